"""Lap marks sorted: which of them a rider pressed, and which the head unit made by itself."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from ridercda.rides.ride import LapTrigger, Ride

FloatArray = npt.NDArray[np.float64]

DOUBLE_PRESS = 5.0  # [s] two presses this near are one; common practice
# Distances after which head units close a lap by themselves. [m]
AUTO_LAPS = (500.0, 1000.0, 1609.344, 2000.0, 3000.0, 3218.688, 5000.0, 8046.72, 10000.0)


@dataclass(frozen=True, slots=True)
class Marks:
    """Lap marks worth something.

    Parameters
    ----------
    times : tuple of float
        Increasing, on the ride's clock. [s]
    notes : tuple of str
        What was left out and why, one sentence each.
    """

    times: tuple[float, ...]
    notes: tuple[str, ...] = ()


def sorted_marks(ride: Ride, travelled: FloatArray, lap_length: float | None) -> Marks:
    """Return the lap marks of a ride that a rider, or a gate, may have set.

    Parameters
    ----------
    ride : Ride
    travelled : ndarray, shape (n,)
        Distance ridden at each record. [m]
    lap_length : float, optional
        Of the venue: marks that come every lap may be pressed at the gate, whatever the distance. [m]

    Returns
    -------
    Marks
        The ends of laps; also the start of a lap where none ended. Laps closed by time or by the end of the
        recording are no marks.
    """
    notes: list[str] = []
    own = [lap for lap in ride.laps if lap.trigger not in _BY_ITSELF]
    counts = {
        trigger: sum(lap.trigger is trigger for lap in ride.laps)
        for trigger in (LapTrigger.DISTANCE, LapTrigger.TIME)
    }
    for trigger, count in counts.items():
        if count:
            notes.append(f"{count} laps closed by {trigger.value} were passed over: the head unit made them.")
    first, last = float(ride.time[0]), float(ride.time[-1])
    ends = {lap.end for lap in own}
    # The start of a lap is a mark only where no lap ended about then: files round the two differently.
    closed = np.array([lap.end for lap in ride.laps])
    starts = {
        lap.start
        for lap in own
        if lap.start > first + DOUBLE_PRESS and np.abs(closed - lap.start).min() > DOUBLE_PRESS
    }
    by_itself = {lap.end for lap in ride.laps if lap.trigger in _BY_ITSELF}
    times = np.array(sorted((ends | starts) - by_itself))
    times = times[(times > first + 1.0) & (times < last - 1.0)]
    times = _without_doubles(times, notes)
    every = _equal_distance(np.interp(times, ride.time, travelled), lap_length)
    if every is not None:
        notes.append(
            f"The lap marks come every {every:.0f} m wherever that is: the head unit made them, they were "
            "passed over."
        )
        return Marks((), tuple(notes))
    return Marks(tuple(float(t) for t in times), tuple(notes))


_BY_ITSELF = frozenset({LapTrigger.DISTANCE, LapTrigger.TIME, LapTrigger.SESSION_END})


def _without_doubles(times: FloatArray, notes: list[str]) -> FloatArray:
    if times.size < 2:
        return times
    kept = [float(times[0])]
    for time in times[1:]:
        if time - kept[-1] > DOUBLE_PRESS:
            kept.append(float(time))
        else:
            notes.append(f"The lap button was pressed twice at {clock(kept[-1])}: the first press counts.")
    return np.array(kept)


def _equal_distance(at: FloatArray, lap_length: float | None) -> float | None:
    """Return the distance between marks where it is always the same and no lap of the venue; else None."""
    gaps = np.diff(at)
    if gaps.size < 3:
        return None
    usual = float(np.median(gaps))
    # Records a second apart leave a mark uncertain by the way ridden in a second.
    if usual < 200 or np.abs(gaps - usual).max() > 15.0 + 0.002 * usual:
        return None
    if lap_length is not None:
        laps = usual / lap_length
        if round(laps) >= 1 and abs(laps - round(laps)) < 0.02 * round(laps):
            return None
    if lap_length is None and min(abs(usual - auto) for auto in AUTO_LAPS) > 15.0:
        return None
    return usual


def clock(time: float) -> str:
    """Return seconds as h:mm:ss, the way session files write them."""
    minutes, seconds = divmod(round(time), 60)
    hours, minutes = divmod(minutes, 60)
    return f"{hours}:{minutes:02d}:{seconds:02d}"
