"""Times: ``h:mm:ss`` within a ride, clock time of day, and how both are shown."""

from __future__ import annotations

import datetime as dt
import math
import re

from ridercda.errors import QuantityError

CLOCK = re.compile(r"(?:(?P<hours>[0-9]+):)?(?P<minutes>[0-9]+):(?P<seconds>[0-9]{1,2}(?:[.,][0-9]*)?)")
_TIME_OF_DAY = re.compile(
    r"(?P<hours>[0-9]{1,2}):(?P<minutes>[0-9]{2})(?::(?P<seconds>[0-9]{2}(?:[.,][0-9]*)?))?"
)
_SECONDS_PER_DAY = 86400.0


def parse_time_of_day(value: object, key: str = "") -> float:
    """Return a time of day in seconds since midnight from ``hh:mm`` or ``hh:mm:ss``.

    Parameters
    ----------
    value : object
        Text, or a time as TOML reads an unquoted ``09:30:00``.
    key : str
        Where it stands, for the message.

    Raises
    ------
    QuantityError
        If it is neither, or not within one day.
    """
    if isinstance(value, dt.time):
        return seconds_of_day(value)
    match = _TIME_OF_DAY.fullmatch(value.strip()) if isinstance(value, str) else None
    if match is not None:
        hours, minutes = int(match["hours"]), int(match["minutes"])
        seconds = float((match["seconds"] or "0").replace(",", "."))
        if minutes < 60 and seconds < 60.0:
            total = 3600.0 * hours + 60.0 * minutes + seconds
            if total <= _SECONDS_PER_DAY:
                return total
    raise QuantityError(f"{_where(key)}{value!r}: this is not a time of day; write it like '09:30'")


def parse_clock(text: str, key: str = "") -> float:
    """Return the seconds of a text that `CLOCK` matches.

    Raises
    ------
    QuantityError
        If minutes after hours, or seconds, are 60 or more.
    """
    match = CLOCK.fullmatch(text.strip())
    if match is None:
        raise QuantityError(f"{_where(key)}{text!r}: this is not a time; write it like '0:05:10'")
    hours, minutes = float(match["hours"] or 0), float(match["minutes"])
    seconds = float(match["seconds"].replace(",", "."))
    if seconds >= 60.0 or (match["hours"] is not None and minutes >= 60):
        raise QuantityError(f"{_where(key)}{text!r}: minutes and seconds go to 59; write it like '0:05:10'")
    total = 3600.0 * hours + 60.0 * minutes + seconds
    if not math.isfinite(total):
        raise QuantityError(f"{_where(key)}{text!r}: this number is not finite")
    return total


def format_duration(seconds: float, digits: int = 0) -> str:
    """Return a duration as ``h:mm:ss`` or, below an hour, ``m:ss``.

    Parameters
    ----------
    seconds : float
        Duration; a negative one gets a true minus sign, one that is not finite a dash. [s]
    digits : int
        Decimals of the seconds.
    """
    if not math.isfinite(seconds):
        return "–"
    rounded = round(abs(seconds), digits)
    sign = "−" if seconds < 0 and rounded > 0 else ""
    # Split the rounded figure as whole units of the last place, so that 59.96 never shows as 0:60.0.
    unit = 10**digits
    ticks = round(rounded * unit)
    whole, part = divmod(ticks, unit)
    minutes, secs = divmod(whole, 60)
    hours, minutes = divmod(minutes, 60)
    tail = f"{secs:02d}" + (f".{part:0{digits}d}" if digits else "")
    return f"{sign}{hours}:{minutes:02d}:{tail}" if hours else f"{sign}{minutes}:{tail}"


def seconds_of_day(value: dt.time) -> float:
    """Return the seconds since midnight of a clock time."""
    return 3600.0 * value.hour + 60.0 * value.minute + value.second + 1e-6 * value.microsecond


def _where(key: str) -> str:
    return f"{key}: " if key else ""
