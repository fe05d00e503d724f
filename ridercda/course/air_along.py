"""The air of a race along its course: density by altitude, and the wind at the rider."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from ridercda.course.route import Course
from ridercda.errors import CourseError
from ridercda.physics.air import (
    air_density,
    pressure_at_altitude,
    pressure_from_sea_level,
    temperature_at_altitude,
)
from ridercda.physics.wind import RIDER_HEIGHT, log_profile
from ridercda.session.defaults import default
from ridercda.session.document import Air

FloatArray = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class RaceAir:
    """The air of a race. Arrays are read-only.

    Parameters
    ----------
    density : ndarray, shape (n,)
        On each stretch of the course. [kg m⁻³]
    temperature : float
        At the start. [K]
    wind_speed, wind_from : float
        As given, at the wind's own height [m s⁻¹], clockwise from true north [rad].
    height_factor : float
        Wind at the rider over wind at its own height. [1]
    """

    density: FloatArray
    temperature: float
    wind_speed: float = 0.0
    wind_from: float = 0.0
    height_factor: float = 1.0

    def __post_init__(self) -> None:
        """Make the array read-only."""
        self.density.setflags(write=False)

    @property
    def wind_north(self) -> float:
        """Component of where the wind comes from, at the rider. [m/s]"""
        return self.wind_speed * self.height_factor * float(np.cos(self.wind_from))

    @property
    def wind_east(self) -> float:
        """Component of where the wind comes from, at the rider. [m/s]"""
        return self.wind_speed * self.height_factor * float(np.sin(self.wind_from))


def uniform_air(course: Course, density: float, temperature: float = 293.15) -> RaceAir:
    """Return still air of one density all along a course.

    Parameters
    ----------
    course : Course
        The route.
    density : float
        [kg m⁻³]
    temperature : float
        [K]
    """
    return RaceAir(np.full(course.lengths.size, density), temperature)


def race_air(air: Air, course: Course) -> RaceAir:
    """Return the air of a race.

    Parameters
    ----------
    air : Air
        The course's own laid over the day's; what is not given takes its default.
    course : Course
        The route. A pressure without an altitude is that at the start.

    Raises
    ------
    CourseError
        If the air cannot be: a pressure or temperature out of range somewhere along the course.

    Notes
    -----
    Temperature and pressure follow the altitude from where they were measured with the standard lapse rate,
    density follows from both. An indoor track has no wind.
    """
    temperature = _given(air.temperature, "air.temperature")
    humidity = _given(air.humidity, "air.humidity")
    start = float(course.altitude[0])
    altitude = 0.5 * (course.altitude[1:] + course.altitude[:-1])
    measured_at = start if air.altitude is None else air.altitude
    try:
        if air.pressure is not None:
            pressure = air.pressure
        else:
            sea_level = _given(air.sea_level_pressure, "air.sea_level_pressure")
            pressure = float(pressure_from_sea_level(sea_level, measured_at, temperature))
        density = air_density(
            temperature_at_altitude(temperature, measured_at, altitude),
            pressure_at_altitude(pressure, measured_at, altitude, temperature),
            humidity,
        )
    except ValueError as error:
        raise CourseError(f"course {course.id!r}: the air along it cannot be: {error}") from error
    if course.track is not None:
        return RaceAir(density, temperature)
    height = _given(air.wind_height, "air.wind_height")
    roughness = _given(air.roughness, "air.roughness")
    # Wind measured at or below the rider is taken as it is.
    factor = float(log_profile(RIDER_HEIGHT, height, roughness)) if height > RIDER_HEIGHT else 1.0
    return RaceAir(density, temperature, air.wind_speed or 0.0, air.wind_from or 0.0, factor)


def _given(value: float | None, key: str) -> float:
    """Return a value, or its default where it is not given."""
    return default(key) if value is None else value
