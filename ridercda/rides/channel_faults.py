"""Channels that are missing, frozen, silent or smoothed."""

from __future__ import annotations

import numpy as np

from ridercda.rides import thresholds as limit
from ridercda.rides.ground_track import ground_track
from ridercda.rides.ride import Fault, FaultKind, FloatArray, Ride
from ridercda.rides.spans import BoolArray, equal_spans, true_spans

BLANK, LEAVE = "blank", "leave"
FROM_DISTANCE, FROM_POSITION = "from-distance", "from-position"


def find_missing_channels(ride: Ride) -> list[Fault]:
    """Return channels that the drag of a ride needs and that are missing, wholly or for a while.

    A missing speed is offered from distance or from position, whichever there is.
    """
    start, end = float(ride.time[0]), float(ride.time[-1])
    faults = []
    if not ride.has("power"):
        cause = "There is no power in this ride: no drag can be found from it"
        faults.append(Fault(FaultKind.CHANNEL_MISSING, start, end, "power", cause))
    if not ride.has("speed"):
        if ride.has("distance"):
            cause = "There is no speed in this ride; distance tells it"
            choices: tuple[str, ...] = (FROM_DISTANCE, LEAVE)
        elif ride.has("latitude", "longitude"):
            cause = "There is no speed and no distance in this ride; positions tell a rough one"
            choices = (FROM_POSITION, LEAVE)
        else:
            cause = "There is no speed, distance or position in this ride: only lap times can tell how fast it was"
            choices = ()
        faults.append(Fault(FaultKind.CHANNEL_MISSING, start, end, "speed", cause, choices=choices))
    for name, noun in (("power", "Power"), ("speed", "Speed"), ("latitude", "Position")):
        if ride.has(name):
            faults += _holes(ride, name, noun)
    return faults


def find_silent_speed(ride: Ride) -> list[Fault]:
    """Return where the wheel reads zero though the bike did not stop."""
    if not ride.has("speed"):
        return []
    speed = ride.channels["speed"]
    start, end = float(ride.time[0]), float(ride.time[-1])
    if not np.nanmax(speed) > 0:
        if ride.has("distance") and float(np.nanmax(ride.channels["distance"])) > limit.POSITION_JUMP:
            far = float(np.nanmax(ride.channels["distance"]))
            cause = (
                f"Speed is zero throughout while distance goes on to {far:.0f} m; distance tells the speed"
            )
            choices = (FROM_DISTANCE, LEAVE)
            return [Fault(FaultKind.CHANNEL_FROZEN, start, end, "speed", cause, choices=choices)]
        return []
    faults = []
    for first, last in true_spans(speed == 0):
        if first == 0 or last == speed.size - 1:
            continue
        before, after = float(speed[first - 1]), float(speed[last + 1])
        span = float(ride.time[last + 1] - ride.time[first - 1])
        if before > limit.SPEED_ZERO_FROM and after > limit.SPEED_ZERO_TO and span <= limit.DROPOUT_LONGEST:
            cause = f"Speed reads zero for {span:.0f} s between {before * 3.6:.0f} and {after * 3.6:.0f} km/h"
            faults.append(
                Fault(
                    FaultKind.CHANNEL_FROZEN,
                    float(ride.time[first]),
                    float(ride.time[last]),
                    "speed",
                    cause,
                    choices=(BLANK, LEAVE),
                )
            )
    return faults


def find_frozen_channels(ride: Ride) -> list[Fault]:
    """Return where power, speed or position repeats one value too long to be true.

    How long is too long is told by the ride itself: a channel whose neighbouring values are equal with probability
    q shows a run of n equal values about q**(n-1) times per record. A steady one is never called frozen.
    """
    faults = []
    for name, noun in (("power", "Power"), ("speed", "Speed")):
        if ride.has(name):
            for first, last in frozen_spans(ride.channels[name]):
                if name == "power" and last + 1 < ride.time.size and ride.channels[name][last + 1] == 0:
                    continue  # held until pedalling stopped: told as such
                span = float(ride.time[last] - ride.time[first])
                cause = (
                    f"{noun} repeats one value for {span:.0f} s while it changes at every record elsewhere"
                )
                faults.append(
                    Fault(
                        FaultKind.CHANNEL_FROZEN,
                        float(ride.time[first + 1]),  # the first of the run may be a true reading
                        float(ride.time[last]),
                        name,
                        cause,
                        choices=(BLANK, LEAVE),
                    )
                )
    return faults + _frozen_positions(ride)


def frozen_spans(values: FloatArray, shortest: int = limit.FROZEN_SHORTEST) -> list[tuple[int, int]]:
    """Return (first, last) of runs of one positive value that the channel's own liveliness rules out."""
    change = np.diff(values)
    live = np.isfinite(change) & ((values[1:] > 0) | (values[:-1] > 0))
    if int(live.sum()) < 60:
        return []
    sizes = np.abs(change[live & (change != 0)])
    if not sizes.size:
        return []
    usual = float(np.median(sizes))
    equal = int((live & (change == 0)).sum())
    pairs = int(live.sum())
    found = []
    for first, last in equal_spans(values):
        length = last - first + 1
        if length < shortest or not values[first] > 0:
            continue
        chance = (equal - (length - 1) + 1) / (pairs - (length - 1) + 2)
        if values.size * chance ** (length - 1) > limit.FROZEN_CHANCE:
            continue
        if _lively_beside(change, first, last, usual):
            found.append((first, last))
    return found


