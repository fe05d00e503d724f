"""A prepared day: what the estimator sees of a session, run by run, on SI arrays.

Everything that depends on files, units and clocks is behind it; everything that is estimated is ahead of it.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from ridercda.session.document import RunKind, VenueKind

FloatArray = npt.NDArray[np.float64]
IntArray = npt.NDArray[np.int64]
BoolArray = npt.NDArray[np.bool_]


@dataclass(frozen=True, slots=True, eq=False)
class RunRecords:
    """The record intervals of one run; entry k holds the interval (time[k] - interval[k], time[k]].

    All arrays have shape (n,). Power and speed are means over the interval; what varies along the venue is taken at
    its middle. NaN marks a value the ride does not have. A record that is not `usable` is not explained by the
    model (a stop, braking, a U-turn, an exclusion); the estimator passes over it and starts afresh behind it.
    """

    time: FloatArray  # end of the interval, on the ride's clock [s]
    interval: FloatArray  # [s]
    power: FloatArray  # at the meter [W]
    speed: FloatArray  # of the wheel on the ground, as recorded times `DayRun.speed_factor` [m/s]
    start_speed: FloatArray  # of the wheel at the start of the interval, from the means about it [m/s]
    end_speed: FloatArray  # at its end [m/s]
    air_speed: FloatArray  # along the bike, at the rider's height; NaN without a sensor [m/s]
    position: FloatArray  # along the venue, at the middle of the interval [m]
    direction: FloatArray  # +1 with growing position, -1 against it
    heading: FloatArray  # of travel, clockwise from north; NaN where unknown [rad]
    density: FloatArray  # of the air [kg/m^3]
    load: FloatArray  # tyre load over weight, 1/cos(lean) [1]
    path_ratio: FloatArray  # speed of the centre of mass over that of the wheel [1]
    lean_power: FloatArray  # released by leaning into a bend (height and path), positive drives [W]
    tyre_temperature: FloatArray  # above 20 degC [K]
    warm_up: FloatArray  # share of the tyres' warm-up still to come, 1 falling to 0 [1]
    altitude: FloatArray  # as recorded, at the end of the interval; NaN without [m]
    lap: IntArray  # lap within the run, from 0; -1 outside complete laps
    usable: BoolArray

    def __post_init__(self) -> None:
        """Make the arrays read-only."""
        for name in self.__slots__:
            getattr(self, name).setflags(write=False)

    @property
    def size(self) -> int:
        """Number of records."""
        return int(self.time.size)


@dataclass(frozen=True, slots=True, eq=False)
class DayRun:
    """One counted run: which setup and tyres, when, in what expected wind, and its records."""

    id: str
    ride: str
    setup: int  # index into Day.setups
    tyres: int  # index into Day.tyres
    kind: RunKind
    start: float  # on the ride's clock [s]
    end: float  # [s]
    hour: float  # middle of the run on the day's clock, from the first run's middle [h]
    laps: int
    mass: float  # rider, bike and the setup's change [kg]
    efficiency: float  # between the meter and the wheel, for positive power [1]
    rotating_mass: float  # wheel inertia over radius squared [kg]
    speed_source: int  # index into Day.speed_factor_sd: runs that share one circumference error
    wind_from_report: (
        tuple[float, float] | None
    )  # components the wind comes from, east and north, 1.2 m up [m/s]
    wind_report_sd: float  # of each component, 1.2 m up [m/s]
    records: RunRecords


@dataclass(frozen=True, slots=True)
class DayTyres:
    """A tyre set and what is known of it beforehand."""

    id: str
    crr: float | None  # [1]
    crr_sd: float | None  # 0: exact [1]
    temperature_coefficient: float  # relative [1/K]
    temperature_coefficient_sd: float  # [1/K]


@dataclass(frozen=True, slots=True)
class LeftOut:
    """A run that is not counted, with the reason."""

    id: str
    ride: str
    setup: str
    start: float  # [s]
    end: float  # [s]
    reason: str


@dataclass(frozen=True, slots=True, eq=False)
class Day:
    """Everything an estimate depends on, and nothing else."""

    venue: VenueKind
    venue_length: float  # of the stretch that repeats: the lap, or the road one way [m]
    closed: bool  # whether the end of that stretch is its start, so that its rises sum to zero
    flat: bool  # an indoor track: no profile, no wind
    setups: tuple[str, ...]
    baseline: int | None
    tyres: tuple[DayTyres, ...]
    runs: tuple[DayRun, ...]
    left_out: tuple[LeftOut, ...]
    gravity: float  # [m/s^2]
    power_scale_sd: float  # meter and drivetrain together, relative [1]
    speed_factor_sd: tuple[float, ...]  # relative, per speed source [1]
    reference_speed: float  # [m/s]
    smallest_worthwhile_cda: float | None  # [m^2]
    smallest_worthwhile_power: float | None  # at the reference speed [W]
    confidence: float
    altitude_sd: float | None  # of the recorded altitude where it is trusted to give the profile [m]
    notes: tuple[tuple[str, str], ...] = ()  # warning code and message, from preparing
