"""From the records of any file to a raw ride: one clock, SI arrays, nothing resampled."""

from __future__ import annotations

import datetime as dt
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from types import MappingProxyType

import numpy as np

from ridercda.errors import ReaderError
from ridercda.rides.format import ReadOptions
from ridercda.rides.ride import CHANNELS, Fault, FaultKind, FloatArray, LapMark, LapTrigger, Ride

UNIX_EPOCH = dt.datetime(1970, 1, 1, tzinfo=dt.UTC)
HALF_TURN = np.pi / 2
LONGEST = 30 * 86400.0  # a record a month from the others has a broken clock [s]
LARGEST = 1e7  # in SI; no channel of a ride reaches it


@dataclass(frozen=True, slots=True)
class LapSpan:
    """A lap on the file's own clock. [s]"""

    start: float
    end: float
    trigger: LapTrigger


@dataclass(frozen=True, slots=True)
class FaultSpan:
    """A fault on the file's own clock; None reaches to the ride's first or last record. [s]"""

    fault: Fault
    start: float | None = None
    end: float | None = None


@dataclass(frozen=True, slots=True)
class Records:
    """What a reader gathered.

    Parameters
    ----------
    clock : ndarray, shape (n,)
        The file's own clock, NaN where a record has no time. [s]
    channels : mapping of str to ndarray, shape (n,)
        SI, NaN where a record has no value.
    zero : datetime, optional
        Moment at which the clock reads zero.
    laps, faults : sequence
        On the file's own clock.
    source, device : str
        As in `Ride`.
    notes : mapping of str to str
        As in `Ride`.
    """

    clock: FloatArray
    channels: Mapping[str, FloatArray]
    zero: dt.datetime | None = None
    laps: Sequence[LapSpan] = ()
    faults: Sequence[FaultSpan] = ()
    source: str = ""
    device: str = ""
    notes: Mapping[str, str] = field(default_factory=lambda: MappingProxyType({}))


def assemble(records: Records, options: ReadOptions) -> Ride:
    """Return the raw ride: on its own clock, in the order of the file.

    Records without a time are left out, and those more than a month from the others; values that cannot be
    are NaN (not finite, ten million or more, latitude beyond the pole, the point 0° N 0° E that units write
    before they have a fix, a heart that does not beat); channels without any value are left out.

    Raises
    ------
    ReaderError
        If no record has a time.
    """
    timed = np.isfinite(records.clock)
    if not timed.any():
        raise ReaderError(
            "there is no record with a time in it; is it a course or a workout rather than a ride?"
        )
    known = np.sort(records.clock[timed])
    middle = known[known.size // 2]  # one of them, where a median would lie between two
    with np.errstate(invalid="ignore", over="ignore"):
        timed &= np.abs(records.clock - middle) <= LONGEST
    if not timed.any():
        raise ReaderError("the times in it lie further apart than a ride lasts; the file is damaged")
    clock = records.clock[timed]
    first = float(clock[0])
    time = clock - first
    channels = {
        name: _possible(values[timed]) for name, values in records.channels.items() if name in CHANNELS
    }
    _blank_impossible_positions(channels)
    _count_distance_from_start(channels)
    if "heart_rate" in channels:  # zero is what units write without a strap
        channels["heart_rate"][channels["heart_rate"] == 0] = np.nan
    channels = {
        name: channels[name] for name in CHANNELS if name in channels and np.isfinite(channels[name]).any()
    }
    notes = dict(records.notes)
    faults = list(records.faults)
    lost = int(records.clock.size - clock.size)
    if lost:
        cause = f"{lost} of {records.clock.size} records have no time or an impossible one and were left out"
        faults.append(FaultSpan(Fault(FaultKind.FILE_DAMAGED, 0.0, 0.0, "", cause, "left out")))
    if options.wheel_circumference is not None:
        notes["wheel_circumference"] = f"{options.wheel_circumference!r} m as set in the head unit"
    return Ride(
        time=time,
        channels=MappingProxyType(channels),
        start=_moment(records.zero, first),
        laps=tuple(
            LapMark(lap.start - first, lap.end - first, lap.trigger)
            for lap in records.laps
            if np.isfinite([lap.start, lap.end]).all() and 0 <= lap.end - lap.start <= LONGEST
        ),
        source=records.source,
        device=records.device,
        faults=_on_ride_clock(faults, first, float(time.min()), float(time.max())),
        notes=MappingProxyType(notes),
    )


def seconds_of_moment(moment: dt.datetime) -> float:
    """Return seconds since 1970 in UTC; a moment without an offset is taken as UTC."""
    aware = moment if moment.tzinfo is not None else moment.replace(tzinfo=dt.UTC)
    return (aware - UNIX_EPOCH).total_seconds()


def _moment(zero: dt.datetime | None, first: float) -> dt.datetime | None:
    if zero is None:
        return None
    try:
        return zero + dt.timedelta(seconds=first)
    except OverflowError:
        return None


def _possible(values: FloatArray) -> FloatArray:
    with np.errstate(invalid="ignore"):
        return np.where(np.abs(values) < LARGEST, values, np.nan)


def _blank_impossible_positions(channels: dict[str, FloatArray]) -> None:
    latitude, longitude = channels.get("latitude"), channels.get("longitude")
    if latitude is None or longitude is None:
        channels.pop("latitude", None)
        channels.pop("longitude", None)
        return
    unknown = ~np.isfinite(latitude) | ~np.isfinite(longitude)
    unknown |= (np.abs(latitude) > HALF_TURN) | (np.abs(longitude) > 2.0 * np.pi)
    unknown |= (latitude == 0.0) & (longitude == 0.0)
    latitude[unknown] = np.nan
    longitude[unknown] = np.nan


def _count_distance_from_start(channels: dict[str, FloatArray]) -> None:
    distance = channels.get("distance")
    if distance is not None:
        known = np.flatnonzero(np.isfinite(distance))
        if known.size:
            distance -= distance[known[0]]


def _on_ride_clock(faults: Sequence[FaultSpan], first: float, start: float, end: float) -> tuple[Fault, ...]:
    placed = [
        replace(
            each.fault,
            start=start if each.start is None else each.start - first,
            end=end if each.end is None else each.end - first,
        )
        for each in faults
    ]
    return tuple(sorted(placed, key=lambda fault: (fault.start, fault.end)))
