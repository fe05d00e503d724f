"""Riders to invent: how power or speed is held, and how drag area varies between and within runs."""

from __future__ import annotations

import math
from dataclasses import dataclass
from enum import StrEnum

import numpy as np
import numpy.typing as npt

from ridercda.synthetic.wind import ornstein_uhlenbeck

FloatArray = npt.NDArray[np.float64]


class Holds(StrEnum):
    """What the rider keeps an eye on."""

    POWER = "power"
    SPEED = "speed"


class Spread(StrEnum):
    """How drag area is spread over runs."""

    NORMAL = "normal"
    STUDENT_3 = "student-3"  # heavy tails, scaled to the same standard deviation


@dataclass(frozen=True, slots=True)
class RiderSpec:
    """How the rider rides and sits.

    Parameters
    ----------
    mass : float
        With kit. [kg]
    holds : Holds
    wobble, wobble_time : float
        Relative standard deviation and time scale of power about the target. [1, s]
    grade_response : float
        Relative rise of power per unit of grade: 2 means 2 % more on a 1 % climb.
    response_time : float
        Time in which power follows a new target. [s]
    run_spread : float
        Relative standard deviation of drag area between runs.
    run_spread_kind : Spread
    within_run, within_run_time : float
        The same within a run, and how fast it changes. [1, s]
    drift_per_hour : float
        Relative change of the drag area of every setup per hour; zero at the middle of the day.
    effort_slope : float
        Relative change of drag area per 100 W above `effort_reference`.
    effort_reference : float
        [W]
    speed_slope : float
        Change of ln(drag area) per ln(speed), about `speed_reference`.
    speed_reference : float
        [m/s]
    yaw_square : float
        CxA = CdA cos(yaw) (1 + yaw_square * yaw^2): negative for a sail effect. [1/rad^2]
    """

    mass: float = 75.5
    holds: Holds = Holds.POWER
    wobble: float = 0.04
    wobble_time: float = 5.0
    grade_response: float = 0.0
    response_time: float = 1.0
    run_spread: float = 0.005
    run_spread_kind: Spread = Spread.NORMAL
    within_run: float = 0.0
    within_run_time: float = 40.0
    drift_per_hour: float = 0.0
    effort_slope: float = 0.0
    effort_reference: float = 220.0
    speed_slope: float = 0.0
    speed_reference: float = 10.0
    yaw_square: float = 0.0


def run_factors(spec: RiderSpec, runs: int, rng: np.random.Generator) -> FloatArray:
    """Return what each run's drag area is multiplied with; shape (runs,). [1]"""
    if spec.run_spread_kind is Spread.STUDENT_3:
        deviation = rng.standard_t(3, runs) / math.sqrt(3.0)
    else:
        deviation = rng.standard_normal(runs)
    return np.asarray(1 + spec.run_spread * deviation)


def power_factors(spec: RiderSpec, steps: int, step: float, rng: np.random.Generator) -> FloatArray:
    """Return the wobble of power about the target; shape (steps,). [1]"""
    if spec.wobble == 0:
        return np.ones(steps)
    return np.asarray(1 + spec.wobble * ornstein_uhlenbeck(steps, step / spec.wobble_time, rng))


def drag_factors(
    spec: RiderSpec, steps: int, step: float, middle: float, rng: np.random.Generator
) -> FloatArray:
    """Return drift and restlessness of drag area through the day; shape (steps,). [1]

    `middle` is when the drift is zero. [s]
    """
    factor = 1 + spec.drift_per_hour * (np.arange(steps) * step - middle) / 3600.0
    if spec.within_run > 0:
        factor *= 1 + spec.within_run * ornstein_uhlenbeck(steps, step / spec.within_run_time, rng)
    return np.asarray(factor)
