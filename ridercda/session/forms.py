"""How one value of session.toml is read and written: quantities, words, clocks, dates and lists.

Reading a value gives SI; writing one takes the value it replaces as a hint, so that a mass in pounds stays in
pounds and a time as h:mm:ss stays one. What is written reads back as exactly the same number.
"""

from __future__ import annotations

import datetime as dt
import re
from collections.abc import Mapping
from dataclasses import dataclass
from decimal import Decimal
from enum import StrEnum
from pathlib import Path
from types import MappingProxyType
from typing import Protocol

from ridercda.errors import QuantityError, SessionError
from ridercda.session.document import Worthwhile
from ridercda.session.toml_patch import InlineTable, TomlValue
from ridercda.session.validate import suggestion
from ridercda.units import (
    Kind,
    kind_units,
    parse_duration,
    parse_either,
    parse_quantity,
    parse_time_of_day,
    quantity_text,
    unit_symbol,
)

_NUMBER = r"(?P<sign>[-+\u2212]?)(?P<digits>[\d.,]+)(?:[eE][-+\u2212]?\d+)?"
_NUMBER_AND_UNIT = re.compile(rf"\s*{_NUMBER}(?P<tail>\s*\S.*?)\s*", re.DOTALL)
_OFFSET = re.compile(r"([-+\u2212])(\d\d):?(\d\d)")


@dataclass(frozen=True, slots=True)
class Where:
    """A place in a session file, for messages."""

    path: Path | None
    key: str = ""

    def at(self, name: str) -> Where:
        """Return the place one key further in."""
        return Where(self.path, f"{self.key}.{name}" if self.key else name)

    def error(self, message: str) -> SessionError:
        """Return the error to raise for what stands here."""
        return SessionError(message, path=self.path, key=self.key)


class Form(Protocol):
    """How a value is read and written."""

    def read(self, raw: TomlValue, where: Where) -> object:
        """Return the value in SI; raises SessionError."""

    def write(self, value: object, hint: TomlValue | None) -> TomlValue:
        """Return the value as it stands in the file, in the manner of `hint`."""


def _told(raw: TomlValue) -> str:
    return f'"{raw}"' if isinstance(raw, str) else str(raw).lower() if isinstance(raw, bool) else str(raw)


# -- quantities ------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Quantity:
    """A number with a unit; written in `unit` where there is no hint, as a bare number where it is empty."""

    kind: Kind
    unit: str = ""

    def read(self, raw: TomlValue, where: Where) -> float:
        """Return the value in SI."""
        try:
            return parse_quantity(raw, self.kind)
        except QuantityError as error:
            raise where.error(str(error)) from error

    def write(self, value: object, hint: TomlValue | None) -> TomlValue:
        """Return the shortest text or number that reads back as `value`, in the unit of the hint."""
        assert isinstance(value, float | int)
        text: TomlValue
        if unit_symbol(hint, self.kind) is not None:
            text = self._like(value, str(hint))
        elif hint is None and self.unit:
            text = quantity_text(value, self.kind, self.unit)
        else:
            number = float(quantity_text(value, self.kind).partition(" ")[0])
            text = int(number) if isinstance(hint, int) and number.is_integer() else number
        if self.read(text, Where(None)) == value:
            return text
        return quantity_text(value, self.kind, kind_units(self.kind).si.symbol)  # no rounding on the way

    def _like(self, value: float, hint: str) -> str:
        """Return the value in the unit, spelling, sign and decimal sign of another text."""
        found = _NUMBER_AND_UNIT.fullmatch(hint)
        symbol = unit_symbol(hint, self.kind)
        assert found is not None
        number = quantity_text(value, self.kind, symbol).partition(" ")[0]
        if "," in found["digits"]:
            number = number.replace(".", ",")
        sign = "+" if found["sign"] == "+" and value > 0 else ""
        return f"{sign}{number}{found['tail']}"


@dataclass(frozen=True, slots=True)
class Quantities:
    """A list of numbers or quantities of one kind."""

    each: Quantity

    def read(self, raw: TomlValue, where: Where) -> tuple[float, ...]:
        """Return the values in SI."""
        if not isinstance(raw, list):
            raise where.error(f"{_told(raw)} is not a list; write it as [..., ...]")
        return tuple(self.each.read(item, where) for item in raw)

    def write(self, value: object, hint: TomlValue | None) -> TomlValue:
        """Return the list, each in the manner of the first one of the hint."""
        assert isinstance(value, tuple)
        like = hint[0] if isinstance(hint, list) and hint else None
        return [self.each.write(item, like) for item in value]


