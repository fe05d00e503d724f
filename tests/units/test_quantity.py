from __future__ import annotations

import contextlib
import datetime as dt
import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from ridercda.errors import QuantityError
from ridercda.units import Kind, kind_units, parse_duration, parse_either, parse_quantity


class TestTextThatALibraryReadsWrongly:
    """Given these texts, the conversion library raises or answers something else; the grammar here is our
    own."""

    def test_degrees_celsius_with_a_space(self) -> None:
        assert parse_quantity("18 degC", Kind.TEMPERATURE) == pytest.approx(291.15, abs=1e-12)

    def test_c_is_celsius_not_coulombs(self) -> None:
        assert parse_quantity("18 C", Kind.TEMPERATURE) == pytest.approx(291.15, abs=1e-12)

    def test_f_is_fahrenheit_not_farads(self) -> None:
        assert parse_quantity("64 F", Kind.TEMPERATURE) == pytest.approx((64 - 32) / 1.8 + 273.15, abs=1e-12)

    def test_decimal_comma(self) -> None:
        assert parse_quantity("2,5 m/s", Kind.SPEED) == 2.5

    def test_clock_time(self) -> None:
        assert parse_quantity("1:05:10", Kind.DURATION) == 3910.0
        with pytest.raises(QuantityError, match=r"'1:05:10': ':05:10' is not a unit of speed"):
            parse_quantity("1:05:10", Kind.SPEED)

    def test_overflow(self) -> None:
        with pytest.raises(QuantityError, match=r"rider.mass: '1e400 kg': this number is not finite"):
            parse_quantity("1e400 kg", Kind.MASS, "rider.mass")


