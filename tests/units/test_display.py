from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from ridercda.errors import QuantityError
from ridercda.units import (
    DisplayUnits,
    Kind,
    UnitSystem,
    digits_for,
    display_symbol,
    format_duration,
    format_interval,
    format_number,
    format_quantity,
    from_display,
    parse_duration,
    parse_quantity,
    parse_time_of_day,
    to_display,
)

METRIC, IMPERIAL = UnitSystem.METRIC, UnitSystem.IMPERIAL


@pytest.mark.parametrize(
    ("value", "kind", "metric", "imperial"),
    [
        (75.5, Kind.MASS, "75.5 kg", "166.4 lb"),
        (12.5, Kind.SPEED, "45.0 km/h", "28.0 mph"),
        (2.5, Kind.WIND_SPEED, "2.5 m/s", "5.6 mph"),
        (40233.6, Kind.DISTANCE, "40.23 km", "25.00 mi"),
        (2.105, Kind.LENGTH, "2105 mm", "82.87 in"),
        (100.0, Kind.HEIGHT, "100.0 m", "328 ft"),
        (291.15, Kind.TEMPERATURE, "18.0 °C", "64.4 °F"),
        (5.0, Kind.TEMPERATURE_DIFFERENCE, "5.0 °C", "9.0 °F"),
        (100800.0, Kind.PRESSURE, "1008.0 hPa", "29.77 inHg"),
        (650e3, Kind.TYRE_PRESSURE, "6.50 bar", "94 psi"),
        (0.2604, Kind.AREA, "0.260 m²", "0.260 m²"),
        (1.201, Kind.DENSITY, "1.201 kg/m³", "0.0750 lb/ft³"),
        (math.radians(240), Kind.ANGLE, "240°", "240°"),
        (0.55, Kind.HUMIDITY, "55 %", "55 %"),
        (-0.035, Kind.GRADE, "−3.5 %", "−3.5 %"),
        (1.5, Kind.FREQUENCY, "90 rpm", "90 rpm"),
        (285.2, Kind.POWER, "285 W", "285 W"),
        (20e3, Kind.ENERGY, "20.0 kJ", "20.0 kJ"),
    ],
)
def test_figures_in_both_systems(value: float, kind: Kind, metric: str, imperial: str) -> None:
    assert format_quantity(value, kind, METRIC) == metric
    assert format_quantity(value, kind, IMPERIAL) == imperial


def test_choice_is_per_quantity() -> None:
    units = DisplayUnits(METRIC, {Kind.TYRE_PRESSURE: IMPERIAL})
    assert format_quantity(650e3, Kind.TYRE_PRESSURE, units.of(Kind.TYRE_PRESSURE)) == "94 psi"
    assert format_quantity(75.5, Kind.MASS, units.of(Kind.MASS)) == "75.5 kg"


@pytest.mark.parametrize(
    ("half_width", "digits"),
    [
        # The three worked cases of the Particle Data Group's rule for ± 0.119, 0.367 and 0.9995 (from
        # memory): 0.827 ± 0.119 -> 0.83 ± 0.12, 0.827 ± 0.367 -> 0.8 ± 0.4.
        (0.119, 2),
        (0.367, 1),
        (0.99, 1),
        (0.0354, 3),
        (0.0355, 2),
        (0.00799, 3),
        (0.0021, 4),
        (0.000949, 4),
        (0.000951, 4),
        (1.2, 1),
        (3.6, 0),
        (12.0, 0),
        (4700.0, 0),
        (0.09999, 2),
    ],
)
def test_digits_follow_the_uncertainty(half_width: float, digits: int) -> None:
    assert digits_for(half_width) == digits


@given(st.floats(1e-9, 10.0))
def test_rounding_never_moves_a_figure_by_more_than_a_seventh_of_its_uncertainty(half_width: float) -> None:
    # Half a unit of the last place against 3.55 (one digit) or 1.00 to 3.54 (two digits).
    assert 0.5 * 10.0 ** -digits_for(half_width) <= 0.5 / 3.54 * half_width or half_width > 3.5


@pytest.mark.parametrize("half_width", [0.0, -0.1, math.nan, math.inf])
def test_no_width_is_no_interval(half_width: float) -> None:
    with pytest.raises(ValueError, match="a half-width must be positive and finite"):
        digits_for(half_width)
    with pytest.raises(ValueError, match="a half-width must be positive and finite"):
        format_quantity(0.26, Kind.AREA, half_width=half_width)


