"""From an edited session back to the text of session.toml, leaving what was not edited as it was."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path

from ridercda.session.document import Session
from ridercda.session.keys import FORMAT, SESSION
from ridercda.session.load import BYTE_ORDER_MARK, content_of, session_from_text
from ridercda.session.schema import SubTable, Table
from ridercda.session.toml_patch import TomlTable, TomlValue, patch

TABLE_ORDER = tuple(sub.name for sub in SESSION.tables)


def text_of_edited(text: str, before: Session, after: Session, path: Path, name: str) -> str:
    """Return the text of session.toml after an edit.

    Parameters
    ----------
    text : str
        The text as loaded.
    before, after : Session
        What it holds, and what it shall hold.
    path : Path
        Of the file, for messages.
    name : str
        What the session is called where the text does not name it.

    Returns
    -------
    str
        `text` itself where the two are equal.
    """
    if after == before:
        return text
    old = content_of(text, path)
    new = write_table(SESSION, before, after, old)
    mark = BYTE_ORDER_MARK if text.startswith(BYTE_ORDER_MARK) else ""
    result = mark + patch(text.removeprefix(mark), old, new, TABLE_ORDER)
    if session_from_text(result, path, name) != after:
        raise AssertionError("the session would not read back as it is; nothing was saved")
    return result


def text_of_new(session: Session) -> str:
    """Return the text of a session that has no file yet."""
    content = {"format": FORMAT, **write_table(SESSION, None, session, {})}
    return patch("", {}, content, TABLE_ORDER)


def write_table(table: Table, before: object | None, after: object, old: TomlTable) -> TomlTable:
    """Return the content of a table after an edit.

    Parameters
    ----------
    table : Table
        Its keys.
    before : object, optional
        The part of the document that `old` gives; None where the table is new.
    after : object
        The part of the document that it shall give.
    old : dict
        The content as written; of a new table, that of a neighbour whose manner is followed.

    Returns
    -------
    dict
        Values of fields that did not change are those of `old`.
    """
    new: TomlTable = {} if before is None else dict(old)
    for entry in table.entries:
        blank = all(getattr(after, name) == table.blank(name) for name in entry.fields)
        changed = before is None or any(getattr(after, f) != getattr(before, f) for f in entry.fields)
        if changed:
            values = dict.fromkeys(entry.names) if blank else entry.write(after, old)
            for name, value in values.items():
                if value is None:
                    new.pop(name, None)
                else:
                    new[name] = value
    for sub in table.tables:
        was = table.blank(sub.field) if before is None else getattr(before, sub.field)
        now = getattr(after, sub.field)
        if now != was:
            written = old.get(sub.name) if before is not None else None
            below = _write_below(sub, was, now, written)
            if below or (sub.name in new and now is not None and not sub.many):
                new[sub.name] = below
            else:
                new.pop(sub.name, None)
    return new


def _write_below(sub: SubTable, before: object, after: object, old: TomlValue | None) -> TomlValue:
    """Return the content of a table below another, or of an array of them."""
    if isinstance(before, tuple) and isinstance(after, tuple):
        items = _write_items(sub.table, before, after, old if isinstance(old, list) else [])
        return list(items)
    if after is None:
        return {}
    if isinstance(old, dict):
        return write_table(sub.table, before, after, old)
    return write_table(sub.table, None, after, {})


def _write_items(
    table: Table, before: Sequence[object], after: Sequence[object], old: list[TomlValue]
) -> list[TomlTable]:
    tables = [item for item in old if isinstance(item, dict)]
    free = dict(enumerate(before))
    items: list[TomlTable] = []
    for item in after:
        i = next((i for i, was in free.items() if was == item), None)
        if i is None:
            i = next((i for i, was in free.items() if _continues(was, item)), None)
        was = None if i is None else free.pop(i)
        like = tables[0] if tables else {}
        items.append(write_table(table, was, item, like if i is None else tables[i]))
    return items


def _continues(was: object, item: object) -> bool:
    """Whether an item is an earlier one edited: of the same id, or the same but for its id."""
    before, after = getattr(was, "id", None), getattr(item, "id", None)
    if before is None or after is None:
        return before is after and _start_of(was) == _start_of(item)
    return bool(before == after or replace(was, id=after) == item)  # type: ignore[type-var]


def _start_of(item: object) -> object:
    """Return what tells nameless items apart: where they begin or what they are about."""
    for name in ("kind", "start", "time"):
        if hasattr(item, name):
            return getattr(item, name)
    return None
