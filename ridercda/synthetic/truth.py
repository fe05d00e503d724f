"""What was true on an invented day: all that an oracle could wish to know."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from ridercda.synthetic.line import Line

FloatArray = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class RunTruth:
    """One run as it was.

    Times are on the ride's clock. `cda` is the run's own at zero yaw and the reference speed and effort, its
    drift and restlessness averaged in; `wind_east`, `wind_north` are the mean velocity of the air (towards)
    at the rider, gusts and shelter averaged in; `gust_sd` is the standard deviation about it, both components
    pooled.
    """

    id: str
    setup: str
    start: float
    end: float
    lap_times: tuple[float, ...]
    cda: float
    crr: float  # mean, temperature and warm-up included
    density: float
    mass: float
    wind_east: float
    wind_north: float
    gust_sd: float


@dataclass(frozen=True, slots=True, eq=False)
class RecordTruth:
    """What was true at each record before faults took records away; shape (n,) each, on the ride's clock."""

    time: FloatArray
    place: FloatArray  # along the lap from the start line, 0 to its length (a road: from the start) [m]
    speed: FloatArray  # of the wheel, mean [m/s]
    power: FloatArray  # at the wheel, mean [W]
    braked: FloatArray  # mean power taken by the brakes [W]
    wind_east: FloatArray  # mean at the rider [m/s]
    wind_north: FloatArray


@dataclass(frozen=True, slots=True, eq=False)
class Truth:
    """The truth of a day."""

    cda: Mapping[str, float]  # per setup [m^2]
    crr: Mapping[str, float]  # per tyre set at 20 degC, warmed up
    runs: tuple[RunTruth, ...]
    records: RecordTruth
    gust_sd: float  # of each component, before shelter [m/s]
    gust_time: float  # [s]
    line: Line
    line_start: float  # of the start line along `line` [m]
    lap_length: float  # of the line; a rider who wanders outside it on a track rides further [m]
    power_scale: float  # relative error of the meter
    circumference_factor: float  # recorded over true distance
    efficiency: float
    energy_error: float  # largest mismatch of the power balance over a step [J]

    def height(self, place: npt.ArrayLike) -> FloatArray:
        """Return the height of the road at places along the lap from the start line. [m]"""
        return self.line.at(self.line.height, np.asarray(place, float) + self.line_start)

    def heading(self, place: npt.ArrayLike) -> tuple[FloatArray, FloatArray]:
        """Return the north and east parts of the unit vector along the road at places along the lap. [1]"""
        at = np.asarray(place, float) + self.line_start
        return self.line.at(self.line.cos_heading, at), self.line.at(self.line.sin_heading, at)

    def curvature(self, place: npt.ArrayLike) -> FloatArray:
        """Return the curvature of the wheel's path at places along the lap. [1/m]"""
        return self.line.at(self.line.curvature, np.asarray(place, float) + self.line_start)
