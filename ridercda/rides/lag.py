"""How late power comes against speed: from the acceleration it causes."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ridercda.rides import thresholds as limit
from ridercda.rides.ride import Fault, FaultKind, FloatArray, Ride
from ridercda.rides.spans import BoolArray, IndexArray

LEAVE, SHIFT = "leave", "shift"
_WINDOW = (
    8.0  # half-width of the mean that is taken off; of 3, 5, 8 and 15 s the least bias on invented days [s]
)
_MODEL_ERROR = 0.12  # what the jackknife leaves out, on invented days with a known lag [s]
_QUIET = 4.0  # pedalled on either side, so that braking does not come in [s]


@dataclass(frozen=True, slots=True)
class Lag:
    """A lag of power behind speed. `correlation` is that of power and acceleration at the lag."""

    value: float  # positive: power comes late [s]
    standard_error: float  # [s]
    correlation: float


def find_power_lag(ride: Ride) -> list[Fault]:
    """Return the lag of power where it is beyond doubt; by default it is left, since an estimate allows for it."""
    lag = power_lag(ride)
    if lag is None or lag.correlation < limit.LAG_CORRELATION:
        return []
    if abs(lag.value) < max(limit.LAG_SMALLEST, limit.SIGNIFICANT * lag.standard_error):
        return []
    late = "after" if lag.value > 0 else "before"
    cause = (
        f"Power comes {abs(lag.value):.1f} ± {2 * lag.standard_error:.1f} s {late} the acceleration it causes "
        f"(correlation {lag.correlation:.2f})"
    )
    start, end = float(ride.time[0]), float(ride.time[-1])
    choices = (LEAVE, SHIFT)
    return [Fault(FaultKind.POWER_LAG, start, end, "power", cause, choices=choices, value=lag.value)]


def power_lag(ride: Ride) -> Lag | None:
    """Return the lag at which power and what it goes into agree best; None where nothing tells.

    Notes
    -----
    Slow parts (hills, wind) are taken off both with a running mean over 17 s; only stretches pedalled
    throughout count, so that brakes do not come in. Air drag of a usual rider is counted in: left out, it
    follows power and draws the peak by some 0.2 s. The peak of the cross-correlation over ±5 s is placed between records
    by a parabola; the standard error is a jackknife over blocks of the ride.
    """
    if not ride.has("power", "speed") or ride.time.size < limit.SMOOTHED_FEWEST:
        return None
    steps = np.diff(ride.time)
    interval = float(np.median(steps))
    reach = round(limit.LAG_LONGEST / interval)
    if not 1 <= reach <= 200:
        return None
    rate, power, good = _fast_parts(ride, steps, interval)
    if int(good.sum()) < limit.SMOOTHED_FEWEST:
        return None
    blocks = np.array_split(np.arange(rate.size), limit.LAG_BLOCKS)
    parts = np.array([_cross(rate, power, good, block, reach + 1) for block in blocks])
    whole = parts.sum(axis=0)
    at = _peak(whole[0], reach)
    if at is None:
        return None
    others = [_peak((whole - part)[0], reach) for part in parts]
    if any(other is None for other in others):
        return None
    left_out = np.array([other for other in others if other is not None])
    error = float(np.sqrt((left_out.size - 1) / left_out.size * ((left_out - left_out.mean()) ** 2).sum()))
    middle = round(at) + reach + 1
    norm = float(np.sqrt(whole[1][middle] * whole[2][middle]))
    correlation = float(whole[0][middle]) / norm if norm > 0 else 0.0
    return Lag(at * interval, float(np.hypot(error * interval, _MODEL_ERROR)), correlation)


def _fast_parts(ride: Ride, steps: FloatArray, interval: float) -> tuple[FloatArray, FloatArray, BoolArray]:
    """Return what power goes into, per mass, and power, their slow parts taken off, and where both are usable."""
    speed, power = ride.channels["speed"], ride.channels["power"]
    rate = np.full(speed.size, np.nan)
    span = ride.time[2:] - ride.time[:-2]
    # Centred, so that it belongs to the same moment as the mean over the record.
    rate[1:-1] = 0.5 * (speed[2:] ** 2 - speed[:-2] ** 2) / span + limit.NOMINAL_DRAG * speed[1:-1] ** 3
    irregular = np.abs(steps - interval) > limit.REGULAR * interval
    bad = ~np.isfinite(rate) | ~np.isfinite(power) | ~(speed > limit.MOVING) | ~(power > 0)
    bad[1:] |= irregular
    quiet = round(_QUIET / interval)
    good = np.convolve(bad, np.ones(2 * quiet + 1), mode="same") < 0.5
    half = round(_WINDOW / interval)
    return _without_mean(rate, good, half), _without_mean(power, good, half), good


def _without_mean(values: FloatArray, good: BoolArray, half: int) -> FloatArray:
    kept = np.where(good, values, 0.0)
    total, count = (
        np.cumsum(np.concatenate((np.zeros(half + 1), part, np.zeros(half))))
        for part in (kept, good.astype(float))
    )
    width = 2 * half + 1
    sums, counts = total[width:] - total[:-width], count[width:] - count[:-width]
    return np.asarray(np.where(good, values - sums / np.maximum(counts, 1.0), 0.0))


def _cross(rate: FloatArray, power: FloatArray, good: BoolArray, block: IndexArray, reach: int) -> FloatArray:
    """Return sums of products and of squares over a block, for power taken -reach..reach records later."""
    bound_rate, bound_power = (4.0 * float(np.std(part[good])) for part in (rate, power))
    here = np.clip(rate[block], -bound_rate, bound_rate)
    found = np.zeros((3, 2 * reach + 1))
    for column, lag in enumerate(range(-reach, reach + 1)):
        there = block + lag
        inside = (there >= 0) & (there < rate.size)
        inside[inside] &= good[block[inside]] & good[there[inside]]
        moved = np.clip(power[there[inside]], -bound_power, bound_power)
        own = here[inside]
        found[:, column] = (own * moved).sum(), (own * own).sum(), (moved * moved).sum()
    return found


def _peak(cross: FloatArray, reach: int) -> float | None:
    """Return where the highest point of a cross-correlation lies, in records; None at the edge of the search."""
    top = int(np.argmax(cross))
    if top in (0, cross.size - 1) or cross[top] <= 0:
        return None
    left, middle, right = cross[top - 1 : top + 2]
    bend = left - 2.0 * middle + right
    return top - (reach + 1) + (0.5 * float((left - right) / bend) if bend < 0 else 0.0)
