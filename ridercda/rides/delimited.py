"""Reader of delimited text: a header row names the channels, a unit may follow in brackets.

Comma, semicolon or tab between cells; decimal point or comma; time in seconds, as h:mm:ss or as ISO 8601.
Lines that start with # before the header are skipped. Other headers than the canonical names are mapped by the
options.
"""

from __future__ import annotations

import csv
import datetime as dt
import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from types import MappingProxyType
from typing import BinaryIO

import numpy as np

from ridercda.errors import QuantityError, ReaderError
from ridercda.rides.assembly import UNIX_EPOCH, FaultSpan, LapSpan, Records, assemble, seconds_of_moment
from ridercda.rides.format import CHANNEL_KINDS, USUAL_UNITS, Reader, ReadOptions, plain_name
from ridercda.rides.packing import unpacked
from ridercda.rides.ride import Fault, FaultKind, FloatArray, LapTrigger, Ride
from ridercda.units import Kind, conversion, find_unit
from ridercda.units.durations import parse_clock
from ridercda.watch import Watch

TIME, LAP = "time", "lap"
CANONICAL_NAMES = (TIME, *CHANNEL_KINDS, LAP)
"""The headers that are understood without a mapping."""

_KINDS: Mapping[str, Kind] = MappingProxyType({TIME: Kind.DURATION, **CHANNEL_KINDS})
_DELIMITERS = "\t;,"
_UNIT = re.compile(r"(?P<name>.*?)\s*(?:\[(?P<square>[^\]]*)\]|\((?P<round>[^)]*)\))\s*")
_UNIX_TIME = 1e9  # a number this large is seconds since 1970, not since the start
_TOO_FAST = 25.0  # a median speed without a unit above this is in km/h or mph [m/s]
_SHOWN_HEADERS = 30  # in a message
_FIELD_LIMIT = 1 << 16  # characters in a cell; no cell of a ride is longer


class UnknownColumns(ReaderError):
    """The headers do not say which column is which; a mapping is needed.

    Parameters
    ----------
    message : str
        What is missing.
    headers : tuple of str
        As found in the file.

    Attributes
    ----------
    canonical : tuple of str
        The names that a header can be mapped to.
    """

    canonical: tuple[str, ...] = CANONICAL_NAMES

    def __init__(self, message: str, headers: tuple[str, ...]) -> None:
        self.headers = headers
        found = ", ".join(_shown(header) for header in headers[:_SHOWN_HEADERS])
        if len(headers) > _SHOWN_HEADERS:
            found += f" and {len(headers) - _SHOWN_HEADERS} more"
        super().__init__(
            f"{message}. Its headers are {found}; names understood are {', '.join(CANONICAL_NAMES)}. "
            'Name the others under columns, e.g. columns = {power = "Watts [W]"}'
        )


@dataclass(frozen=True, slots=True)
class _Column:
    index: int
    header: str
    unit: str | None


@dataclass(frozen=True, slots=True)
class _Table:
    headers: tuple[str, ...]
    rows: list[list[str]]
    first_line: int


def read_headers(path: Path) -> tuple[str, ...]:
    """Return the headers of a delimited text file, so that a mapping can be offered.

    Raises
    ------
    ReaderError
        If the file cannot be read or has no header row.
    """
    try:
        data, _ = unpacked(path.read_bytes())
    except OSError as error:
        raise ReaderError(f"the file cannot be read: {error.strerror or error}", path=path) from error
    lines, _ = _lines_from_header(_decoded(data))
    if not lines:
        raise ReaderError("there is no header row", path=path)
    return _headers(lines[0], _delimiter(lines[0]))


