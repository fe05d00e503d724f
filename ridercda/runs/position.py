"""Position along the venue for every record of the runs of a day."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from types import MappingProxyType

import numpy as np
import numpy.typing as npt

from ridercda.physics.track import TrackShape
from ridercda.rides.ride import Ride
from ridercda.runs.fixes import plane_of
from ridercda.runs.placement import Placed, Placement, Scale, lap_coordinate, passing_times
from ridercda.runs.placing import TYPICAL_BIKE, TYPICAL_RIDER, place_runs
from ridercda.runs.records import counted
from ridercda.runs.reference_line import ReferenceLine
from ridercda.runs.traced import Group, RideTrace, TracedRun, trace_ride, trace_runs
from ridercda.runs.turns import turns_by_speed
from ridercda.session.document import Session, Venue, VenueKind
from ridercda.watch import NO_WATCH, Watch

FloatArray = npt.NDArray[np.float64]
IntArray = npt.NDArray[np.int64]
BoolArray = npt.NDArray[np.bool_]


@dataclass(frozen=True, slots=True, eq=False)
class RunPosition:
    """Where a run was, at each of its records.

    Arrays have shape (n,) and belong to the records ``points`` of the ride; the interval that ends at
    ``points.start + k`` runs from entry k - 1 to entry k, so the first entry only begins one.

    Parameters
    ----------
    points : slice
        Of the ride's records.
    position : ndarray
        Along the venue: from 0 up to the length of a lap; on an out-and-back road or a road from 0 to its
        length, whichever way it is ridden. [m]
    unwrapped : ndarray
        The same without falling back at the start of a lap; falls when ridden against the venue's sense. [m]
    direction : ndarray
        +1 with growing position, -1 against it.
    lap : ndarray of int
        Complete lap within the run, from 0; -1 outside complete laps.
    heading : ndarray
        Of travel, clockwise from true north, 0 to 2π; NaN where unknown. On a track without positions it is
        counted from the direction of the home straight. [rad]
    curvature : ndarray
        Of the path as ridden, positive to the right; NaN where unknown. [1/m]
    valid : ndarray of bool
        False in a U-turn, off the venue and in an exclusion of the run.
    gates : tuple of float
        When laps began and ended: as given for the run, else when it was back where it started, interpolated
        between records. [s]
    standard_error : ndarray
        Of the position; its error varies slowly. [m]
    """

    points: slice
    position: FloatArray
    unwrapped: FloatArray
    direction: FloatArray
    lap: IntArray
    heading: FloatArray
    curvature: FloatArray
    valid: BoolArray
    gates: tuple[float, ...]
    standard_error: FloatArray

    def __post_init__(self) -> None:
        """Make the arrays read-only."""
        for name in self.__slots__:
            value = getattr(self, name)
            if isinstance(value, np.ndarray):
                value.setflags(write=False)

    @property
    def records(self) -> slice:
        """The ride's records that end an interval of this run."""
        return slice(min(self.points.start + 1, self.points.stop), self.points.stop)

    @property
    def laps(self) -> int:
        """Number of complete laps."""
        return max(len(self.gates) - 1, 0)


@dataclass(frozen=True, slots=True, eq=False)
class VenuePath:
    """The venue as the runs show it, and where each run was on it.

    Parameters
    ----------
    kind : VenueKind
    length : float
        Range of the position: once round, or the road one way. [m]
    length_error : float
        Standard error of the length. [m]
    closed : bool
        Whether position `length` is position 0.
    has_heading : bool
        Whether headings are known against north.
    line : ReferenceLine or None
        The drawn line; None where no position was recorded.
    runs : mapping of run id to RunPosition
        Runs that could be placed.
    circumference : mapping of (ride id, tyre set) to Scale
        True over recorded distance.
    notes : tuple of str
        What the user should know, one sentence each.
    """

    kind: VenueKind
    length: float
    length_error: float
    closed: bool
    has_heading: bool
    line: ReferenceLine | None
    runs: Mapping[str, RunPosition]
    circumference: Mapping[Group, Scale]
    notes: tuple[str, ...] = field(default=())

    @property
    def lap_length(self) -> float:
        """Once round, or there and back. [m]"""
        return self.length * (2.0 if self.kind is VenueKind.OUT_AND_BACK else 1.0)

    def circumference_factor(self, ride: str, tyres: str) -> Scale:
        """Return true over recorded distance for a ride and tyre set; 1 with an error of 1 % if unknown."""
        return self.circumference.get((ride, tyres), Scale(1.0, 1e-2, ""))


def locate(session: Session, rides: Mapping[str, Ride], watch: Watch = NO_WATCH) -> VenuePath:
    """Return where along the venue every record of the session's counted runs lies.

    Parameters
    ----------
    session : Session
        With a venue; without one the runs are taken as ridden on a road that does not repeat.
    rides : mapping of ride id to Ride
        Repaired: their time strictly increases. Runs of other rides are passed over.
    watch : Watch

    Returns
    -------
    VenuePath

    Raises
    ------
    Cancelled
        If the watch stops the work.

    Notes
    -----
    With fixes, one line is drawn through all laps of all runs, by distance as the wheel sees it; each fix is
    projected near where dead reckoning expects it, and the position is wheel distance plus a slowly varying
    offset. Without fixes the lap closes by lap marks, or where the signals that the ground leaves in a ride
    repeat.
    """
    venue = session.venue or Venue(VenueKind.ROAD)
    used = sorted({run.ride for run in session.runs if run.ride in rides and not run.excluded})
    plane = plane_of([rides[ride] for ride in used])
    traces = {ride: trace_ride(rides[ride], plane) for ride in used}
    if venue.kind is VenueKind.OUT_AND_BACK:
        leg = venue.lap_length / 2 if venue.lap_length is not None else None
        traces = {ride: _turned_by_speed(trace, leg) for ride, trace in traces.items()}
    runs = trace_runs(session, traces)
    mass = (session.rider.mass or TYPICAL_RIDER) + (session.bike.mass or TYPICAL_BIKE)
    placement = place_runs(venue, runs, _spans(runs, traces), mass, watch)
    return _path(venue, runs, placement)


