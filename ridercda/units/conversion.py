"""Conversion between units: one registry, opened when the first unit that is not SI turns up.

The registry only converts; it never reads a user's text. It holds the definitions below and no others:
loading the library's own list of a thousand units costs 0.2 s at start-up, these 5 ms.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from typing import TYPE_CHECKING, Any

import numpy as np
import numpy.typing as npt

from ridercda.errors import QuantityError
from ridercda.units.kinds import Kind, Unit, find_unit, kind_units, symbols

if TYPE_CHECKING:
    import pint

FloatArray = npt.NDArray[np.float64]

# Exact by definition, the mercury columns by convention: The International System of Units, 9th ed. 2019;
# NIST Special Publication 811, appendix B, 2008 (both from memory).
_DEFINITIONS = (
    "metre = [length]",
    "second = [time]",
    "kilogram = [mass]",
    "kelvin = [temperature]; offset: 0",
    "radian = []",
    "one = []",
    "percent = 0.01 * one",
    "permille = 0.001 * one",
    "degree = 3.14159265358979323846 / 180 * radian",
    "degree_celsius = kelvin; offset: 273.15",
    "degree_fahrenheit = 5 / 9 * kelvin; offset: 233.15 + 200 / 9",
    "kilometre = 1000 * metre",
    "centimetre = 0.01 * metre",
    "millimetre = 0.001 * metre",
    "inch = 0.0254 * metre",
    "foot = 0.3048 * metre",
    "yard = 0.9144 * metre",
    "mile = 1609.344 * metre",
    "millisecond = 0.001 * second",
    "minute = 60 * second",
    "hour = 3600 * second",
    "knot = 1852 * metre / hour",
    "hertz = 1 / second",
    "per_minute = 1 / minute",
    "gram = 0.001 * kilogram",
    "pound = 0.45359237 * kilogram",
    "ounce = pound / 16",
    "stone = 14 * pound",
    "standard_gravity = 9.80665 * metre / second ** 2",
    "newton = kilogram * metre / second ** 2",
    "pound_force = pound * standard_gravity",
    "kilogram_force = kilogram * standard_gravity",
    "joule = newton * metre",
    "kilojoule = 1000 * joule",
    "kilocalorie = 4184 * joule",
    "watt = joule / second",
    "kilowatt = 1000 * watt",
    "horsepower = 550 * foot * pound_force / second",
    "pascal = newton / metre ** 2",
    "hectopascal = 100 * pascal",
    "kilopascal = 1000 * pascal",
    "bar = 100000 * pascal",
    "millibar = 100 * pascal",
    "psi = pound_force / inch ** 2",
    "atmosphere = 101325 * pascal",
    "millimetre_mercury = 133.322387415 * pascal",
    "inch_mercury = 25.4 * millimetre_mercury",
    "litre = 0.001 * metre ** 3",
)


@dataclass(frozen=True, slots=True)
class Conversion:
    """From a unit to SI: value·scale + offset."""

    scale: float
    offset: float

    def to_si(self, values: npt.ArrayLike) -> FloatArray:
        """Return values of the unit in SI; NaN stays NaN."""
        return np.asarray(np.asarray(values, float) * self.scale + self.offset)

    def from_si(self, values: npt.ArrayLike) -> FloatArray:
        """Return SI values in the unit; NaN stays NaN."""
        return np.asarray((np.asarray(values, float) - self.offset) / self.scale)


def conversion(unit: str, kind: Kind, key: str = "") -> Conversion:
    """Return the conversion of a unit of a kind, e.g. from the header of a column.

    Parameters
    ----------
    unit : str
        As people write it.
    kind : Kind
        What is measured.
    key : str
        Where it stands, for the message.

    Raises
    ------
    QuantityError
        If it is not a unit of this kind.
    """
    found = find_unit(unit, kind)
    if found is None:
        where = f"{key}: " if key else ""
        raise QuantityError(f"{where}{unit!r} is not a unit of {kind}; use one of {symbols(kind)}")
    return unit_conversion(found, kind)


def to_si(values: npt.ArrayLike, unit: str, kind: Kind, key: str = "") -> FloatArray:
    """Return values given in a unit in SI; see `conversion`."""
    return conversion(unit, kind, key).to_si(values)


def from_si(values: npt.ArrayLike, unit: str, kind: Kind, key: str = "") -> FloatArray:
    """Return SI values in a unit; see `conversion`."""
    return conversion(unit, kind, key).from_si(values)


@cache
def unit_conversion(unit: Unit, kind: Kind) -> Conversion:
    """Return the conversion of a unit found in the table."""
    si = kind_units(kind).si
    if unit.expression == si.expression:
        return Conversion(1.0, 0.0)
    registry = _registry()
    degree = unit.expression.startswith("degree_")
    difference = f"delta_{unit.expression}" if degree else unit.expression
    scale = float(registry.convert(1.0, difference, si.expression))
    offset = float(registry.convert(0.0, unit.expression, si.expression)) if degree else 0.0
    return Conversion(scale, offset)


@cache
def _registry() -> pint.UnitRegistry[Any]:
    import pint  # 0.13 s

    registry: pint.UnitRegistry[Any] = pint.UnitRegistry(None)
    for definition in _DEFINITIONS:
        registry.define(definition)
    return registry
