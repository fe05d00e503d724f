"""How a course is cut into steps: by riding it once with the step length under error control.

All riders of a study then take the same steps, so what the method leaves of error is common to them and
drops out of the seconds between two setups.
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
    COS_HEADING,
    COSINE,
    CRR,
    CRR_FACTOR,
    DENSITY,
    DRIVE,
    EAST,
    FALLBACK,
    FALLBACK_SHAPE,
    FREE,
    FROM_REST,
    GRIP,
    KIND,
    LENGTH,
    LIMIT_END,
    LIMIT_START,
    LIMITED,
    NORTH,
    PER_MASS,
    SEGMENT,
    SHAPE,
    SHELTER,
    SIN_HEADING,
    SINE,
    SIT_SPEED,
    SITS_UP,
    STEP_COLUMNS,
    WEIGHT,
)
from ridercda.course.stepping import SLOWEST, capped, first_stage, later_stages, plain_drag, yaw_drag

FloatArray = npt.NDArray[np.float64]

LONGEST_STEP = 250.0  # [m]
FIRST_STEP = 0.2  # off the line [m]
BRAKING_STEP = 5.0  # [m]
HOLDING_STEP = 25.0  # along a steady limit [m]
NEAR_LIMIT = 1.7  # a limit counts where v² may grow to it by this factor: riders 30 % faster are still caught

# Columns of the record of the ride: at the end of each step.
POSITION, SPEED_SQUARED, SECONDS, HELD_BACK = range(4)
RECORD_COLUMNS = 4


@njit(cache=True, nogil=True, error_model="numpy")
def limits_at_ends(lengths: FloatArray, caps: FloatArray, braking: float) -> FloatArray:
    """Return the limit of v² at the end of each segment, from where a rider can still brake for what follows.

    Parameters
    ----------
    lengths : ndarray, shape (n,)
        Of the segments. [m]
    caps : ndarray, shape (n,)
        Limit of v² on each segment, infinite for none. [m² s⁻²]
    braking : float
        Deceleration. [m s⁻²]
    """
    ends = np.empty(lengths.size)
    following = math.inf
    for i in range(lengths.size - 1, -1, -1):
        ends[i] = min(caps[i], following)
        following = min(caps[i], ends[i] + 2.0 * braking * lengths[i])
    return ends


@njit(cache=True, nogil=True, error_model="numpy")
def cut_course(
    rider: FloatArray,
    watts: FloatArray,
    segments: FloatArray,
    tables: FloatArray,
    lengths: FloatArray,
    caps: FloatArray,
    braking: float,
    start_speed: float,
    tolerance: float,
) -> tuple[FloatArray, FloatArray]:
    """Ride a course once and return the steps taken and the record of the ride.

    Parameters
    ----------
    rider : ndarray, shape (RIDER_ROWS,)
        One column of the table of riders.
    watts : ndarray, shape (n,)
        The power plan. [W]
    segments : ndarray, shape (n, SEGMENT_COLUMNS)
        What the course is.
    tables : ndarray, shape (tables, YAW_POINTS)
        No rows where the rider has a plain drag area.
    lengths, caps : ndarray, shape (n,)
        Of the segments [m], and the limit of v² on each [m² s⁻²].
    braking : float
        Deceleration. [m s⁻²]
    start_speed : float
        0 from rest. [m s⁻¹]
    tolerance : float
        Of the method's own estimate of the error of time, relative, step by step.

    Returns
    -------
    steps : ndarray, shape (k, STEP_COLUMNS)
    record : ndarray, shape (k, RECORD_COLUMNS)
        Position [m], v² [m² s⁻²], time [s] at the end of each step, and the push over half the moving mass
        that the rider held back or braked away, meaned over the step [m s⁻²]. Time is infinite from where
        the rider stands.
    """
    room = 1024
    steps = np.empty((room, STEP_COLUMNS))
    record = np.empty((room, RECORD_COLUMNS))
    ends = limits_at_ends(lengths, caps, braking)
    k = 0
    y, time, position = start_speed * start_speed, 0.0, 0.0
    wanted = LONGEST_STEP
    for i in range(lengths.size):
        shelter = segments[i, SHELTER]
        cosine, sine = segments[i, COS_HEADING] * shelter, segments[i, SIN_HEADING] * shelter
        head = rider[NORTH] * cosine + rider[EAST] * sine
        across = rider[EAST] * cosine - rider[NORTH] * sine
        cross2 = across * across
        bearing = BEARING_SPEED * rider[PER_MASS]
        roll = (
            rider[WEIGHT] * (segments[i, SINE] + rider[CRR] * segments[i, COSINE] * segments[i, CRR_FACTOR])
            + BEARING_STILL * rider[PER_MASS]
        )
        power = watts[i] * rider[DRIVE]
        kink = lengths[i] - (caps[i] - ends[i]) / (2.0 * braking)  # from here on the limit falls
        x = 0.0
        while x < lengths[i]:
            goal = kink if x < kink < lengths[i] else lengths[i]
            v = math.sqrt(y)
            up = segments[i, SITS_UP] > 0.0 or v < rider[SIT_SPEED]
            area = segments[i, DENSITY] * (rider[FALLBACK] if up else rider[AREA])
            row = int(rider[FALLBACK_SHAPE] if up else rider[SHAPE])
            limit = min(caps[i], ends[i] + 2.0 * braking * (lengths[i] - x))
            if y == 0.0:
                h = min(FIRST_STEP, goal - x)
                air = math.sqrt(head * head + cross2)
                push = rider[GRIP] if power > 0.0 else 0.0
                y_end = h * (push - segments[i, DENSITY] * rider[FALLBACK] * air * head - roll)
                seconds = 2.0 * h / math.sqrt(max(y_end, SLOWEST))
                kind, held, wanted, limit_end = FROM_REST, 0.0, h, math.inf
            else:
                near = min(limit, ends[i] + 2.0 * braking * (lengths[i] - goal)) <= NEAR_LIMIT * y
                if near:
                    wanted = min(wanted, BRAKING_STEP if x >= kink or y < 0.98 * limit else HOLDING_STEP)
                while True:
                    h = (goal - x) / math.ceil((goal - x) / wanted)
                    if tables.shape[0] > 0:
                        drag, drag_slope = yaw_drag(v, head, cross2, area, tables, row)
                    else:
                        drag, drag_slope = plain_drag(v, head, cross2, area)
                    k1, t1, gate, fall, y2 = first_stage(
                        y, v, h, power, rider[GRIP], drag, drag_slope, roll, bearing
                    )
                    v2 = math.sqrt(y2)
                    if tables.shape[0] > 0:
                        drag2, _ = yaw_drag(v2, head, cross2, area, tables, row)
                    else:
                        drag2, _ = plain_drag(v2, head, cross2, area)
                    y_free, seconds, y_error, t_error = later_stages(
                        y, v2, h, power, rider[GRIP], drag2, roll, bearing, k1, t1, gate, fall
                    )
                    # An error of y lives on over the length in which the speed relaxes, at most some 150 m.
                    error = abs(t_error) / seconds + abs(y_error) / (2.0 * y) * min(1.0, h / 150.0)
                    grown = 0.8 * (tolerance / (error + 1e-30)) ** (1.0 / 3.0)
                    if error <= tolerance or h < 1e-3 or not y_free > SLOWEST:
                        break
                    wanted = h * max(0.2, min(grown, 0.8))
                limit_end = min(caps[i], ends[i] + 2.0 * braking * max(lengths[i] - x - h, 0.0))
                y_end, seconds = capped(y, v, y_free, seconds, h, limit, limit_end)
                held = max(0.0, y_free - y_end) / h
                kind = LIMITED if near or y_free > limit_end else FREE
                wanted = min(max(wanted, h) * max(0.3, min(grown, 2.0)), LONGEST_STEP)
            if k == room:
                room *= 2
                more_steps, more_record = np.empty((room, STEP_COLUMNS)), np.empty((room, RECORD_COLUMNS))
                more_steps[:k], more_record[:k] = steps, record
                steps, record = more_steps, more_record
            stands = not y_end > SLOWEST
            y = SLOWEST if stands else y_end
            time += math.inf if stands else seconds
            x = goal if goal - x - h < 1e-9 * lengths[i] else x + h
            steps[k, LENGTH], steps[k, SEGMENT], steps[k, KIND] = h, i, kind
            steps[k, LIMIT_START], steps[k, LIMIT_END] = limit, limit_end
            record[k, POSITION], record[k, SPEED_SQUARED] = position + x, y
            record[k, SECONDS], record[k, HELD_BACK] = time, held
            k += 1
            if stands:  # the rest would take no end of steps
                return steps[:k].copy(), record[:k].copy()
        position += lengths[i]
    return steps[:k].copy(), record[:k].copy()
