"""Wind to invent: a mean that drifts through the day, gusts of several spectra, shelter, passing cars."""

from __future__ import annotations

import math
from dataclasses import dataclass
from enum import StrEnum

import numpy as np
import numpy.typing as npt
from numba import njit

from ridercda.physics.wind import log_profile

FloatArray = npt.NDArray[np.float64]


class GustKind(StrEnum):
    """What the gusts look like in the rider's time."""

    ORNSTEIN_UHLENBECK = "ornstein-uhlenbeck"  # spectrum falls with f^-2
    KAIMAL = "kaimal"  # falls with f^-5/3 over many decades
    BURSTS = "bursts"  # quiet spells and squalls: an Ornstein-Uhlenbeck process of changing strength


@dataclass(frozen=True, slots=True)
class GustSpec:
    """Gusts as the rider meets them, east and north independent.

    Parameters
    ----------
    sd : float
        Of each component. [m/s]
    time : float
        Correlation time (the integral time scale of the spectrum). [s]
    kind : GustKind
        Spectrum.
    """

    sd: float = 0.0
    time: float = 11.0
    kind: GustKind = GustKind.ORNSTEIN_UHLENBECK


@dataclass(frozen=True, slots=True)
class PassingCars:
    """Cars from behind that push the air along the road for a moment.

    Parameters
    ----------
    per_hour : float
        Mean number.
    push, push_sd : float
        Peak speed of the air they drag along, and its spread between cars. [m/s]
    decay : float
        Time in which the push dies down. [s]
    """

    per_hour: float = 60.0
    push: float = 2.5
    push_sd: float = 0.8
    decay: float = 2.5


@dataclass(frozen=True, slots=True)
class WeatherReport:
    """What the session says of the wind: a report of the day, not the wind at the rider.

    Parameters
    ----------
    speed_error : float
        Relative standard deviation of the reported speed against the truth.
    from_error : float
        Standard deviation of the reported direction. [rad]
    height, roughness : float
        The log profile the report hangs on. [m]
    """

    speed_error: float = 0.25
    from_error: float = math.radians(15)
    height: float = 10.0
    roughness: float = 0.03


@dataclass(frozen=True, slots=True)
class WindSpec:
    """Wind at the rider's height.

    Parameters
    ----------
    speed : float
        Mean of the day. [m/s]
    blows_from : float or None
        Direction of the day's mean, clockwise from north; None draws one. [rad]
    turn : float
        By how much the direction turns from the first minute to the last. [rad]
    growth : float
        By how much the speed grows from the first minute to the last. [m/s]
    slow_sd, slow_time : float
        Slow changes of each component on top (Ornstein-Uhlenbeck). [m/s, s]
    gusts : GustSpec
    shelter_variation : float
        Relative standard deviation, along the venue, of the share of the wind that reaches the rider.
    cars : PassingCars or None
    report : WeatherReport or None
    """

    speed: float = 1.5
    blows_from: float | None = None
    turn: float = math.radians(15)
    growth: float = 0.0
    slow_sd: float = 0.0
    slow_time: float = 1500.0
    gusts: GustSpec = GustSpec(0.5)
    shelter_variation: float = 0.0
    cars: PassingCars | None = None
    report: WeatherReport | None = None


CALM = WindSpec(speed=0.4, gusts=GustSpec(0.15))
WINDY = WindSpec(speed=1.5, gusts=GustSpec(0.5))
GUSTY = WindSpec(speed=3.0, gusts=GustSpec(1.0))
STILL = WindSpec(speed=0.0, turn=0.0, gusts=GustSpec(0.0))


@dataclass(frozen=True, slots=True, eq=False)
class WindSeries:
    """The wind through a day, one value per step of the integration.

    `east` and `north` are the velocity of the air (towards), mean and gusts together; `push` is the speed of
    air dragged along the road by cars or riders. Each shape (n,). [m/s]
    """

    east: FloatArray
    north: FloatArray
    push: FloatArray


def blow(spec: WindSpec, steps: int, step: float, duration: float, rng: np.random.Generator) -> WindSeries:
    """Return the wind of a day.

    Parameters
    ----------
    spec : WindSpec
    steps : int
        Number of values.
    step : float
        Between them. [s]
    duration : float
        Over which turn and growth happen. [s]
    rng : Generator
    """
    blows_from = spec.blows_from if spec.blows_from is not None else rng.uniform(0, 2 * math.pi)
    part = np.arange(steps) * (step / duration) - 0.5
    speed = np.maximum(spec.speed + spec.growth * part, 0.0)
    angle = blows_from + spec.turn * part
    east, north = -speed * np.sin(angle), -speed * np.cos(angle)
    for component in (east, north):
        if spec.slow_sd > 0:
            component += spec.slow_sd * ornstein_uhlenbeck(steps, step / spec.slow_time, rng)
        if spec.gusts.sd > 0:
            component += spec.gusts.sd * _unit_gusts(spec.gusts, steps, step, rng)
    push = _pushes(spec.cars, steps, step, rng) if spec.cars else np.zeros(steps)
    return WindSeries(east, north, push)


