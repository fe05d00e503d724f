"""The test day as a frozen document: SI floats, angles in radians, no arrays.

None means "not given": the default that then applies stands in `ridercda.session.defaults`. An edit is a pure
function from Session to Session (`ridercda.session.edits`), so undo is right by construction.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from enum import StrEnum
from types import MappingProxyType
from typing import TypeVar


class VenueKind(StrEnum):
    """How the test place repeats."""

    LOOP = "loop"
    OUT_AND_BACK = "out-and-back"
    TRACK = "track"
    ROAD = "road"


class MeterLocation(StrEnum):
    """Where the power meter sits; a hub sees no drivetrain loss."""

    CRANK = "crank"
    PEDALS = "pedals"
    HUB = "hub"


class MeterSides(StrEnum):
    """Which legs the power meter measures."""

    BOTH = "both"
    LEFT = "left"
    RIGHT = "right"


class RunKind(StrEnum):
    """How a run was ridden."""

    PEDALLED = "pedalled"
    COAST_DOWN = "coast-down"


class PlanKind(StrEnum):
    """How power is laid out over a course."""

    CONSTANT = "constant"
    BY_GRADE = "by-grade"
    BEST = "best"
    FILE = "file"


@dataclass(frozen=True, slots=True)
class Rider:
    """The rider all-up: kit, shoes, helmet."""

    id: str = ""
    mass: float | None = None  # [kg]
    critical_power: float | None = None  # [W]
    w_prime: float | None = None  # [J]


@dataclass(frozen=True, slots=True)
class Bike:
    """The bike with bottles."""

    mass: float | None = None  # [kg]
    wheel_inertia: float | None = None  # both wheels [kg m^2]
    wheel_circumference: float | None = None  # roll-out [m]
    drivetrain_efficiency: float | None = None  # [1]
    drivetrain_efficiency_sd: float | None = None  # [1]


@dataclass(frozen=True, slots=True)
class PowerMeter:
    """Where and how power is measured."""

    location: MeterLocation | None = None
    sides: MeterSides | None = None
    scale_sd: float | None = None  # relative, the same error in every run of the day [1]


@dataclass(frozen=True, slots=True)
class AirReading:
    """A reading through the day, interpolated to each run."""

    time: float  # of day [s]
    temperature: float | None = None  # [K]
    pressure: float | None = None  # [Pa]
    humidity: float | None = None  # [1]
    wind_speed: float | None = None  # [m/s]
    wind_from: float | None = None  # clockwise from true north [rad]


@dataclass(frozen=True, slots=True)
class Air:
    """Air for the day, or an overlay of it: what is None falls through to the layer below."""

    temperature: float | None = None  # [K]
    pressure: float | None = None  # at the venue [Pa]
    sea_level_pressure: float | None = None  # reduced; needs altitude [Pa]
    altitude: float | None = None  # [m]
    humidity: float | None = None  # [1]
    wind_speed: float | None = None  # at wind_height [m/s]
    wind_from: float | None = None  # clockwise from true north [rad]
    wind_height: float | None = None  # [m]
    wind_sd: float | None = None  # of each component at wind_height [m/s]
    roughness: float | None = None  # [m]
    readings: tuple[AirReading, ...] = ()

    def over(self, below: Air) -> Air:
        """Return this air laid over `below`, key by key; a pressure of either kind hides both kinds below."""
        if self.pressure is not None or self.sea_level_pressure is not None:
            below = replace(below, pressure=None, sea_level_pressure=None)
        return Air(
            **{
                name: getattr(self, name) if getattr(self, name) not in (None, ()) else getattr(below, name)
                for name in self.__slots__
            }
        )


@dataclass(frozen=True, slots=True)
class Venue:
    """The test place."""

    kind: VenueKind
    id: str = ""
    lap_length: float | None = None  # once round, there AND back, once round the track [m]
    bend_radius: float | None = None  # track [m]
    transition_length: float | None = None  # track [m]
    mass_height: float | None = None  # of rider and bike above the ground [m]


@dataclass(frozen=True, slots=True)
class RepairChoice:
    """A `[[ride.repair]]`: which repair to take for a kind of fault, on the whole ride or a span."""

    kind: str  # a fault code
    choice: str  # one of the fault's choices
    start: float | None = None  # [s]
    end: float | None = None  # [s]
    value: float | None = None  # where the repair takes one, in SI, e.g. a lag [s]


@dataclass(frozen=True, slots=True)
class RideEntry:
    """A ride of the session: the file and how to read it."""

    id: str
    file: str  # relative to the session folder, forward slashes
    sha256: str = ""
    start: dt.datetime | None = None  # wall clock for elapsed-time text
    columns: Mapping[str, str] = field(default_factory=lambda: MappingProxyType({}))  # channel -> header
    wheel_circumference: float | None = None  # as set in the head unit [m]
    power_channel: str = ""
    repairs: tuple[RepairChoice, ...] = ()


@dataclass(frozen=True, slots=True)
class Setup:
    """One position and equipment under test, or known from elsewhere."""

    id: str
    letter: str = ""
    name: str = ""
    baseline: bool = False
    tyres: str = ""  # same name = same Crr; "" everywhere = one shared set
    mass_change: float = 0.0  # [kg]
    power_cost: float | None = None  # [W]
    power_cost_share: float | None = None  # instead of watts: a share of power [1]
    power_cost_sd: float | None = None  # in the unit of whichever is given
    held: float | None = None  # share of race time [1]
    fallback: str = ""  # setup id
    notes: str = ""
    photos: tuple[str, ...] = ()
    measurements: Mapping[str, str] = field(default_factory=lambda: MappingProxyType({}))
    # Known from elsewhere, not tested today:
    cda: float | None = None  # [m^2]
    cda_sd: float | None = None  # [m^2]
    cda_difference: float | None = None  # [m^2]
    cda_difference_sd: float | None = None  # [m^2]
    difference_from: str = ""  # setup id
    yaw: tuple[float, ...] = ()  # [rad]
    cxa: tuple[float, ...] = ()  # axial force / (1/2 rho V^2) [m^2]


@dataclass(frozen=True, slots=True)
class Tyres:
    """What is known of a tyre set beforehand."""

    id: str
    crr: float | None = None  # at 20 degC on this surface [1]
    crr_sd: float | None = None  # None with crr given: exact [1]
    temperature_coefficient: float | None = None  # relative, per kelvin [1/K]
    temperature_coefficient_sd: float | None = None  # [1/K]
    pressure: float | None = None  # [Pa]
    wheel_circumference: float | None = None  # [m]


@dataclass(frozen=True, slots=True)
class Exclusion:
    """A span of a run left out, with the reason."""

    start: float  # on the ride's clock [s]
    end: float  # [s]
    reason: str


@dataclass(frozen=True, slots=True)
class Run:
    """A span of a ride ridden in one setup: the record intervals inside [start, end]."""

    id: str
    ride: str
    setup: str
    start: float  # on the ride's clock [s]
    end: float | None = None  # None: to the end of the ride [s]
    excluded: str = ""  # the reason; "" = counted
    note: str = ""
    laps: tuple[float, ...] = ()  # times at which laps begin and end, on the ride's clock [s]
    kind: RunKind = RunKind.PEDALLED
    exclusions: tuple[Exclusion, ...] = ()
    air: Air = Air()


@dataclass(frozen=True, slots=True)
class CourseSegment:
    """A stretch of a course built by hand."""

    length: float  # [m]
    grade: float = 0.0  # rise over run [1]
    heading: float = 0.0  # clockwise from true north [rad]
    crr_factor: float | None = None  # [1]
    shelter: float | None = None  # share of the wind that reaches the rider [1]
    speed_limit: float | None = None  # [m/s]


@dataclass(frozen=True, slots=True)
class PowerPlan:
    """How power is laid out over the course."""

    kind: PlanKind = PlanKind.CONSTANT
    critical_power: float | None = None  # [W]
    w_prime: float | None = None  # [J]
    max_power: float | None = None  # [W]
    min_power: float | None = None  # [W]
    file: str = ""


@dataclass(frozen=True, slots=True)
class CourseEntry:
    """A course of the session: where it comes from and the race to be ridden on it."""

    id: str
    name: str = ""
    file: str = ""  # relative to the session folder
    sha256: str = ""
    segments: tuple[CourseSegment, ...] = ()
    track_laps: float | None = None  # on this venue [1]
    power: float | None = None  # [W]
    power_sd: float | None = None  # [W]
    air: Air = Air()
    wind_speed_sd: float | None = None  # [m/s]
    shelter: float | None = None  # share of the wind that reaches the rider [1]
    crr_factor: float | None = None  # [1]
    corner_grip: float | None = None  # usable lateral acceleration / g [1]
    laps: int = 1
    standing_start: bool = True
    max_speed: float | None = None  # where the rider brakes on descents [m/s]
    weight: float = 1.0  # in a season of several courses
    plan: PowerPlan = PowerPlan()


@dataclass(frozen=True, slots=True)
class Worthwhile:
    """The smallest difference worth having: a drag area or watts at the reference speed."""

    cda: float | None = None  # [m^2]
    power: float | None = None  # [W]


@dataclass(frozen=True, slots=True)
class Session:
    """One test day."""

    name: str
    venue: Venue | None = None
    date: dt.date | None = None
    utc_offset: float | None = None  # [s]
    smallest_worthwhile: Worthwhile = Worthwhile()
    reference_speed: float | None = None  # the speed CdA is reported at [m/s]
    rider: Rider = Rider()
    bike: Bike = Bike()
    power_meter: PowerMeter = PowerMeter()
    air: Air = Air()
    rides: tuple[RideEntry, ...] = ()
    setups: tuple[Setup, ...] = ()
    tyres: tuple[Tyres, ...] = ()
    runs: tuple[Run, ...] = ()
    courses: tuple[CourseEntry, ...] = ()

    def setup(self, setup_id: str) -> Setup:
        """Return the setup with this id; KeyError if there is none."""
        return next_by_id(self.setups, setup_id)

    def ride(self, ride_id: str) -> RideEntry:
        """Return the ride with this id; KeyError if there is none."""
        return next_by_id(self.rides, ride_id)

    def run(self, run_id: str) -> Run:
        """Return the run with this id; KeyError if there is none."""
        return next_by_id(self.runs, run_id)

    def course(self, course_id: str) -> CourseEntry:
        """Return the course with this id; KeyError if there is none."""
        return next_by_id(self.courses, course_id)

    @property
    def baseline(self) -> Setup | None:
        """The setup the others are compared with: the one marked, else the first; None without setups."""
        return next((s for s in self.setups if s.baseline), self.setups[0] if self.setups else None)


_Named = TypeVar("_Named", Setup, RideEntry, Run, CourseEntry, Tyres)


def next_by_id(items: tuple[_Named, ...], item_id: str) -> _Named:
    """Return the item with this id; KeyError if there is none."""
    for item in items:
        if item.id == item_id:
            return item
    raise KeyError(item_id)