@pytest.mark.parametrize(
    ("text", "kind", "expected"),
    [
        ("75.5 kg", Kind.MASS, 75.5),
        ("75,5kg", Kind.MASS, 75.5),
        ("+0.3 kg", Kind.MASS, 0.3),
        ("-300 g", Kind.MASS, -0.3),
        ("−300 g", Kind.MASS, -0.3),
        ("165 lb", Kind.MASS, 165 * 0.45359237),
        ("165 lbs", Kind.MASS, 165 * 0.45359237),
        ("165 LBS", Kind.MASS, 165 * 0.45359237),
        ("11 st", Kind.MASS, 154 * 0.45359237),
        ("2.105 m", Kind.LENGTH, 2.105),
        ("2105 mm", Kind.LENGTH, 2.105),
        ("27 in", Kind.LENGTH, 27 * 0.0254),
        ('27"', Kind.LENGTH, 27 * 0.0254),
        ("27″", Kind.LENGTH, 27 * 0.0254),
        ("6 ft", Kind.HEIGHT, 6 * 0.3048),
        ("25 mi", Kind.DISTANCE, 40233.6),
        ("2.4e3 m", Kind.DISTANCE, 2400.0),
        (".5 km", Kind.DISTANCE, 500.0),
        ("5. km", Kind.DISTANCE, 5000.0),
        ("36 km/h", Kind.SPEED, 10.0),
        ("36 kph", Kind.SPEED, 10.0),
        ("36 km / h", Kind.SPEED, 10.0),
        ("25 mph", Kind.SPEED, 25 * 1609.344 / 3600),
        ("5 m s⁻¹", Kind.SPEED, 5.0),
        ("10 kn", Kind.WIND_SPEED, 18520 / 3600),
        ("1008 hPa", Kind.PRESSURE, 100800.0),
        ("1008 mbar", Kind.PRESSURE, 100800.0),
        ("1008 mb", Kind.PRESSURE, 100800.0),
        ("100.8 kPa", Kind.PRESSURE, 100800.0),
        ("29.92 inHg", Kind.PRESSURE, 29.92 * 3386.389),
        ("29.92 in Hg", Kind.PRESSURE, 29.92 * 3386.389),
        ("90 psi", Kind.TYRE_PRESSURE, 90 * 6894.757293168),
        ("6,5 bar", Kind.TYRE_PRESSURE, 650e3),
        ("0.14 kg*m^2", Kind.INERTIA, 0.14),
        ("0.14 kg m²", Kind.INERTIA, 0.14),
        ("0.14 kg·m²", Kind.INERTIA, 0.14),
        ("0.14 kg * m**2", Kind.INERTIA, 0.14),
        ("0.002 m^2", Kind.AREA, 0.002),
        ("0.002 m²", Kind.AREA, 0.002),
        ("0.002 m2", Kind.AREA, 0.002),
        ("26 cm²", Kind.AREA, 0.0026),
        ("285 W", Kind.POWER, 285.0),
        ("285 watts", Kind.POWER, 285.0),
        ("0.285 kW", Kind.POWER, 285.0),
        ("20 kJ", Kind.ENERGY, 20e3),
        ("18 °C", Kind.TEMPERATURE, 291.15),
        ("18º C", Kind.TEMPERATURE, 291.15),
        ("18 ℃", Kind.TEMPERATURE, 291.15),
        ("18°c", Kind.TEMPERATURE, 291.15),
        ("291.15 K", Kind.TEMPERATURE, 291.15),
        ("-40 °F", Kind.TEMPERATURE, 233.15),
        ("240 deg", Kind.ANGLE, math.radians(240)),
        ("240°", Kind.ANGLE, math.radians(240)),
        ("1 rad", Kind.ANGLE, 1.0),
        ("55 %", Kind.HUMIDITY, 0.55),
        ("55%", Kind.HUMIDITY, 0.55),
        ("100 %", Kind.HUMIDITY, 1.0),
        ("1.5 %", Kind.RATIO, 0.015),
        ("-3.5 %", Kind.GRADE, -0.035),
        ("90 rpm", Kind.FREQUENCY, 1.5),
        ("144 bpm", Kind.FREQUENCY, 2.4),
        ("250 ms", Kind.DURATION, 0.25),
        ("15 s", Kind.DURATION, 15.0),
        ("1.5 min", Kind.DURATION, 90.0),
        ("2 h", Kind.DURATION, 7200.0),
        ("1.2 kg/m^3", Kind.DENSITY, 1.2),
        ("-0.01 1/K", Kind.PER_KELVIN, -0.01),
        ("-1 %/K", Kind.PER_KELVIN, -0.01),
        ("-1 % per K", Kind.PER_KELVIN, -0.01),
        ("-0.01 /degC", Kind.PER_KELVIN, -0.01),
        ("-0.01 per degF", Kind.PER_KELVIN, -0.018),
        ("75.5\N{NO-BREAK SPACE}kg", Kind.MASS, 75.5),
        ("75.5\N{NARROW NO-BREAK SPACE}kg", Kind.MASS, 75.5),
        ("  75.5 kg  ", Kind.MASS, 75.5),
    ],
)
def test_spellings(text: str, kind: Kind, expected: float) -> None:
    assert parse_quantity(text, kind) == pytest.approx(expected, rel=1e-6 if "Hg" in text else 1e-12)


@pytest.mark.parametrize(
    ("value", "kind", "expected"),
    [
        (75.5, Kind.MASS, 75.5),
        (75, Kind.MASS, 75.0),
        ("75.5", Kind.MASS, 75.5),
        (240, Kind.ANGLE, math.radians(240)),
        ("240", Kind.ANGLE, math.radians(240)),
        (0.55, Kind.HUMIDITY, 0.55),
        (0.977, Kind.RATIO, 0.977),
        (-0.01, Kind.PER_KELVIN, -0.01),
        (310, Kind.DURATION, 310.0),
    ],
)
def test_bare_numbers_are_si_but_angles_degrees(value: object, kind: Kind, expected: float) -> None:
    assert parse_quantity(value, kind) == pytest.approx(expected, rel=1e-15)


