"""The grammar of a quantity: ``"number unit"``, decimal point or comma, finite, or a bare number in SI."""

from __future__ import annotations

import datetime as dt
import math
import re

from ridercda.errors import QuantityError
from ridercda.units.conversion import Conversion, unit_conversion
from ridercda.units.durations import CLOCK, parse_clock, seconds_of_day
from ridercda.units.kinds import Kind, Unit, find_unit, kind_units, symbols

_QUANTITY = re.compile(
    r"(?P<number>[+\-−]?(?:[0-9]+(?:[.,][0-9]*)?|[.,][0-9]+)(?:[eE][+\-−]?[0-9]+)?)\s*(?P<unit>.*)", re.DOTALL
)


def parse_quantity(value: object, kind: Kind, key: str = "", bare_unit: str | None = None) -> float:
    """Return a quantity in SI (angles in radians) from a text or number a user wrote.

    Parameters
    ----------
    value : object
        ``"75.5 kg"``, ``"2,5 m/s"``, or a number in the SI unit (an angle in degrees). A duration may also be
        ``h:mm:ss``.
    kind : Kind
        What it measures.
    key : str
        Where it stands, e.g. ``rider.mass``, for the message.
    bare_unit : str, optional
        The unit of a number without one, where that is not the file's rule: an entry field that shows its
        unit.

    Raises
    ------
    QuantityError
        If it is no number with a unit of this kind, is not finite, lacks a unit that must be given, or is a
        humidity that is not 0 to 1. The message names the key, the value and units that would do.
    """
    if kind is Kind.DURATION and isinstance(value, str) and CLOCK.fullmatch(value.strip()):
        return parse_clock(value, key)
    number, unit_text = _split(value, kind, key)
    if unit_text:
        unit = find_unit(unit_text, kind)
        if unit is None:
            raise _refusal(value, kind, key, f"{unit_text!r} is not a unit of {kind}")
    else:
        unit = _bare(value, kind, key, bare_unit)
    si = _finite(number, unit, value, kind, key)
    if kind is Kind.HUMIDITY and not 0.0 <= si <= 1.0:
        raise _refusal(value, kind, key, "a humidity is 0 to 1, or 0 to 100 with a % sign")
    return si


def parse_duration(value: object, key: str = "") -> float:
    """Return a duration in seconds from ``h:mm:ss``, ``mm:ss.s``, a number of seconds or a quantity.

    Parameters
    ----------
    value : object
        Text, a number, or a time of day as TOML reads an unquoted ``00:05:10``.
    key : str
        Where it stands, for the message.

    Raises
    ------
    QuantityError
        If it is none of these, or is negative or not finite.
    """
    if isinstance(value, dt.time):
        return seconds_of_day(value)
    seconds = parse_quantity(value, Kind.DURATION, key)
    if seconds < 0.0:
        raise _refusal(value, Kind.DURATION, key, "a time cannot be negative")
    return seconds


def parse_either(value: object, kinds: tuple[Kind, ...], key: str = "") -> tuple[Kind, float]:
    """Return which of several kinds a quantity is, told by its unit, and its value in SI.

    Parameters
    ----------
    value : object
        As in `parse_quantity`; a bare number is of the first kind.
    kinds : tuple of Kind
        Those allowed.
    key : str
        Where it stands, for the message.

    Raises
    ------
    QuantityError
        As `parse_quantity`; for an unknown unit the message lists those of every kind.
    """
    number, unit_text = _split(value, kinds[0], key)
    if not unit_text:
        return kinds[0], parse_quantity(value, kinds[0], key)
    for kind in kinds:
        unit = find_unit(unit_text, kind)
        if unit is not None:
            return kind, _finite(number, unit, value, kind, key)
    options = " or ".join(f"{kind} ({symbols(kind)})" for kind in kinds)
    where = f"{key}: " if key else ""
    raise QuantityError(f"{where}{_shown(value)}: {unit_text!r} is not a unit of {options}")


def unit_symbol(value: object, kind: Kind) -> str | None:
    """Return the symbol of the unit a text was written in; None for a bare number or what is no quantity."""
    match = _QUANTITY.fullmatch(value.strip()) if isinstance(value, str) else None
    unit = find_unit(match["unit"], kind) if match and match["unit"] else None
    return unit.symbol if unit else None


