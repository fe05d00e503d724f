"""The range of each figure of a session: wide enough for any real day, narrow enough to catch a slip."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType


@dataclass(frozen=True, slots=True)
class Bound:
    """A closed range in SI, with the unit it is told in: shown = value * scale + offset."""

    low: float
    high: float
    unit: str = ""
    scale: float = 1.0
    offset: float = 0.0

    def trouble(self, value: float) -> str:
        """Return what is wrong with a value, empty where nothing is."""
        if not math.isfinite(value):
            return f"{value} is not a finite number"
        if self.low <= value <= self.high:
            return ""
        shown, low, high = (f"{x * self.scale + self.offset:.6g}" for x in (value, self.low, self.high))
        unit = f" {self.unit}" if self.unit else ""
        return f"{shown}{unit} cannot be: it must lie between {low} and {high}{unit}"


_TINY = 1e-9
_MASS = Bound(20.0, 250.0, "kg")
_POWER = Bound(1.0, 2500.0, "W")
_CIRCUMFERENCE = Bound(0.8, 3.0, "m")
_TEMPERATURE = Bound(253.15, 323.15, "degC", offset=-273.15)
_PRESSURE = Bound(60e3, 110e3, "hPa", scale=0.01)
_HUMIDITY = Bound(0.0, 1.0)
_WIND = Bound(0.0, 40.0, "m/s")
_ANGLE = Bound(-4 * math.pi, 4 * math.pi, "deg", scale=180 / math.pi)
_SHARE = Bound(0.0, 1.0)
_CRR_FACTOR = Bound(0.1, 10.0)
_SHELTER = Bound(0.0, 2.0)
_SPEED = Bound(0.5, 60.0, "m/s")
_SD_SHARE = Bound(0.0, 0.3)
_CLOCK = Bound(0.0, 7 * 86400.0, "s")

BOUNDS: Mapping[str, Mapping[str, Bound]] = MappingProxyType(
    {
        "Session": {"reference_speed": Bound(1.0, 30.0, "m/s"), "utc_offset": Bound(-64800.0, 64800.0, "s")},
        "Worthwhile": {"cda": Bound(_TINY, 1.0, "m^2"), "power": Bound(_TINY, 1000.0, "W")},
        "Rider": {
            "mass": _MASS,
            "critical_power": Bound(20.0, 800.0, "W"),
            "w_prime": Bound(100.0, 100e3, "J"),
        },
        "Bike": {
            "mass": Bound(3.0, 60.0, "kg"),
            "wheel_inertia": Bound(0.0, 1.0, "kg*m^2"),
            "wheel_circumference": _CIRCUMFERENCE,
            "drivetrain_efficiency": Bound(0.7, 1.0),
            "drivetrain_efficiency_sd": _SD_SHARE,
        },
        "PowerMeter": {"scale_sd": _SD_SHARE},
        "AirReading": {
            "time": Bound(0.0, 86400.0, "s"),
            "temperature": _TEMPERATURE,
            "pressure": _PRESSURE,
            "humidity": _HUMIDITY,
            "wind_speed": _WIND,
            "wind_from": _ANGLE,
        },
        "Air": {
            "temperature": _TEMPERATURE,
            "pressure": _PRESSURE,
            "sea_level_pressure": Bound(85e3, 110e3, "hPa", scale=0.01),
            "altitude": Bound(-500.0, 6000.0, "m"),
            "humidity": _HUMIDITY,
            "wind_speed": _WIND,
            "wind_from": _ANGLE,
            "wind_height": Bound(0.5, 200.0, "m"),
            "wind_sd": Bound(0.0, 20.0, "m/s"),
            "roughness": Bound(1e-5, 5.0, "m"),
        },
        "Venue": {
            "lap_length": Bound(50.0, 200e3, "m"),
            "bend_radius": Bound(5.0, 500.0, "m"),
            "transition_length": Bound(0.0, 500.0, "m"),
            "mass_height": Bound(0.3, 2.0, "m"),
        },
        "RepairChoice": {"start": _CLOCK, "end": _CLOCK, "value": Bound(-1e9, 1e9)},
        "RideEntry": {"wheel_circumference": _CIRCUMFERENCE},
        "Setup": {
            "mass_change": Bound(-50.0, 50.0, "kg"),
            "power_cost": Bound(-500.0, 1000.0, "W"),
            "power_cost_share": Bound(-0.5, 0.9),
            "power_cost_sd": Bound(0.0, 500.0),
            "held": _SHARE,
            "cda": Bound(0.03, 2.0, "m^2"),
            "cda_sd": Bound(0.0, 0.5, "m^2"),
            "cda_difference": Bound(-1.0, 1.0, "m^2"),
            "cda_difference_sd": Bound(0.0, 0.5, "m^2"),
            "yaw": Bound(0.0, math.pi / 2, "deg", scale=180 / math.pi),
            "cxa": Bound(-1.0, 2.0, "m^2"),
        },
        "Tyres": {
            "crr": Bound(0.0003, 0.1),
            "crr_sd": Bound(0.0, 0.05),
            "temperature_coefficient": Bound(-0.1, 0.1, "1/K"),
            "temperature_coefficient_sd": Bound(0.0, 0.1, "1/K"),
            "pressure": Bound(20e3, 3e6, "bar", scale=1e-5),
            "wheel_circumference": _CIRCUMFERENCE,
        },
        "Exclusion": {"start": _CLOCK, "end": _CLOCK},
        "Run": {"start": _CLOCK, "end": _CLOCK, "laps": _CLOCK},
        "CourseSegment": {
            "length": Bound(_TINY, 1e6, "m"),
            "grade": Bound(-0.6, 0.6),
            "heading": _ANGLE,
            "crr_factor": _CRR_FACTOR,
            "shelter": _SHELTER,
            "speed_limit": _SPEED,
        },
        "PowerPlan": {
            "critical_power": Bound(20.0, 800.0, "W"),
            "w_prime": Bound(100.0, 100e3, "J"),
            "max_power": Bound(1.0, 4000.0, "W"),
            "min_power": Bound(0.0, 2500.0, "W"),
        },
        "CourseEntry": {
            "track_laps": Bound(_TINY, 1e4),
            "power": _POWER,
            "power_sd": Bound(0.0, 500.0, "W"),
            "wind_speed_sd": Bound(0.0, 20.0, "m/s"),
            "shelter": _SHELTER,
            "crr_factor": _CRR_FACTOR,
            "corner_grip": Bound(0.05, 1.5),
            "laps": Bound(1, 10000),
            "max_speed": _SPEED,
            "weight": Bound(0.0, 1e6),
        },
    }
)
"""For each class of the document, the range of each of its figures."""
