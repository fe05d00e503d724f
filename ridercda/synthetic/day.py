"""Inventing a test day: from a spec and a seed to a session, its rides and the truth, all in memory."""

from __future__ import annotations

import datetime as dt
import math
from collections.abc import Mapping
from dataclasses import dataclass, replace
from itertools import pairwise
from types import MappingProxyType

import numpy as np
import numpy.typing as npt

from ridercda.physics.air import air_density
from ridercda.rides.ride import LapMark, LapTrigger, Ride
from ridercda.session.document import Session
from ridercda.synthetic import motion as equation
from ridercda.synthetic.faults import inject
from ridercda.synthetic.paperwork import Crossings, session_document
from ridercda.synthetic.recording import Motion, draw_calibrations, record
from ridercda.synthetic.rider import Holds, drag_factors, power_factors, run_factors
from ridercda.synthetic.sensors import SpeedSource
from ridercda.synthetic.spec import Cycle, DaySpec, SetupSpec
from ridercda.synthetic.truth import RecordTruth, RunTruth, Truth
from ridercda.synthetic.venue import Place, RoadVenue, TrackVenue, lay_out
from ridercda.synthetic.wind import WindSeries, blow, ornstein_uhlenbeck, reported_wind, shelter

FloatArray = npt.NDArray[np.float64]

RIDE = "day"
UTC_OFFSET = 7200.0  # [s]


@dataclass(frozen=True, slots=True, eq=False)
class SyntheticDay:
    """An invented day: the session as its rider would write it down, the rides by id, and the truth."""

    session: Session
    rides: Mapping[str, Ride]
    truth: Truth


@dataclass(frozen=True, slots=True, eq=False)
class _Ridden:
    """What the equation of motion gives back."""

    motion: Motion
    wind_east: FloatArray
    wind_north: FloatArray
    braked: FloatArray
    balance: FloatArray
    crossings: FloatArray  # shape (runs, laps + 1)


@dataclass(frozen=True, slots=True, eq=False)
class _Surroundings:
    """Series through the day, one value per step."""

    wind: WindSeries
    temperature: FloatArray
    density: FloatArray
    crr: FloatArray  # shape (tyre sets, steps)
    wobble: FloatArray
    drag: FloatArray
    wander: FloatArray


def simulate_day(spec: DaySpec, seed: int) -> SyntheticDay:
    """Return the day that `spec` and `seed` make; the same pair always makes the same day.

    Parameters
    ----------
    spec : DaySpec
    seed : int
        Not negative. Venue, wind, rider, instruments and paperwork draw from streams of their own, so
        changing one leaves the others as they were.

    Raises
    ------
    ValueError
        If `order` names a setup that is not there, a setup names tyres that are not there, or the day does
        not end within a few times its expected length (a rider who cannot climb the venue, say).
    """
    streams = [np.random.default_rng(s) for s in np.random.SeedSequence(seed).spawn(6)]
    of_venue, of_wind, of_rider, of_sensors, of_paper, of_shelter = streams
    setups = _setups_in_order(spec)
    spec = _with_drawn_efficiency(spec, of_sensors)
    venue = spec.venue
    if isinstance(venue, RoadVenue):
        venue = replace(venue, stretch=venue.stretch, runs=max(venue.runs, len(setups) * spec.laps))
    place = lay_out(venue, of_venue)
    targets = _targets(spec, setups)
    factors = run_factors(spec.rider, len(setups), of_rider)
    expected = _expected_duration(spec, place, targets)
    share = shelter(spec.wind, len(place.line.east), place.line.length, of_shelter)

    wind_state, rider_state = of_wind.bit_generator.state, of_rider.bit_generator.state
    for margin in (1.3, 2.5, 6.0):
        of_wind.bit_generator.state, of_rider.bit_generator.state = wind_state, rider_state
        steps = round(expected * margin / spec.step)
        around = _surroundings(spec, steps, expected, of_wind, of_rider)
        ridden = _ride(spec, place, setups, targets, factors, share, around)
        if ridden is not None:
            break
    else:
        raise ValueError(f"the day did not end within {6 * expected:.0f} s: the rider hardly moves")

    index = {s.id: k for k, s in enumerate(spec.setups)}
    calibrations = draw_calibrations(spec.sensors, tuple(index[s.id] for s in setups), of_sensors)
    time, channels = record(
        ridden.motion, place.line, spec.sensors, calibrations, around.temperature, of_sensors
    )
    truth = _truth(spec, place, setups, factors, around, ridden, calibrations.power_scale, time)
    time, channels = inject(time, channels, spec.faults)
    crossings = _crossings(ridden.crossings - spec.sensors.interval, of_paper)
    # Nobody presses a button every 250 m.
    presses = crossings.of_runs if isinstance(spec.venue, TrackVenue) else crossings.of_laps
    start = dt.datetime.combine(
        spec.date, dt.time(), dt.timezone(dt.timedelta(seconds=UTC_OFFSET))
    ) + dt.timedelta(seconds=spec.start_of_day)
    ride = Ride(
        time=time,
        channels=MappingProxyType(channels),
        start=start,
        laps=tuple(LapMark(a, b, LapTrigger.MANUAL) for a, b in pairwise(presses)),
        source="text",
        device="invented",
    )
    mean_wind = (float(ridden.wind_east.mean()), float(ridden.wind_north.mean()))
    report = reported_wind(spec.wind, *mean_wind, of_paper)
    session = session_document(
        spec,
        place.venue,
        setups,
        crossings,
        ride_id=RIDE,
        start=start,
        duration=float(time[-1]),
        report=report if spec.wind.report else None,
    )
    return SyntheticDay(session, MappingProxyType({RIDE: ride}), truth)