def quantity_text(value: float, kind: Kind, unit: str | None = None) -> str:
    """Return a quantity as the shortest text that `parse_quantity` reads back to the very same number.

    What was once read from a text in the same unit always has such a text, and so has any number in the SI
    unit. Where a unit's rounding leaves no text for a number, the text reads back one or two last places
    away.

    Parameters
    ----------
    value : float
        In SI, finite.
    kind : Kind
        What it measures.
    unit : str, optional
        The unit to write it in; by default that of a bare number, or the metric one where a unit must be
        given.

    Raises
    ------
    QuantityError
        If the unit is not one of this kind or the value is not finite.
    """
    units = kind_units(kind)
    wanted = unit or units.bare or units.metric[0]
    found = find_unit(wanted, kind)
    if found is None:
        raise _refusal(wanted, kind, "", f"{wanted!r} is not a unit of {kind}")
    if not math.isfinite(value):
        raise QuantityError(f"{value!r} cannot be written as a {kind}: it is not finite")
    convert = unit_conversion(found, kind)
    if not math.isfinite(value / convert.scale):
        raise QuantityError(f"{value!r} is too large to be written in {found.symbol}")
    symbol = "" if found.symbol == "1" else f" {_ascii(found)}"
    return f"{_shortest(value, convert)}{symbol}"


def _shortest(value: float, convert: Conversion) -> str:
    """Return the fewest digits that convert back to the very same float."""
    exact = (value - convert.offset) / convert.scale
    for digits in range(1, 18):
        text = f"{exact:.{digits}g}"
        if float(text) * convert.scale + convert.offset == value:
            return _without_exponent(text)
    # The quotient itself may be rounded one last place away from the number that converts back.
    for neighbour in (math.nextafter(exact, math.inf), math.nextafter(exact, -math.inf)):
        if neighbour * convert.scale + convert.offset == value:
            return repr(neighbour)
    return repr(exact)


def _without_exponent(text: str) -> str:
    """Return 1.2e+03 as 1200 where that is no longer than people like."""
    number = float(text)
    if "e" in text and 1e-6 <= abs(number) < 1e16:
        plain = f"{number:.0f}" if number == int(number) else f"{number:.20f}".rstrip("0")
        if float(plain) == number:
            return plain
    return text


def _ascii(unit: Unit) -> str:
    """Return a spelling a keyboard has."""
    spellings = (unit.symbol, *unit.spellings)
    preferred = [s for s in spellings if s in {"degC", "degF", "deg", "m^2", "kg*m^2", "kg/m^3"}]
    if preferred:
        return preferred[0]
    return next((s for s in spellings if s.isascii()), unit.symbol)


def _split(value: object, kind: Kind, key: str) -> tuple[float, str]:
    if isinstance(value, bool) or not isinstance(value, (int, float, str)):
        raise _refusal(value, kind, key, f"this is not a {kind}")
    if isinstance(value, str):
        match = _QUANTITY.fullmatch(value.strip())
        if match is None:
            raise _refusal(value, kind, key, f"this is not a {kind}")
        text = match["number"].replace(",", ".").replace("−", "-")
        return float(text), match["unit"]
    try:
        return float(value), ""
    except OverflowError:
        return math.inf, ""


def _bare(value: object, kind: Kind, key: str, bare_unit: str | None) -> Unit:
    bare = bare_unit or kind_units(kind).bare
    if bare is None:
        raise _refusal(value, kind, key, f"a {kind} needs its unit")
    unit = find_unit(bare, kind)
    if unit is None:
        raise ValueError(f"{bare!r} is not a unit of {kind}")
    return unit


def _finite(number: float, unit: Unit, value: object, kind: Kind, key: str) -> float:
    convert = unit_conversion(unit, kind)
    si = number * convert.scale + convert.offset
    if not math.isfinite(si):
        raise _refusal(value, kind, key, "this number is not finite")
    return si


def _refusal(value: object, kind: Kind, key: str, reason: str) -> QuantityError:
    where = f"{key}: " if key else ""
    names = symbols(kind)
    bare = kind_units(kind).bare
    if bare == "1":
        names += ", or a plain number"
    elif bare is not None:
        names += f", or a plain number in {bare}"
    example = kind_units(kind).example
    return QuantityError(f"{where}{_shown(value)}: {reason}; write it like {example!r} (units: {names})")


def _shown(value: object) -> str:
    text = repr(value)
    return text if len(text) <= 80 else f"{text[:77]}..."