def _turned_by_speed(trace: RideTrace, leg: float | None) -> RideTrace:
    """Return a trace without positions with the U-turns that its speed shows."""
    if np.isfinite(trace.east).any():
        return trace
    return replace(trace, turns=turns_by_speed(trace.travelled, trace.speed, leg))


def _spans(runs: Sequence[TracedRun], traces: Mapping[str, RideTrace]) -> list[RideTrace]:
    """Return each ride's trace between the start of its first run and the end of its last."""
    spans = []
    for ride, trace in traces.items():
        points = [run.points for run in runs if run.run.ride == ride]
        if points:
            spans.append(trace.part(slice(min(p.start for p in points), max(p.stop for p in points))))
    return spans


def _path(venue: Venue, runs: Sequence[TracedRun], placement: Placement) -> VenuePath:
    closed = venue.kind in (VenueKind.LOOP, VenueKind.TRACK)
    shape = _track_shape(venue, placement)
    told = {
        run.run.id: _run_position(venue.kind, run, placement.runs[run.run.id], placement, shape)
        for run in runs
        if run.run.id in placement.runs
    }
    return VenuePath(
        kind=venue.kind,
        length=placement.length,
        length_error=placement.length_error,
        closed=closed,
        has_heading=placement.line is not None,
        line=placement.line,
        runs=MappingProxyType(told),
        circumference=placement.scales,
        notes=placement.notes,
    )


def _track_shape(venue: Venue, placement: Placement) -> TrackShape | None:
    if venue.kind is not VenueKind.TRACK or placement.line is not None or venue.bend_radius is None:
        return None
    return TrackShape(placement.length, venue.bend_radius, venue.transition_length or 0.0)


def _run_position(
    kind: VenueKind, run: TracedRun, placed: Placed, placement: Placement, shape: TrackShape | None
) -> RunPosition:
    length = placement.length
    if kind in (VenueKind.LOOP, VenueKind.TRACK):
        position = placed.station % length
        position[position >= length] = 0.0  # the remainder of a tiny negative number rounds up to the length
    else:
        position = np.clip(placed.station, 0.0, length)
    heading, curvature = _heading(run, placed, placement.line, shape)
    gates = _gates(run, *lap_coordinate(kind, placed, length))
    valid = ~placed.off_venue
    valid[1:] &= counted(run.time, slice(1, run.time.size), run.run.exclusions)
    return RunPosition(
        points=run.points,
        position=position,
        unwrapped=placed.station,
        direction=placed.direction,
        lap=_laps(run.time, gates),
        heading=heading,
        curvature=curvature,
        valid=valid,
        gates=gates,
        standard_error=placed.standard_error,
    )


def _heading(
    run: TracedRun, placed: Placed, line: ReferenceLine | None, shape: TrackShape | None
) -> tuple[FloatArray, FloatArray]:
    if line is not None:
        ahead = line.heading(placed.station)
        back = placed.direction < 0
        heading = np.where(back, (ahead + np.pi) % (2 * np.pi), ahead)
        return heading, line.curvature(placed.station) * placed.direction
    if shape is not None:
        # A track is ridden with the infield on the left.
        return shape.heading(placed.station), -shape.curvature(placed.station)
    nothing = np.full(run.time.size, np.nan)
    return nothing, nothing.copy()


def _gates(run: TracedRun, coordinate: FloatArray, lap: float) -> tuple[float, ...]:
    """Return when laps begin and end: as given for the run, else each time it is back where it started."""
    if run.run.laps:
        return run.run.laps
    if not np.isfinite(lap):
        return ()
    time, coordinate = _to_the_edges(run, coordinate)
    slack = min(0.01 * lap, 20.0)  # a run cut at a gate by hand
    laps = int((coordinate[-1] - coordinate[0] + slack) // lap)
    if laps == 0:
        return ()
    goals = coordinate[0] + lap * np.arange(laps + 1)
    return tuple(float(t) for t in passing_times(time, coordinate, goals))


def _to_the_edges(run: TracedRun, coordinate: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Add the moments at which a run begins and ends, which lie up to a record beyond its own records."""
    interval = float(np.median(np.diff(run.time)))
    ahead = min(max(run.time[0] - run.run.start, 0.0), interval)
    end = run.time[-1] if run.run.end is None else run.run.end
    behind = min(max(end - run.time[-1], 0.0), interval)
    time = np.concatenate(([run.time[0] - ahead], run.time, [run.time[-1] + behind]))
    first = coordinate[0] - ahead * run.speed[0]
    last = coordinate[-1] + behind * run.speed[-1]
    return time, np.concatenate(([first], coordinate, [last]))


def _laps(time: FloatArray, gates: tuple[float, ...]) -> IntArray:
    if len(gates) < 2:
        return np.full(time.size, -1, np.int64)
    lap = np.searchsorted(np.asarray(gates), time - 1e-6, side="right").astype(np.int64) - 1
    lap[lap >= len(gates) - 1] = -1
    return lap