def find_smoothed_channels(ride: Ride) -> list[Fault]:
    """Return whether power or speed is a running mean, or changes at every other record only."""
    if ride.time.size < limit.SMOOTHED_FEWEST:
        return []
    faults = []
    start, end = float(ride.time[0]), float(ride.time[-1])
    for name, noun in (("power", "Power"), ("speed", "Speed")):
        if not ride.has(name):
            continue
        held = held_length(ride.channels[name])
        if held is not None:
            cause = f"{noun} changes at every {held}th record only: it is held in between"
            faults.append(Fault(FaultKind.CHANNEL_SMOOTHED, start, end, name, cause, value=float(held)))
        elif name == "power":
            width = running_mean_width(ride.time, ride.channels[name])
            if width is not None:
                cause = (
                    f"Power is a running mean of {width} records: its changes return {width} records later"
                )
                faults.append(Fault(FaultKind.CHANNEL_SMOOTHED, start, end, name, cause, value=float(width)))
    return faults


def held_length(values: FloatArray) -> int | None:
    """Return for how many records a channel keeps each value, where one length above 1 prevails; else None."""
    lengths = np.array([last - first + 1 for first, last in equal_spans(values) if values[first] > 0])
    if lengths.size < limit.SMOOTHED_FEWEST // 10:
        return None
    counts = np.bincount(lengths[lengths <= limit.SMOOTHED_LONGEST], minlength=3)
    usual = int(np.argmax(counts))
    if usual < 2 or counts[usual] < limit.HELD_SHARE * lengths.size:
        return None
    return usual


def running_mean_width(time: FloatArray, values: FloatArray) -> int | None:
    """Return over how many records a channel was averaged; None where it does not look averaged.

    Notes
    -----
    The change of a running mean over w records is (x[t] - x[t-w])/w. Its neighbours share nearly all of their
    noise, so that changes correlate; the correlation falls evenly to below zero and turns up sharply at lag w, where
    the value that came in goes out. Changes of an unsmoothed channel do not correlate. Smoothing that weighs
    records differently has no such bend and is not found.
    """
    steps = np.diff(time)
    change = np.diff(values)
    usual = float(np.median(steps))
    good = np.isfinite(change) & (np.abs(steps - usual) <= limit.REGULAR * usual)
    good &= (values[1:] > 0) & (values[:-1] > 0)
    if int(good.sum()) < limit.SMOOTHED_FEWEST or float((change[good] != 0).mean()) < 0.5:
        return None
    bound = 4.0 * 1.4826 * float(np.median(np.abs(change[good])))
    clipped = np.where(good, np.clip(change, -bound, bound), 0.0)
    correlation = _autocorrelation(clipped, good, limit.SMOOTHED_LONGEST + 1)
    bend = correlation[:-2] - 2.0 * correlation[1:-1] + correlation[2:]  # at lags 1, 2, ...
    width = int(np.argmax(bend[1:])) + 2
    others = np.delete(bend[1:], width - 2)
    sharp = float(bend[width - 1])
    needed = max(limit.SMOOTHED_BEND, 5.0 * float(np.sqrt(6.0 / good.sum())))
    smooth = correlation[1] > limit.SMOOTHED_CORRELATION and correlation[width] < limit.SMOOTHED_RETURN
    return width if smooth and sharp > needed and sharp > 2.0 * float(others.max()) else None


def _autocorrelation(values: FloatArray, good: BoolArray, longest: int) -> FloatArray:
    variance = float((values[good] ** 2).mean())
    found = np.zeros(longest + 1)
    for lag in range(longest + 1):
        both = good[lag:] & good[: good.size - lag]
        if both.any() and variance > 0:
            found[lag] = float((values[lag:] * values[: values.size - lag])[both].mean()) / variance
    return found


def _lively_beside(change: FloatArray, first: int, last: int, usual: float) -> bool:
    """Whether the channel changes as usual on both sides of a run of equal values."""
    sides = [change[max(0, first - 20) : first], change[last : last + 20]]
    told = [np.abs(side[np.isfinite(side)]) for side in sides]
    told = [side for side in told if side.size >= 10]
    return bool(told) and all(float(np.median(side)) >= 0.3 * usual for side in told)


def _frozen_positions(ride: Ride) -> list[Fault]:
    track = ground_track(ride)
    if track is None or not ride.has("speed"):
        return []
    still = (np.diff(track.east) == 0) & (np.diff(track.north) == 0)
    moving = np.fmin(ride.channels["speed"][1:], ride.channels["speed"][:-1]) > limit.MOVING
    faults = []
    for first, last in true_spans(still & moving):
        start, end = float(ride.time[first]), float(ride.time[last + 1])
        if end - start > limit.FROZEN_POSITION:
            cause = f"Position stays where it is for {end - start:.0f} s while the wheel turns"
            # The first fix of the run is a true one.
            begin = float(ride.time[first + 1])
            choices = (BLANK, LEAVE)
            faults.append(Fault(FaultKind.CHANNEL_FROZEN, begin, end, "latitude", cause, choices=choices))
    return faults


def _holes(ride: Ride, name: str, noun: str) -> list[Fault]:
    unknown = ~np.isfinite(ride.channels[name])
    faults = []
    for first, last in true_spans(unknown):
        start, end = float(ride.time[first]), float(ride.time[last])
        shortest = limit.DROPOUT_LONGEST if name == "power" else limit.MISSING_SPAN
        if end - start >= shortest:
            cause = f"{noun} is missing for {end - start:.0f} s"
            faults.append(Fault(FaultKind.CHANNEL_MISSING, start, end, name, cause))
    return faults
