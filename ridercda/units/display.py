"""Quantities as people see them: metric or imperial by choice, digits decided by the uncertainty."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import StrEnum
from types import MappingProxyType

import numpy as np
import numpy.typing as npt

from ridercda.units.conversion import Conversion, conversion
from ridercda.units.kinds import Kind, kind_units

FloatArray = npt.NDArray[np.float64]

TRUE_MINUS = "−"
NOTHING = "–"  # shown where there is no figure


class UnitSystem(StrEnum):
    """A choice of units for display."""

    METRIC = "metric"
    IMPERIAL = "imperial"


@dataclass(frozen=True, slots=True)
class DisplayUnits:
    """The user's choice: one system for all, and another for some kinds.

    Parameters
    ----------
    system : UnitSystem
        For every kind not named below.
    by_kind : mapping of Kind to UnitSystem
        Exceptions.
    """

    system: UnitSystem = UnitSystem.METRIC
    by_kind: Mapping[Kind, UnitSystem] = field(default_factory=lambda: MappingProxyType({}))

    def of(self, kind: Kind) -> UnitSystem:
        """Return the system chosen for a kind."""
        return self.by_kind.get(kind, self.system)


def display_symbol(kind: Kind, system: UnitSystem = UnitSystem.METRIC) -> str:
    """Return the symbol of the unit a kind is shown in."""
    return _shown_in(kind, system)[0]


def to_display(values: npt.ArrayLike, kind: Kind, system: UnitSystem = UnitSystem.METRIC) -> FloatArray:
    """Return SI values in the unit they are shown in, e.g. for an axis; NaN stays NaN."""
    return _conversion(kind, system).from_si(values)


def from_display(values: npt.ArrayLike, kind: Kind, system: UnitSystem = UnitSystem.METRIC) -> FloatArray:
    """Return shown values in SI; NaN stays NaN."""
    return _conversion(kind, system).to_si(values)


def digits_for(half_width: float) -> int:
    """Return how many decimals a figure deserves, from the half-width of its interval or its standard error.

    Parameters
    ----------
    half_width : float
        Positive and finite, in the unit shown.

    Returns
    -------
    int
        0 or more.

    Raises
    ------
    ValueError
        If it is not positive or not finite: an interval of no width is no interval.

    Notes
    -----
    The rule of the Particle Data Group ("Review of Particle Physics," introduction, rounding; from memory):
    two digits of the uncertainty if its first three are 100 to 354, one if they are 355 to 949, and from 950
    up it counts as 1000 with two digits.
    """
    if not (math.isfinite(half_width) and half_width > 0.0):
        raise ValueError(f"a half-width must be positive and finite, not {half_width!r}")
    mantissa, exponent = f"{half_width:.2e}".split("e")
    digits = 2 if float(mantissa) < 3.55 else 1  # 9.5 counts as 10, so its two digits end at the same place
    return max(digits - 1 - int(exponent), 0)


def format_number(value: float, digits: int, minus: str = TRUE_MINUS, plus: str = "") -> str:
    """Return a number with fixed decimals and no negative zero; a dash where it is not finite.

    Parameters
    ----------
    value : float
        The number.
    digits : int
        Decimals.
    minus, plus : str
        Signs to set before negative and positive numbers.
    """
    if not math.isfinite(value):
        return NOTHING
    text = f"{abs(value):.{digits}f}"
    if float(text) == 0.0:
        return text
    return f"{minus if value < 0 else plus}{text}"


def format_quantity(
    value: float | None,
    kind: Kind,
    system: UnitSystem = UnitSystem.METRIC,
    *,
    half_width: float | None = None,
    digits: int | None = None,
    minus: str = TRUE_MINUS,
    plus: str = "",
) -> str:
    """Return a quantity with its unit, as people see it.

    Parameters
    ----------
    value : float or None
        In SI (an angle in radians); None or not finite shows a dash.
    kind : Kind
        What it measures.
    system : UnitSystem
        Metric or imperial.
    half_width : float, optional
        Half-width of its interval or its standard error, in SI, which decides the decimals.
    digits : int, optional
        Decimals, where they are to be the same down a column. By default those usual for the kind.
    minus, plus : str
        Signs; ``plus="+"`` for a difference, ``minus="-"`` for a file.

    Raises
    ------
    ValueError
        If `half_width` is not positive and finite.
    """
    symbol, usual = _shown_in(kind, system)
    if value is None or not math.isfinite(value):
        return NOTHING
    convert = _conversion(kind, system)
    decimals = digits
    if decimals is None:
        decimals = usual if half_width is None else digits_for(half_width / convert.scale)
    return with_unit(format_number(float(convert.from_si(value)), decimals, minus, plus), symbol)


def format_interval(
    low: float,
    high: float,
    kind: Kind,
    system: UnitSystem = UnitSystem.METRIC,
    *,
    digits: int | None = None,
    minus: str = TRUE_MINUS,
) -> str:
    """Return an interval with its unit, its decimals decided by its own width unless given.

    Parameters
    ----------
    low, high : float
        Ends, in SI; a dash where one is not finite.
    kind : Kind
        What it measures.
    system : UnitSystem
        Metric or imperial.
    digits : int, optional
        Decimals.
    minus : str
        The minus sign.

    Raises
    ------
    ValueError
        If the interval has no width and no digits are given.
    """
    if not (math.isfinite(low) and math.isfinite(high)):
        return NOTHING
    symbol, _ = _shown_in(kind, system)
    convert = _conversion(kind, system)
    decimals = digits_for(0.5 * (high - low) / convert.scale) if digits is None else digits
    ends = (format_number(float(convert.from_si(end)), decimals, minus) for end in (low, high))
    return with_unit(" to ".join(ends), symbol)


def with_unit(number: str, symbol: str) -> str:
    """Return a number with its unit; degrees of angle close up, and a plain 1 is left out."""
    if symbol == "1":
        return number
    return f"{number}{symbol}" if symbol == "°" else f"{number} {symbol}"


def _shown_in(kind: Kind, system: UnitSystem) -> tuple[str, int]:
    units = kind_units(kind)
    return units.imperial if system is UnitSystem.IMPERIAL else units.metric


def _conversion(kind: Kind, system: UnitSystem) -> Conversion:
    return conversion(_shown_in(kind, system)[0], kind)