@pytest.mark.parametrize(
    "kind", [Kind.TEMPERATURE, Kind.TEMPERATURE_DIFFERENCE, Kind.PRESSURE, Kind.TYRE_PRESSURE]
)
@pytest.mark.parametrize("value", [18, 18.0, "18"])
def test_temperature_and_pressure_need_their_unit(kind: Kind, value: object) -> None:
    with pytest.raises(
        QuantityError, match=rf"air: {value!r}: a {kind} needs its unit; write it like .* \(units: K|Pa"
    ):
        parse_quantity(value, kind, "air")


def test_temperature_difference_has_no_offset() -> None:
    assert parse_quantity("5 degC", Kind.TEMPERATURE_DIFFERENCE) == pytest.approx(5.0, rel=1e-15)
    assert parse_quantity("9 F", Kind.TEMPERATURE_DIFFERENCE) == pytest.approx(5.0, rel=1e-15)
    assert parse_quantity("5 K", Kind.TEMPERATURE_DIFFERENCE) == 5.0


def test_field_that_shows_its_unit_may_leave_it_out() -> None:
    assert parse_quantity("165", Kind.MASS, bare_unit="lb") == pytest.approx(165 * 0.45359237)
    assert parse_quantity("18", Kind.TEMPERATURE, bare_unit="°C") == pytest.approx(291.15)
    assert parse_quantity("75 kg", Kind.MASS, bare_unit="lb") == 75.0
    with pytest.raises(ValueError, match="'lb' is not a unit of speed"):
        parse_quantity("165", Kind.SPEED, bare_unit="lb")


@pytest.mark.parametrize(
    "value",
    [
        "",
        "   ",
        "kg",
        "nan kg",
        "inf kg",
        "-inf",
        "1.2.3 kg",
        "1,234.5 kg",
        "1 234 kg",
        "1_000 kg",
        "--5 kg",
        "0x10 kg",
        "٧٥ kg",
        "1e kg",
        "75 kg kg",
        "75 ± 1 kg",
        "75 kg; 80 kg",
        "75\n80",
    ],
)
def test_what_is_no_quantity_is_refused(value: str) -> None:
    with pytest.raises(QuantityError, match=r"mass; write it like '75.5 kg' \(units: kg, g, lb, oz, st"):
        parse_quantity(value, Kind.MASS, "rider.mass")


@pytest.mark.parametrize("value", [None, True, False, [75], {"kg": 75}, dt.time(1, 2), 75j])
def test_what_is_not_even_a_text_or_number_is_refused(value: object) -> None:
    with pytest.raises(QuantityError, match=r"rider\.mass: .*: this is not a mass"):
        parse_quantity(value, Kind.MASS, "rider.mass")


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf, 10**400, "1e999"])
def test_numbers_are_finite(value: object) -> None:
    with pytest.raises(QuantityError, match="this number is not finite"):
        parse_quantity(value, Kind.MASS)


@pytest.mark.parametrize(
    ("text", "kind", "message"),
    [
        (
            "75.5 kgg",
            Kind.MASS,
            r"rider: '75.5 kgg': 'kgg' is not a unit of mass; .*units: kg, g, lb, oz, st, or a plain",
        ),
        (
            "18 kg",
            Kind.TEMPERATURE,
            r"'kg' is not a unit of temperature; write it like '18 degC' \(units: K, °C, °F\)",
        ),
        ("5 m", Kind.DURATION, r"'m' is not a unit of duration.*s, ms, min, h"),
        ("5 ms", Kind.SPEED, r"'ms' is not a unit of speed.*m/s, km/h, mph"),
        ("1013 Pascal-seconds", Kind.PRESSURE, r"'Pascal-seconds' is not a unit of pressure.*Pa, hPa, mbar"),
    ],
)
def test_wrong_unit_is_told_with_those_that_would_do(text: str, kind: Kind, message: str) -> None:
    with pytest.raises(QuantityError, match=message):
        parse_quantity(text, kind, "rider")


@pytest.mark.parametrize("value", [55, "55", 1.01, "101 %", "-1 %", -0.1])
def test_humidity_is_a_fraction_or_a_percentage(value: object) -> None:
    with pytest.raises(QuantityError, match="a humidity is 0 to 1, or 0 to 100 with a % sign"):
        parse_quantity(value, Kind.HUMIDITY, "air.humidity")


