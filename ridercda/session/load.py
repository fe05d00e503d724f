"""From the content of session.toml to a session."""

from __future__ import annotations

import tomllib
from collections.abc import Mapping
from pathlib import Path

from ridercda.errors import SessionError
from ridercda.session.document import Session
from ridercda.session.forms import Where
from ridercda.session.keys import FORMAT, SESSION
from ridercda.session.schema import SubTable, Table
from ridercda.session.toml_patch import TomlTable, TomlValue
from ridercda.session.validate import key_of, suggestion, validate

BYTE_ORDER_MARK = "\ufeff"


def session_from_text(text: str, path: Path, name: str) -> Session:
    """Read a session from the text of its file.

    Parameters
    ----------
    text : str
        Of session.toml.
    path : Path
        Of the file, for messages.
    name : str
        What the session is called where the text does not name it.

    Raises
    ------
    SessionError
        If anything in it cannot be used.
    """
    content = content_of(text, path)
    where = Where(path)
    number = content.pop("format", None)
    if number is None:
        raise where.at("format").error(f"is missing; begin the file with the line: format = {FORMAT}")
    if isinstance(number, bool) or not isinstance(number, int) or number < 1:
        raise where.at("format").error(f"{number} is not a format number; write format = {FORMAT}")
    if number > FORMAT:
        raise where.at("format").error(
            f"{number} is newer than this program reads ({FORMAT}); open it with a newer version"
        )
    content.setdefault("name", name)
    session = read_table(SESSION, content, where)
    assert isinstance(session, Session)
    validate(session, path)
    return session


def content_of(text: str, path: Path) -> TomlTable:
    """Return what `tomllib` reads from a text; raises SessionError if it is not TOML."""
    try:
        return tomllib.loads(text.removeprefix(BYTE_ORDER_MARK))
    except tomllib.TOMLDecodeError as error:
        raise SessionError(f"is not valid TOML: {error}; mend that place", path=path) from error


def read_table(table: Table, content: TomlValue, where: Where) -> object:
    """Return the part of the document that a table gives.

    Raises
    ------
    SessionError
        If a key is unknown or missing, or a value cannot be read.
    """
    if not isinstance(content, dict):
        raise where.error(f"is not a table; write it as [{where.key}] with its keys below")
    for name in content:
        if name not in table.names:
            raise where.at(name).error(f"is not a key known here; {suggestion(name, table.names)}")
    for name in table.required():
        if name not in content:
            raise where.at(name).error(f"is missing; every {where.key.rpartition('.')[2]} needs it")
    fields: dict[str, object] = {}
    for entry in table.entries:
        fields.update(entry.read(content, where))
    for sub in table.tables:
        if sub.name in content:
            fields[sub.field] = _read_below(sub, content[sub.name], where)
    return table.make(**fields)


def _read_below(sub: SubTable, content: TomlValue, where: Where) -> object:
    if not sub.many:
        return read_table(sub.table, content, where.at(sub.name))
    if not isinstance(content, list):
        name = where.at(sub.name).key
        raise where.at(sub.name).error(f"is one table where there may be several; write [[{name}]]")
    return tuple(
        read_table(sub.table, item, where.at(key_of(sub.name, _id_of(item), i)))
        for i, item in enumerate(content)
    )


def _id_of(item: TomlValue) -> str:
    found = item.get("id") if isinstance(item, Mapping) else None
    return found if isinstance(found, str) else ""