def read_delimited(stream: BinaryIO, options: ReadOptions, watch: Watch) -> Ride:
    """Return the raw ride of delimited text.

    Parameters
    ----------
    stream : binary stream
        UTF-8, UTF-16 with a byte order mark, or Latin-1.
    options : ReadOptions
        `columns` maps channels (also ``time`` and ``lap``) to headers; `start` is the wall clock at elapsed
        zero.
    watch : Watch
        Told of progress by column.

    Raises
    ------
    UnknownColumns
        If no column holds the time, or none holds a channel.
    ReaderError
        If a unit is not one of its channel, or there is no row with a time.
    """
    table = _parsed(_decoded(stream.read()))
    columns = _columns(table.headers, options)
    if TIME not in columns:
        raise UnknownColumns("no column holds the time", table.headers)
    if not any(name in CHANNEL_KINDS for name in columns):
        raise UnknownColumns("no column holds a channel of a ride", table.headers)
    if not table.rows:
        raise ReaderError("there is a header row but no row below it")
    watch.step(1, len(columns) + 1)
    clock, zero = _clock(_cells(table, columns[TIME]), columns[TIME], options.start)
    if not np.isfinite(clock).any():
        raise ReaderError(
            f"no cell of {_shown(columns[TIME].header)} is a time; write seconds, h:mm:ss or ISO 8601, first is "
            f"{_shown(_cells(table, columns[TIME])[0])}"
        )
    channels: dict[str, FloatArray] = {}
    for done, (name, column) in enumerate(columns.items(), start=2):
        if name in CHANNEL_KINDS:
            channels[name] = _in_si(_numbers(_cells(table, column)), column, name)
        watch.step(done, len(columns) + 1)
    laps = _laps(clock, _cells(table, columns[LAP])) if LAP in columns else []
    faults = []
    lost = int(np.count_nonzero(~np.isfinite(clock)))
    if lost:
        line = table.first_line + int(np.flatnonzero(~np.isfinite(clock))[0])
        cause = (
            f"{lost} of {clock.size} rows have no readable time, the first on line {line}; they were left out"
        )
        faults.append(FaultSpan(Fault(FaultKind.FILE_DAMAGED, 0.0, 0.0, "", cause, "left out")))
    unread = [
        header
        for index, header in enumerate(table.headers)
        if index not in {c.index for c in columns.values()}
    ]
    notes = {
        name: f"from the column {column.header!r}" for name, column in columns.items() if name in channels
    }
    if unread:
        notes["columns"] = f"not read: {', '.join(unread)}"
    timed = np.isfinite(clock)
    return assemble(
        Records(
            clock=clock[timed],
            channels={name: values[timed] for name, values in channels.items()},
            zero=zero,
            laps=laps,
            faults=faults,
            source="text",
            notes=notes,
        ),
        options,
    )


def _is_delimited(head: bytes) -> bool:
    text = _decoded(head)
    if (
        "\0" in text
        or sum(not char.isprintable() and char not in "\r\n\t" for char in text) > len(text) // 100
    ):
        return False
    lines, _ = _lines_from_header(text)
    return (
        bool(lines) and not lines[0].startswith(("<", "{")) and any(mark in lines[0] for mark in _DELIMITERS)
    )


READER = Reader("delimited text", (".csv", ".txt", ".tsv"), _is_delimited, read_delimited)


def _decoded(data: bytes) -> str:
    if data.startswith((b"\xff\xfe", b"\xfe\xff")):
        return data.decode("utf-16", errors="replace")
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError:
        return data.decode("latin-1")


def _lines_from_header(text: str) -> tuple[list[str], int]:
    """Return the lines from the header row on, and the number of the first."""
    lines = text.splitlines()
    for number, line in enumerate(lines, start=1):
        if line.strip() and not line.lstrip().startswith("#"):
            return lines[number - 1 :], number
    return [], 0


def _delimiter(header: str) -> str:
    unquoted = re.sub(r'"[^"]*"', "", header)
    return max(_DELIMITERS, key=unquoted.count)


def _headers(line: str, delimiter: str) -> tuple[str, ...]:
    try:
        cells = next(csv.reader([line], delimiter=delimiter, skipinitialspace=True), [])
    except csv.Error as error:
        raise ReaderError(f"the header row cannot be read: {error}") from error
    return tuple(cell.strip() for cell in cells)


def _parsed(text: str) -> _Table:
    lines, number = _lines_from_header(text)
    if not lines:
        raise ReaderError("there is no header row")
    delimiter = _delimiter(lines[0])
    if len(max(lines, key=len)) > _FIELD_LIMIT:
        raise ReaderError(f"a line is longer than {_FIELD_LIMIT} characters; this is not a table of a ride")
    try:
        rows = [row for row in csv.reader(lines[1:], delimiter=delimiter, skipinitialspace=True) if row]
    except csv.Error as error:
        raise ReaderError(f"the table cannot be read: {error}") from error
    return _Table(_headers(lines[0], delimiter), rows, number + 1)


def _split_header(header: str) -> tuple[str, str | None]:
    match = _UNIT.fullmatch(header)
    if match is None:
        return header.strip(), None
    return match["name"].strip(), (match["square"] if match["square"] is not None else match["round"]).strip()


def _unit_of(header: str, name: str) -> str | None:
    """Return the unit a header names; round brackets may hold a remark instead."""
    _, unit = _split_header(header)
    if (
        unit is not None
        and header.rstrip().endswith(")")
        and find_unit(unit, _KINDS.get(name, Kind.RATIO)) is None
    ):
        return None
    return unit


def _columns(headers: tuple[str, ...], options: ReadOptions) -> dict[str, _Column]:
    found: dict[str, _Column] = {}
    for name, wanted in options.names.items():
        if name not in CANONICAL_NAMES:
            raise ReaderError(f"{name!r} is not a channel; the names are {', '.join(CANONICAL_NAMES)}")
        found[name] = _asked(name, wanted, headers)
    taken = {column.index for column in found.values()}
    for index, header in enumerate(headers):
        canonical = plain_name(_split_header(header)[0])
        if index not in taken and canonical in CANONICAL_NAMES and canonical not in found:
            found[canonical] = _Column(index, header, _unit_of(header, canonical))
    return found