def shelter(spec: WindSpec, samples: int, length: float, rng: np.random.Generator) -> FloatArray:
    """Return the share of the wind that reaches the rider along a line; mean 1, shape (samples,). [1]"""
    if spec.shelter_variation == 0:
        return np.ones(samples)
    s = np.arange(samples) / samples
    waves = np.arange(1, max(2, round(length / 150.0)))  # hedges and gaps down to some 150 m
    weight = rng.normal(size=(2, len(waves))) / np.sqrt(waves)
    phase = 2 * np.pi * waves[:, None] * s
    raw = weight[0] @ np.cos(phase) + weight[1] @ np.sin(phase)
    share = np.clip(1 + spec.shelter_variation * raw / raw.std(), 0.05, None)
    return np.asarray(share / share.mean())


def reported_wind(
    spec: WindSpec, mean_east: float, mean_north: float, rng: np.random.Generator
) -> tuple[float, float]:
    """Return speed and direction (from) of the day's weather report, at its own height. [m/s, rad]"""
    report = spec.report or WeatherReport()
    speed = math.hypot(mean_east, mean_north) / float(log_profile(1.2, report.height, report.roughness))
    blows_from = math.atan2(-mean_east, -mean_north) + rng.normal(0, report.from_error)
    return max(0.0, speed * (1 + rng.normal(0, report.speed_error))), blows_from % (2 * math.pi)


def ornstein_uhlenbeck(steps: int, rate: float, rng: np.random.Generator) -> FloatArray:
    """Return a stationary Ornstein-Uhlenbeck series of unit variance; `rate` is step over time scale."""
    return _first_order(rng.standard_normal(steps), math.exp(-rate))


@njit(cache=True, nogil=True)
def _first_order(noise: FloatArray, keep: float) -> FloatArray:
    gain = math.sqrt(1.0 - keep * keep)
    out = np.empty_like(noise)
    value = noise[0]
    out[0] = value
    for i in range(1, len(noise)):
        value = keep * value + gain * noise[i]
        out[i] = value
    return out


def _unit_gusts(spec: GustSpec, steps: int, step: float, rng: np.random.Generator) -> FloatArray:
    if spec.kind is GustKind.KAIMAL:
        return _kaimal(spec.time, steps, step, rng)
    fast = ornstein_uhlenbeck(steps, step / spec.time, rng)
    if spec.kind is GustKind.BURSTS:
        strength = np.exp(0.6 * ornstein_uhlenbeck(steps, step / 120.0, rng))
        return np.asarray(fast * strength / math.exp(0.36))  # lognormal: mean square exp(2 * 0.36)
    return fast


def _kaimal(time: float, steps: int, step: float, rng: np.random.Generator) -> FloatArray:
    # S(f) = 4 T / (1 + 6 f T)^(5/3) in the rider's time: unit variance, and S(0)/4 = T is the integral scale
    # (Kaimal et al., Q. J. R. Meteorol. Soc. 98, 563-589, 1972, as IEC 61400-1 writes it; from memory).
    n = 1 << (steps - 1).bit_length()  # a power of two: quick, and longer than the day
    frequency = np.fft.rfftfreq(n, step)
    density = 4 * time / (1 + 6 * frequency * time) ** (5 / 3)
    amplitude = np.sqrt(density * n / (2 * step) / 2)
    spectrum = amplitude * (rng.standard_normal(len(frequency)) + 1j * rng.standard_normal(len(frequency)))
    return np.asarray(np.fft.irfft(spectrum, n)[:steps])


def _pushes(cars: PassingCars, steps: int, step: float, rng: np.random.Generator) -> FloatArray:
    push = np.zeros(steps)
    count = rng.poisson(cars.per_hour * steps * step / 3600.0)
    for start, peak in zip(
        rng.uniform(0, steps * step, count), rng.normal(cars.push, cars.push_sd, count), strict=True
    ):
        first = int(start / step)
        t = np.arange(min(round(8 * cars.decay / step), steps - first)) * step
        push[first : first + len(t)] += max(peak, 0.0) * (1 - np.exp(-t / 0.4)) * np.exp(-t / cars.decay)
    return push
