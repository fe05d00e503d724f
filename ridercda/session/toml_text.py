"""A TOML text cut into tables and statements without losing a byte.

A table owns the comment lines that stand directly above its header; blank lines and comments set apart by
them form the gap before it. Joining all pieces gives the text back exactly. The text must be valid TOML:
`tomllib` has the last word on that, the scanner here only finds where things begin and end.
"""

from __future__ import annotations

import tomllib
from dataclasses import dataclass, field

Path = tuple[str | int, ...]
"""Where a table stands, e.g. ``("run", 2, "air")``; numbers count the items of an array of tables."""


@dataclass(slots=True, eq=False)
class Statement:
    """One ``key = value`` with its indentation, comment and line end."""

    key: tuple[str, ...]
    before: str  # up to the value
    value: str
    after: str  # comment and line end

    @property
    def text(self) -> str:
        """The statement as written."""
        return self.before + self.value + self.after


@dataclass(slots=True, eq=False)
class Block:
    """One table: what sets it apart, its own comment, header and body; the root table has no header."""

    path: Path
    gap: str = ""
    lead: str = ""
    header: str = ""
    body: list[Statement | str] = field(default_factory=list)

    @property
    def statements(self) -> list[Statement]:
        """The statements of the body, without its comments and blank lines."""
        return [part for part in self.body if isinstance(part, Statement)]

    @property
    def text(self) -> str:
        """The table as written."""
        inside = "".join(part if isinstance(part, str) else part.text for part in self.body)
        return self.gap + self.lead + self.header + inside


@dataclass(slots=True)
class TomlText:
    """A whole text: its blocks in order (the root first), what trails them, and its line end."""

    blocks: list[Block]
    trailer: str
    newline: str

    @property
    def text(self) -> str:
        """The text as written."""
        return "".join(block.text for block in self.blocks) + self.trailer


def cut(text: str) -> TomlText:
    """Cut a valid TOML text into its tables.

    Parameters
    ----------
    text : str
        Without a byte order mark, line ends as in the file.

    Returns
    -------
    TomlText
        Whose `text` is `text`, byte for byte.
    """
    counts: dict[Path, int] = {}
    blocks = [Block(())]
    loose: list[str] = []  # blank lines and comments whose owner is not yet known
    position = 0
    while position < len(text):
        start = _skip(text, position, " \t")
        if start == len(text) or text[start] in "#\r\n":
            end = _line_end(text, start)
            line = text[position:end]
            body = blocks[-1].body
            if not loose and line.strip() and body and _is_content(body[-1]):
                body.append(line)
            else:
                loose.append(line)
        elif text[start] == "[":
            end = _line_end(text, _header_end(text, start))
            gap, lead = _split_lead(loose)
            loose = []
            path = _header_path(text[start:end], counts)
            blocks.append(Block(path, gap=gap, lead=lead, header=text[position:end]))
        else:
            equals = _find_equals(text, start)
            value = _skip(text, equals + 1, " \t")
            value_end = _value_end(text, value)
            end = _line_end(text, value_end)
            key = _key_path(text[start:equals])
            blocks[-1].body += loose
            loose = []
            blocks[-1].body.append(
                Statement(key, text[position:value], text[value:value_end], text[value_end:end])
            )
        position = end
    crlf = text.count("\r\n")
    newline = "\r\n" if crlf > text.count("\n") - crlf else "\n"
    return TomlText(blocks, "".join(loose), newline)


def _is_content(part: Statement | str) -> bool:
    return isinstance(part, Statement) or bool(part.strip())


def _split_lead(lines: list[str]) -> tuple[str, str]:
    """Split loose lines into the gap and the comment directly above what follows."""
    first = len(lines)
    while first and lines[first - 1].strip():
        first -= 1
    return "".join(lines[:first]), "".join(lines[first:])


def _skip(text: str, position: int, characters: str) -> int:
    while position < len(text) and text[position] in characters:
        position += 1
    return position


def _line_end(text: str, position: int) -> int:
    end = text.find("\n", position)
    return len(text) if end < 0 else end + 1


def _string_end(text: str, start: int) -> int:
    """Return where the string that opens at `start` has ended."""
    quote = text[start]
    delimiter = quote * 3 if text.startswith(quote * 3, start) else quote
    position = start + len(delimiter)
    while not text.startswith(delimiter, position):
        position += 2 if quote == '"' and text[position] == "\\" else 1
    position += len(delimiter)
    if len(delimiter) == 3:  # up to two quotes may stand directly before the closing three
        position = min(_skip(text, position, quote), position + 2)
    return position


def _value_end(text: str, start: int) -> int:
    """Return where the value that begins at `start` ends, without the blanks after it."""
    depth = 0
    position = end = start
    while position < len(text):
        character = text[position]
        if character in "\"'":
            position = end = _string_end(text, position)
            continue
        if character == "#":
            if depth == 0:
                break
            position = _line_end(text, position)
            continue
        if character in "\r\n" and depth == 0:
            break
        depth += (character in "[{") - (character in "]}")
        position += 1
        if not character.isspace():
            end = position
    return end


def _find_equals(text: str, start: int) -> int:
    position = start
    while text[position] != "=":
        position = _string_end(text, position) if text[position] in "\"'" else position + 1
    return position


def _header_end(text: str, start: int) -> int:
    position = start
    while text[position] != "]":
        position = _string_end(text, position) if text[position] in "\"'" else position + 1
    return position


def _names(nested: object) -> tuple[str, ...]:
    """Return the chain of keys of a TOML text that holds one key only."""
    names: list[str] = []
    while isinstance(nested, dict | list) and nested:
        if isinstance(nested, list):
            nested = nested[0]
        else:
            name, nested = next(iter(nested.items()))
            names.append(name)
    return tuple(names)


def _key_path(key: str) -> tuple[str, ...]:
    return _names(tomllib.loads(f"{key} = 0"))


def _header_path(line: str, counts: dict[Path, int]) -> Path:
    """Return where a header's table stands, counting the items of arrays of tables as they come."""
    names = _names(tomllib.loads(line))
    path: Path = ()
    for name in names[:-1]:
        path = (*path, name)
        if path in counts:
            path = (*path, counts[path] - 1)
    path = (*path, names[-1])
    if line.lstrip().startswith("[["):
        index = counts.get(path, 0)
        counts[path] = index + 1
        path = (*path, index)
    return path