@dataclass(frozen=True, slots=True)
class SmallestWorthwhile:
    """A drag area, or watts at the reference speed."""

    def read(self, raw: TomlValue, where: Where) -> Worthwhile:
        """Return which of the two it is."""
        try:
            kind, value = parse_either(raw, (Kind.AREA, Kind.POWER))
        except QuantityError as error:
            raise where.error(str(error)) from error
        return Worthwhile(cda=value) if kind is Kind.AREA else Worthwhile(power=value)

    def write(self, value: object, hint: TomlValue | None) -> TomlValue:
        """Return the one that is given."""
        assert isinstance(value, Worthwhile)
        kind, unit, figure = (Kind.AREA, "m^2", value.cda)
        if figure is None:
            kind, unit, figure = (Kind.POWER, "W", value.power)
        bare = isinstance(hint, float | int) and kind is Kind.AREA
        return Quantity(kind, unit).write(figure, hint if bare or unit_symbol(hint, kind) else None)


# -- words, texts and switches ---------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Text:
    """Any text."""

    def read(self, raw: TomlValue, where: Where) -> str:
        """Return the text."""
        if not isinstance(raw, str):
            raise where.error(f"{_told(raw)} is not a text; put it in quotes")
        return raw

    def write(self, value: object, hint: TomlValue | None) -> TomlValue:
        """Return the text."""
        return str(value)


@dataclass(frozen=True, slots=True)
class Word:
    """One of a few words."""

    words: type[StrEnum]

    def read(self, raw: TomlValue, where: Where) -> StrEnum:
        """Return the word."""
        known = [word.value for word in self.words]
        if not isinstance(raw, str) or raw not in known:
            hint = suggestion(str(raw), known)
            listed = "" if hint.startswith("known") else f" (one of {', '.join(known)})"
            raise where.error(f"{_told(raw)} is not known here; {hint}{listed}")
        return self.words(raw)

    def write(self, value: object, hint: TomlValue | None) -> TomlValue:
        """Return the word."""
        return str(value)


@dataclass(frozen=True, slots=True)
class Flag:
    """True or false."""

    def read(self, raw: TomlValue, where: Where) -> bool:
        """Return it."""
        if not isinstance(raw, bool):
            raise where.error(f"{_told(raw)} is neither true nor false; write one of them, without quotes")
        return raw

    def write(self, value: object, hint: TomlValue | None) -> TomlValue:
        """Return it."""
        return bool(value)


@dataclass(frozen=True, slots=True)
class Whole:
    """A whole number."""

    def read(self, raw: TomlValue, where: Where) -> int:
        """Return it."""
        if isinstance(raw, bool) or not isinstance(raw, int):
            raise where.error(f"{_told(raw)} is not a whole number; write one without quotes")
        return raw

    def write(self, value: object, hint: TomlValue | None) -> TomlValue:
        """Return it."""
        assert isinstance(value, int)
        return value


@dataclass(frozen=True, slots=True)
class Texts:
    """A list of texts."""

    def read(self, raw: TomlValue, where: Where) -> tuple[str, ...]:
        """Return the texts."""
        if not isinstance(raw, list):
            raise where.error(f'{_told(raw)} is not a list of texts; write it as ["...", "..."]')
        return tuple(Text().read(item, where) for item in raw)

    def write(self, value: object, hint: TomlValue | None) -> TomlValue:
        """Return the list."""
        assert isinstance(value, tuple)
        return list(value)


@dataclass(frozen=True, slots=True)
class TextMap:
    """A small table of texts."""

    def read(self, raw: TomlValue, where: Where) -> Mapping[str, str]:
        """Return the table; numbers in it are taken as text."""
        if not isinstance(raw, dict):
            raise where.error(f'{_told(raw)} is not a table; write it as {{name = "..."}}')
        for name, item in raw.items():
            if isinstance(item, bool | list | dict):
                raise where.at(name).error(f"{_told(item)} is not a text; put it in quotes")
        return MappingProxyType({name: str(item) for name, item in raw.items()})

    def write(self, value: object, hint: TomlValue | None) -> TomlValue:
        """Return the table; what the hint holds already stays as it is there."""
        assert isinstance(value, Mapping)
        was = hint if isinstance(hint, dict) else {}
        kept = {
            name: was[name] if name in was and str(was[name]) == text else text
            for name, text in value.items()
        }
        return InlineTable(kept)


