"""The repairs: pure functions from a ride and a fault to the channels that change."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from types import MappingProxyType

import numpy as np

from ridercda.rides.ground_track import ground_track
from ridercda.rides.ride import Fault, FaultKind, FloatArray, Ride
from ridercda.rides.spans import BoolArray

LEAVE = "leave"
Channels = Mapping[str, FloatArray]
_TOUCH = 1e-6  # spans are told by the time of records; this much of rounding is no matter [s]


def blank(ride: Ride, fault: Fault) -> Channels:
    """Blank the channel within the fault: not to be trusted. Both coordinates go together."""
    names = ("latitude", "longitude") if fault.channel == "latitude" else (fault.channel,)
    within = _within(ride, fault)
    return {name: np.where(within, np.nan, ride.channels[name]) for name in names}


def zero(ride: Ride, fault: Fault) -> Channels:
    """Set the channel to zero within the fault."""
    return {fault.channel: np.where(_within(ride, fault), 0.0, ride.channels[fault.channel])}


def interpolate(ride: Ride, fault: Fault) -> Channels:
    """Draw a straight line across the fault from the records beside it."""
    values = ride.channels[fault.channel]
    within = _within(ride, fault)
    known = ~within & np.isfinite(values)
    if not known.any():
        return {fault.channel: np.where(within, np.nan, values)}
    line = np.interp(ride.time, ride.time[known], values[known])
    return {fault.channel: np.where(within, line, values)}


def take_off_step(ride: Ride, fault: Fault) -> Channels:
    """Take a step off everything after it; records within it are blanked."""
    step = 0.0 if fault.value is None else fault.value
    after = ride.time >= fault.end - _TOUCH
    within = _within(ride, fault) & ~after & (ride.time > fault.start + _TOUCH)
    moved = ride.channels[fault.channel] - np.where(after, step, 0.0)
    return {fault.channel: np.where(within, np.nan, moved)}


def speed_from_distance(ride: Ride, fault: Fault) -> Channels:
    """Take speed as the way gone in each record interval; NaN where distance is missing or falls."""
    distance = ride.channels["distance"]
    speed = np.diff(distance) / np.diff(ride.time)
    return {"speed": _over_intervals(ride, fault, np.where(speed >= 0, speed, np.nan))}


def speed_from_position(ride: Ride, fault: Fault) -> Channels:
    """Take speed as the chord between fixes over the record interval."""
    track = ground_track(ride)
    if track is None:
        return {}
    chord = np.hypot(np.diff(track.east), np.diff(track.north))
    return {"speed": _over_intervals(ride, fault, chord / np.diff(ride.time))}


def scale_wheel(ride: Ride, fault: Fault) -> Channels:
    """Scale wheel speed and distance by the factor found or given."""
    factor = 1.0 if fault.value is None else fault.value
    return {name: ride.channels[name] * factor for name in ("speed", "distance") if name in ride.channels}


def shift_power(ride: Ride, fault: Fault) -> Channels:
    """Move power earlier by its lag, to the nearest record: no value is mixed with another, so none is smoothed.

    What is left of the lag is at most half a record interval. Where there is no record at the shifted moment
    (beyond the ends, across a gap) power is NaN.
    """
    lag = 0.0 if fault.value is None else fault.value
    time, power = ride.time, ride.channels["power"]
    wanted = time + lag
    after = np.clip(np.searchsorted(time, wanted), 0, time.size - 1)
    before = np.clip(after - 1, 0, time.size - 1)
    # On a tie the later record, for all alike, so that a lag of half a record moves every value the same way.
    nearest = np.where(wanted - time[before] < time[after] - wanted, before, after)
    usual = float(np.median(np.diff(time))) if time.size > 1 else 1.0
    there = np.abs(time[nearest] - wanted) <= 0.5 * usual + _TOUCH
    return {"power": np.where(there, power[nearest], np.nan)}


Repair = Callable[[Ride, Fault], Channels]

REPAIRS: Mapping[tuple[FaultKind, str], Repair] = MappingProxyType(
    {
        (FaultKind.POSITION_SPIKE, "blank"): blank,
        (FaultKind.ALTITUDE_STEP, "blank"): blank,
        (FaultKind.ALTITUDE_STEP, "shift"): take_off_step,
        (FaultKind.CHANNEL_FROZEN, "blank"): blank,
        (FaultKind.CHANNEL_FROZEN, "from-distance"): speed_from_distance,
        (FaultKind.CHANNEL_MISSING, "from-distance"): speed_from_distance,
        (FaultKind.CHANNEL_MISSING, "from-position"): speed_from_position,
        (FaultKind.POWER_HELD, "zero"): zero,
        (FaultKind.POWER_HELD, "blank"): blank,
        (FaultKind.POWER_SPIKE, "blank"): blank,
        (FaultKind.POWER_SPIKE, "interpolate"): interpolate,
        (FaultKind.POWER_DROPOUT, "blank"): blank,
        (FaultKind.POWER_DROPOUT, "interpolate"): interpolate,
        (FaultKind.CIRCUMFERENCE, "scale"): scale_wheel,
        (FaultKind.POWER_LAG, "shift"): shift_power,
    }
)
"""What each repair does; the clock's own are in `ridercda.rides.clock`."""


def _within(ride: Ride, fault: Fault) -> BoolArray:
    return np.asarray((ride.time >= fault.start - _TOUCH) & (ride.time <= fault.end + _TOUCH))


def _over_intervals(ride: Ride, fault: Fault, values: FloatArray) -> FloatArray:
    """Return speed with the values of intervals put at their ends, within the fault."""
    own = np.concatenate((values[:1], values))
    recorded = ride.channels.get("speed")
    return own if recorded is None else np.where(_within(ride, fault), own, recorded)
