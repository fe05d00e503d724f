"""Bring a TOML text from one content to another, touching only what differs.

Items of an array of tables are matched by their ``id``, then by being equal, then by being equal but for
the id; those without one by order. A removed table goes with its own comment, a new one is set after its
neighbour in the array, or where `order` puts it.
"""

from __future__ import annotations

import datetime as dt
import tomllib
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

from ridercda.session.toml_text import Block, Path, Statement, TomlText, cut

TomlValue = str | int | float | bool | dt.date | dt.time | list["TomlValue"] | dict[str, "TomlValue"]
TomlTable = dict[str, TomlValue]


class InlineTable(dict[str, TomlValue]):
    """A table that is written on one line, within its key's statement."""


def patch(text: str, old: TomlTable, new: TomlTable, order: Sequence[str] = ()) -> str:
    """Return the text with its content changed from `old` to `new`.

    Parameters
    ----------
    text : str
        Valid TOML without a byte order mark.
    old : dict
        What `tomllib` reads from it.
    new : dict
        What it shall hold.
    order : sequence of str
        The usual order of the top-level tables, for those that are not there yet.

    Returns
    -------
    str
        `text` itself where nothing differs.
    """
    patcher = _Patcher(cut(text), tuple(order))
    patcher.table((), old, new)
    result = patcher.document.text
    if not same(tomllib.loads(result), new):
        raise AssertionError("the patched text does not hold what it should; it was not used")
    return result


def same(a: TomlValue, b: TomlValue) -> bool:
    """Whether two TOML values are the same in type and content."""
    if isinstance(a, dict) and isinstance(b, dict):
        return a.keys() == b.keys() and all(same(a[key], b[key]) for key in a)
    if type(a) is not type(b):
        return False
    if isinstance(a, list) and isinstance(b, list):
        return len(a) == len(b) and all(map(same, a, b))
    return a == b


def matches(old: Sequence[TomlTable], new: Sequence[TomlTable]) -> list[int | None]:
    """Return for each new item the index of the old one it continues, or None."""
    found: list[int | None] = [None] * len(new)
    free = dict(enumerate(old))
    for rule in (_same_id, same, _same_but_id, _both_nameless):
        for i, item in enumerate(new):
            if found[i] is None:
                j = next((j for j, was in free.items() if rule(was, item)), None)
                if j is not None:
                    found[i] = j
                    del free[j]
    return found


def _same_id(a: TomlTable, b: TomlTable) -> bool:
    return "id" in a and "id" in b and a["id"] == b["id"]


def _same_but_id(a: TomlTable, b: TomlTable) -> bool:
    return "id" in a and "id" in b and same({**a, "id": ""}, {**b, "id": ""})


def _both_nameless(a: TomlTable, b: TomlTable) -> bool:
    return "id" not in a and "id" not in b


def _has_header(value: TomlValue) -> bool:
    """Whether a new value is written as a table, or several, with headers of their own."""
    if isinstance(value, dict):
        return not isinstance(value, InlineTable)
    return _tables(value) is not None


def _tables(value: TomlValue) -> list[TomlTable] | None:
    """Return the value as an array of tables, None if it is anything else."""
    if isinstance(value, list) and value:
        tables = [item for item in value if isinstance(item, dict)]
        if len(tables) == len(value):
            return tables
    return None


