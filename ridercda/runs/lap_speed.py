"""Speed from lap times, for a track day whose rides have power but no speed sensor."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from itertools import pairwise
from types import MappingProxyType

import numpy as np
import numpy.typing as npt

from ridercda.rides.ride import Fault, FaultKind, Ride
from ridercda.runs.marks import sorted_marks
from ridercda.session.document import Run, Session

FloatArray = npt.NDArray[np.float64]

PLAUSIBLE = (2.0, 30.0)  # [m/s] a lap whose mean speed is outside is a pause or no lap


@dataclass(frozen=True, slots=True, eq=False)
class LapSpeed:
    """Speed as lap times show it.

    Parameters
    ----------
    speed : ndarray, shape (n,)
        Mean over the interval before each record, constant within a lap; NaN outside whole laps. [m/s]
    laps : int
        Laps it was made from.
    """

    speed: FloatArray
    laps: int


def speed_from_laps(time: FloatArray, laps: Sequence[Sequence[float]], lap_length: float) -> LapSpeed:
    """Return the speed that lap times show.

    Parameters
    ----------
    time : ndarray, shape (n,)
        Strictly increasing. [s]
    laps : sequence of sequences of float
        For each run, when its laps begin and end. [s]
    lap_length : float
        [m]

    Returns
    -------
    LapSpeed
        An interval that holds the end of a lap takes its share of both laps, so the distance of every lap is
        kept to the moment.

    Raises
    ------
    ValueError
        If the lap length is not positive.
    """
    if not lap_length > 0:
        raise ValueError(f"a lap length is positive, not {lap_length}")
    n = time.size
    ridden = np.zeros(n)
    covered = np.zeros(n)
    count = 0
    for edges in laps:
        for start, end in pairwise(edges):
            if end <= start or not PLAUSIBLE[0] <= lap_length / (end - start) <= PLAUSIBLE[1]:
                continue
            count += 1
            first = int(np.searchsorted(time, start, side="right"))
            last = min(int(np.searchsorted(time, end, side="left")) + 1, n)
            k = np.arange(max(first, 1), last)
            overlap = np.maximum(np.minimum(time[k], end) - np.maximum(time[k - 1], start), 0.0)
            ridden[k] += overlap * lap_length / (end - start)
            covered[k] += overlap
    dt = np.diff(time, prepend=time[:1])
    whole = (covered > 0) & (covered >= dt - 1e-6)
    # An interval at the edge of the laps is told by the part that lies inside, if that is half of it or more.
    most = (covered > 0) & (covered >= 0.5 * dt)
    speed = np.full(n, np.nan)
    use = whole | most
    speed[use] = ridden[use] / covered[use]
    return LapSpeed(speed, count)


def with_lap_speed(ride: Ride, ride_id: str, session: Session) -> Ride:
    """Return a ride without speed and distance with the speed its lap times show, and a fault that says so.

    Parameters
    ----------
    ride : Ride
        Repaired.
    ride_id : str
    session : Session
        Its venue's `lap_length` and the laps of the ride's runs count; a run without laps takes the ride's own
        lap marks inside it.

    Returns
    -------
    Ride
        The ride as it is where it has speed or distance, or where lap length or lap times are missing.
    """
    lap_length = session.venue.lap_length if session.venue is not None else None
    if ride.has("speed") or ride.has("distance") or lap_length is None or ride.time.size < 2:
        return ride
    marks = sorted_marks(ride, np.zeros(ride.time.size), lap_length).times
    runs = [run for run in session.runs if run.ride == ride_id]
    laps = [run.laps or _inside(marks, run, float(ride.time[-1])) for run in runs]
    found = speed_from_laps(ride.time, laps, lap_length)
    if found.laps == 0:
        return ride
    fault = Fault(
        kind=FaultKind.CHANNEL_MISSING,
        start=float(ride.time[0]),
        end=float(ride.time[-1]),
        channel="speed",
        cause=f"No speed was recorded: {found.laps} lap times on a lap of {lap_length:g} m give one mean "
        "speed a lap; changes of speed within a lap are not seen.",
        repair="lap-times",
        choices=("lap-times", "leave"),
    )
    return replace(
        ride,
        channels=MappingProxyType({**ride.channels, "speed": found.speed}),
        faults=tuple(sorted((*ride.faults, fault), key=lambda fault: fault.start)),
        notes=MappingProxyType({**ride.notes, "speed": "from lap times: one mean a lap"}),
    )


def _inside(marks: Sequence[float], run: Run, ride_end: float) -> tuple[float, ...]:
    end = ride_end if run.end is None else run.end
    return tuple(mark for mark in marks if run.start - 1.0 <= mark <= end + 1.0)
