"""Racing on a track: riders lean through the bends, their mass takes a shorter way than their wheels.

The state is e, twice the mechanical energy over the moving mass [m² s⁻²]; on a straight it is the square of the
wheel speed. In a bend of curvature κ the mass leans in by h·sin(λ) and comes down by h·(1 - cos(λ)), so

    e = v_w²·(m·c² + I/r²)/m_e - 2·(m/m_e)·g·h·(1 - cos λ),   c = 1 - h·κ·sin λ,   v_w² = g·tan(λ)/(κ·c)

which is explicit in tan(λ) and solved for it by Newton's method. Entering a bend keeps e: the wheels speed up.
Translation and air act at the mass (c·v_w), rolling, bearings and the watch at the wheels.
"""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt
from numba import njit

from ridercda.course.blocks import (
    AREA,
    BEARING_SPEED,
    BEARING_STILL,
    CRR,
    CRR_FACTOR,
    DENSITY,
    DRIVE,
    GRIP,
    KIND,
    LENGTH,
    PER_MASS,
    SEGMENT,
    STEP_COLUMNS,
    WEIGHT,
)
from ridercda.course.stepping import SLOWEST

FloatArray = npt.NDArray[np.float64]
IntArray = npt.NDArray[np.int64]

FIRST_STEP, GROWTH = 0.1, 1.08  # off the line [m], and from step to step while it is below the stretch's


def cut_track(lengths: FloatArray, start_speed: float) -> FloatArray:
    """Return the steps of a track event: one to a stretch, shorter ones off the line.

    Parameters
    ----------
    lengths : ndarray, shape (n,)
        Of the stretches, short beside the 150 m over which a rider's speed relaxes. [m]
    start_speed : float
        0 from rest. [m s⁻¹]

    Returns
    -------
    ndarray, shape (k, STEP_COLUMNS)
    """
    rows: list[tuple[float, int]] = []
    longest = math.inf if start_speed > 0 else FIRST_STEP
    for index, length in enumerate(lengths.tolist()):
        left = length
        while left > 1e-9:
            h = left if left <= 1.5 * longest else longest
            rows.append((h, index))
            left -= h
            longest *= GROWTH
    steps = np.zeros((len(rows), STEP_COLUMNS))
    steps[:, LENGTH], steps[:, SEGMENT] = np.array(rows).T
    steps[:, KIND] = 0.0
    return steps


@njit(cache=True, nogil=True, error_model="numpy", inline="always")
def _wheel_speed(
    energy: float, curvature: float, tangent: float, share: float, gravity: float, height: float
) -> tuple[float, float]:
    """Return the wheel speed at an energy, and the tangent of the lean, from a guess of it."""
    if curvature <= 0.0:
        return math.sqrt(max(energy, SLOWEST)), 0.0
    t = tangent if tangent > 0.0 else max(energy, SLOWEST) * curvature / gravity
    for _ in range(30):
        secant = math.sqrt(1.0 + t * t)
        sine = t / secant
        c = 1.0 - height * curvature * sine
        dc = -height * curvature / (secant * secant * secant)
        speed2 = gravity * t / (curvature * c)
        dspeed2 = gravity / (curvature * c) * (1.0 - t * dc / c)
        inertia = share * c * c + (1.0 - share)
        miss = speed2 * inertia - 2.0 * share * gravity * height * (1.0 - 1.0 / secant) - energy
        slope = (
            dspeed2 * inertia
            + speed2 * 2.0 * share * c * dc
            - 2.0 * share * gravity * height * sine / (secant * secant)
        )
        change = miss / slope
        following = t - change
        t = following if following > 0.5 * t else 0.5 * t
        if abs(change) < 1e-10 * t:
            break
    c = 1.0 - height * curvature * t / math.sqrt(1.0 + t * t)
    return math.sqrt(gravity * t / (curvature * c)), t


@njit(cache=True, nogil=True, error_model="numpy", inline="always")
def _push(
    v: float,
    tangent: float,
    curvature: float,
    power: float,
    grip: float,
    area: float,
    rolling: float,
    still: float,
    bearing: float,
    height: float,
) -> float:
    """Return de/dx: all forces along the wheels' way over half the moving mass."""
    secant = math.sqrt(1.0 + tangent * tangent)
    c = 1.0 - height * curvature * tangent / secant
    drag = area * c * c * c * v * v
    return min(power / v, grip) - drag - rolling * secant - still - bearing * v


@njit(cache=True, nogil=True, error_model="numpy")
def race_track(
    riders: FloatArray,
    plan_of: IntArray,
    watts: FloatArray,
    segments: FloatArray,
    curvature: FloatArray,
    steps: FloatArray,
    start_speed: float,
    gravity: float,
    height: float,
    marks: IntArray,
    times: FloatArray,
    record: FloatArray,
) -> None:
    """Race riders round a track, each by the midpoint rule.

    Parameters
    ----------
    riders, plan_of, watts, segments, steps, start_speed, marks, times
        As in `blocks.race_block`, for any number of riders. Slope, wind, limits and yaw are passed over.
    curvature : ndarray, shape (segments,)
        Of the wheels' way. [m⁻¹]
    gravity, height : float
        Local gravity [m s⁻²], and the height of the mass above the ground [m].
    record : ndarray, shape (steps, 2) or (0, 2)
        Filled with wheel speed [m s⁻¹] and time [s] at the end of each step for the last rider.
    """
    for i in range(riders.shape[1]):
        share = riders[WEIGHT, i] / (2.0 * gravity)  # mass over moving mass
        still, bearing = BEARING_STILL * riders[PER_MASS, i], BEARING_SPEED * riders[PER_MASS, i]
        grip = riders[GRIP, i]
        energy, time, t = start_speed * start_speed, 0.0, 0.0
        v = start_speed
        for k in range(steps.shape[0]):
            index = int(steps[k, SEGMENT])
            h = steps[k, LENGTH]
            bend = curvature[index]
            power = watts[plan_of[i], index] * riders[DRIVE, i]
            area = segments[index, DENSITY] * riders[AREA, i]
            rolling = riders[WEIGHT, i] * riders[CRR, i] * segments[index, CRR_FACTOR]
            if energy == 0.0:
                energy = h * (grip - rolling - still)
                v, t = _wheel_speed(energy, bend, 0.0, share, gravity, height)
                time += 2.0 * h / v
            else:
                v, t = _wheel_speed(energy, bend, t, share, gravity, height)
                rate = _push(v, t, bend, power, grip, area, rolling, still, bearing, height)
                middle = max(energy + 0.5 * h * rate, SLOWEST)
                v_middle, t_middle = _wheel_speed(middle, bend, t, share, gravity, height)
                rate = _push(v_middle, t_middle, bend, power, grip, area, rolling, still, bearing, height)
                energy += h * rate
                stands = not energy > SLOWEST
                energy = SLOWEST if stands else energy
                v_end, t = _wheel_speed(energy, bend, t_middle, share, gravity, height)
                time += math.inf if stands else h * (1.0 / v + 4.0 / v_middle + 1.0 / v_end) / 6.0
                v = v_end
            if marks[k] >= 0:
                times[i, marks[k]] = time
            if record.shape[0] > 0:
                record[k, 0], record[k, 1] = v, time
