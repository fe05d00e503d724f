"""A clock that repeats or runs backward: found and put right, so that time strictly increases."""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Callable
from dataclasses import replace
from types import MappingProxyType

import numpy as np
import numpy.typing as npt

from ridercda.rides.ride import CHANNELS, Fault, FaultKind, FloatArray, Ride
from ridercda.rides.spans import BoolArray, signed, true_spans
from ridercda.rides.thresholds import FEW_OUT_OF_ORDER

Decide = Callable[[Fault], Fault]
"""From a fault with its choices to the same fault with the repair taken."""

_TICK = 1e-6  # records closer than this bear the same time [s]
_DROP, _SORT, _SHIFT = "drop", "sort", "shift"
_SPREAD, _MERGE, _FIRST, _LAST = "spread", "merge", "keep-first", "keep-last"


def mend_clock(ride: Ride, decide: Decide) -> tuple[Ride, tuple[Fault, ...]]:
    """Return the ride with strictly increasing time, and what was wrong.

    Parameters
    ----------
    ride : Ride
        Raw.
    decide : callable
        Takes the default or chosen repair; a clock fault cannot be left.

    Returns
    -------
    ride : Ride
        The same object where nothing was wrong.
    faults : tuple of Fault
        Spans are on the clock as recorded.
    """
    if ride.time.size < 2 or bool((np.diff(ride.time) > _TICK).all()):
        return ride, ()
    faults: list[Fault] = []
    ride = replace(ride, time=np.round(ride.time, 6))
    ride = _mend_stray(ride, decide, faults)
    ride = _mend_set_back(ride, decide, faults)
    ride = _mend_repeated(ride, decide, faults)
    return ride, tuple(faults)


def _mend_stray(ride: Ride, decide: Decide, faults: list[Fault]) -> Ride:
    """Deal with a few records out of order; a longer stretch is left for `_mend_set_back`."""
    time = ride.time
    if bool((np.diff(time) >= 0).all()):
        return ride
    ordered = _longest_rising(time)
    kept = np.ones(time.size, bool)
    sort = False
    usual = _usual_interval(time)
    for first, last in true_spans(~ordered):
        if last - first + 1 > FEW_OUT_OF_ORDER:
            continue
        fits = _fits_between(time[first : last + 1], time[ordered], usual)
        records = f"{last - first + 1} records" if last > first else "1 record"
        fault = decide(
            Fault(
                FaultKind.CLOCK_BACKWARD,
                float(time[first : last + 1].min()),
                float(time[first : last + 1].max()),
                "",
                f"{records} out of order: the clock jumps by {signed(time[first] - time[max(first - 1, 0)], 0)} s and back",
                choices=(_SORT, _DROP) if fits else (_DROP,),
            )
        )
        faults.append(fault)
        if fault.repair == _SORT:
            sort = True
        else:
            kept[first : last + 1] = False
    ride = _selected(ride, np.flatnonzero(kept))
    return _sorted_where_stray(ride) if sort else ride


def _sorted_where_stray(ride: Ride) -> Ride:
    """Put short strays in order and leave a clock that was set back as it is."""
    time = ride.time
    pieces = np.split(np.arange(time.size), [k for k in _set_back(time) if k > 0])
    return _selected(
        ride, np.concatenate([piece[np.argsort(time[piece], kind="stable")] for piece in pieces])
    )


def _set_back(time: FloatArray) -> list[int]:
    """Return where the clock steps back and stays back for more than a few records."""
    steps = np.flatnonzero(np.diff(time) < 0) + 1
    reach = FEW_OUT_OF_ORDER + 1
    return [int(k) for k in steps if (time[k : k + reach] < time[max(0, k - reach) : k].max()).all()]


