"""Spells of steady riding: what lies between stops, gaps and easy riding."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import numpy.typing as npt

from ridercda.runs.traced import RideTrace

FloatArray = npt.NDArray[np.float64]
BoolArray = npt.NDArray[np.bool_]

STANDING = 1.0  # [m/s]
STOP = 3.0  # [s] standing this long ends a spell
TURNING = 8.0  # [s] a foot put down in a U-turn does not end a spell if it lasts less
GAP = 10.0  # [s] of silence in the recording that ends a spell
EASY = 20.0  # [s] of easy riding that ends a spell
EASY_POWER = 0.4  # of the power that three quarters of the riding stays under
EASY_SPEED = 0.8  # of the usual speed
SHORTEST = 30.0  # [s] a spell worth a run


def riding_spells(trace: RideTrace) -> tuple[slice, ...]:
    """Return the records of each spell of steady riding, in order.

    Parameters
    ----------
    trace : RideTrace
        Its turns are not taken for stops.

    Returns
    -------
    tuple of slice
        Each at least 30 s long.

    Notes
    -----
    A spell ends where the rider stands for 3 s, the recording is silent for 10 s, or the rider goes easy for 20 s:
    at less than 40 % of the power that three quarters of the riding stay under, and slower than usual. Common
    practice.
    """
    time = trace.time
    if time.size < 2:
        return ()
    turning = near_turns(trace)
    still = _lasting(trace.speed < STANDING, time, STOP) & ~_only_in_turns(trace, turning)
    broken = still | (_easy(trace) & ~turning)
    gap = np.concatenate(([False], np.diff(time) > GAP))
    edges = np.flatnonzero(np.diff(np.concatenate(([True], broken, [True])).astype(np.int8)))
    spells = []
    for first, last in zip(edges[::2], edges[1::2], strict=True):
        cuts = [first, *(first + 1 + np.flatnonzero(gap[first + 1 : last])), last]
        for begin, end in pairwise(cuts):
            if end - begin > 1 and time[end - 1] - time[begin] >= SHORTEST:
                spells.append(slice(int(begin), int(end)))
    return tuple(spells)


def near_turns(trace: RideTrace, reach: float = 60.0) -> BoolArray:
    """Return the records within some metres of a U-turn."""
    if trace.turns.size == 0:
        return np.zeros(trace.time.size, bool)
    after = np.minimum(np.searchsorted(trace.turns, trace.travelled), trace.turns.size - 1)
    before = np.maximum(after - 1, 0)
    gap = np.minimum(
        np.abs(trace.turns[after] - trace.travelled), np.abs(trace.turns[before] - trace.travelled)
    )
    return np.asarray(gap <= reach)


def _lasting(flag: BoolArray, time: FloatArray, least: float) -> BoolArray:
    """Return a flag only where it holds for some seconds on end."""
    edges = np.flatnonzero(np.diff(np.concatenate(([False], flag, [False])).astype(np.int8)))
    lasting = np.zeros(flag.size, bool)
    for first, last in zip(edges[::2], edges[1::2], strict=True):
        if time[last - 1] - time[max(first - 1, 0)] >= least:
            lasting[first:last] = True
    return lasting


def _only_in_turns(trace: RideTrace, turning: BoolArray) -> BoolArray:
    return turning & ~_lasting(trace.speed < STANDING, trace.time, TURNING)


def _easy(trace: RideTrace) -> BoolArray:
    moving = trace.speed > 2.0
    known = np.isfinite(trace.power)
    if known.mean() < 0.5 or moving.sum() < 60:
        return np.zeros(trace.time.size, bool)
    power = running_mean(trace.time, np.where(known, trace.power, 0.0), 10.0)
    hard = float(np.percentile(power[moving], 75))
    usual = float(np.median(trace.speed[moving]))
    slow = running_mean(trace.time, trace.speed, 10.0) < EASY_SPEED * usual
    easy = _lasting((power < EASY_POWER * hard) & slow, trace.time, EASY)
    # The means see a change coming half a window early, and behind it as long.
    return np.asarray(running_mean(trace.time, easy.astype(float), 10.0) > 1.0 - 1e-9)


def running_mean(time: FloatArray, values: FloatArray, window: float) -> FloatArray:
    """Return the mean over a window about each record, by time.

    Parameters
    ----------
    time, values : ndarray, shape (n,)
        Values hold over the interval before their record. [s, any]
    window : float
        Full width. [s]
    """
    total = np.concatenate(([0.0], np.cumsum(values[1:] * np.diff(time))))
    low = np.maximum(time - window / 2, time[0])
    high = np.minimum(time + window / 2, time[-1])
    span = np.maximum(high - low, 1e-9)
    return np.asarray((np.interp(high, time, total) - np.interp(low, time, total)) / span)
