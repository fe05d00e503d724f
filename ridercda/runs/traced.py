"""A run's signals as the position finder sees them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from ridercda.physics.local_plane import LocalPlane
from ridercda.rides.ride import Ride
from ridercda.runs.fixes import track_on
from ridercda.runs.marks import sorted_marks
from ridercda.runs.records import points_in
from ridercda.runs.turns import u_turns
from ridercda.runs.wheel_distance import DistanceSource, wheel_distance
from ridercda.session.document import Run, Session, VenueKind

FloatArray = npt.NDArray[np.float64]

Group = tuple[str, str]  # ride id and tyre set: what shares one circumference error


@dataclass(frozen=True, slots=True, eq=False)
class RideTrace:
    """A ride's path, whole.

    Parameters
    ----------
    time, travelled, doubt, east, north, speed : ndarray, shape (n,)
        [s, m, m, m, m, m/s]
    power, altitude : ndarray, shape (n,)
        NaN where unknown. [W, m]
    source : DistanceSource
    turns : ndarray, shape (k,)
        Distances ridden at which the path turns back on itself. [m]
    presses : tuple of float
        Lap marks set by hand or at a gate. [s]
    """

    time: FloatArray
    travelled: FloatArray
    doubt: FloatArray
    east: FloatArray
    north: FloatArray
    speed: FloatArray
    power: FloatArray
    altitude: FloatArray
    source: DistanceSource
    turns: FloatArray
    presses: tuple[float, ...]

    def part(self, points: slice) -> RideTrace:
        """Return the trace of some records only; its turns and presses stay those of the whole."""
        arrays = ("time", "travelled", "doubt", "east", "north", "speed", "power", "altitude")
        return replace(self, **{name: getattr(self, name)[points] for name in arrays})


@dataclass(frozen=True, slots=True, eq=False)
class TracedRun:
    """One run's part of a trace; arrays of shape (n,) hold the records inside it."""

    run: Run
    group: Group
    points: slice
    time: FloatArray  # [s]
    travelled: FloatArray  # since the ride's first record [m]
    doubt: FloatArray  # of the step ending at each record [m]
    east: FloatArray  # [m]
    north: FloatArray  # [m]
    speed: FloatArray  # [m/s]
    power: FloatArray  # [W]
    altitude: FloatArray  # [m]
    source: DistanceSource
    turns: FloatArray  # inside the run, in distance ridden [m]
    earlier_turns: FloatArray  # in the ride before the run [m]
    marks: tuple[float, ...]  # laps given for the run, else pressed by hand inside it [s]

    def part(self, inner: slice, name: str) -> TracedRun:
        """Return some records of the run as a run of another name."""
        first = self.points.start
        time = self.time[inner]
        arrays = ("time", "travelled", "doubt", "east", "north", "speed", "power", "altitude")
        return replace(
            self,
            run=replace(self.run, id=name, start=float(time[0]), end=float(time[-1])),
            points=slice(first + inner.start, first + inner.stop),
            marks=tuple(mark for mark in self.marks if time[0] - 0.5 <= mark <= time[-1] + 0.5),
            **{array: getattr(self, array)[inner] for array in arrays},
        )

    @property
    def length(self) -> float:
        """Distance ridden in the run. [m]"""
        return float(self.travelled[-1] - self.travelled[0]) if self.travelled.size else 0.0

    @property
    def fixed(self) -> bool:
        """Whether at least a third of the records have a position."""
        good = np.isfinite(self.east)
        return bool(good.size and good.mean() > 1 / 3)


def trace_ride(ride: Ride, plane: LocalPlane | None) -> RideTrace:
    """Return a ride's path on a plane. Its time must strictly increase."""
    n = ride.time.size
    nothing = np.full(n, np.nan)
    east, north = track_on(plane, ride) if plane is not None else (nothing, nothing.copy())
    wheel = wheel_distance(ride, east, north)
    dt = np.diff(ride.time, prepend=ride.time[:1])
    speed = np.diff(wheel.distance, prepend=wheel.distance[:1]) / np.maximum(dt, 1e-9)
    if n > 1:
        speed[0] = speed[1]
    return RideTrace(
        time=ride.time,
        travelled=wheel.distance,
        doubt=wheel.doubt,
        east=east,
        north=north,
        speed=speed,
        power=ride.channels.get("power", nothing),
        altitude=ride.channels.get("altitude", nothing),
        source=wheel.source,
        turns=u_turns(wheel.distance, east, north),
        presses=sorted_marks(ride, wheel.distance, None).times if n > 1 else (),
    )


def trace_run(run: Run, tyres: str, trace: RideTrace, turns: FloatArray) -> TracedRun:
    """Return the part of a trace that a run covers.

    Parameters
    ----------
    run : Run
    tyres : str
        The tyre set it was ridden on.
    trace : RideTrace
        Of the run's ride.
    turns : ndarray, shape (k,)
        Distances ridden at which the rider turned back, anywhere in the ride. [m]
    """
    points = points_in(trace.time, run.start, run.end)
    time = trace.time[points]
    travelled = trace.travelled[points]
    inside = (turns > travelled[0]) & (turns < travelled[-1]) if time.size else slice(0)
    marks = run.laps or tuple(
        press for press in trace.presses if time.size and time[0] - 0.5 <= press <= time[-1] + 0.5
    )
    return TracedRun(
        run=run,
        group=(run.ride, tyres),
        points=points,
        time=time,
        travelled=travelled,
        doubt=trace.doubt[points],
        east=trace.east[points],
        north=trace.north[points],
        speed=trace.speed[points],
        power=trace.power[points],
        altitude=trace.altitude[points],
        source=trace.source,
        turns=turns[inside],
        earlier_turns=turns[turns <= travelled[0]] if time.size else turns[:0],
        marks=marks,
    )


def trace_runs(session: Session, traces: Mapping[str, RideTrace]) -> tuple[TracedRun, ...]:
    """Return the counted runs of a session whose ride is at hand and that hold at least two records.

    On a loop or a track a path that comes back beside itself is a bend, not a U-turn.
    """
    tyres = {setup.id: setup.tyres for setup in session.setups}
    round_and_round = session.venue is not None and session.venue.kind in (VenueKind.LOOP, VenueKind.TRACK)
    traced = []
    for run in session.runs:
        if run.ride in traces and not run.excluded:
            trace = traces[run.ride]
            turns = np.empty(0) if round_and_round else trace.turns
            traced.append(trace_run(run, tyres.get(run.setup, ""), trace, turns))
    return tuple(run for run in traced if run.time.size >= 2)