@dataclass(slots=True)
class _Patcher:
    """The edits of one text. Numbers in paths are names here: the order of blocks tells the true index."""

    document: TomlText
    order: tuple[str, ...]
    fresh: dict[Path, int] = field(default_factory=dict)

    # -- comparing ---------------------------------------------------------------------------------------

    def table(self, path: Path, old: TomlTable, new: TomlTable) -> None:
        for key in old:
            if key not in new:
                self.remove((*path, key))
        for key, value in new.items():
            if key not in old:
                self.add(path, key, value)
            elif not same(old[key], value):
                self.change(path, key, old[key], value)

    def change(self, path: Path, key: str, old: TomlValue, new: TomlValue) -> None:
        statement = self.statement((*path, key))
        old_tables, new_tables = _tables(old), _tables(new)
        if statement is not None:
            statement.value = _changed_value(statement.value, old, new)
        elif isinstance(old, dict) and isinstance(new, dict):
            self.table((*path, key), old, new)
            if not self.unit((*path, key)) and self.dotted((*path, key)) is None:
                self.add(path, key, {})  # nothing below it is left that would imply it
        elif old_tables is not None and new_tables is not None:
            self.array((*path, key), old_tables, new_tables)
        else:
            self.remove((*path, key))
            self.add(path, key, new)

    def array(self, path: Path, old: list[TomlTable], new: list[TomlTable]) -> None:
        found = matches(old, new)
        kept = [j for j in found if j is not None]
        for gone in sorted(set(range(len(old))) - set(kept)):
            self.remove((*path, gone))
        if kept != sorted(kept):
            self.reorder([(*path, j) for j in kept])
        self.fresh[path] = len(old)
        after: Path | None = None
        for item, j in zip(new, found, strict=True):
            if j is None:
                before = (*path, kept[0]) if after is None and kept else None
                here = (*path, self.fresh[path])
                self.fresh[path] += 1
                self.insert_tables(here, item, self.place(path, after, before))
            else:
                here = (*path, j)
                self.table(here, old[j], item)
            after = here

    # -- finding -----------------------------------------------------------------------------------------

    def statement(self, path: Path) -> Statement | None:
        """Return the one statement that sets this key, dotted or not."""
        for block in self.document.blocks:
            for statement in block.statements:
                if block.path + statement.key == path:
                    return statement
        return None

    def unit(self, path: Path) -> list[int]:
        """Return the indices of the blocks at or below a path."""
        size = len(path)
        return [i for i, block in enumerate(self.document.blocks) if i and block.path[:size] == path]

    def place(self, path: Path, after: Path | None = None, before: Path | None = None) -> int:
        """Return the index among the blocks at which a new table at `path` goes."""
        if after is not None:
            return self.unit(after)[-1] + 1
        if before is not None:
            return self.unit(before)[0]
        if len(path) > 1:
            parent = self.unit(path[:-1])
            return parent[-1] + 1 if parent else len(self.document.blocks)
        name = path[0]
        if isinstance(name, str) and name in self.order:
            rank = self.order.index(name)
            for earlier in reversed(self.order[:rank]):
                if found := self.unit((earlier,)):
                    return found[-1] + 1
            for later in self.order[rank + 1 :]:
                if found := self.unit((later,)):
                    return found[0]
        return len(self.document.blocks)

    # -- removing ----------------------------------------------------------------------------------------

    def remove(self, path: Path) -> None:
        """Remove a key or table with all below it."""
        size = len(path)
        gap = ""
        blocks: list[Block] = []
        for block in self.document.blocks:
            if block.header and block.path[:size] == path:
                gap = _joined_gap(gap, block.gap)
                continue
            block.body = [
                part for part in block.body if isinstance(part, str) or (block.path + part.key)[:size] != path
            ]
            if gap.strip():  # a comment set apart is not the removed table's own
                block.gap = gap if not block.gap.strip() else gap + block.gap
            gap = ""
            blocks.append(block)
        if gap.strip():
            self.document.trailer = gap + self.document.trailer
        self.document.blocks = blocks

    def reorder(self, paths: list[Path]) -> None:
        """Put the tables at these paths in this order where the first of them stands."""
        units = [[self.document.blocks[i] for i in self.unit(path)] for path in paths]
        moved = {id(block) for unit in units for block in unit}
        first = min(self.unit(path)[0] for path in paths)
        heads = sorted((self.document.blocks.index(unit[0]), unit[0].gap) for unit in units)
        for unit, (_, gap) in zip(units, heads, strict=True):
            unit[0].gap = gap
        self.end_line(len(self.document.blocks))
        rest = [block for block in self.document.blocks if id(block) not in moved]
        at = sum(id(block) not in moved for block in self.document.blocks[:first])
        self.document.blocks = rest[:at] + [block for unit in units for block in unit] + rest[at:]

    # -- adding ------------------------------------------------------------------------------------------

    def add(self, path: Path, key: str, value: TomlValue) -> None:
        """Add a key that a table does not have yet."""
        dotted = self.dotted(path)
        tables = _tables(value)
        if dotted is None and isinstance(value, dict) and _has_header(value):
            self.insert_tables((*path, key), value, self.place((*path, key)))
        elif dotted is None and tables is not None:
            after: Path | None = None
            for i, item in enumerate(tables):
                here = (*path, key, i)
                self.insert_tables(here, item, self.place((*path, key), after))
                after = here
        elif dotted is None:
            self.append(self.own_block(path), (key,), value)
        else:
            block, size = dotted
            self.append(block, (*(str(part) for part in path[size:]), key), value)

    def dotted(self, path: Path) -> tuple[Block, int] | None:
        """Return the block whose dotted statements make up the table at `path`, with the size of its path."""
        for block in self.document.blocks:
            size = len(block.path)
            if size < len(path) and block.path == path[:size]:
                rest = path[size:]
                if any(statement.key[: len(rest)] == rest for statement in block.statements):
                    return block, size
        return None

    def own_block(self, path: Path) -> Block:
        """Return the block of a table; one is made where only its sub-tables have headers."""
        for block in self.document.blocks:
            if block.path == path:
                return block
        below = self.unit(path)
        return self.insert(path, below[0] if below else self.place(path))

    def insert_tables(self, path: Path, table: TomlTable, index: int) -> None:
        """Insert a new table and the tables below it as blocks."""
        block = self.insert(path, index)
        for key, value in table.items():
            if not _has_header(value):
                self.append(block, (key,), value)
        for key, value in table.items():
            if _has_header(value):
                self.add(path, key, value)

    def insert(self, path: Path, index: int) -> Block:
        blocks = self.document.blocks
        self.end_line(index)
        names = ".".join(map(_key_text, _names(path)))
        header = f"[[{names}]]" if isinstance(path[-1], int) else f"[{names}]"
        first = not any(block.text for block in blocks[:index])
        gap = self.document.newline if not first and self.set_apart(path) else ""
        block = Block(path, gap=gap, header=header + self.document.newline)
        if first and index < len(blocks) and not blocks[index].gap:
            blocks[index].gap = self.document.newline
        blocks.insert(index, block)
        return block

    def set_apart(self, path: Path) -> bool:
        """Whether a new table is set apart by a blank line, going by its like or by most tables."""
        names = _names(path)
        others = self.document.blocks[2:]
        like = [block for block in others if _names(block.path) == names] or others
        return 2 * sum(bool(block.gap) for block in like) >= len(like)

    def append(self, block: Block, key: tuple[str, ...], value: TomlValue) -> None:
        """Add a statement after the last one of a block."""
        last = max((i for i, part in enumerate(block.body) if isinstance(part, Statement)), default=None)
        self.end_line(self.document.blocks.index(block) + 1)
        indent = ""
        at = 0
        if last is not None:
            before = block.body[last]
            assert isinstance(before, Statement)
            indent = before.before[: len(before.before) - len(before.before.lstrip(" \t"))]
            at = last + 1
        name = ".".join(map(_key_text, key))
        statement = Statement(key, f"{indent}{name} = ", _rendered(value), self.document.newline)
        block.body.insert(at, statement)

    def end_line(self, index: int) -> None:
        """Make the text before the block at `index` end with a line end."""
        for block in reversed(self.document.blocks[:index]):
            if not block.text:
                continue
            if not block.text.endswith("\n"):
                self.close(block)
            return

    def close(self, block: Block) -> None:
        """Give the last line of a block the line end it lacks."""
        if not block.body:
            block.header += self.document.newline
        elif isinstance(last := block.body[-1], Statement):
            last.after += self.document.newline
        else:
            block.body[-1] = last + self.document.newline


