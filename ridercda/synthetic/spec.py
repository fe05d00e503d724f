"""A test day to invent: what is ridden where, by whom, in what air, and with which instruments."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, field, replace
from enum import StrEnum

from ridercda.synthetic.faults import FaultSpec
from ridercda.synthetic.rider import RiderSpec
from ridercda.synthetic.sensors import (
    BarometerSpec,
    PositionSpec,
    PowerAveraging,
    PowerSpec,
    SensorSpec,
    SpeedSource,
    SpeedSpec,
)
from ridercda.synthetic.venue import LoopVenue, TrackVenue, VenueSpec
from ridercda.synthetic.wind import STILL, WINDY, WindSpec


class Cycle(StrEnum):
    """When the rider moves on to the next of the targets."""

    RUN = "run"
    LAP = "lap"


class LapTimes(StrEnum):
    """What the session's runs say of their laps."""

    NONE = "none"
    EXACT = "exact"
    PRESSED = "pressed"  # by a lap button: some tenths of a second off


@dataclass(frozen=True, slots=True)
class SetupSpec:
    """One setup: true drag area at zero yaw and the reference speed [m^2], tyres, mass change [kg]."""

    id: str
    cda: float
    letter: str = ""
    name: str = ""
    tyres: str = "race"
    mass_change: float = 0.0


@dataclass(frozen=True, slots=True)
class TyreSpec:
    """One tyre set.

    Parameters
    ----------
    crr : float
        At 20 °C and warmed up. [1]
    temperature_coefficient : float
        Relative change per kelvin of air temperature. [1/K]
    warm_up, warm_up_time : float
        Relative excess in the first moment of the day, and the time in which it fades. [1, s]
    stated_crr, stated_crr_sd : float or None
        What the session says of it beforehand. [1]
    """

    id: str = "race"
    crr: float = 0.0040
    temperature_coefficient: float = -0.01
    warm_up: float = 0.0
    warm_up_time: float = 500.0
    stated_crr: float | None = None
    stated_crr_sd: float | None = None


@dataclass(frozen=True, slots=True)
class AirSpec:
    """Air through the day; the temperature rises evenly. [K, Pa, 1, K/h]

    `readings` are the times of day, in hours since the start, at which the session holds a reading; none: one
    value for the day, that of its middle.
    """

    temperature: float = 293.15
    pressure: float = 100800.0
    humidity: float = 0.55
    warming_per_hour: float = 0.0
    readings: tuple[float, ...] = ()


THREE_SETUPS = (
    SetupSpec("a", 0.260, "A", "Base"),
    SetupSpec("b", 0.257, "B", "New helmet"),
    SetupSpec("c", 0.247, "C", "Narrow pads"),
)


@dataclass(frozen=True, slots=True)
class DaySpec:
    """A whole test day.

    Parameters
    ----------
    venue : VenueSpec
    setups : tuple of SetupSpec
        The first is the baseline.
    order : str or tuple of str
        Setup of each run, by letter.
    laps : int
        Of each run.
    targets : tuple of float
        Power [W] or speed [m/s] to hold, as the rider holds the one or the other; each setup goes through
        them, starting one further than the setup before it.
    cycle : Cycle
    easy_power : float
        Between runs. [W]
    pause : float
        Standing between runs, where the rider turns back to the line. [s]
    roll_out, approach : float
        Ridden past the line, and before it, when turning back. [m]
    easy_time, settle_time : float
        Easy riding, then riding up to speed, where the rider goes straight on. [s]
    warm_up : float
        Easy riding before the first run. [s]
    lap_times : LapTimes
    date : date
    start_of_day : float
        [s since midnight]
    step : float
        Of the integration. [s]
    """

    name: str = "Invented day"
    venue: VenueSpec = field(default_factory=LoopVenue)
    wind: WindSpec = WINDY
    rider: RiderSpec = field(default_factory=RiderSpec)
    tyres: tuple[TyreSpec, ...] = (TyreSpec(),)
    setups: tuple[SetupSpec, ...] = THREE_SETUPS
    order: str | tuple[str, ...] = "ABCCBAABCCBA"
    laps: int = 2
    targets: tuple[float, ...] = (150.0, 220.0, 300.0)
    cycle: Cycle = Cycle.RUN
    sensors: SensorSpec = field(default_factory=SensorSpec)
    air: AirSpec = AirSpec()
    faults: tuple[FaultSpec, ...] = ()
    bike_mass: float = 8.5
    wheel_inertia: float = 0.14
    wheel_circumference: float = 2.105
    easy_power: float = 110.0
    pause: float = 20.0
    roll_out: float = 100.0
    approach: float = 200.0
    easy_time: float = 60.0
    settle_time: float = 30.0
    warm_up: float = 0.0
    lap_times: LapTimes = LapTimes.EXACT
    date: dt.date = dt.date(2026, 5, 9)
    start_of_day: float = 9 * 3600.0
    step: float = 0.05


def exact_sensors(interval: float = 1.0) -> SensorSpec:
    """Return instruments without error."""
    return SensorSpec(
        interval=interval,
        power=PowerSpec(noise=0.0),
        speed=SpeedSpec(noise=0.0),
        position=PositionSpec(wander=0.0, jitter=0.0),
        barometer=None,
        air_probe=None,
        thermometer=None,
    )


def noise_free(spec: DaySpec) -> DaySpec:
    """Return the same day in still air, with exact instruments, a rider who always sits the same, no faults.

    Wobble of power stays: it is true power, and the exact instruments see it.
    """
    venue = spec.venue
    if isinstance(venue, TrackVenue):
        venue = replace(venue, wander_mean=0.0, wander_sd=0.0)
    return replace(
        spec,
        venue=venue,
        wind=replace(STILL, report=None),
        rider=replace(spec.rider, run_spread=0.0, within_run=0.0, drift_per_hour=0.0),
        sensors=replace(
            exact_sensors(spec.sensors.interval),
            position=PositionSpec(wander=0.0, jitter=0.0) if spec.sensors.position else None,
            barometer=BarometerSpec(0.0, 0.0, 0.0, 0.0) if spec.sensors.barometer else None,
        ),
        faults=(),
    )


def gps_speed(spec: SensorSpec) -> SensorSpec:
    """Return the same instruments with speed from GPS and power per crank revolution."""
    return replace(
        spec,
        power=replace(spec.power, averaging=PowerAveraging.REVOLUTION),
        speed=replace(spec.speed, source=SpeedSource.GPS, noise=0.05),
    )


REFERENCE_DAY = DaySpec(name="Reference day")
"""84 kg, a 2.4 km loop, three setups, four runs of two laps each, 1.5 m/s of wind gusting by 0.5 m/s."""

TRACK_DAY = DaySpec(
    name="Track day",
    venue=TrackVenue(),
    wind=STILL,
    laps=12,
    targets=(180.0, 250.0, 330.0),
    sensors=SensorSpec(position=None, barometer=None),
    tyres=(TyreSpec(crr=0.0025),),
)