def test_uncertainty_is_counted_in_the_unit_shown() -> None:
    # 0.1 m/s is 0.36 km/h: one digit; in mph 0.22: two.
    assert format_quantity(12.5, Kind.SPEED, METRIC, half_width=0.1) == "45.0 km/h"
    assert format_quantity(12.5, Kind.SPEED, IMPERIAL, half_width=0.1) == "27.96 mph"
    # A half-width has no offset.
    assert format_quantity(291.15, Kind.TEMPERATURE, METRIC, half_width=2.0) == "18.0 °C"


def test_intervals() -> None:
    assert format_interval(-0.018, -0.008, Kind.AREA) == "−0.018 to −0.008 m²"
    assert format_interval(0.2519, 0.2681, Kind.AREA) == "0.252 to 0.268 m²"
    assert format_interval(-0.0012, 0.0031, Kind.AREA, digits=3, minus="-") == "-0.001 to 0.003 m²"
    assert format_interval(math.nan, 0.1, Kind.AREA) == "–"
    with pytest.raises(ValueError, match="a half-width must be positive"):
        format_interval(0.26, 0.26, Kind.AREA)


def test_signs() -> None:
    assert format_quantity(-0.0131, Kind.AREA) == "−0.013 m²"
    assert format_quantity(-0.0131, Kind.AREA, minus="-") == "-0.013 m²"
    assert format_quantity(0.0131, Kind.AREA, plus="+") == "+0.013 m²"
    assert format_quantity(0.0, Kind.AREA, plus="+") == "0.000 m²"
    assert format_number(-0.0004, 3) == "0.000"  # never a negative zero


@pytest.mark.parametrize("value", [None, math.nan, math.inf, -math.inf])
def test_no_figure_is_a_dash(value: float | None) -> None:
    assert format_quantity(value, Kind.AREA) == "–"


@given(st.sampled_from(list(Kind)), st.sampled_from(list(UnitSystem)), st.floats(0.0, 1.0))
def test_what_is_shown_reads_back(kind: Kind, system: UnitSystem, value: float) -> None:
    # Half a unit of the last decimal shown, in SI.
    half = 0.51e-12 * float(np.diff(from_display([0.0, 1.0], kind, system))[0]) + 1e-13
    shown = format_quantity(value, kind, system, digits=12)
    assert parse_quantity(shown, kind) == pytest.approx(value, rel=0, abs=half)
    if kind is not Kind.HUMIDITY:
        shown = format_quantity(-value, kind, system, digits=12)
        assert parse_quantity(shown, kind) == pytest.approx(-value, rel=0, abs=half)


@given(st.sampled_from(list(Kind)), st.sampled_from(list(UnitSystem)))
def test_axes_and_their_symbols(kind: Kind, system: UnitSystem) -> None:
    values = np.array([0.1, 0.5, np.nan])
    shown = to_display(values, kind, system)
    np.testing.assert_allclose(from_display(shown, kind, system), values, rtol=1e-9)
    text = f"{shown[1]:.15g} {display_symbol(kind, system)}"
    assert parse_quantity(text, kind) == pytest.approx(0.5, rel=1e-9)


@pytest.mark.parametrize(
    ("seconds", "digits", "text"),
    [
        (0.0, 0, "0:00"),
        (59.96, 1, "1:00.0"),
        (59.94, 1, "0:59.9"),
        (3599.6, 0, "1:00:00"),
        (3910.0, 0, "1:05:10"),
        (3011.2, 1, "50:11.2"),
        (-38.1, 1, "−0:38.1"),
        (-0.01, 1, "0:00.0"),
        (360000.0, 0, "100:00:00"),
        (math.nan, 0, "–"),
    ],
)
def test_durations_as_people_read_them(seconds: float, digits: int, text: str) -> None:
    assert format_duration(seconds, digits) == text


@given(st.floats(0.0, 1e6), st.integers(0, 3))
def test_durations_read_back(seconds: float, digits: int) -> None:
    assert parse_duration(format_duration(seconds, digits)) == pytest.approx(seconds, abs=0.51 * 10**-digits)


@pytest.mark.parametrize(
    ("text", "seconds"), [("09:30", 34200.0), ("9:30:15", 34215.0), ("24:00", 86400.0), ("00:00:00.5", 0.5)]
)
def test_time_of_day_is_hours_and_minutes(text: str, seconds: float) -> None:
    assert parse_time_of_day(text) == seconds


@pytest.mark.parametrize("value", ["9", "25:00", "09:60", "24:00:01", "9:30 pm", 34200, None, ""])
def test_what_is_no_time_of_day_is_refused(value: object) -> None:
    with pytest.raises(
        QuantityError, match=r"air.reading\[1\].time: .*not a time of day; write it like '09:30'"
    ):
        parse_time_of_day(value, "air.reading[1].time")