def _asked(name: str, wanted: str, headers: tuple[str, ...]) -> _Column:
    for index, header in enumerate(headers):
        if header == wanted.strip():
            return _Column(index, header, _unit_of(header, name))
    base, unit = _split_header(wanted)
    for index, header in enumerate(headers):
        header_base, header_unit = _split_header(header)
        if plain_name(header_base) == plain_name(base) and (unit is None or header_unit in (None, unit)):
            return _Column(index, header, unit or _unit_of(header, name))
    raise UnknownColumns(f"there is no column {wanted!r} to take as {name}", headers)


def _cells(table: _Table, column: _Column) -> list[str]:
    at = column.index
    return [row[at].strip() if at < len(row) else "" for row in table.rows]


def _numbers(cells: Sequence[str]) -> FloatArray:
    try:
        return np.array(cells, dtype=np.float64)
    except ValueError:
        return np.array([_number(cell) for cell in cells], dtype=np.float64)


def _number(cell: str) -> float:
    text = cell.replace("\N{MINUS SIGN}", "-").replace("\N{NO-BREAK SPACE}", "").replace(" ", "")
    if "," in text:
        if "." in text:  # the one that comes last is the decimal mark, the other parts thousands
            text = text.replace("." if text.rfind(",") > text.rfind(".") else ",", "")
        text = text.replace(",", ".")
    try:
        return float(text)
    except ValueError:
        return np.nan


def _in_si(values: FloatArray, column: _Column, channel: str) -> FloatArray:
    unit = column.unit or USUAL_UNITS[channel]
    try:
        si = conversion(unit[:40], CHANNEL_KINDS[channel], column.header[:60]).to_si(values)
    except QuantityError as error:
        raise ReaderError(str(error)) from error
    if channel == "speed" and not column.unit:
        moving = si[np.isfinite(si) & (si > 0)]
        if moving.size and float(np.median(moving)) > _TOO_FAST:
            raise ReaderError(
                f"{_shown(column.header)} names no unit and half its values are above {_TOO_FAST:g} m/s; name the "
                f'unit in the header or the mapping, e.g. columns = {{speed = "{column.header} [km/h]"}}'
            )
    return si


def _clock(
    cells: Sequence[str], column: _Column, start: dt.datetime | None
) -> tuple[FloatArray, dt.datetime | None]:
    """Return the clock and the moment at which it reads zero."""
    numeric = _numbers(cells)
    if np.isfinite(numeric).sum() * 2 > len(cells):
        try:
            elapsed = conversion((column.unit or "s")[:40], Kind.DURATION, column.header[:60]).to_si(numeric)
        except QuantityError as error:
            raise ReaderError(str(error)) from error
        known = elapsed[np.isfinite(elapsed)]
        if float(np.median(known)) >= _UNIX_TIME:
            return elapsed, UNIX_EPOCH
        return elapsed, start
    moments = [_moment(cell) for cell in cells]
    if sum(each is not None for each in moments) * 2 > len(cells):
        zone = next(each.tzinfo for each in moments if each is not None)
        clock = np.array(
            [np.nan if each is None else seconds_of_moment(each) for each in moments], dtype=np.float64
        )
        return clock, UNIX_EPOCH.astimezone(zone) if zone else UNIX_EPOCH.replace(tzinfo=None)
    return np.array([_clock_text(cell) for cell in cells], dtype=np.float64), start


def _moment(cell: str) -> dt.datetime | None:
    if not cell[
        :4
    ].isdigit():  # fromisoformat also takes bare years and weeks; a ride's record has date and time
        return None
    try:
        return dt.datetime.fromisoformat(cell) if len(cell) > 10 else None
    except ValueError:
        return None


def _clock_text(cell: str) -> float:
    try:
        return parse_clock(cell)
    except QuantityError:
        return np.nan


def _laps(clock: FloatArray, cells: Sequence[str]) -> list[LapSpan]:
    """Return laps from a lap column: from the last record of the lap before to the last of its own."""
    timed = [
        (time, cell) for time, cell in zip(clock.tolist(), cells, strict=True) if np.isfinite(time) and cell
    ]
    spans: list[LapSpan] = []
    begin = timed[0][0] if timed else 0.0
    for place, (time, cell) in enumerate(timed):
        if place + 1 == len(timed) or timed[place + 1][1] != cell:
            spans.append(LapSpan(begin, time, LapTrigger.UNKNOWN))
            begin = time
    return spans


def _shown(text: str) -> str:
    """Return a text of the file in quotes, cut where it is too long for a message."""
    return repr(text if len(text) <= 40 else f"{text[:39]}…")