def _with_drawn_efficiency(spec: DaySpec, rng: np.random.Generator) -> DaySpec:
    power = spec.sensors.power
    if power.efficiency_sd == 0:
        return spec
    drawn = replace(power, efficiency=power.efficiency + power.efficiency_sd * rng.standard_normal())
    return replace(spec, sensors=replace(spec.sensors, power=drawn))


def _setups_in_order(spec: DaySpec) -> tuple[SetupSpec, ...]:
    by_letter = {s.letter or s.id: s for s in spec.setups}
    tyres = {t.id for t in spec.tyres}
    for setup in spec.setups:
        if setup.tyres not in tyres:
            raise ValueError(f"setup {setup.id} has tyres {setup.tyres!r}; there are {sorted(tyres)}")
    for letter in spec.order:
        if letter not in by_letter:
            raise ValueError(f"order names setup {letter!r}; there are {sorted(by_letter)}")
    return tuple(by_letter[letter] for letter in spec.order)


def _targets(spec: DaySpec, setups: tuple[SetupSpec, ...]) -> FloatArray:
    """Target of each lap of each run: each setup goes through the targets, offset from the setup before."""
    index = {s.id: k for k, s in enumerate(spec.setups)}
    turn = {s.id: index[s.id] for s in spec.setups}
    targets = np.empty((len(setups), spec.laps))
    for r, setup in enumerate(setups):
        if spec.cycle is Cycle.RUN:
            targets[r] = spec.targets[turn[setup.id] % len(spec.targets)]
            turn[setup.id] += 1
        else:
            for lap in range(spec.laps):
                targets[r, lap] = spec.targets[turn[setup.id] % len(spec.targets)]
                turn[setup.id] += 1
    return targets


def _expected_duration(spec: DaySpec, place: Place, targets: FloatArray) -> float:
    # Held power: air takes some 85 %.
    speeds = targets if spec.rider.holds is Holds.SPEED else np.cbrt(targets * 0.85 / (0.6 * 0.27))
    between = spec.pause + (spec.roll_out + spec.approach) / 4.0 if place.turns_back else 0.0
    if not place.turns_back:
        between = spec.easy_time + spec.settle_time + (place.gate / 8.0)
    return float((place.lap / speeds).sum() + len(targets) * between + 60.0 + spec.warm_up)


def _surroundings(
    spec: DaySpec, steps: int, expected: float, of_wind: np.random.Generator, of_rider: np.random.Generator
) -> _Surroundings:
    step = spec.step
    hours = np.arange(steps, dtype=float) * step / 3600.0
    middle = 0.5 * expected
    temperature = np.asarray(spec.air.temperature + spec.air.warming_per_hour * (hours - middle / 3600.0))
    if spec.air.warming_per_hour:
        knots = np.linspace(0, steps - 1, 200)
        density = np.interp(
            np.arange(steps),
            knots,
            air_density(
                np.interp(knots, np.arange(steps), temperature), spec.air.pressure, spec.air.humidity
            ),
        )
    else:
        density = np.full(
            steps, float(air_density(spec.air.temperature, spec.air.pressure, spec.air.humidity))
        )
    crr = np.empty((len(spec.tyres), steps))
    for row, tyres in zip(crr, spec.tyres, strict=True):
        row[:] = tyres.crr * (1 + tyres.temperature_coefficient * (temperature - 293.15))
        if tyres.warm_up:
            row *= 1 + tyres.warm_up * np.exp(-hours * 3600.0 / tyres.warm_up_time)
    wind = blow(spec.wind, steps, step, expected, of_wind)
    wobble = power_factors(spec.rider, steps, step, of_rider)
    drag = drag_factors(spec.rider, steps, step, middle, of_rider)
    wander = np.zeros(steps)
    if isinstance(spec.venue, TrackVenue):
        if spec.venue.wander_sd > 0:
            wander = spec.venue.wander_sd * ornstein_uhlenbeck(steps, step / spec.venue.wander_time, of_rider)
        wander = np.maximum(wander + spec.venue.wander_mean, 0.0)
        wind = WindSeries(wind.east, wind.north, wind.push + spec.venue.dragged_air)
    return _Surroundings(wind, temperature, density, crr, wobble, drag, wander)


