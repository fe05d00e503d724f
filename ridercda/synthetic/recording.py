"""From the motion to what the instruments recorded of it."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from numba import njit

from ridercda.synthetic.line import Line
from ridercda.synthetic.sensors import (
    AirProbeSpec,
    BarometerSpec,
    PositionSpec,
    PowerAveraging,
    PowerSpec,
    SensorSpec,
    SpeedSource,
    SpeedSpec,
    ThermometerSpec,
)
from ridercda.synthetic.wind import ornstein_uhlenbeck

FloatArray = npt.NDArray[np.float64]

EARTH_RADIUS = 6378137.0  # [m] WGS84, equatorial
EARTH_ECCENTRICITY = 0.00669437999014  # WGS84, squared
ORIGIN = (math.radians(47.2), math.radians(3.4))  # latitude, longitude of the local origin: fields
ALTITUDE = 180.0  # [m] of the local origin


@dataclass(frozen=True, slots=True, eq=False)
class Motion:
    """What happened, one value per integration step, shape (n,): SI."""

    step: float
    place: FloatArray  # along the line, at the step's end [m]
    distance: FloatArray  # of the wheel, at the step's end [m]
    power: FloatArray  # at the crank, mean [W]
    air_along: FloatArray  # at the step's end [m/s]
    run: npt.NDArray[np.int64]  # index of the run, -1 between runs

    def per_record(self, values: FloatArray, interval: float) -> FloatArray:
        """Return means over each record's last second (or its interval, if shorter)."""
        every = round(interval / self.step)
        window = min(every, round(1.0 / self.step))
        count = len(values) // every
        return np.asarray(values[: count * every].reshape(count, every)[:, -window:].mean(axis=1))

    def at_record(self, values: FloatArray, interval: float) -> FloatArray:
        """Return the values at the end of each record interval."""
        every = round(interval / self.step)
        return values[every - 1 :: every][: len(values) // every]


@dataclass(frozen=True, slots=True, eq=False)
class Calibrations:
    """Errors of the day, drawn once: power scale, air-probe factor per run (and between)."""

    power_scale: float
    probe_factor: float
    probe_setup_factors: FloatArray  # per run


def draw_calibrations(
    sensors: SensorSpec, setup_of_run: tuple[int, ...], rng: np.random.Generator
) -> Calibrations:
    """Return the day's calibration errors."""
    power = sensors.power
    scale = power.scale + (power.scale_sd * rng.standard_normal() if power.scale_sd > 0 else 0.0)
    probe = sensors.air_probe or AirProbeSpec(0.0, 0.0, 0.0)
    per_setup = 1 + probe.setup_factor_sd * rng.standard_normal(max(setup_of_run) + 1)
    return Calibrations(scale, 1 + probe.factor_sd * rng.standard_normal(), per_setup[np.array(setup_of_run)])


def record(
    motion: Motion,
    line: Line,
    sensors: SensorSpec,
    calibrations: Calibrations,
    air_temperature: FloatArray,
    rng: np.random.Generator,
) -> tuple[FloatArray, dict[str, FloatArray]]:
    """Return time and channels as recorded.

    Parameters
    ----------
    motion : Motion
    line : Line
    sensors : SensorSpec
    calibrations : Calibrations
    air_temperature : ndarray, shape (steps,)
        [K]
    rng : Generator
    """
    interval = sensors.interval
    ends = motion.at_record(motion.distance, interval)
    count = len(ends)
    time: FloatArray = np.arange(count, dtype=float) * interval
    channels = {"power": _power(motion, sensors, calibrations.power_scale, rng)}
    if sensors.speed.source is not SpeedSource.NONE:
        channels["speed"], channels["distance"] = _speed(motion, sensors.speed, interval, rng)
    place = motion.at_record(motion.place, interval)
    if sensors.position is not None:
        channels["latitude"], channels["longitude"] = _position(line, place, sensors.position, interval, rng)
    if sensors.barometer is not None:
        height = line.at(line.height, place) + ALTITUDE
        channels["altitude"] = _altitude(height, time, sensors.barometer, rng)
    if sensors.thermometer is not None:
        air = motion.at_record(air_temperature[: len(motion.distance)], interval)
        channels["temperature"] = _temperature(air, interval, sensors.thermometer, rng)
    if sensors.air_probe is not None:
        run = motion.at_record(np.maximum(motion.run, 0).astype(float), interval).astype(int)
        factor = calibrations.probe_factor * calibrations.probe_setup_factors[run]
        channels["air_speed"] = motion.per_record(motion.air_along, interval) * factor + rng.normal(
            0, sensors.air_probe.noise, count
        )
    true_power = motion.per_record(motion.power, interval)
    channels["cadence"] = _cadence(true_power, rng)
    channels["heart_rate"] = _heart_rate(true_power, interval, rng)
    return time, channels


def _power(motion: Motion, sensors: SensorSpec, scale: float, rng: np.random.Generator) -> FloatArray:
    spec: PowerSpec = sensors.power
    interval = sensors.interval
    if spec.lag == 0 and spec.averaging is PowerAveraging.RECORD:
        power = motion.per_record(motion.power, interval)
    else:
        work = np.concatenate(([0.0], np.cumsum(motion.power) * motion.step))
        ends = _interval_ends(len(motion.power) // round(interval / motion.step), interval) - spec.lag
        window = min(interval, 1.0)
        if spec.averaging is PowerAveraging.RECORD:
            power = (_work_at(work, ends, motion.step) - _work_at(work, ends - window, motion.step)) / window
        else:
            turns = _crank_turns(motion.power, motion.step)
            last = np.searchsorted(turns, ends, side="right") - 1
            first = np.searchsorted(turns, ends - window, side="right") - 1
            last = np.maximum(last, 1)
            first = np.clip(first, 0, last - 1)  # at least one turn; a slow crank repeats its last
            power = (_work_at(work, turns[last], motion.step) - _work_at(work, turns[first], motion.step)) / (
                turns[last] - turns[first]
            )
            power = np.where(ends - turns[last] > 2.0, 0.0, power)  # no turn for two seconds: it gives up
    count = len(power)
    hours = np.arange(count) * interval / 3600.0
    offset = np.where(power > 0, spec.zero + spec.zero_drift_per_hour * hours, 0.0)
    power = power * (1 + scale) * (1 + spec.noise * rng.standard_normal(count)) + offset
    power = np.maximum(power, 0.0)
    return _rounded(power, spec.resolution)


def _interval_ends(count: int, interval: float) -> FloatArray:
    """Return when each record interval of a day ends, since its first moment. [s]"""
    return np.arange(1, count + 1, dtype=float) * interval


def _work_at(work: FloatArray, time: FloatArray, step: float) -> FloatArray:
    return np.asarray(np.interp(time / step, np.arange(len(work)), work))


@njit(cache=True, nogil=True)
def _turn_times(power: FloatArray, step: float, out: FloatArray) -> int:
    phase = 0.0
    count = 1
    out[0] = 0.0
    for i in range(len(power)):
        if power[i] > 1.0:
            phase += step * (1.35 + 0.0006 * power[i])
            if phase >= 1.0:
                phase -= 1.0
                out[count] = (i + 1) * step
                count += 1
    return count


def _crank_turns(power: FloatArray, step: float) -> FloatArray:
    out = np.empty(2 + int(len(power) * step * 3))
    return out[: _turn_times(np.minimum(power, 1000.0), step, out)]


def _speed(
    motion: Motion, spec: SpeedSpec, interval: float, rng: np.random.Generator
) -> tuple[FloatArray, FloatArray]:
    ends = motion.at_record(motion.distance, interval)
    factor = 1 + spec.circumference_error
    count = len(ends)
    if spec.source is SpeedSource.GPS:
        true = np.diff(motion.distance, prepend=0.0) / motion.step
        late = round(spec.gps_delay / motion.step)
        true = np.concatenate((np.full(late, true[0]), true))[: len(true)]
        smooth = _follow(true, math.exp(-motion.step / spec.gps_smoothing)) if spec.gps_smoothing else true
        speed = motion.at_record(smooth, interval)
        error = spec.noise * ornstein_uhlenbeck(count, interval / 3.0, rng)
        speed = _rounded(np.maximum(speed + error, 0.0), spec.resolution)
        return speed, np.concatenate(([0.0], np.cumsum(speed[1:]) * interval))
    if spec.source is SpeedSource.WHEEL_EVENTS:
        jitter = rng.normal(0, spec.noise * interval / math.sqrt(2), count + 1)
        passed = np.concatenate(([0.0], ends * factor)) + jitter
        distance = np.maximum.accumulate(passed)
        speed = _rounded(np.diff(distance) / interval, spec.resolution)
        return speed, distance[1:] - distance[1]
    if interval > 1.0:
        every = round(interval / motion.step)
        second = round(1.0 / motion.step)
        before = motion.distance[every - 1 - second :: every][: len(ends)]
        speed = (ends - before) * factor
    else:
        speed = np.diff(ends, prepend=0.0) / interval * factor
    moving = speed > 0.3
    noise = rng.normal(0, spec.noise, count) if spec.noise > 0 else np.zeros(count)
    speed = _rounded(np.where(moving, np.maximum(speed + noise, 0.0), speed), spec.resolution)
    if interval > 1.0 or spec.noise == 0:
        return speed, (ends - ends[0]) * factor
    return speed, np.concatenate(([0.0], np.cumsum(speed[1:]) * interval))


@njit(cache=True, nogil=True)
def _follow(values: FloatArray, keep: float) -> FloatArray:
    out = np.empty_like(values)
    state = values[0]
    for i in range(len(values)):
        state = keep * state + (1.0 - keep) * values[i]
        out[i] = state
    return out


def _position(
    line: Line, place: FloatArray, spec: PositionSpec, interval: float, rng: np.random.Generator
) -> tuple[FloatArray, FloatArray]:
    east, north = line.at(line.east, place), line.at(line.north, place)
    for component in (east, north):
        if spec.wander > 0:
            component += spec.wander * ornstein_uhlenbeck(len(place), interval / spec.wander_time, rng)
        if spec.jitter > 0:
            component += rng.normal(0, spec.jitter, len(place))
    return to_geographic(east, north)


def to_geographic(east: FloatArray, north: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return WGS84 latitude and longitude of local coordinates within some kilometres of the origin. [rad]"""
    latitude0, longitude0 = ORIGIN
    bend = 1 - EARTH_ECCENTRICITY * math.sin(latitude0) ** 2
    meridian = EARTH_RADIUS * (1 - EARTH_ECCENTRICITY) / bend**1.5
    prime = EARTH_RADIUS / math.sqrt(bend)
    latitude = latitude0 + north / meridian
    # The second-order terms of a tangent plane matter from some kilometres on.
    latitude -= math.tan(latitude0) * east**2 / (2 * meridian * prime)
    longitude = longitude0 + east / (prime * math.cos(latitude0)) * (
        1 + math.tan(latitude0) * north / meridian
    )
    return latitude, longitude


def _altitude(
    height: FloatArray, time: FloatArray, spec: BarometerSpec, rng: np.random.Generator
) -> FloatArray:
    offset = rng.normal(0, spec.offset_sd) if spec.offset_sd > 0 else 0.0
    drift = rng.normal(0, spec.drift_per_hour) if spec.drift_per_hour > 0 else 0.0
    noise = rng.normal(0, spec.noise, len(time)) if spec.noise > 0 else np.zeros(len(time))
    return _rounded(height + offset + drift * time / 3600.0 + noise, spec.resolution)


def _temperature(
    air: FloatArray, interval: float, spec: ThermometerSpec, rng: np.random.Generator
) -> FloatArray:
    keep = math.exp(-interval / spec.time)
    return (
        np.round(_follow(air + spec.warm_bias, keep) + rng.normal(0, spec.noise, len(air)) - 273.15) + 273.15
    )


def _cadence(power: FloatArray, rng: np.random.Generator) -> FloatArray:
    wobble = 0.03 * ornstein_uhlenbeck(len(power), 0.1, rng)
    cadence = 1.35 + 0.0006 * np.minimum(power, 500.0) + wobble
    return np.round(np.where(power > 5.0, cadence, 0.0) * 60) / 60


def _heart_rate(power: FloatArray, interval: float, rng: np.random.Generator) -> FloatArray:
    beats = 70.0 + 0.32 * _follow(power, math.exp(-interval / 45.0))
    return np.round(beats + ornstein_uhlenbeck(len(power), interval / 20.0, rng)) / 60


def _rounded(values: FloatArray, resolution: float) -> FloatArray:
    return np.round(values / resolution) * resolution if resolution > 0 else values
