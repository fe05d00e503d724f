"""How often records were taken: gaps, pauses, thinned-out and mixed sampling. Nothing is filled in."""

from __future__ import annotations

import numpy as np

from ridercda.rides import thresholds as limit
from ridercda.rides.ground_track import ground_track
from ridercda.rides.ride import Fault, FaultKind, FloatArray, Ride
from ridercda.rides.spans import BoolArray, median_about, true_spans


def find_sampling_faults(ride: Ride) -> list[Fault]:
    """Return gaps, pauses, smart recording and changes of the record interval.

    Parameters
    ----------
    ride : Ride
        With strictly increasing time. Pauses that its reader listed are not listed again.
    """
    if ride.time.size < 3:
        return []
    steps = np.diff(ride.time)
    local = median_about(steps, limit.NEIGHBOURHOOD)
    regular = np.abs(steps - local) <= limit.REGULAR * local
    thinned = (
        float(regular.mean()) < limit.REGULAR_SHARE
        and float(np.quantile(steps, 0.9)) > limit.SMART_INTERVAL
        and steps.size >= limit.NEIGHBOURHOOD
    )
    faults: list[Fault] = []
    if thinned:
        low, high = np.quantile(steps, (0.05, 0.95))
        cause = (
            f"Records were thinned out by the unit (smart recording): intervals of {low:.0f} to {high:.0f} s"
        )
        faults.append(Fault(FaultKind.SMART_RECORDING, float(ride.time[0]), float(ride.time[-1]), "", cause))
        missing = steps > limit.SMART_GAP
    else:
        faults += _mixed(ride.time, local)
        missing = steps > np.maximum(limit.GAP_FACTOR * local, local + limit.GAP_EXCESS)
    faults += _gaps(ride, steps, local, missing)
    return faults


def _mixed(time: FloatArray, local: FloatArray) -> list[Fault]:
    usual = float(np.median(local))
    other = np.abs(local - usual) > limit.REGULAR * usual
    return [
        Fault(
            FaultKind.MIXED_SAMPLING,
            float(time[first]),
            float(time[last + 1]),
            "",
            f"Records every {float(np.median(local[first : last + 1])):.3g} s, elsewhere every {usual:.3g} s",
        )
        for first, last in true_spans(other)
        if last - first + 1 >= limit.MIXED_RECORDS
    ]


def _gaps(ride: Ride, steps: FloatArray, local: FloatArray, missing: BoolArray) -> list[Fault]:
    pauses = [(fault.start, fault.end) for fault in ride.faults if fault.kind is FaultKind.AUTO_PAUSE]
    moved = _moved(ride)
    faults = []
    for k in np.flatnonzero(missing).tolist():
        start, end = float(ride.time[k]), float(ride.time[k + 1])
        if any(since < end + 1.0 and until > start - 1.0 for since, until in pauses):
            continue
        far = float(moved[k])
        told = "" if np.isnan(far) else f", {far:.0f} m further on"
        if _is_pause(ride, k, far):
            cause = f"The recording stood still for {end - start:.0f} s while the bike did{told}"
            faults.append(Fault(FaultKind.AUTO_PAUSE, start, end, "", cause))
            continue
        lost = max(1, round(float(steps[k] / local[k])) - 1)
        cause = f"{lost} record{'s' if lost > 1 else ''} missing: {end - start:.3g} s without one{told}"
        faults.append(Fault(FaultKind.GAP, start, end, "", cause))
    return faults


def _moved(ride: Ride) -> FloatArray:
    """Return how far the bike went between records, by the wheel or else by position; NaN where unknown. [m]"""
    unknown = np.full(ride.time.size - 1, np.nan)
    if ride.has("distance"):
        by_wheel = np.diff(ride.channels["distance"])
        return np.asarray(np.where(by_wheel >= 0, by_wheel, np.nan))
    track = ground_track(ride)
    if track is None:
        return unknown
    return np.asarray(np.hypot(np.diff(track.east), np.diff(track.north)))


def _is_pause(ride: Ride, k: int, far: float) -> bool:
    if ride.time[k + 1] - ride.time[k] < limit.PAUSE_SHORTEST or not ride.has("speed"):
        return False
    ends = ride.channels["speed"][k : k + 2]
    return bool(np.nanmax(np.append(ends, 0.0)) <= limit.PAUSE_SPEED and np.isfinite(ends).any()) and not (
        far > limit.PAUSE_DISTANCE
    )
