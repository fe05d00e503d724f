"""Wild positions and steps in altitude."""

from __future__ import annotations

import numpy as np

from ridercda.rides import thresholds as limit
from ridercda.rides.ground_track import GroundTrack, ground_track
from ridercda.rides.ride import Fault, FaultKind, FloatArray, Ride
from ridercda.rides.spans import IndexArray, scatter_of, signed

BLANK, SHIFT, LEAVE = "blank", "shift", "leave"
CLUSTER = 5  # records within which steps of altitude belong together


def find_position_faults(ride: Ride) -> list[Fault]:
    """Return fixes that jump away and come back, and wild ones before the receiver had settled."""
    track = ground_track(ride)
    if track is None:
        return []
    known = np.flatnonzero(np.isfinite(track.east))
    if known.size < 3:
        return []
    jumps = _jumps(ride, track, known)
    faults = []
    k = 0
    if (
        jumps.size
        and jumps[0] < limit.FIRST_FIXES < known.size
        and (jumps.size < 2 or jumps[1] > jumps[0] + 1)
    ):
        first = known[: jumps[0] + 1]
        cause = f"The first {first.size} fixes lie {_step(track, known, int(jumps[0])):.0f} m from where the ride goes on"
        faults.append(_wild(ride, int(first[0]), int(first[-1]), cause))
        k = 1
    while k < jumps.size - 1:
        out, back = int(jumps[k]), int(jumps[k + 1])
        before, after = int(known[out]), int(known[back + 1])
        away = ride.time[after] - ride.time[before]
        home = np.hypot(track.east[after] - track.east[before], track.north[after] - track.north[before])
        if away <= limit.POSITION_RETURN and home <= limit.POSITION_SPEED * away:
            cause = f"Position jumps {_step(track, known, out):.0f} m away and comes back after {away:.0f} s"
            faults.append(_wild(ride, int(known[out + 1]), int(known[back]), cause))
            k += 2
        else:
            k += 1
    return faults


def find_altitude_faults(ride: Ride) -> list[Fault]:
    """Return steps in altitude that no road makes, lasting ones and single records off the line."""
    if not ride.has("altitude"):
        return []
    altitude = ride.channels["altitude"]
    known = np.flatnonzero(np.isfinite(altitude))
    if known.size < 10:
        return []
    rise = np.diff(altitude[known])
    span = np.diff(ride.time[known])
    run = _run_between(ride, known, span)
    usual = scatter_of(rise)
    allowed = (
        np.maximum(limit.ALTITUDE_STEP, limit.ALTITUDE_GRADE * run) + limit.ALTITUDE_NOISE_FACTOR * usual
    )
    faults = []
    for first, last in _clusters(np.flatnonzero(np.abs(rise) > allowed)):
        before, after = known[first], known[last + 1]
        net = float(altitude[after] - altitude[before])
        largest = float(rise[first : last + 1][np.argmax(np.abs(rise[first : last + 1]))])
        start, end = float(ride.time[before]), float(ride.time[after])
        if last > first and abs(net) < 0.5 * abs(largest) + limit.ALTITUDE_STEP:
            cause = (
                f"Altitude leaves its line by {signed(largest)} m and comes back within {end - start:.3g} s"
            )
            inside = float(ride.time[known[first + 1]]), float(ride.time[known[last]])
            fault = Fault(FaultKind.ALTITUDE_STEP, *inside, "altitude", cause, choices=(BLANK, LEAVE))
        else:
            way = float(run[first : last + 1].sum())
            cause = f"Altitude steps by {signed(net)} m within {end - start:.3g} s and {way:.0f} m of road"
            choices = (SHIFT, LEAVE)
            fault = Fault(FaultKind.ALTITUDE_STEP, start, end, "altitude", cause, choices=choices, value=net)
        faults.append(fault)
    return faults


def _clusters(steps: IndexArray) -> list[tuple[int, int]]:
    """Return (first, last) of steps that follow one another within a few records."""
    if not steps.size:
        return []
    parts = np.split(steps, np.flatnonzero(np.diff(steps) > CLUSTER) + 1)
    return [(int(part[0]), int(part[-1])) for part in parts]


def _wild(ride: Ride, first: int, last: int, cause: str) -> Fault:
    return Fault(
        FaultKind.POSITION_SPIKE,
        float(ride.time[first]),
        float(ride.time[last]),
        "latitude",
        cause,
        choices=(BLANK, LEAVE),
    )


def _jumps(ride: Ride, track: GroundTrack, known: IndexArray) -> IndexArray:
    """Return k where the way from known fix k to the next is too far for the time."""
    far = np.hypot(np.diff(track.east[known]), np.diff(track.north[known]))
    span = np.diff(ride.time[known])
    fastest = np.full(far.size, limit.POSITION_SPEED)
    if ride.has("speed"):
        speed = ride.channels["speed"][known]
        nearby = np.fmax(speed[1:], speed[:-1])
        # A wheel that reads zero may have lost its sensor: zero says nothing.
        told = nearby > 0
        fastest[told] = limit.POSITION_SPEED_FACTOR * nearby[told] + limit.POSITION_SPEED_EXCESS
    return np.flatnonzero((far > limit.POSITION_JUMP) & (far > fastest * span))


def _step(track: GroundTrack, known: IndexArray, k: int) -> float:
    here, there = known[k], known[k + 1]
    return float(np.hypot(track.east[there] - track.east[here], track.north[there] - track.north[here]))


def _run_between(ride: Ride, known: IndexArray, span: FloatArray) -> FloatArray:
    """Return the way between records with an altitude, by speed; a generous one where it is unknown. [m]"""
    if not ride.has("speed"):
        return np.asarray(limit.POSITION_SPEED * span)
    speed = ride.channels["speed"][known]
    nearby = np.fmax(speed[1:], speed[:-1])
    return np.asarray(np.where(np.isfinite(nearby), nearby, limit.POSITION_SPEED) * span)