def _ride(
    spec: DaySpec,
    place: Place,
    setups: tuple[SetupSpec, ...],
    targets: FloatArray,
    factors: FloatArray,
    share: FloatArray,
    around: _Surroundings,
) -> _Ridden | None:
    line, rider = place.line, spec.rider
    steps = len(around.wobble)
    tyre_index = {t.id: float(k) for k, t in enumerate(spec.tyres)}
    runs = np.array(
        [
            (s.cda * f, rider.mass + spec.bike_mass + s.mass_change, tyre_index[s.tyres])
            for s, f in zip(setups, factors, strict=True)
        ]
    )
    samples = np.column_stack(
        (
            line.curvature,
            line.height,
            line.cos_heading,
            line.sin_heading,
            line.grade_sine,
            share,
            line.speed_limit,
        )
    )
    position, distance, power, air, east, north, braked = (np.empty(steps) for _ in range(7))
    balance = np.empty((steps, 3))
    run_of_step = np.empty(steps, np.int64)
    crossings = np.full((len(setups), spec.laps + 1), math.nan)
    radius = spec.wheel_circumference / (2 * math.pi)
    used = equation.ride(
        spec.step, samples, line.step, line.closed, place.start, place.lap, spec.laps, place.turns_back,
        place.gate, runs, targets, int(rider.holds is Holds.SPEED), around.wind.east, around.wind.north,
        around.wind.push, around.wobble, around.drag, around.density, around.crr, around.wander,
        spec.wheel_inertia / radius**2, spec.venue.mass_height, spec.sensors.power.efficiency,
        rider.response_time, rider.grade_response, rider.effort_slope, rider.effort_reference,
        rider.speed_slope, rider.speed_reference, rider.yaw_square, spec.easy_power, spec.pause,
        spec.roll_out, spec.approach, spec.easy_time, spec.settle_time, spec.warm_up, position, distance,
        power, air, east, north, braked, balance, run_of_step, crossings,
    )  # fmt: skip
    if used < 0:
        return None
    motion = Motion(spec.step, position[:used], distance[:used], power[:used], air[:used], run_of_step[:used])
    return _Ridden(motion, east[:used], north[:used], braked[:used], balance[:used], crossings)


def _crossings(times: FloatArray, rng: np.random.Generator) -> Crossings:
    """Exact times at the line, and the times at which the button was pressed for them. [s]"""
    pressed = times + np.clip(rng.normal(0.1, 0.3, times.shape), -1.0, 1.5)
    return Crossings(times, pressed)


def _truth(
    spec: DaySpec,
    place: Place,
    setups: tuple[SetupSpec, ...],
    factors: FloatArray,
    around: _Surroundings,
    ridden: _Ridden,
    power_scale: float,
    time: FloatArray,
) -> Truth:
    motion, interval = ridden.motion, spec.sensors.interval
    tyre_row = {t.id: k for k, t in enumerate(spec.tyres)}
    runs = []
    for r, setup in enumerate(setups):
        first, last = (round(ridden.crossings[r, k] / spec.step) for k in (0, -1))
        span = slice(first, last)
        east, north = ridden.wind_east[span], ridden.wind_north[span]
        runs.append(
            RunTruth(
                id=str(r + 1),
                setup=setup.id,
                start=float(ridden.crossings[r, 0] - interval),
                end=float(ridden.crossings[r, -1] - interval),
                lap_times=tuple(float(t - interval) for t in ridden.crossings[r]),
                cda=float(setup.cda * factors[r] * around.drag[span].mean()),
                crr=float(around.crr[tyre_row[setup.tyres], span].mean()),
                density=float(around.density[span].mean()),
                mass=spec.rider.mass + spec.bike_mass + setup.mass_change,
                wind_east=float(east.mean()),
                wind_north=float(north.mean()),
                gust_sd=float(math.sqrt(0.5 * (east.var() + north.var()))),
            )
        )
    along = motion.at_record(motion.place, interval) - place.start
    ends = motion.at_record(motion.distance, interval)
    records = RecordTruth(
        time=time.copy(),
        place=np.mod(along, place.lap) if place.line.closed else along,
        speed=np.diff(ends, prepend=0.0) / interval,
        power=motion.per_record(motion.power, interval) * spec.sensors.power.efficiency,
        braked=motion.per_record(ridden.braked, interval) / spec.step,
        wind_east=motion.per_record(ridden.wind_east, interval),
        wind_north=motion.per_record(ridden.wind_north, interval),
    )
    moving = ridden.motion.run >= 0
    change = ridden.balance[moving, 1] - ridden.balance[moving, 0]
    return Truth(
        cda=MappingProxyType({s.id: s.cda for s in spec.setups}),
        crr=MappingProxyType({t.id: t.crr for t in spec.tyres}),
        runs=tuple(runs),
        records=records,
        gust_sd=spec.wind.gusts.sd,
        gust_time=spec.wind.gusts.time,
        line=place.line,
        line_start=place.start,
        lap_length=place.lap,
        power_scale=power_scale,
        circumference_factor=(
            1 + spec.sensors.speed.circumference_error
            if spec.sensors.speed.source is not SpeedSource.GPS
            else 1.0
        ),
        efficiency=spec.sensors.power.efficiency,
        energy_error=float(np.abs(change - ridden.balance[moving, 2]).max()),
    )
