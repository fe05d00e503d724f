"""One step of the race simulation: kinetic energy against distance, compiled into the loops that use it.

The state is y = v² [m² s⁻²]. Within a step everything about the course is constant, so

    dy/dx = a_p/v - drag(v) - a_r - a_b·v,    dt/dx = 1/v

with the coefficients divided by half the moving mass. Power over speed makes a slow climb stiff (it relaxes
within 7 m at 3 m/s) while a flat wants steps of 100 m, hence a linearly implicit method: ROS3 of A. Sandu et
al., "Benchmarking stiff ODE solvers for atmospheric chemistry problems II: Rosenbrock solvers," Atmospheric
Environment 31, 3459-3472, 1997, doi:10.1016/S1352-2310(97)83212-8 (third order, L-stable, two evaluations a
step; coefficients from memory, their order is a test). Time rides along as a second, non-stiff component.

Everything here is inlined at compile time: only then does the compiler work on several riders at a time.
"""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt
from numba import njit

FloatArray = npt.NDArray[np.float64]

GAMMA = 0.43586652150845899941601945119356
C21 = -1.0156171083877702091975600115545
C31, C32 = 4.0759956452537699824805835358067, 9.2076794298330791242156818474003
M2, M3 = 6.1697947043828245592553615689730, -0.42772256543218573326238373806514
E1, E2, E3 = 0.5, -2.9079558716805469821718236208017, 0.22354069897811569627360909276199

SLOWEST = 1e-3  # [m² s⁻²] below this a rider stands
STILL = 1e-12  # [m² s⁻²] keeps the air speed from zero where it is divided by

YAW_POINTS = 1025  # of a yaw table, see `yaw_shape`


def yaw_position(yaw: npt.ArrayLike) -> FloatArray:
    """Return where a yaw angle stands in a yaw table: 1 - cos/(|cos| + sin), 0 from ahead to 2 from behind.

    Parameters
    ----------
    yaw : array_like, shape (...)
        Magnitude of the yaw, 0 to π. [rad]

    Notes
    -----
    It grows with the angle, takes one division and no arc tangent, and is smooth but for a kink in its
    second derivative at 90°.
    """
    angle = np.asarray(yaw, float)
    cosine, sine = np.cos(angle), np.sin(angle)
    return np.asarray(1.0 - cosine / (np.abs(cosine) + sine))


def yaw_at(position: npt.ArrayLike) -> FloatArray:
    """Return the yaw angle at a place in a yaw table; the inverse of `yaw_position`. [rad]

    Parameters
    ----------
    position : array_like, shape (...)
        0 to 2.
    """
    share = 1.0 - np.asarray(position, float)  # cos/(|cos| + sin)
    return np.asarray(np.arctan2(1.0 - np.abs(share), share))


@njit(cache=True, nogil=True, error_model="numpy", inline="always")
def plain_drag(v: float, head: float, cross2: float, area: float) -> tuple[float, float]:
    """Return the drag of a plain CdA, area·V·u, and its derivative by v."""
    along = v + head
    air2 = along * along + cross2 + STILL
    air = math.sqrt(air2)
    return area * air * along, area * (along * along + air2) / air


@njit(cache=True, nogil=True, error_model="numpy", inline="always")
def yaw_drag(
    v: float, head: float, cross2: float, area: float, tables: FloatArray, row: int
) -> tuple[float, float]:
    """Return the drag of a yaw table, area·C(yaw)·V², and its derivative by v."""
    along = v + head
    air2 = along * along + cross2 + STILL
    across = math.sqrt(cross2)
    whole = abs(along) + across + 1e-9
    position = (1.0 - along / whole) * (0.5 * (YAW_POINTS - 1))
    cell = int(position)
    cell = cell if cell < YAW_POINTS - 2 else YAW_POINTS - 2
    here = tables[row, cell]
    rise = tables[row, cell + 1] - here
    shape = here + rise * (position - cell)
    turn = -rise * (0.5 * (YAW_POINTS - 1)) * across / (whole * whole)
    return area * shape * air2, area * (2.0 * shape * along + turn * air2)


@njit(cache=True, nogil=True, error_model="numpy", inline="always")
def first_stage(
    y: float,
    v: float,
    h: float,
    power: float,
    grip: float,
    drag: float,
    drag_slope: float,
    roll: float,
    bearing: float,
) -> tuple[float, float, float, float, float]:
    """Return the increments of y and t, 1/(1/(hγ) - J), the derivative of 1/v by y, and y of the next stage.

    Where the grip of a start and not the power limits the push, the push does not depend on the speed.
    """
    slowness = 1.0 / v
    push = power * slowness
    gripped = push > grip
    force = (grip if gripped else push) - drag - roll - bearing * v
    slope = -0.5 * slowness * ((0.0 if gripped else push * slowness) + drag_slope + bearing)
    gate = GAMMA * h / (1.0 - GAMMA * h * slope)
    fall = -0.5 * slowness * slowness * slowness
    k1 = force * gate
    y2 = y + k1
    return k1, GAMMA * h * (slowness + fall * k1), gate, fall, (y2 if y2 > SLOWEST else SLOWEST)


@njit(cache=True, nogil=True, error_model="numpy", inline="always")
def later_stages(
    y: float,
    v2: float,
    h: float,
    power: float,
    grip: float,
    drag: float,
    roll: float,
    bearing: float,
    k1: float,
    t1: float,
    gate: float,
    fall: float,
) -> tuple[float, float, float, float]:
    """Return y at the end, the time taken, and the method's own estimate of the error of both."""
    per_h = 1.0 / h
    slowness = 1.0 / v2
    push = power * slowness
    force = (push if push < grip else grip) - drag - roll - bearing * v2
    k2 = (force + C21 * per_h * k1) * gate
    k3 = (force + per_h * (C31 * k1 + C32 * k2)) * gate
    t2 = GAMMA * h * (slowness + C21 * per_h * t1 + fall * k2)
    t3 = GAMMA * h * (slowness + per_h * (C31 * t1 + C32 * t2) + fall * k3)
    return (
        y + k1 + M2 * k2 + M3 * k3,
        t1 + M2 * t2 + M3 * t3,
        E1 * k1 + E2 * k2 + E3 * k3,
        E1 * t1 + E2 * t2 + E3 * t3,
    )


@njit(cache=True, nogil=True, error_model="numpy", inline="always")
def capped(
    y: float, v: float, y_end: float, time: float, h: float, limit: float, limit_end: float
) -> tuple[float, float]:
    """Return y at the end and the time of a step that must stay below a limit, itself a straight line in y.

    Up to where the free course meets the limit the rider is free, then on the limit; on both parts y is taken
    as a straight line, for which the time 2h/(v + v_end) is exact.
    """
    room = limit - y
    room = room if room > 0.0 else 0.0
    over = y_end - limit_end
    share = room / (room + over + 1e-30)
    y_meet = y + share * (y_end - y)
    y_meet = y_meet if y_meet > SLOWEST else SLOWEST
    v_meet = math.sqrt(y_meet)
    held = 2.0 * h * (share / (v + v_meet) + (1.0 - share) / (v_meet + math.sqrt(limit_end)))
    binds = over > 0.0
    return (limit_end if binds else y_end), (held if binds else time)
