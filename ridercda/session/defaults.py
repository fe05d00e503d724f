"""Every default that moves a number; ``python -m ridercda.session.defaults`` prints the table as Markdown.

A key is the dotted key of session.toml where there is one. Values are in the SI unit named beside them.
"""

from __future__ import annotations

import sys
from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

COMMON_PRACTICE = "common practice"


@dataclass(frozen=True, slots=True)
class Default:
    """What is assumed where nothing is given.

    Parameters
    ----------
    key : str
        Dotted key, as in session.toml.
    value : float or str
        In `unit`; text where the key takes one of a few words.
    unit : str
        SI unit; "1" for a plain number, "" for a word.
    text : str
        What it is, in one sentence.
    source : str
        Where it comes from; "common practice" for a rule of thumb, "definition" where it is a convention.
    """

    key: str
    value: float | str
    unit: str
    text: str
    source: str


_MARTIN = (
    "J. C. Martin et al., Validation of a mathematical model for road cycling power, "
    "J. Appl. Biomech. 14(3), 276-291, 1998, doi:10.1123/jab.14.3.276 (from memory)"
)
_ISO_2533 = "ISO 2533:1975, Standard atmosphere"
_NEUTRAL = "definition: changes nothing"

DEFAULTS: tuple[Default, ...] = (
    Default("confidence", 0.95, "1", "Share of intervals that should hold the truth.", "definition"),
    Default("bike.wheel_inertia", 0.14, "kg m²", "Moment of inertia of both wheels together.", _MARTIN),
    Default(
        "bike.wheel_circumference",
        2.105,
        "m",
        "Roll-out of a 25 mm tyre on a 622 mm rim under a rider.",
        COMMON_PRACTICE,
    ),
    Default(
        "bike.drivetrain_efficiency",
        0.977,
        "1",
        "Share of the power measured before the chain that reaches the wheel.",
        _MARTIN,
    ),
    Default(
        "bike.drivetrain_efficiency_sd",
        0.005,
        "1",
        "Standard deviation of that efficiency between clean, well-kept drivetrains.",
        COMMON_PRACTICE,
    ),
    Default("power_meter.location", "crank", "", "Where power is measured.", COMMON_PRACTICE),
    Default("power_meter.sides", "both", "", "Which legs are measured.", COMMON_PRACTICE),
    Default(
        "power_meter.scale_sd",
        0.015,
        "1",
        "Relative standard deviation of the meter's scale; the same error in every run of the day.",
        f"{COMMON_PRACTICE}: makers state 1 to 2 %",
    ),
    Default(
        "air.temperature",
        288.15,
        "K",
        "Air temperature where neither the session nor a ride gives one.",
        _ISO_2533,
    ),
    Default(
        "air.sea_level_pressure",
        101325.0,
        "Pa",
        "Pressure reduced to sea level where no pressure is given.",
        _ISO_2533,
    ),
    Default("air.altitude", 0.0, "m", "Altitude of the venue where no ride recorded one.", "definition"),
    Default(
        "air.humidity",
        0.5,
        "1",
        "Relative humidity; from 0 to 1 it moves density by less than 1 % up to 20 °C.",
        COMMON_PRACTICE,
    ),
    Default(
        "air.wind_height",
        10.0,
        "m",
        "Height at which wind_speed was measured.",
        "World Meteorological Organization, Guide to Instruments and Methods of Observation "
        "(WMO-No. 8): surface wind is measured at 10 m (from memory)",
    ),
    Default(
        "air.roughness",
        0.03,
        "m",
        "Roughness length of the ground upwind: open flat land with short grass.",
        "World Meteorological Organization, Guide to Instruments and Methods of Observation "
        "(WMO-No. 8), terrain classes of Davenport (from memory)",
    ),
    Default("air.rider_height", 1.2, "m", "Height at which the rider meets the wind.", COMMON_PRACTICE),
    Default(
        "venue.mass_height",
        1.1,
        "m",
        "Height of the mass of rider and bike above the ground, which leans into a bend.",
        COMMON_PRACTICE,
    ),
    Default(
        "run.settle_time",
        15.0,
        "s",
        "Left out at the start of a proposed run, while rider and speed settle.",
        COMMON_PRACTICE,
    ),
    Default("setup.mass_change", 0.0, "kg", "Mass of a setup against the bike as weighed.", _NEUTRAL),
    Default("setup.power_cost", 0.0, "W", "Power the rider loses in a setup.", _NEUTRAL),
    Default(
        "setup.power_cost_sd",
        0.0,
        "W or 1",
        "Standard deviation of a power cost, in the unit of the cost; without one the cost is exact.",
        _NEUTRAL,
    ),
    Default("setup.held", 1.0, "1", "Share of the race time for which a setup is held.", _NEUTRAL),
    Default(
        "setup.cda_offset_sd",
        0.03,
        "1",
        "Relative standard deviation between the CdA levels of two places, e.g. a tunnel and a road; "
        "counted for an absolute CdA known from elsewhere.",
        f"{COMMON_PRACTICE}: tunnel and field levels differ by percents",
    ),
    Default(
        "tyres.reference_temperature",
        293.15,
        "K",
        "Temperature at which Crr is quoted.",
        "definition",
    ),
    Default(
        "tyres.temperature_coefficient",
        -0.01,
        "1/K",
        "Relative change of Crr per kelvin of air temperature.",
        COMMON_PRACTICE,
    ),
    Default(
        "tyres.temperature_coefficient_sd",
        0.005,
        "1/K",
        "Standard deviation of that coefficient between tyres.",
        COMMON_PRACTICE,
    ),
    Default(
        "course.corner_grip",
        0.4,
        "1",
        "Lateral acceleration a rider uses in a corner, over g: a lean of 22 degrees on a dry road.",
        COMMON_PRACTICE,
    ),
    Default(
        "course.max_speed",
        25.0,
        "m/s",
        "Speed at which a rider brakes on a descent.",
        COMMON_PRACTICE,
    ),
    Default("course.shelter", 1.0, "1", "Share of the wind that reaches the rider.", _NEUTRAL),
    Default("course.crr_factor", 1.0, "1", "Crr on the course's surface over Crr at the venue.", _NEUTRAL),
    Default("course.power_sd", 0.0, "W", "Standard deviation of the race power.", _NEUTRAL),
    Default("course.wind_speed_sd", 0.0, "m/s", "Standard deviation of the race-day wind.", _NEUTRAL),
    Default("course.laps", 1.0, "1", "Times round the course.", _NEUTRAL),
    Default("course.weight", 1.0, "1", "Weight of a course in a season.", _NEUTRAL),
    Default("course.plan.kind", "constant", "", "How power is laid out over the course.", _NEUTRAL),
)
"""The table itself, in the order of session.toml."""

_BY_KEY: Mapping[str, Default] = MappingProxyType({row.key: row for row in DEFAULTS})


def default_row(key: str) -> Default:
    """Return the row of the table with this key; KeyError if there is none."""
    return _BY_KEY[key]


def default(key: str) -> float:
    """Return a numeric default in its SI unit; KeyError if the table has no such number."""
    value = _BY_KEY[key].value
    if isinstance(value, str):
        raise KeyError(f"the default of {key} is a word, not a number: use default_word")
    return value


def default_word(key: str) -> str:
    """Return a default that is one of a few words; KeyError if the table has no such word."""
    value = _BY_KEY[key].value
    if not isinstance(value, str):
        raise KeyError(f"the default of {key} is a number, not a word: use default")
    return value


def markdown_table() -> str:
    """Return the table as Markdown, for the documentation."""
    rows = ["| key | default | unit | what it is | source |", "| --- | --- | --- | --- | --- |"]
    for row in DEFAULTS:
        value = row.value if isinstance(row.value, str) else f"{row.value:.10g}"
        rows.append(f"| `{row.key}` | {value} | {row.unit} | {row.text} | {row.source} |")
    return "\n".join(rows) + "\n"


if __name__ == "__main__":
    sys.stdout.write(markdown_table())
