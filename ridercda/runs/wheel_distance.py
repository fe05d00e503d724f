"""Distance ridden, record by record, from the wheel; from speed or position where there is no distance."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum

import numpy as np
import numpy.typing as npt

from ridercda.rides.ride import FaultKind, Ride

FloatArray = npt.NDArray[np.float64]

FASTEST = 40.0  # [m/s] no rider is faster on the level; beyond it a step of distance is a fault
LONG_INTERVAL = 5.0  # [s] a speed is not held over a longer silence without doubt


class DistanceSource(StrEnum):
    """What a ride's distance was made from."""

    WHEEL = "distance"
    SPEED = "speed"
    POSITION = "position"
    NONE = "none"


@dataclass(frozen=True, slots=True, eq=False)
class WheelDistance:
    """Distance ridden since a ride's first record.

    Parameters
    ----------
    distance : ndarray, shape (n,)
        Never falling. [m]
    doubt : ndarray, shape (n,)
        Standard deviation of the step that ends at each record, beyond that of a good sensor. [m]
    source : DistanceSource
        Where it came from; NONE: the ride has neither distance, speed nor position, and distance is zero.
    """

    distance: FloatArray
    doubt: FloatArray
    source: DistanceSource


def wheel_distance(ride: Ride, east: FloatArray, north: FloatArray) -> WheelDistance:
    """Return the distance ridden up to each record.

    Parameters
    ----------
    ride : Ride
        Its time strictly increases.
    east, north : ndarray, shape (n,)
        Position on a local plane, spikes removed; NaN where unknown. [m]

    Returns
    -------
    WheelDistance

    Notes
    -----
    The distance channel is preferred to the sum of speeds because nothing is lost in it between records;
    steps that are missing, negative or impossibly long are filled from speed. Where the wheel stands still
    while the position moves on (a sensor that fell silent), the position's own steps are taken.
    """
    n = ride.time.size
    dt = np.diff(ride.time, prepend=ride.time[:1])
    speed_steps, speed_doubt = _steps_from_speed(ride, dt)
    position_steps = _steps_from_position(ride.time, east, north)
    doubt = np.zeros(n)
    if ride.has("distance"):
        steps, doubt = _steps_from_distance(ride, dt, speed_steps, position_steps)
        source = DistanceSource.WHEEL
    elif ride.has("speed"):
        steps, doubt = speed_steps, speed_doubt
        source = DistanceSource.SPEED
    elif position_steps is not None:
        steps = position_steps
        source = DistanceSource.POSITION
    else:
        return WheelDistance(np.zeros(n), doubt, DistanceSource.NONE)
    if source is not DistanceSource.POSITION and position_steps is not None:
        stalled = _stalled(ride.time, steps, position_steps)
        steps = np.where(stalled, position_steps, steps)
        doubt = np.where(stalled, np.maximum(doubt, 1.0), doubt)
    if any(fault.kind is FaultKind.SPEED_FROM_GPS for fault in ride.faults):
        source = DistanceSource.POSITION
    return WheelDistance(np.cumsum(steps), doubt, source)


def _steps_from_speed(ride: Ride, dt: FloatArray) -> tuple[FloatArray, FloatArray]:
    speed = ride.channels.get("speed")
    if speed is None or not np.isfinite(speed).any():
        return np.zeros(dt.size), np.zeros(dt.size)
    good = np.isfinite(speed) & (speed >= 0) & (speed < FASTEST)
    if not good.any():
        return np.zeros(dt.size), np.zeros(dt.size)
    filled = np.interp(ride.time, ride.time[good], speed[good])
    before = np.concatenate((filled[:1], filled[:-1]))
    # A recorded speed is the mean of at most the last second or so: a longer interval saw both of its ends.
    steps = dt * np.where(dt > 2.0, 0.5 * (before + filled), filled)
    doubt = np.where(good & (dt <= LONG_INTERVAL), 0.0, 0.2 * steps)
    return steps, doubt


def _steps_from_distance(
    ride: Ride, dt: FloatArray, speed_steps: FloatArray, position_steps: FloatArray | None
) -> tuple[FloatArray, FloatArray]:
    recorded = ride.channels["distance"]
    known = np.flatnonzero(np.isfinite(recorded))
    steps = np.zeros(dt.size)
    doubt = np.zeros(dt.size)
    rise = np.diff(recorded[known])
    span = np.diff(ride.time[known])
    bad = (rise < 0) | (rise > FASTEST * np.maximum(span, 1.0))
    # Between known records the known rise is shared out like speed, else like time.
    shape = speed_steps if speed_steps.any() else dt
    total = np.cumsum(shape)
    inside = total[known[1:]] - total[known[:-1]]
    owner = np.searchsorted(known, np.arange(dt.size), side="left") - 1  # interval of known records
    within = (owner >= 0) & (owner < rise.size)
    k = owner[within]
    flat = inside[k] <= 0
    share = np.where(
        flat, dt[within] / np.maximum(span[k], 1e-9), shape[within] / np.where(flat, 1.0, inside[k])
    )
    substitute = position_steps if position_steps is not None and not speed_steps.any() else speed_steps
    steps[within] = np.where(bad[k], substitute[within], share * rise[k])
    doubt[within] = np.where(bad[k], 0.2 * substitute[within] + 1.0, 0.0)
    outside = ~within
    steps[outside] = speed_steps[outside]
    steps[0] = 0.0
    return steps, doubt


def _steps_from_position(time: FloatArray, east: FloatArray, north: FloatArray) -> FloatArray | None:
    good = np.isfinite(east) & np.isfinite(north)
    if good.sum() < 3:
        return None
    x = np.interp(time, time[good], east[good])
    y = np.interp(time, time[good], north[good])
    # Steps over four records: noise of single fixes would lengthen the path.
    half = min(2, (time.size - 1) // 2)
    if half == 0:
        return np.hypot(np.diff(x, prepend=x[:1]), np.diff(y, prepend=y[:1]))
    index = np.arange(time.size)
    after, before = np.minimum(index + half, time.size - 1), np.maximum(index - half, 0)
    speed = np.hypot(x[after] - x[before], y[after] - y[before]) / np.maximum(
        time[after] - time[before], 1e-9
    )
    dt = np.diff(time, prepend=time[:1])
    return np.asarray(0.5 * (speed + np.concatenate((speed[:1], speed[:-1]))) * dt)


def _stalled(time: FloatArray, steps: FloatArray, position_steps: FloatArray) -> npt.NDArray[np.bool_]:
    """Return where the wheel reports nothing for 5 s or more while the position moves at 3 m/s or more."""
    dt = np.maximum(np.diff(time, prepend=time[0] - 1.0), 1e-9)
    still = (steps < 0.5 * dt) & (position_steps > 3.0 * dt)
    edges = np.flatnonzero(np.diff(np.concatenate(([False], still, [False])).astype(np.int8)))
    stalled = np.zeros(time.size, bool)
    for first, last in zip(edges[::2], edges[1::2], strict=True):
        if time[last - 1] - time[max(first - 1, 0)] >= 5.0:
            stalled[first:last] = True
    return stalled
