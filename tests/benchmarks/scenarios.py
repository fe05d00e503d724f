"""The scenarios of the calibration study: days that keep the solver's model, and days that break it."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from ridercda.synthetic.rider import Holds, RiderSpec, Spread
from ridercda.synthetic.sensors import AirProbeSpec, SensorSpec, SpeedSource
from ridercda.synthetic.spec import (
    REFERENCE_DAY,
    THREE_SETUPS,
    TRACK_DAY,
    AirSpec,
    Cycle,
    DaySpec,
    LapTimes,
    SetupSpec,
    TyreSpec,
)
from ridercda.synthetic.venue import OutAndBackVenue
from ridercda.synthetic.wind import (
    CALM,
    GUSTY,
    WINDY,
    GustKind,
    GustSpec,
    PassingCars,
    WeatherReport,
    WindSpec,
)

# The meter and the drivetrain err as a session's defaults say that they may, so that absolute intervals can
# be held to their promise.
_POWER = replace(REFERENCE_DAY.sensors.power, scale_sd=0.015, efficiency_sd=0.005)
BASE = replace(REFERENCE_DAY, sensors=replace(REFERENCE_DAY.sensors, power=_POWER), lap_times=LapTimes.NONE)


@dataclass(frozen=True, slots=True)
class Scenario:
    """One row of the table.

    Parameters
    ----------
    id : str
    text : str
        What is special about these days.
    day : callable
        From a seed to the day's spec.
    keeps_model : bool
        Whether the solver's own assumptions hold.
    """

    id: str
    text: str
    day: Callable[[int], DaySpec]
    keeps_model: bool = True


def _always(spec: DaySpec) -> Callable[[int], DaySpec]:
    return lambda _: spec


def _with_sensors(spec: DaySpec, **changes: object) -> DaySpec:
    return replace(spec, sensors=replace(spec.sensors, **changes))  # type: ignore[arg-type]


def _with_power(spec: DaySpec, **changes: object) -> DaySpec:
    return _with_sensors(spec, power=replace(spec.sensors.power, **changes))  # type: ignore[arg-type]


def _with_speed(spec: DaySpec, **changes: object) -> DaySpec:
    return _with_sensors(spec, speed=replace(spec.sensors.speed, **changes))  # type: ignore[arg-type]


def _with_rider(spec: DaySpec, **changes: object) -> DaySpec:
    return replace(spec, rider=replace(spec.rider, **changes))  # type: ignore[arg-type]


def _one_speed(seed: int) -> DaySpec:
    """One target, and a Crr known to 5 %: the truth is drawn about what the session states."""
    true = 0.0040 + 0.0002 * np.random.default_rng(10_000_000 + seed).standard_normal()
    tyres = (TyreSpec(crr=true, stated_crr=0.0040, stated_crr_sd=0.0002),)
    return replace(BASE, targets=(230.0,), tyres=tyres)


_TWELVE = tuple(SetupSpec(letter.lower(), 0.255, letter, f"Setup {letter}") for letter in "ABCDEFGHIJKL")
_HOLDS_SPEED = RiderSpec(holds=Holds.SPEED)
_TRACK_SENSORS = SensorSpec(power=_POWER, position=None, barometer=None)

SCENARIOS: tuple[Scenario, ...] = (
    Scenario("calm", "loop, 0.4 m/s of wind, gusts 0.15 m/s", _always(replace(BASE, wind=CALM))),
    Scenario("windy", "loop, 1.5 m/s, gusts 0.5 m/s", _always(replace(BASE, wind=WINDY))),
    Scenario("gusty", "loop, 3 m/s, gusts 1.0 m/s", _always(replace(BASE, wind=GUSTY))),
    Scenario(
        "reported",
        "gusty loop with a weather report, 25 % and 15° off",
        _always(replace(BASE, wind=replace(GUSTY, report=WeatherReport()))),
    ),
    Scenario(
        "out-and-back", "1.5 km each way, windy", _always(replace(BASE, venue=OutAndBackVenue(), laps=2))
    ),
    Scenario(
        "track",
        "indoor track, no GPS",
        _always(replace(TRACK_DAY, sensors=_TRACK_SENSORS, lap_times=LapTimes.NONE)),
    ),
    Scenario(
        "gps-speed",
        "speed from GPS, smoothed and late; windy",
        _always(_with_speed(BASE, source=SpeedSource.GPS, noise=0.05)),
    ),
    Scenario("one-speed", "230 W all day, Crr known to 5 %; windy", _one_speed),
    Scenario(
        "two-by-two",
        "two setups, two repeats, another power each lap; windy",
        _always(replace(BASE, setups=THREE_SETUPS[:2], order="ABBA", cycle=Cycle.LAP)),
    ),
    Scenario(
        "confounded",
        "all of A, then B, then C, with a drift of 0.5 % an hour; windy",
        _always(_with_rider(replace(BASE, order="AAAABBBBCCCC"), drift_per_hour=0.005)),
    ),
    Scenario(
        "lag",
        "power 1.5 s late and wheel circumference 1 % off; windy",
        _always(_with_speed(_with_power(BASE, lag=1.5), circumference_error=0.01)),
    ),
    Scenario(
        "air-probe",
        "air-speed probe, 2 % off; gusty",
        _always(_with_sensors(replace(BASE, wind=GUSTY), air_probe=AirProbeSpec())),
    ),
    Scenario(
        "yaw",
        "drag area 1 % lower at 6° of yaw, 4 % at 11°; gusty",
        _always(_with_rider(replace(BASE, wind=GUSTY), yaw_square=-1.0)),
    ),
    Scenario(
        "holds-speed",
        "rider holds 8.5, 10 and 11.5 m/s; windy",
        _always(replace(BASE, rider=_HOLDS_SPEED, targets=(8.5, 10.0, 11.5))),
    ),
    Scenario(
        "holds-speed-gusty",
        "rider holds 8.5, 10 and 11.5 m/s; gusty",
        _always(replace(BASE, wind=GUSTY, rider=_HOLDS_SPEED, targets=(8.5, 10.0, 11.5))),
    ),
    Scenario(
        "twelve-equal",
        "twelve setups, all equal, two runs of one lap each; windy",
        _always(replace(BASE, setups=_TWELVE, order="ABCDEFGHIJKLLKJIHGFEDCBA", laps=1)),
    ),
    Scenario(
        "kaimal",
        "gusts with a -5/3 spectrum; windy",
        _always(replace(BASE, wind=replace(WINDY, gusts=GustSpec(0.5, 11.0, GustKind.KAIMAL)))),
        keeps_model=False,
    ),
    Scenario(
        "squalls",
        "gusts that come in squalls; windy",
        _always(replace(BASE, wind=replace(WINDY, gusts=GustSpec(0.5, 11.0, GustKind.BURSTS)))),
        keeps_model=False,
    ),
    Scenario(
        "heavy-tails-1",
        "runs spread by 1 % with heavy tails (t, 3 degrees of freedom); windy",
        _always(_with_rider(BASE, run_spread=0.01, run_spread_kind=Spread.STUDENT_3)),
        keeps_model=False,
    ),
    Scenario(
        "heavy-tails-2",
        "the same with 2 %; windy",
        _always(_with_rider(BASE, run_spread=0.02, run_spread_kind=Spread.STUDENT_3)),
        keeps_model=False,
    ),
    Scenario(
        "shelter",
        "hedges: the wind that reaches the rider varies by 40 % along the loop; gusty",
        _always(replace(BASE, wind=replace(GUSTY, shelter_variation=0.4))),
        keeps_model=False,
    ),
    Scenario(
        "warm-up",
        "tyres 8 % slow at the start of a morning that warms by 5 K an hour; windy",
        _always(
            replace(
                BASE,
                tyres=(TyreSpec(warm_up=0.08, warm_up_time=600.0),),
                air=AirSpec(temperature=288.15, warming_per_hour=5.0, readings=(0.0, 0.5, 1.0, 1.5, 2.0)),
            )
        ),
        keeps_model=False,
    ),
    Scenario(
        "zero-drift",
        "power zero drifts by 3 W an hour; windy",
        _always(_with_power(BASE, zero_drift_per_hour=3.0)),
        keeps_model=False,
    ),
    Scenario(
        "effort",
        "drag area rises by 1.5 % per 100 W; windy",
        _always(_with_rider(BASE, effort_slope=0.015)),
        keeps_model=False,
    ),
    Scenario(
        "cars",
        "a car a minute pushes the air along by 2.5 m/s; windy",
        _always(replace(BASE, wind=replace(WINDY, cars=PassingCars()))),
        keeps_model=False,
    ),
    Scenario(
        "restless",
        "rider moves about within a run by 1 %, power up on climbs; windy",
        _always(_with_rider(BASE, within_run=0.01, grade_response=3.0)),
        keeps_model=False,
    ),
    Scenario(
        "wind-turns",
        "the wind turns by 60° and grows by 1 m/s through the day, and wavers in between",
        _always(
            replace(
                BASE,
                wind=WindSpec(
                    speed=1.5,
                    turn=math.radians(60),
                    growth=1.0,
                    slow_sd=0.3,
                    slow_time=900.0,
                    gusts=GustSpec(0.5),
                ),
            )
        ),
        keeps_model=False,
    ),
)


def scenario(scenario_id: str) -> Scenario:
    """Return the scenario with this id; KeyError if there is none."""
    for each in SCENARIOS:
        if each.id == scenario_id:
            return each
    raise KeyError(scenario_id)