# -- times -----------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Clock:
    """A time on a ride's clock: seconds, or h:mm:ss."""

    def read(self, raw: TomlValue, where: Where) -> float:
        """Return seconds."""
        try:
            return parse_duration(raw)
        except QuantityError as error:
            raise where.error(str(error)) from error

    def write(self, value: object, hint: TomlValue | None) -> TomlValue:
        """Return h:mm:ss, or seconds where the hint is in seconds."""
        assert isinstance(value, float | int)
        if hint is None or isinstance(hint, dt.time) or (isinstance(hint, str) and ":" in hint):
            text = clock_text(value)
            if self.read(text, Where(None)) == value:
                return text
            hint = 0.0
        return Quantity(Kind.DURATION).write(value, hint)


@dataclass(frozen=True, slots=True)
class ClockTimes:
    """A list of times on a ride's clock."""

    def read(self, raw: TomlValue, where: Where) -> tuple[float, ...]:
        """Return seconds."""
        if not isinstance(raw, list):
            raise where.error(f'{_told(raw)} is not a list of times; write it as ["0:05:10", ...]')
        return tuple(Clock().read(item, where) for item in raw)

    def write(self, value: object, hint: TomlValue | None) -> TomlValue:
        """Return the list in the manner of the first one of the hint."""
        assert isinstance(value, tuple)
        like = hint[0] if isinstance(hint, list) and hint else None
        return [Clock().write(item, like) for item in value]


@dataclass(frozen=True, slots=True)
class TimeOfDay:
    """A time of day: 09:30, 09:30:00, quoted or not."""

    def read(self, raw: TomlValue, where: Where) -> float:
        """Return seconds after midnight."""
        try:
            return parse_time_of_day(raw)
        except QuantityError as error:
            raise where.error(str(error)) from error

    def write(self, value: object, hint: TomlValue | None) -> TomlValue:
        """Return hh:mm, with seconds where there are any."""
        assert isinstance(value, float | int)
        text = f"{clock_text(value):0>8}"
        return text.removesuffix(":00") if isinstance(hint, str) and hint.count(":") == 1 else text


def clock_text(seconds: float) -> str:
    """Return seconds as h:mm:ss, with just the decimals they have."""
    total = Decimal(repr(float(seconds)))
    minutes, rest = divmod(total, 60)
    whole = format(rest.normalize(), "f")
    if "." not in whole:
        return f"{int(minutes) // 60}:{int(minutes) % 60:02d}:{int(rest):02d}"
    before, after = whole.split(".")
    return f"{int(minutes) // 60}:{int(minutes) % 60:02d}:{before:0>2}.{after}"


@dataclass(frozen=True, slots=True)
class Date:
    """A day."""

    def read(self, raw: TomlValue, where: Where) -> dt.date:
        """Return the day."""
        if isinstance(raw, dt.date) and not isinstance(raw, dt.datetime):
            return raw
        try:
            return dt.date.fromisoformat(str(raw))
        except ValueError:
            raise where.error(f"{_told(raw)} is not a date; write year-month-day, e.g. 2026-05-09") from None

    def write(self, value: object, hint: TomlValue | None) -> TomlValue:
        """Return the day, quoted where the hint is."""
        assert isinstance(value, dt.date)
        return value.isoformat() if isinstance(hint, str) else value


@dataclass(frozen=True, slots=True)
class Moment:
    """A date with a time, with or without an offset from UTC."""

    def read(self, raw: TomlValue, where: Where) -> dt.datetime:
        """Return the moment."""
        if isinstance(raw, dt.datetime):
            return raw
        try:
            return dt.datetime.fromisoformat(str(raw))
        except ValueError:
            raise where.error(
                f"{_told(raw)} is not a date with a time; write e.g. 2026-05-09T09:30:00+02:00"
            ) from None

    def write(self, value: object, hint: TomlValue | None) -> TomlValue:
        """Return the moment, quoted where the hint is."""
        assert isinstance(value, dt.datetime)
        return value.isoformat() if isinstance(hint, str) else value


@dataclass(frozen=True, slots=True)
class Offset:
    """An offset from UTC, e.g. "+02:00"."""

    def read(self, raw: TomlValue, where: Where) -> float:
        """Return seconds."""
        text = str(raw).strip()
        if text in ("Z", "UTC"):
            return 0.0
        found = _OFFSET.fullmatch(text)
        if found is None:
            raise where.error(f'{_told(raw)} is not an offset from UTC; write e.g. "+02:00"')
        size = int(found[2]) * 3600.0 + int(found[3]) * 60.0
        return size if found[1] == "+" else -size

    def write(self, value: object, hint: TomlValue | None) -> TomlValue:
        """Return sign, hours and minutes."""
        assert isinstance(value, float | int)
        hours, minutes = divmod(round(abs(value) / 60), 60)
        return f"{'-' if value < 0 else '+'}{hours:02d}:{minutes:02d}"
