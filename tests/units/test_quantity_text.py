from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from ridercda.errors import QuantityError
from ridercda.units import Kind, kind_units, parse_quantity, quantity_text, unit_symbol

in_any_unit = st.sampled_from([(kind, unit.symbol) for kind in Kind for unit in kind_units(kind).units])


@pytest.mark.parametrize(
    ("value", "kind", "unit", "text"),
    [
        (75.5, Kind.MASS, None, "75.5 kg"),
        (165 * 0.45359237, Kind.MASS, "lb", "165 lb"),
        (291.15, Kind.TEMPERATURE, None, "18 degC"),
        (100800.0, Kind.PRESSURE, None, "1008 hPa"),
        (0.14, Kind.INERTIA, None, "0.14 kg*m^2"),
        (math.radians(240), Kind.ANGLE, None, "240 deg"),
        (0.002, Kind.AREA, None, "0.002 m^2"),
        (0.55, Kind.HUMIDITY, None, "0.55"),
        (0.55, Kind.HUMIDITY, "%", "55 %"),
        (0.1, Kind.MASS, None, "0.1 kg"),
        (2400.0, Kind.DISTANCE, None, "2400 m"),
        (1.2e-5, Kind.AREA, None, "0.000012 m^2"),
        (-3.5, Kind.HEIGHT, None, "-3.5 m"),
        (0.0, Kind.MASS, "lb", "0 lb"),
    ],
)
def test_text_is_what_a_person_would_write(value: float, kind: Kind, unit: str | None, text: str) -> None:
    assert quantity_text(value, kind, unit) == text
    assert parse_quantity(text, kind) == value


@given(in_any_unit, st.from_regex(r"-?[0-9]{1,4}(\.[0-9]{0,5}[1-9])?", fullmatch=True))
def test_what_was_read_is_written_as_short_and_reads_the_same(unit: tuple[Kind, str], number: str) -> None:
    kind, symbol = unit
    if kind is Kind.HUMIDITY:
        number = str(abs(float(number)) % 1.0)
    value = parse_quantity(f"{number} {symbol}" if symbol != "1" else number, kind)
    text = quantity_text(value, kind, symbol)
    assert parse_quantity(text, kind) == value
    assert len(text.partition(" ")[0]) <= max(len(number), 1)


@given(st.sampled_from(list(Kind)), st.floats(-1e12, 1e12))
def test_any_number_is_exact_in_the_si_unit(kind: Kind, value: float) -> None:
    if kind is Kind.HUMIDITY:
        value = abs(value) % 1.0
    assert parse_quantity(quantity_text(value, kind, kind_units(kind).si.symbol), kind) == value


@given(in_any_unit, st.floats(1e-6, 1e6))
def test_any_number_in_any_unit_is_within_two_last_places(unit: tuple[Kind, str], value: float) -> None:
    kind, symbol = unit
    if kind is Kind.HUMIDITY:
        value %= 1.0
    back = parse_quantity(quantity_text(value, kind, symbol), kind)
    offset = 300.0 if kind is Kind.TEMPERATURE else 0.0
    assert back == pytest.approx(value, rel=0, abs=2 * math.ulp(value + offset))


def test_text_needs_a_finite_value_and_a_unit_of_the_kind() -> None:
    with pytest.raises(QuantityError, match="cannot be written as a mass: it is not finite"):
        quantity_text(math.nan, Kind.MASS)
    with pytest.raises(QuantityError, match="'lb' is not a unit of speed"):
        quantity_text(1.0, Kind.SPEED, "lb")
    with pytest.raises(QuantityError, match="is too large to be written in mm"):
        quantity_text(1e307, Kind.LENGTH, "mm")


@pytest.mark.parametrize(
    ("value", "kind", "symbol"),
    [
        ("165 lbs", Kind.MASS, "lb"),
        ("18 C", Kind.TEMPERATURE, "°C"),
        ("55%", Kind.HUMIDITY, "%"),
        ("75.5", Kind.MASS, None),
        (75.5, Kind.MASS, None),
        ("75 furlongs", Kind.MASS, None),
        ("about 75 kg", Kind.MASS, None),
        (None, Kind.MASS, None),
    ],
)
def test_unit_a_text_was_written_in(value: object, kind: Kind, symbol: str | None) -> None:
    assert unit_symbol(value, kind) == symbol
