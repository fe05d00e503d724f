"""The wheel against the satellites: speed that is not a wheel's, and a circumference that is off or drifts."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ridercda.rides import thresholds as limit
from ridercda.rides.ground_track import GroundTrack, ground_track
from ridercda.rides.lag import power_lag
from ridercda.rides.notes import NO_SPEED_SENSOR, SPEED_FROM_SENSOR
from ridercda.rides.ride import Fault, FaultKind, FloatArray, Ride
from ridercda.rides.spans import BoolArray, IndexArray, scatter_of, signed

SCALE, LEAVE = "scale", "leave"
_HOUR = 3600.0


def find_speed_from_position(ride: Ride) -> list[Fault]:
    """Return whether speed comes from positions rather than from a wheel."""
    if not ride.has("speed") or ride.notes.get("speed") == SPEED_FROM_SENSOR:
        return []
    track = ground_track(ride)
    if track is None:
        return []
    cause = ""
    likeness = scatter_likeness(ride, track)
    if ride.notes.get("speed") == NO_SPEED_SENSOR:
        cause = "The file lists its sensors and none measures speed: it comes from positions, and is smoothed"
    elif likeness is not None and likeness > limit.JITTER_CORRELATION:
        cause = (
            f"Speed scatters exactly as positions do (correlation {likeness:.2f}): it was computed from them"
        )
    elif (late := _late_speed(ride)) is not None:
        cause = f"Speed comes {late:.1f} s after the power behind it, as filtered satellite speed does and no wheel"
    if not cause:
        return []
    return [Fault(FaultKind.SPEED_FROM_GPS, float(ride.time[0]), float(ride.time[-1]), "speed", cause)]


def find_circumference_faults(ride: Ride) -> list[Fault]:
    """Return whether wheel distance and the way between fixes disagree, as a whole or more and more.

    Only straight pieces count, on which the chord between two fixes is the way. To be used on a ride whose speed
    is a wheel's.
    """
    pieces = straight_pieces(ride)
    if pieces is None:
        return []
    factor, error = _factor(pieces, np.ones(pieces.start.size, bool))
    start, end = float(ride.time[0]), float(ride.time[-1])
    if not np.isfinite(error):
        return []
    hours = _by_hour(pieces)
    told = ", ".join(f"{signed(100 * (value - 1), 2)} %" for value, _ in hours)
    drift = _drift(hours)
    if drift is not None:
        cause = f"Wheel distance drifts against position, hour by hour: {told} is missing from the wheel"
        choices = (LEAVE, SCALE)
        return [Fault(FaultKind.CIRCUMFERENCE, start, end, "distance", cause, choices=choices, value=factor)]
    if abs(factor - 1) > max(limit.CIRCUMFERENCE_OFFSET, limit.SIGNIFICANT * error):
        cause = (
            f"The way between fixes is {factor:.4f} ± {2 * error:.4f} of wheel distance: the circumference set in the "
            f"head unit is {'too small' if factor > 1 else 'too large'} by {100 * abs(factor - 1):.1f} %"
        )
        choices = (LEAVE, SCALE)
        return [Fault(FaultKind.CIRCUMFERENCE, start, end, "distance", cause, choices=choices, value=factor)]
    return []


def _late_speed(ride: Ride) -> float | None:
    lag = power_lag(ride)
    if lag is None or lag.correlation < limit.LAG_CORRELATION:
        return None
    late = -lag.value
    return late if late > max(limit.LATE_SPEED, limit.SIGNIFICANT * lag.standard_error) else None


@dataclass(frozen=True, slots=True, eq=False)
class Pieces:
    """Straight pieces of a ride: when each starts, its way by position and by wheel. [s, m, m], shape (k,)"""

    start: FloatArray
    chord: FloatArray
    wheel: FloatArray


def straight_pieces(ride: Ride) -> Pieces | None:
    """Return the pieces of some ten seconds ridden straight on; None without positions and a wheel."""
    track = ground_track(ride)
    if track is None or not ride.has("speed"):
        return None
    steps = np.diff(ride.time)
    usual = float(np.median(steps))
    count = max(2, round(limit.CHORD_TIME / usual))
    if ride.time.size < 4 * count:
        return None
    distance = wheel_distance(ride)
    at = np.arange(0, ride.time.size - count, count)
    middle, to = at + count // 2, at + count
    first = _bearing(track, at, middle)
    second = _bearing(track, middle, to)
    turn = np.abs(np.angle(np.exp(1j * (second - first))))
    chord = np.hypot(track.east[to] - track.east[at], track.north[to] - track.north[at])
    wheel = distance[to] - distance[at]
    span = ride.time[to] - ride.time[at]
    good = np.isfinite(chord) & np.isfinite(wheel) & (turn < limit.CHORD_TURN)
    good &= (np.abs(span - count * usual) < 0.5 * usual) & (wheel > limit.MOVING * span)
    return Pieces(ride.time[at][good], chord[good], wheel[good])


def wheel_distance(ride: Ride) -> FloatArray:
    """Return the distance channel, or the sum of speed where there is none; NaN after a hole in speed. [m]"""
    if ride.has("distance"):
        return ride.channels["distance"]
    steps = np.diff(ride.time, prepend=ride.time[:1])
    return np.asarray(np.cumsum(ride.channels["speed"] * steps))


def scatter_likeness(ride: Ride, track: GroundTrack) -> float | None:
    """Return the correlation of the fast scatter of speed with that of positions; None where positions hold none.

    A wheel knows nothing of the scatter of fixes. Running means of up to five fixes are tried, since units smooth.
    """
    steps = np.diff(ride.time)
    with np.errstate(invalid="ignore"):
        from_fixes = np.hypot(np.diff(track.east), np.diff(track.north)) / steps
    speed = ride.channels["speed"]
    usual = float(np.median(steps))
    regular = np.abs(steps - usual) <= limit.REGULAR * usual
    regular &= np.isfinite(from_fixes) & (np.fmin(speed[1:], speed[:-1]) > limit.MOVING)
    best: float | None = None
    for width in (1, 3, 5):
        smoothed = np.convolve(from_fixes, np.full(width, 1.0 / width), mode="same")
        fixes_scatter = _second_difference(smoothed)
        good = np.convolve(regular, np.ones(width + 2), mode="same")[1:-1] > width + 1.5
        if int(good.sum()) < limit.SMOOTHED_FEWEST:
            continue
        # The median, since starts and stops scatter without any fault of the fixes.
        scatter = scatter_of(fixes_scatter[good])
        if scatter < limit.JITTER / width:
            continue
        for lag in range(-2, 3):
            own = _second_difference(np.roll(speed[1:], -lag))
            usable = good & np.isfinite(own)
            if usable.sum() < limit.SMOOTHED_FEWEST:
                continue
            likeness = _clipped_correlation(own[usable], fixes_scatter[usable])
            best = likeness if best is None else max(best, likeness)
    return best


def _clipped_correlation(one: FloatArray, other: FloatArray) -> float:
    clipped = [np.clip(part, -4.0 * scatter_of(part), 4.0 * scatter_of(part)) for part in (one, other)]
    spread = float(np.std(clipped[0])) * float(np.std(clipped[1]))
    if spread == 0.0:
        return 0.0
    return float(np.mean((clipped[0] - clipped[0].mean()) * (clipped[1] - clipped[1].mean()))) / spread


def _second_difference(values: FloatArray) -> FloatArray:
    return np.asarray(values[2:] - 2.0 * values[1:-1] + values[:-2])


def _bearing(track: GroundTrack, begin: IndexArray, end: IndexArray) -> FloatArray:
    return np.asarray(np.arctan2(track.east[end] - track.east[begin], track.north[end] - track.north[begin]))


def _factor(pieces: Pieces, chosen: BoolArray) -> tuple[float, float]:
    """Return the way by position over the way by wheel, outlying pieces left out, and its standard error."""
    ratio = pieces.chord[chosen] / pieces.wheel[chosen]
    if ratio.size < 20:
        return float("nan"), float("nan")
    middle = float(np.median(ratio))
    spread = 1.4826 * float(np.median(np.abs(ratio - middle)))
    kept = np.abs(ratio - middle) <= 3.0 * spread + 1e-9
    weight = pieces.wheel[chosen][kept]
    value = float((weight * ratio[kept]).sum() / weight.sum())
    error = float(np.sqrt((weight**2 * (ratio[kept] - value) ** 2).sum()) / weight.sum())
    return value, error


def _by_hour(pieces: Pieces) -> list[tuple[float, float]]:
    hour = np.floor(pieces.start / _HOUR)
    found = [_factor(pieces, hour == each) for each in np.unique(hour)]
    return [(value, error) for value, error in found if np.isfinite(value)]


def _drift(hours: list[tuple[float, float]]) -> float | None:
    """Return how far the factor moved between the hours that differ most, if that is more than chance."""
    if len(hours) < 2:
        return None
    low, high = min(hours), max(hours)
    drift = high[0] - low[0]
    error = float(np.hypot(low[1], high[1]))
    return drift if drift > max(limit.CIRCUMFERENCE_DRIFT, limit.SIGNIFICANT * error) else None