def _mend_set_back(ride: Ride, decide: Decide, faults: list[Fault]) -> Ride:
    time = ride.time.copy()
    kept = np.ones(time.size, bool)
    usual = _usual_interval(time)
    highest = time[0]
    dropping = False
    for k in range(1, time.size):
        if time[k] >= highest:
            highest, dropping = time[k], False
            continue
        if dropping:
            kept[k] = False
            continue
        fault = decide(
            Fault(
                FaultKind.CLOCK_BACKWARD,
                float(ride.time[k]),
                float(ride.time[k - 1]),
                "",
                f"The clock was set back by {highest - time[k]:.0f} s and went on from there",
                choices=(_SHIFT, _DROP),
            )
        )
        faults.append(fault)
        if fault.repair == _SHIFT:
            time[k:] += highest - time[k] + usual
            highest = time[k]
        else:
            kept[k] = False
            dropping = True
    if kept.all() and np.array_equal(time, ride.time):
        return ride
    return _selected(replace(ride, time=time), np.flatnonzero(kept))


def _mend_repeated(ride: Ride, decide: Decide, faults: list[Fault]) -> Ride:
    time = ride.time.copy()
    usual = _usual_interval(time)
    same = np.diff(time) <= 0
    if not same.any():
        return ride
    channels = {name: values.copy() for name, values in ride.channels.items()}
    kept = np.ones(time.size, bool)
    for first, end in true_spans(same):
        last = end + 1
        room = _room_beside(time, first, last, usual)
        cause = f"{last - first + 1} records bear the same time"
        if room:
            cause += f", the one {'before' if room < 0 else 'after'} it is missing"
        fault = decide(
            Fault(
                FaultKind.CLOCK_DUPLICATE,
                float(time[first]),
                float(time[last]),
                "",
                cause,
                choices=(_SPREAD, _MERGE, _FIRST, _LAST) if room else (_MERGE, _FIRST, _LAST),
            )
        )
        faults.append(fault)
        if fault.repair == _SPREAD:
            time[first if room < 0 else last] += room * usual
            continue
        kept[first + 1 : last + 1] = False
        for values in channels.values():
            known = values[first : last + 1][np.isfinite(values[first : last + 1])]
            if fault.repair == _MERGE and known.size:
                values[first] = known.mean()
            elif fault.repair == _LAST:
                values[first] = values[last]
    return _selected(replace(ride, time=time, channels=MappingProxyType(channels)), np.flatnonzero(kept))


def _room_beside(time: FloatArray, first: int, last: int, usual: float) -> int:
    """Return -1 or 1 where a pair can be spread because the record before or after it is missing, else 0."""
    if last - first != 1:
        return 0
    if first > 0 and time[first] - time[first - 1] > 1.5 * usual:
        return -1
    if last + 1 < time.size and time[last + 1] - time[last] > 1.5 * usual:
        return 1
    return 0


def _longest_rising(time: FloatArray) -> BoolArray:
    """Return the longest subsequence that never falls, by patience sorting."""
    tails: list[float] = []
    tail_at: list[int] = []
    before = np.full(time.size, -1)
    for k, value in enumerate(time.tolist()):
        place = bisect_right(tails, value)
        before[k] = tail_at[place - 1] if place else -1
        if place == len(tails):
            tails.append(value)
            tail_at.append(k)
        else:
            tails[place], tail_at[place] = value, k
    chosen = np.zeros(time.size, bool)
    k = tail_at[-1]
    while k >= 0:
        chosen[k] = True
        k = int(before[k])
    return chosen


def _fits_between(stray: FloatArray, ordered: FloatArray, usual: float) -> bool:
    """Whether records fill places where others are missing."""
    after = np.searchsorted(ordered, stray)
    if bool((after == 0).any() or (after == ordered.size).any()) or bool(
        (np.diff(np.sort(stray)) <= 0).any()
    ):
        return False
    room = np.minimum(stray - ordered[after - 1], ordered[after] - stray)
    return bool((room >= 0.75 * usual).all())


def _usual_interval(time: FloatArray) -> float:
    rising = np.diff(time)
    rising = rising[rising > 0]
    return float(np.median(rising)) if rising.size else 1.0


def _selected(ride: Ride, places: npt.NDArray[np.intp]) -> Ride:
    if places.size == ride.time.size and bool((np.diff(places) == 1).all()):
        return ride
    channels = {name: ride.channels[name][places] for name in CHANNELS if name in ride.channels}
    return replace(ride, time=ride.time[places], channels=MappingProxyType(channels))