def _names(path: Path) -> tuple[str, ...]:
    return tuple(part for part in path if isinstance(part, str))


def _joined_gap(first: str, second: str) -> str:
    """Join the gaps of two removed tables: their comments stay, blank lines between them do not pile up."""
    if not first.strip():
        return second if second.strip() else first
    return first + second if second.strip() else first


def _key_text(name: str) -> str:
    bare = name.isascii() and name.replace("-", "a").replace("_", "a").isalnum()
    return name if bare else _rendered(name)


def _rendered(value: TomlValue) -> str:
    """Return a value as TOML on one line."""
    if isinstance(value, dict):
        inside = ", ".join(f"{_key_text(key)} = {_rendered(item)}" for key, item in value.items())
        return f"{{{inside}}}" if inside else "{}"
    if isinstance(value, list):
        return f"[{', '.join(map(_rendered, value))}]"
    import tomlkit  # only a changed value needs it

    return tomlkit.item(value).as_string()


def _changed_value(text: str, old: TomlValue, new: TomlValue) -> str:
    """Return the text of a value changed from `old` to `new`, an inline table key by key."""
    if not (isinstance(old, dict) and isinstance(new, dict)):
        if isinstance(new, str) and text.startswith("'") and not text.startswith("'''"):
            plain = "'" not in new and new.isprintable()
            return f"'{new}'" if plain else _rendered(new)
        return _rendered(new)
    import tomlkit

    document = tomlkit.parse(f"x = {text}\n")
    _update_inline(document["x"], old, new)
    result = tomlkit.dumps(document).removeprefix("x = ").removesuffix("\n")
    return result if same(tomllib.loads(f"x = {result}")["x"], new) else _rendered(new)


def _update_inline(
    table: dict[str, object], old: Mapping[str, TomlValue], new: Mapping[str, TomlValue]
) -> None:
    for key in old:
        if key not in new:
            del table[key]
    for key, value in new.items():
        was = old.get(key)
        if isinstance(was, dict) and isinstance(value, dict):
            _update_inline(table[key], was, value)  # type: ignore[arg-type]
        elif key not in old or not same(old[key], value):
            table[key] = value
