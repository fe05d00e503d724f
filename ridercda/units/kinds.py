"""The kinds of quantity there are, the units each may be given in, and how people spell them.

A unit is only ever looked up within a kind, so C is a temperature and never a charge.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from enum import StrEnum
from functools import cache
from types import MappingProxyType


class Kind(StrEnum):
    """What a quantity measures; the value is the noun used in messages."""

    MASS = "mass"
    LENGTH = "length"  # of parts: roll-out, body measures
    HEIGHT = "height"  # altitude, heights, radii
    DISTANCE = "distance"  # along the road
    SPEED = "speed"
    WIND_SPEED = "wind speed"
    ACCELERATION = "acceleration"
    FORCE = "force"
    POWER = "power"
    ENERGY = "energy"
    AREA = "area"
    TEMPERATURE = "temperature"
    TEMPERATURE_DIFFERENCE = "temperature difference"
    PRESSURE = "pressure"  # of the air
    TYRE_PRESSURE = "tyre pressure"
    ANGLE = "angle"
    HUMIDITY = "humidity"
    DURATION = "duration"
    INERTIA = "moment of inertia"
    DENSITY = "density"
    FREQUENCY = "frequency"  # cadence, heart rate: counts, not radians
    RATIO = "ratio"
    GRADE = "grade"
    PER_KELVIN = "change per kelvin"


@dataclass(frozen=True, slots=True)
class Unit:
    """A unit of one kind.

    Parameters
    ----------
    symbol : str
        As shown and as named in messages.
    expression : str
        As the registry of `ridercda.units.conversion` knows it.
    spellings : tuple of str
        Other ways people write it.
    """

    symbol: str
    expression: str
    spellings: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class KindUnits:
    """The units of a kind.

    Parameters
    ----------
    units : tuple of Unit
        All that are allowed; the first is SI.
    bare : str or None
        Symbol of the unit of a number without one; None where a unit must be given.
    metric, imperial : tuple of str and int
        Symbol for display and the decimals to show when nothing is known of the uncertainty.
    example : str
        How to write one, for messages.
    """

    units: tuple[Unit, ...]
    bare: str | None
    metric: tuple[str, int]
    imperial: tuple[str, int]
    example: str

    @property
    def si(self) -> Unit:
        """The unit used inside the program."""
        return self.units[0]


_METRE = Unit("m", "metre", ("metre", "metres", "meter", "meters", "mtr"))
_KILOMETRE = Unit("km", "kilometre", ("kilometre", "kilometres", "kilometer", "kilometers", "kms"))
_CENTIMETRE = Unit("cm", "centimetre", ("centimetre", "centimetres", "centimeter", "centimeters"))
_MILLIMETRE = Unit("mm", "millimetre", ("millimetre", "millimetres", "millimeter", "millimeters"))
_INCH = Unit("in", "inch", ("inch", "inches", '"', "″", "ins"))
_FOOT = Unit("ft", "foot", ("foot", "feet", "'", "′"))
_YARD = Unit("yd", "yard", ("yard", "yards", "yds"))
_MILE = Unit("mi", "mile", ("mile", "miles"))
_LENGTHS = (_METRE, _KILOMETRE, _CENTIMETRE, _MILLIMETRE, _INCH, _FOOT, _YARD, _MILE)

_SPEEDS = (
    Unit(
        "m/s", "metre/second", ("m s^-1", "m*s^-1", "ms^-1", "mps", "m/sec", "metres/second", "meters/second")
    ),
    Unit("km/h", "kilometre/hour", ("kph", "kmh", "km/hr", "kmph", "km h^-1", "km*h^-1")),
    Unit("mph", "mile/hour", ("mi/h", "mi/hr", "miles/hour")),
    Unit("kn", "knot", ("kt", "kts", "knot", "knots")),
    Unit("ft/s", "foot/second", ("fps", "ft/sec")),
    Unit("mm/s", "millimetre/second"),
)

_PASCAL = Unit("Pa", "pascal", ("pascal", "pascals", "N/m^2"))
_HECTOPASCAL = Unit("hPa", "hectopascal", ("hectopascal", "hectopascals"))
_KILOPASCAL = Unit("kPa", "kilopascal", ("kilopascal", "kilopascals"))
_BAR = Unit("bar", "bar", ("bars",))
_MILLIBAR = Unit("mbar", "millibar", ("mb", "millibar", "millibars"))
_PSI = Unit("psi", "psi", ("lb/in^2", "lbf/in^2", "psig"))

_PLAIN = Unit("1", "one", ("fraction",))
_PERCENT = Unit("%", "percent", ("percent", "per cent", "pct"))

_TABLE: Mapping[Kind, KindUnits] = MappingProxyType(
    {
        Kind.MASS: KindUnits(
            (
                Unit("kg", "kilogram", ("kgs", "kilo", "kilos", "kilogram", "kilograms", "kilogramme")),
                Unit("g", "gram", ("gr", "gram", "grams", "gramme", "grammes")),
                Unit("lb", "pound", ("lbs", "pound", "pounds", "lbm", "#")),
                Unit("oz", "ounce", ("ounce", "ounces")),
                Unit("st", "stone", ("stone", "stones")),
            ),
            "kg",
            ("kg", 1),
            ("lb", 1),
            "75.5 kg",
        ),
        Kind.LENGTH: KindUnits(_LENGTHS, "m", ("mm", 0), ("in", 2), "2.105 m"),
        Kind.HEIGHT: KindUnits(_LENGTHS, "m", ("m", 1), ("ft", 0), "10 m"),
        Kind.DISTANCE: KindUnits(_LENGTHS, "m", ("km", 2), ("mi", 2), "2400 m"),
        Kind.SPEED: KindUnits(_SPEEDS, "m/s", ("km/h", 1), ("mph", 1), "40 km/h"),
        Kind.WIND_SPEED: KindUnits(_SPEEDS, "m/s", ("m/s", 1), ("mph", 1), "2.5 m/s"),
        Kind.ACCELERATION: KindUnits(
            (
                Unit("m/s²", "metre/second**2", ("m/s^2", "m s^-2", "m*s^-2")),
                Unit("ft/s²", "foot/second**2", ("ft/s^2",)),
                Unit("g0", "standard_gravity"),
            ),
            "m/s²",
            ("m/s²", 2),
            ("ft/s²", 2),
            "0.3 m/s^2",
        ),
        Kind.FORCE: KindUnits(
            (
                Unit("N", "newton", ("newton", "newtons")),
                Unit("lbf", "pound_force"),
                Unit("kgf", "kilogram_force", ("kp",)),
            ),
            "N",
            ("N", 1),
            ("lbf", 1),
            "20 N",
        ),
        Kind.POWER: KindUnits(
            (
                Unit("W", "watt", ("watt", "watts")),
                Unit("kW", "kilowatt", ("kilowatt", "kilowatts")),
                Unit("hp", "horsepower", ("horsepower", "bhp")),
            ),
            "W",
            ("W", 0),
            ("W", 0),
            "285 W",
        ),
        Kind.ENERGY: KindUnits(
            (
                Unit("J", "joule", ("joule", "joules", "W s", "W*s")),
                Unit("kJ", "kilojoule", ("kilojoule", "kilojoules")),
                Unit("Wh", "watt*hour", ("W h", "W*h")),
                Unit("kWh", "kilowatt*hour", ("kW h", "kW*h")),
                Unit("kcal", "kilocalorie", ("kilocalorie", "kilocalories")),
            ),
            "J",
            ("kJ", 1),
            ("kJ", 1),
            "20 kJ",
        ),
        Kind.AREA: KindUnits(
            (
                Unit("m²", "metre**2", ("m^2", "m2", "sq m", "sqm")),
                Unit("cm²", "centimetre**2", ("cm^2", "cm2", "sq cm")),
                Unit("ft²", "foot**2", ("ft^2", "ft2", "sq ft", "sqft")),
                Unit("in²", "inch**2", ("in^2", "in2", "sq in")),
            ),
            "m²",
            ("m²", 3),
            ("m²", 3),
            "0.260 m^2",
        ),
        Kind.TEMPERATURE: KindUnits(
            (
                Unit("K", "kelvin", ("kelvin", "kelvins", "degK", "°K")),
                Unit("°C", "degree_celsius", ("C", "degC", "deg C", "celsius", "centigrade", "degrees C")),
                Unit("°F", "degree_fahrenheit", ("F", "degF", "deg F", "fahrenheit", "degrees F")),
            ),
            None,
            ("°C", 1),
            ("°F", 1),
            "18 degC",
        ),
        Kind.TEMPERATURE_DIFFERENCE: KindUnits(
            (
                Unit("K", "kelvin", ("kelvin", "kelvins", "degK", "°K")),
                Unit("°C", "delta_degree_celsius", ("C", "degC", "deg C", "celsius", "centigrade")),
                Unit("°F", "delta_degree_fahrenheit", ("F", "degF", "deg F", "fahrenheit")),
            ),
            None,
            ("°C", 1),
            ("°F", 1),
            "1.5 K",
        ),
        Kind.PRESSURE: KindUnits(
            (
                _PASCAL,
                _HECTOPASCAL,
                _MILLIBAR,
                _KILOPASCAL,
                _BAR,
                Unit("inHg", "inch_mercury", ("in Hg", "inches Hg", '"Hg', "in.Hg", "inches of mercury")),
                Unit("mmHg", "millimetre_mercury", ("mm Hg",)),
                Unit("atm", "atmosphere", ("atmosphere", "atmospheres")),
                _PSI,
            ),
            None,
            ("hPa", 1),
            ("inHg", 2),
            "1008 hPa",
        ),
        Kind.TYRE_PRESSURE: KindUnits(
            (_PASCAL, _HECTOPASCAL, _KILOPASCAL, _BAR, _MILLIBAR, _PSI),
            None,
            ("bar", 2),
            ("psi", 0),
            "6.5 bar",
        ),
        Kind.ANGLE: KindUnits(
            (
                Unit("rad", "radian", ("radian", "radians")),
                Unit("°", "degree", ("deg", "degs", "degree", "degrees")),
            ),
            "°",
            ("°", 0),
            ("°", 0),
            "240 deg",
        ),
        Kind.HUMIDITY: KindUnits((_PLAIN, _PERCENT), "1", ("%", 0), ("%", 0), "55 %"),
        Kind.DURATION: KindUnits(
            (
                Unit("s", "second", ("sec", "secs", "second", "seconds")),
                Unit("ms", "millisecond", ("msec", "millisecond", "milliseconds")),
                Unit("min", "minute", ("mins", "minute", "minutes")),
                Unit("h", "hour", ("hr", "hrs", "hour", "hours")),
            ),
            "s",
            ("s", 1),
            ("s", 1),
            "0:05:10",
        ),
        Kind.INERTIA: KindUnits(
            (
                Unit("kg m²", "kilogram*metre**2", ("kg*m^2", "kg m^2", "kg m2", "kg*m2", "kgm^2", "kgm2")),
                Unit("g m²", "gram*metre**2", ("g*m^2", "g m^2", "g m2", "gm^2")),
                Unit("lb ft²", "pound*foot**2", ("lb*ft^2", "lb ft^2", "lb ft2")),
            ),
            "kg m²",
            ("kg m²", 3),
            ("kg m²", 3),
            "0.14 kg*m^2",
        ),
        Kind.DENSITY: KindUnits(
            (
                Unit("kg/m³", "kilogram/metre**3", ("kg/m^3", "kg/m3", "kg m^-3", "kg*m^-3")),
                Unit("g/L", "gram/litre", ("g/l",)),
                Unit("lb/ft³", "pound/foot**3", ("lb/ft^3", "lb/ft3", "lbs/ft^3")),
            ),
            "kg/m³",
            ("kg/m³", 3),
            ("lb/ft³", 4),
            "1.20 kg/m^3",
        ),
        Kind.FREQUENCY: KindUnits(
            (
                Unit("Hz", "hertz", ("1/s", "s^-1", "/s")),
                Unit("rpm", "per_minute", ("r/min", "rev/min", "1/min", "/min", "min^-1")),
                Unit("bpm", "per_minute", ("beats/min",)),
            ),
            "Hz",
            ("rpm", 0),
            ("rpm", 0),
            "90 rpm",
        ),
        Kind.RATIO: KindUnits((_PLAIN, _PERCENT), "1", ("%", 1), ("%", 1), "0.977"),
        Kind.GRADE: KindUnits(
            (_PLAIN, _PERCENT, Unit("‰", "permille", ("permille",))), "1", ("%", 1), ("%", 1), "-3.5 %"
        ),
        Kind.PER_KELVIN: KindUnits(
            (
                Unit(
                    "1/K",
                    "1/kelvin",
                    ("/K", "per K", "K^-1", "1/C", "1/degC", "1/°C", "per degC", "/degC", "/°C", "/C"),
                ),
                Unit("%/K", "percent/kelvin", ("% per K", "%/C", "%/degC", "%/°C", "% per degC")),
                Unit(
                    "1/°F", "1/delta_degree_fahrenheit", ("1/F", "1/degF", "/F", "per degF", "/degF", "/°F")
                ),
                Unit("%/°F", "percent/delta_degree_fahrenheit", ("%/F", "%/degF", "% per degF")),
            ),
            "1/K",
            ("%/K", 2),
            ("%/°F", 2),
            "-0.01 1/K",
        ),
    }
)

# Signs that look or mean the same are one, so that the table need not hold every combination.
_SAME = str.maketrans(
    {
        "²": "^2",
        "³": "^3",
        "·": "*",
        "⋅": "*",
        "×": "*",
        "⁄": "/",
        "º": "°",
        "˚": "°",
        "µ": "μ",
        "−": "-",
        "’": "'",
        "”": '"',
        "“": '"',
        "\N{DEGREE CELSIUS}": "°C",
        "\N{DEGREE FAHRENHEIT}": "°F",
        "\N{SUPERSCRIPT MINUS}": "^-",
        "\N{SUPERSCRIPT ONE}": "1",
    }
)


def kind_units(kind: Kind) -> KindUnits:
    """Return the units of a kind."""
    return _TABLE[kind]


def find_unit(text: str, kind: Kind) -> Unit | None:
    """Return the unit of a kind that a text spells, or None.

    Parameters
    ----------
    text : str
        A unit as people write it. The case counts only where two units of the kind differ by nothing else.
    kind : Kind
        What is measured.
    """
    exact, folded = _spellings(kind)
    plain = _plain(text)
    return exact.get(plain) or folded.get(plain.casefold())


def symbols(kind: Kind) -> str:
    """Return the units of a kind as a list for messages."""
    shown = [unit.symbol for unit in _TABLE[kind].units if unit.symbol != "1"]
    return ", ".join(shown)


def _plain(text: str) -> str:
    joined = " ".join(text.translate(_SAME).replace("**", "^").replace("^-^", "^-").split())
    joined = joined.replace("° ", "°")
    for sign in "*/^":
        joined = joined.replace(f" {sign}", sign).replace(f"{sign} ", sign)
    return joined


@cache
def _spellings(kind: Kind) -> tuple[Mapping[str, Unit], Mapping[str, Unit]]:
    exact: dict[str, Unit] = {}
    folded: dict[str, Unit] = {}
    for unit in _TABLE[kind].units:
        for spelling in (unit.symbol, *unit.spellings):
            plain = _plain(spelling)
            if exact.get(plain, unit) is not unit:
                raise ValueError(f"two units of {kind} are spelt {plain!r}")
            exact[plain] = unit
            if folded.setdefault(plain.casefold(), unit) is not unit:
                raise ValueError(f"two units of {kind} differ by case alone: {plain!r}")
    return exact, folded
