"""Many riders side by side over one course, in compiled blocks.

All rows of a block lie in one flat array: with rows a constant apart the compiler sees that they do not
overlap and works on several riders at a time (measured: 12 ns a step and rider, 44 ns without).
"""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt
from numba import njit

from ridercda.course.stepping import SLOWEST, capped, first_stage, later_stages, plain_drag, yaw_drag

FloatArray = npt.NDArray[np.float64]
IntArray = npt.NDArray[np.int64]

LANES = 64  # riders to a block: its rows stay in the first-level cache

# Rows of the table of riders, the same in a block. Areas are over the moving mass, DRIVE turns watts of the
# plan into twice the watts at the wheel over the moving mass; NORTH and EAST are where the wind comes from.
AREA, FALLBACK, SIT_SPEED, CRR, GRIP, DRIVE, NORTH, EAST, PER_MASS, WEIGHT, SHAPE, FALLBACK_SHAPE = range(12)
RIDER_ROWS = 12
# Rows a block has beyond them: the state, and what changes with the segment.
SPEED_SQUARED, SPEED, TIME, POWER, ROLL, HEAD, CROSS2 = range(12, 19)
BLOCK_ROWS = 19

# Columns of the table of segments.
SINE, COSINE, COS_HEADING, SIN_HEADING, SHELTER, DENSITY, CRR_FACTOR, SITS_UP = range(8)
SEGMENT_COLUMNS = 8

# Columns of the table of steps.
LENGTH, SEGMENT, LIMIT_START, LIMIT_END, KIND = range(5)
STEP_COLUMNS = 5
FREE, LIMITED, FROM_REST = 0.0, 1.0, 2.0

BEARING_STILL, BEARING_SPEED = 0.091, 0.0087  # [N], [N s m⁻¹] Martin et al. 1998, see physics.rolling


@njit(cache=True, nogil=True, error_model="numpy")
def enter_segment(
    block: FloatArray, segment: FloatArray, watts: FloatArray, plan_of: IntArray, index: int
) -> None:
    """Set what a block's riders meet on a segment."""
    climb, rolling = segment[SINE], segment[COSINE] * segment[CRR_FACTOR]
    cosine, sine = segment[COS_HEADING] * segment[SHELTER], segment[SIN_HEADING] * segment[SHELTER]
    for i in range(LANES):
        block[POWER * LANES + i] = watts[plan_of[i], index] * block[DRIVE * LANES + i]
    for i in range(LANES):
        north, east = block[NORTH * LANES + i], block[EAST * LANES + i]
        across = east * cosine - north * sine
        block[HEAD * LANES + i] = north * cosine + east * sine
        block[CROSS2 * LANES + i] = across * across
        block[ROLL * LANES + i] = (
            block[WEIGHT * LANES + i] * (climb + block[CRR * LANES + i] * rolling)
            + BEARING_STILL * block[PER_MASS * LANES + i]
        )


@njit(cache=True, nogil=True, error_model="numpy")
def _plain_step(block: FloatArray, step: FloatArray, density: float, sits_up: bool) -> None:
    """Take all riders of a block one step on, with plain drag areas."""
    h, limit, limit_end = step[LENGTH], step[LIMIT_START], step[LIMIT_END]
    limited = step[KIND] == LIMITED
    for i in range(LANES):
        y, v = block[SPEED_SQUARED * LANES + i], block[SPEED * LANES + i]
        power, grip = block[POWER * LANES + i], block[GRIP * LANES + i]
        roll, bearing = block[ROLL * LANES + i], BEARING_SPEED * block[PER_MASS * LANES + i]
        head, cross2 = block[HEAD * LANES + i], block[CROSS2 * LANES + i]
        up = sits_up or v < block[SIT_SPEED * LANES + i]
        area = density * (block[FALLBACK * LANES + i] if up else block[AREA * LANES + i])
        drag, drag_slope = plain_drag(v, head, cross2, area)
        k1, t1, gate, fall, y2 = first_stage(y, v, h, power, grip, drag, drag_slope, roll, bearing)
        v2 = math.sqrt(y2)
        drag2, _ = plain_drag(v2, head, cross2, area)
        y_end, time, _, _ = later_stages(y, v2, h, power, grip, drag2, roll, bearing, k1, t1, gate, fall)
        if limited:
            y_end, time = capped(y, v, y_end, time, h, limit, limit_end)
        stands = not y_end > SLOWEST
        y_end = SLOWEST if stands else y_end
        block[SPEED_SQUARED * LANES + i] = y_end
        block[SPEED * LANES + i] = math.sqrt(y_end)
        block[TIME * LANES + i] += math.inf if stands else time


