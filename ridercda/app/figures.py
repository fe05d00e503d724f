"""Numbers with only the digits their interval allows."""

from __future__ import annotations

import datetime as dt
import math

from ridercda.app.quantities import plain
from ridercda.drag.estimate import Figure
from ridercda.units import digits_for, format_duration


def decimals_for(half_width: float) -> int:
    """Return how many decimals a value deserves whose interval reaches `half_width` to either side; 0 without."""
    return digits_for(half_width) if math.isfinite(half_width) and half_width > 0 else 0


def half_width(interval: tuple[float, float]) -> float:
    """Return half the width of an interval."""
    return (interval[1] - interval[0]) / 2


def value_text(figure: Figure, scale: float = 1.0, *, signed: bool = False) -> str:
    """Return a figure's value with the digits its interval allows."""
    decimals = decimals_for(half_width(figure.interval) * scale)
    return plain(figure.value * scale, decimals, signed=signed)


def plus_minus(figure: Figure, scale: float = 1.0) -> str:
    """Return ``± half-width`` of a figure's interval."""
    half = half_width(figure.interval) * scale
    return f"±\u00a0{plain(half, decimals_for(half))}"


def bounds_text(interval: tuple[float, float], scale: float = 1.0) -> tuple[str, str]:
    """Return both ends of an interval with the digits its width allows."""
    decimals = decimals_for(half_width(interval) * scale)
    return plain(interval[0] * scale, decimals), plain(interval[1] * scale, decimals)


def clock(seconds: float, *, with_seconds: bool = False) -> str:
    """Return a time of day, ``8:05`` or ``8:05:30``, from seconds since midnight (any day)."""
    whole = round(seconds) if with_seconds else math.floor(seconds / 60 + 0.5) * 60
    hours, rest = divmod(whole, 3600)
    text = f"{hours % 24}:{rest // 60:02d}"
    return f"{text}:{rest % 60:02d}" if with_seconds else text


def elapsed(seconds: float) -> str:
    """Return a time on a ride's clock, ``5:10`` or ``1:05:10``."""
    return format_duration(seconds)


def duration(seconds: float) -> str:
    """Return a span in words a reader takes in at once: ``45 s``, ``7 min``, ``2 h 05 min``."""
    if seconds < 90:
        return f"{round(seconds)}\u00a0s"
    minutes = round(seconds / 60)
    if minutes < 60:
        return f"{minutes}\u00a0min"
    return f"{minutes // 60}\u00a0h\u00a0{minutes % 60:02d}\u00a0min"


def date_text(date: dt.date) -> str:
    """Return a date as it is read: ``9 May 2026``."""
    return f"{date.day} {date:%B} {date.year}"
