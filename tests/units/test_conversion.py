from __future__ import annotations

import subprocess
import sys

import numpy as np
import pint
import pytest

from ridercda.errors import QuantityError
from ridercda.units import Kind, conversion, find_unit, from_si, kind_units, to_si

# Our symbol -> the same unit in the words of the library's own list of definitions, which ours does not use.
LIBRARY = {
    "g0": "standard_gravity",
    "m/s": "metre/second",
    "kn": "knot",
    "m²": "metre**2",
    "cm²": "centimetre**2",
    "ft²": "foot**2",
    "in²": "inch**2",
    "m/s²": "metre/second**2",
    "ft/s²": "foot/second**2",
    "mbar": "millibar",
    "inHg": "inHg",
    "°": "degree",
    "min": "minute",
    "h": "hour",
    "kg m²": "kilogram*metre**2",
    "g m²": "gram*metre**2",
    "lb ft²": "pound*foot**2",
    "kg/m³": "kilogram/metre**3",
    "g/L": "gram/litre",
    "lb/ft³": "pound/foot**3",
    "rpm": "1/minute",
    "bpm": "1/minute",
    "1": "dimensionless",
    "%": "percent",
    "‰": "permille",
    "1/K": "1/kelvin",
    "%/K": "percent/kelvin",
    "1/°F": "1/delta_degree_Fahrenheit",
    "%/°F": "percent/delta_degree_Fahrenheit",
    "lbf": "pound_force",
    "kgf": "kilogram_force",
    "st": "stone",
    "lb": "pound",
    "oz": "ounce",
    "in": "inch",
    "ft": "foot",
    "yd": "yard",
    "mi": "mile",
    "hp": "horsepower",
    "km/h": "kilometre/hour",
    "mph": "mile/hour",
    "ft/s": "foot/second",
    "mm/s": "millimetre/second",
    "kWh": "kilowatt*hour",
    "Wh": "watt*hour",
}
CASES = [(kind, unit.symbol) for kind in Kind for unit in kind_units(kind).units]


@pytest.fixture(scope="module")
def library() -> pint.UnitRegistry:
    return pint.UnitRegistry()


@pytest.mark.parametrize(("kind", "symbol"), CASES)
def test_every_unit_agrees_with_the_library_s_own_list(
    kind: Kind, symbol: str, library: pint.UnitRegistry
) -> None:
    if symbol.startswith("°") and kind in (Kind.TEMPERATURE, Kind.TEMPERATURE_DIFFERENCE):
        name = {"°C": "degree_Celsius", "°F": "degree_Fahrenheit"}[symbol]
        theirs = name if kind is Kind.TEMPERATURE else f"delta_{name}"
    else:
        theirs = LIBRARY.get(symbol, symbol)
    si = LIBRARY.get(kind_units(kind).si.symbol, kind_units(kind).si.symbol)
    for number in (0.0, 1.0, 37.5):
        expected = library.Quantity(number, theirs).to(si).magnitude
        # The mercury columns are conventional to nine digits, and libraries differ in the last.
        tolerance = 1e-8 if "Hg" in symbol else 1e-12
        assert float(to_si(number, symbol, kind)) == pytest.approx(expected, rel=tolerance, abs=1e-15)


@pytest.mark.parametrize(("kind", "symbol"), CASES)
def test_there_and_back(kind: Kind, symbol: str) -> None:
    values = np.array([-3.7, 0.0, 2.1, 1e4, np.nan])
    np.testing.assert_allclose(
        from_si(to_si(values, symbol, kind), symbol, kind), values, rtol=1e-12, atol=1e-10
    )


def test_header_of_a_column() -> None:
    np.testing.assert_allclose(to_si(np.array([36.0, np.nan, 18.0]), "km/h", Kind.SPEED), [10.0, np.nan, 5.0])
    np.testing.assert_allclose(to_si([0.0, 20.0], "°C", Kind.TEMPERATURE), [273.15, 293.15])


def test_unit_of_another_kind_is_refused() -> None:
    with pytest.raises(
        QuantityError, match=r"speed \[kg\]: 'kg' is not a unit of speed; use one of m/s, km/h, mph"
    ):
        conversion("kg", Kind.SPEED, "speed [kg]")


def test_case_is_forgiven() -> None:
    for text in ("KM/H", "Kph", "MPH", "M/S"):
        assert find_unit(text, Kind.SPEED) is not None
    assert find_unit("furlong", Kind.DISTANCE) is None


@pytest.mark.parametrize("kind", list(Kind))
def test_table_is_sound(kind: Kind) -> None:
    units = kind_units(kind)
    shown = {unit.symbol for unit in units.units}
    assert units.metric[0] in shown
    assert units.imperial[0] in shown
    assert units.bare is None or units.bare in shown
    assert float(to_si(1.0, units.si.symbol, kind)) == 1.0
    for unit in units.units:
        for spelling in (unit.symbol, *unit.spellings):
            assert find_unit(spelling, kind) is unit


def test_si_needs_no_registry_and_a_start_no_library() -> None:
    code = (
        "import sys; from ridercda.units import Kind, parse_quantity as p\n"
        "assert p('75.5 kg', Kind.MASS) == 75.5 and p(0.3, Kind.AREA) == 0.3\n"
        "assert p('0.14 kg*m^2', Kind.INERTIA) == 0.14\n"
        "assert 'pint' not in sys.modules, 'the registry was opened for SI units'\n"
        "assert 'scipy' not in sys.modules and 'numba' not in sys.modules\n"
        "assert p('36 km/h', Kind.SPEED) and 'pint' in sys.modules\n"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