@njit(cache=True, nogil=True, error_model="numpy")
def _yaw_step(block: FloatArray, step: FloatArray, density: float, sits_up: bool, tables: FloatArray) -> None:
    """Take all riders of a block one step on, with tables of the axial area over yaw."""
    h, limit, limit_end = step[LENGTH], step[LIMIT_START], step[LIMIT_END]
    limited = step[KIND] == LIMITED
    for i in range(LANES):
        y, v = block[SPEED_SQUARED * LANES + i], block[SPEED * LANES + i]
        power, grip = block[POWER * LANES + i], block[GRIP * LANES + i]
        roll, bearing = block[ROLL * LANES + i], BEARING_SPEED * block[PER_MASS * LANES + i]
        head, cross2 = block[HEAD * LANES + i], block[CROSS2 * LANES + i]
        up = sits_up or v < block[SIT_SPEED * LANES + i]
        area = density * (block[FALLBACK * LANES + i] if up else block[AREA * LANES + i])
        row = int(block[FALLBACK_SHAPE * LANES + i] if up else block[SHAPE * LANES + i])
        drag, drag_slope = yaw_drag(v, head, cross2, area, tables, row)
        k1, t1, gate, fall, y2 = first_stage(y, v, h, power, grip, drag, drag_slope, roll, bearing)
        v2 = math.sqrt(y2)
        drag2, _ = yaw_drag(v2, head, cross2, area, tables, row)
        y_end, time, _, _ = later_stages(y, v2, h, power, grip, drag2, roll, bearing, k1, t1, gate, fall)
        if limited:
            y_end, time = capped(y, v, y_end, time, h, limit, limit_end)
        stands = not y_end > SLOWEST
        y_end = SLOWEST if stands else y_end
        block[SPEED_SQUARED * LANES + i] = y_end
        block[SPEED * LANES + i] = math.sqrt(y_end)
        block[TIME * LANES + i] += math.inf if stands else time


@njit(cache=True, nogil=True, error_model="numpy")
def _from_rest(block: FloatArray, step: FloatArray, density: float) -> None:
    """Take all riders of a block off the line: the push is the grip's until power over speed is less."""
    h = step[LENGTH]
    for i in range(LANES):
        head = block[HEAD * LANES + i]
        air = math.sqrt(head * head + block[CROSS2 * LANES + i])
        push = block[GRIP * LANES + i] if block[POWER * LANES + i] > 0.0 else 0.0
        y_end = h * (push - density * block[FALLBACK * LANES + i] * air * head - block[ROLL * LANES + i])
        stands = not y_end > SLOWEST
        y_end = SLOWEST if stands else y_end
        block[SPEED_SQUARED * LANES + i] = y_end
        block[SPEED * LANES + i] = math.sqrt(y_end)
        block[TIME * LANES + i] += math.inf if stands else 2.0 * h / math.sqrt(y_end)


@njit(cache=True, nogil=True, error_model="numpy")
def race_block(
    riders: FloatArray,
    plan_of: IntArray,
    watts: FloatArray,
    segments: FloatArray,
    tables: FloatArray,
    steps: FloatArray,
    start_speed: float,
    marks: IntArray,
    times: FloatArray,
) -> None:
    """Race up to `LANES` riders over the course.

    Parameters
    ----------
    riders : ndarray, shape (RIDER_ROWS, n)
        1 to `LANES` riders; see the names of the rows.
    plan_of : ndarray, shape (n,)
        Row of `watts` each rider follows.
    watts : ndarray, shape (plans, segments)
        Power plans. [W]
    segments : ndarray, shape (segments, SEGMENT_COLUMNS)
        What the course is.
    tables : ndarray, shape (tables, YAW_POINTS)
        Axial area over yaw, relative to AREA; no rows where every rider has a plain drag area.
    steps : ndarray, shape (steps, STEP_COLUMNS)
        How it is cut.
    start_speed : float
        At the start; 0 from rest. [m s⁻¹]
    marks : ndarray, shape (steps,)
        Column of `times` for the time at the end of a step, -1 for none.
    times : ndarray, shape (n, marks)
        Filled. Infinite once a rider stands. [s]
    """
    n = riders.shape[1]
    block = np.empty(BLOCK_ROWS * LANES)
    plans = np.empty(LANES, dtype=np.int64)
    for i in range(LANES):
        source = i if i < n else n - 1
        plans[i] = plan_of[source]
        for row in range(RIDER_ROWS):
            block[row * LANES + i] = riders[row, source]
        block[SPEED_SQUARED * LANES + i] = start_speed * start_speed
        block[SPEED * LANES + i] = start_speed
        block[TIME * LANES + i] = 0.0
    at = -1
    for k in range(steps.shape[0]):
        index = int(steps[k, SEGMENT])
        density, sits_up = segments[index, DENSITY], segments[index, SITS_UP] > 0.0
        if index != at:
            enter_segment(block, segments[index], watts, plans, index)
            at = index
        if steps[k, KIND] == FROM_REST:
            _from_rest(block, steps[k], density)
        elif tables.shape[0] > 0:
            _yaw_step(block, steps[k], density, sits_up, tables)
        else:
            _plain_step(block, steps[k], density, sits_up)
        if marks[k] >= 0:
            for i in range(n):
                times[i, marks[k]] = block[TIME * LANES + i]