def test_long_nonsense_is_cut_in_the_message() -> None:
    with pytest.raises(QuantityError, match="rider") as caught:
        parse_quantity("x" * 10_000, Kind.MASS, "rider")
    assert len(str(caught.value)) < 300


@given(st.text(max_size=30))
def test_any_text_is_a_finite_number_or_refused(text: str) -> None:
    for kind in (Kind.MASS, Kind.TEMPERATURE, Kind.DURATION, Kind.ANGLE):
        with contextlib.suppress(QuantityError):
            assert math.isfinite(parse_quantity(text, kind, "key"))


@given(st.from_regex(r"[+\-]?[0-9]{1,4}[.,][0-9]{1,4}([eE][+\-]?[0-9])?", fullmatch=True))
def test_number_part_is_read_as_python_reads_it(text: str) -> None:
    assert parse_quantity(f"{text} kg", Kind.MASS) == float(text.replace(",", "."))


class TestSeveralKinds:
    """A power cost may be watts or a share; a smallest worthwhile difference an area or watts."""

    @pytest.mark.parametrize(
        ("value", "kind", "expected"),
        [
            ("4 W", Kind.POWER, 4.0),
            ("1.5 %", Kind.RATIO, 0.015),
            (4, Kind.POWER, 4.0),
            ("4", Kind.POWER, 4.0),
        ],
    )
    def test_unit_tells_which(self, value: object, kind: Kind, expected: float) -> None:
        assert parse_either(value, (Kind.POWER, Kind.RATIO)) == (kind, pytest.approx(expected))

    def test_unit_of_neither_is_told_with_those_of_both(self) -> None:
        with pytest.raises(
            QuantityError, match=r"cost: '4 kg': 'kg' is not a unit of power \(W, kW, hp\) or ratio \(%\)"
        ):
            parse_either("4 kg", (Kind.POWER, Kind.RATIO), "cost")

    def test_number_must_be_finite(self) -> None:
        with pytest.raises(QuantityError, match="this number is not finite"):
            parse_either("1e400 %", (Kind.POWER, Kind.RATIO))


class TestDurations:
    """Times within a ride."""

    @pytest.mark.parametrize(
        ("value", "expected"),
        [
            ("0:05:10", 310.0),
            ("1:05:10", 3910.0),
            ("13:02", 782.0),
            ("90:00", 5400.0),
            ("5:10.25", 310.25),
            ("5:10,25", 310.25),
            ("100:00:00", 360e3),
            ("90 s", 90.0),
            ("1.5 min", 90.0),
            (310, 310.0),
            (310.5, 310.5),
            ("310", 310.0),
            (dt.time(0, 5, 10, 500_000), 310.5),
        ],
    )
    def test_spellings(self, value: object, expected: float) -> None:
        assert parse_duration(value, "run.start") == pytest.approx(expected, rel=1e-15)

    @pytest.mark.parametrize(
        ("value", "message"),
        [
            ("1:65:10", "minutes and seconds go to 59"),
            ("5:60", "minutes and seconds go to 59"),
            ("1:05:10:3", "not a unit of duration"),
            ("-5:10", "not a unit of duration"),
            ("5:", "not a unit of duration"),
            (-3, "a time cannot be negative"),
            ("-3 s", "a time cannot be negative"),
            ("soon", "this is not a duration; write it like '0:05:10'"),
            ("9" * 400 + ":00", "this number is not finite"),
        ],
    )
    def test_refusals(self, value: object, message: str) -> None:
        with pytest.raises(QuantityError, match=f"run.start: .*{message}"):
            parse_duration(value, "run.start")


@pytest.mark.parametrize("kind", list(Kind))
def test_example_of_every_kind_reads(kind: Kind) -> None:
    assert math.isfinite(parse_quantity(kind_units(kind).example, kind))
