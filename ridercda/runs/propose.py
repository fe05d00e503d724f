"""Runs and laps proposed from a ride: marks, gates, U-turns and stops say where they begin and end."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from itertools import pairwise

import numpy as np
import numpy.typing as npt

from ridercda.rides.ride import Ride
from ridercda.runs.cut import clear_of
from ridercda.runs.fixes import plane_of
from ridercda.runs.gates import LATE_PRESS, Gate, Progress, fastest_gate, gate_of_presses
from ridercda.runs.lap_groups import Lap, groups_of_laps, lap_time_groups, spans_of_marks
from ridercda.runs.marks import Marks, clock, sorted_marks
from ridercda.runs.placement import Placed, Placement, lap_coordinate
from ridercda.runs.placing import TYPICAL_BIKE, TYPICAL_RIDER, place_runs
from ridercda.runs.proposal import Proposal, ProposedRun
from ridercda.runs.spells import SHORTEST, riding_spells
from ridercda.runs.traced import RideTrace, TracedRun, trace_ride, trace_run
from ridercda.runs.turns import turns_by_speed
from ridercda.runs.wheel_distance import DistanceSource
from ridercda.session.defaults import default
from ridercda.session.document import Run, Venue, VenueKind
from ridercda.watch import NO_WATCH, Watch

FloatArray = npt.NDArray[np.float64]
BoolArray = npt.NDArray[np.bool_]

SETTLE = default("run.settle_time")  # [s]
STEADY = 0.8  # of a run's level just before its start: the rider had settled already
DETOUR = 250.0  # [m] off the venue that ends a run
END_OF_ROAD = 60.0  # [m] from the usual turn within which a U-turn is one of a lap
WORTH = 60.0  # [s] a run without whole laps is at least this long


def propose_runs(
    ride: Ride,
    venue: Venue | None,
    settle: float = SETTLE,
    taken: Sequence[Run] = (),
    watch: Watch = NO_WATCH,
) -> Proposal:
    """Return the runs that a ride seems to hold.

    Parameters
    ----------
    ride : Ride
        Repaired: its time strictly increases.
    venue : Venue or None
        None: a road on which nothing repeats.
    settle : float
        Left out after setting off and after a change on the move. [s]
    taken : sequence of Run
        Runs of this ride that stand already; they always win: nothing is proposed where they are.
    watch : Watch

    Returns
    -------
    Proposal
        Runs in order, none overlapping another or a standing one, each inside the ride.

    Raises
    ------
    ValueError
        If `settle` is negative or not finite.
    """
    if not (settle >= 0 and np.isfinite(settle)):
        raise ValueError(f"settle is a time of 0 s or more, not {settle}")
    if ride.time.size < 2:
        return Proposal((), ("The ride has no two records.",))
    venue = venue or Venue(VenueKind.ROAD)
    trace = _trace(ride, venue)
    marks = sorted_marks(ride, trace.travelled, venue.lap_length)
    trace = replace(trace, presses=marks.times)
    if trace.source is DistanceSource.NONE:
        found = _by_lap_times(trace, venue, marks, settle)
    else:
        found = _by_spells(trace, venue, marks, settle, watch)
    end = float(ride.time[-1])
    runs = clear_of(found.runs, taken, end, _least(venue))
    notes = (*marks.notes, *found.notes)
    if not runs:
        notes = (*notes, _why_none(ride, venue, taken))
    return Proposal(runs, tuple(dict.fromkeys(notes)))


def _trace(ride: Ride, venue: Venue) -> RideTrace:
    trace = trace_ride(ride, plane_of([ride]))
    if venue.kind in (VenueKind.LOOP, VenueKind.TRACK):
        return replace(trace, turns=np.empty(0))
    if venue.kind is VenueKind.OUT_AND_BACK and not np.isfinite(trace.east).any():
        leg = venue.lap_length / 2 if venue.lap_length is not None else None
        return replace(trace, turns=turns_by_speed(trace.travelled, trace.speed, leg))
    return trace


def _least(venue: Venue) -> float:
    """Return the shortest run worth proposing. [s]"""
    return SHORTEST if venue.kind is VenueKind.TRACK else WORTH


def _why_none(ride: Ride, venue: Venue, taken: Sequence[Run]) -> str:
    if taken:
        return "Nothing is left to propose beside the runs that stand."
    if venue.kind is VenueKind.ROAD:
        return f"No spell of steady riding of {WORTH:.0f} s or more was found."
    if not (ride.has("latitude", "longitude") or ride.has("distance") or ride.has("speed")):
        return "The ride has neither position, distance, speed nor lap marks that tell laps."
    place = "an out-and-back road" if venue.kind is VenueKind.OUT_AND_BACK else f"a {venue.kind.value}"
    return f"No whole lap of {place} was found between stops; cut the runs by hand."


def _by_lap_times(trace: RideTrace, venue: Venue, marks: Marks, settle: float) -> Proposal:
    if venue.lap_length is None or len(marks.times) < 2:
        return Proposal((), ())
    groups = lap_time_groups(marks.times, venue.lap_length, trace.time, trace.power)
    if not groups:
        return _without_laps(trace, marks, settle)
    runs = []
    previous_end = -np.inf
    for laps in groups:
        start = laps[0].start
        begin = start + settle if start <= previous_end + 1.0 else start
        previous_end = laps[-1].end
        times = tuple(t for t in (laps[0].start, *(lap.end for lap in laps)) if t >= begin)
        reason = f"{len(laps)} laps by lap times alone: the ride has no speed"
        runs.append(ProposedRun(begin, laps[-1].end, times, reason, 0.6))
    return Proposal(tuple(runs), ())


def _without_laps(trace: RideTrace, marks: Marks, settle: float) -> Proposal:
    """Return spans between marks that are too long for laps."""
    run = trace_run(Run("0", "", "", float(trace.time[0])), "", trace, trace.turns)
    found = _by_marks_alone([run], marks, settle, "between lap marks", 0.3)
    note = "The ride has no speed and its lap marks are too far apart for laps: give each run its lap times."
    return Proposal(found.runs, (note,))


def _by_spells(trace: RideTrace, venue: Venue, marks: Marks, settle: float, watch: Watch) -> Proposal:
    spells = riding_spells(trace)
    if not spells:
        return Proposal((), ())
    traced = [
        trace_run(
            Run(str(k), "", "", float(trace.time[s.start]), float(trace.time[s.stop - 1])),
            "",
            trace,
            trace.turns,
        )
        for k, s in enumerate(spells)
    ]
    if venue.kind is VenueKind.ROAD:
        return _by_marks_alone(traced, marks, settle, "steady riding between stops", 0.5)
    span = trace.part(slice(spells[0].start, spells[-1].stop))
    placement = place_runs(venue, traced, [span], TYPICAL_RIDER + TYPICAL_BIKE, watch)
    traced, progress = _on_the_venue(venue.kind, traced, placement)
    if not progress:
        return _by_marks_alone(traced, marks, settle, "between lap marks; no lap was found", 0.3)
    lap = placement.length * (2.0 if venue.kind is VenueKind.OUT_AND_BACK else 1.0)
    notes = list(placement.notes)
    gate = gate_of_presses(list(progress.values()), marks.times, lap)
    if gate is None:
        gate = fastest_gate(list(progress.values()), lap, settle)
    runs: list[ProposedRun] = []
    fixed = placement.line is not None
    for run in traced:
        if run.run.id in progress:
            # The button may be pressed for a spell's last pass when the rider stands already.
            presses = [t for t in marks.times if run.time[0] - 0.5 <= t <= run.time[-1] + LATE_PRESS]
            runs += _in_spell(run, progress[run.run.id], gate, lap, settle, fixed, presses, notes)
    return Proposal(tuple(runs), tuple(notes))


def _on_the_venue(
    kind: VenueKind, traced: Sequence[TracedRun], placement: Placement
) -> tuple[list[TracedRun], dict[str, Progress]]:
    """Return the stretches of the spells that lie on the venue, and how they go on along it."""
    stretches, progress = [], {}
    for run in traced:
        if run.run.id not in placement.runs:
            continue
        placed = placement.runs[run.run.id]
        round_and_round = kind in (VenueKind.LOOP, VenueKind.TRACK)
        sense = float(placed.direction[0]) if round_and_round else 1.0
        parts = _without_detours(run, placed.off_venue)
        if kind is VenueKind.OUT_AND_BACK:
            parts = [piece for part in parts for piece in _between_odd_turns(part, placed, placement.length)]
        for number, part in enumerate(parts):
            piece = run.part(part, f"{run.run.id}.{number}")
            stretches.append(piece)
            coordinate, _ = lap_coordinate(kind, placed.part(part), placement.length)
            progress[piece.run.id] = Progress(piece.time, coordinate, piece.speed, sense)
    return stretches, progress


def _without_detours(run: TracedRun, off: BoolArray) -> list[slice]:
    """Return what lies between long detours from the venue; a U-turn is none."""
    edges = np.flatnonzero(np.diff(np.concatenate(([False], off, [False])).astype(np.int8)))
    detours = [
        (int(first), int(last))
        for first, last in zip(edges[::2], edges[1::2], strict=True)
        if run.travelled[last - 1] - run.travelled[first] > DETOUR
    ]
    starts = [0, *(last for _, last in detours)]
    stops = [*(first for first, _ in detours), run.time.size]
    return [slice(a, b) for a, b in zip(starts, stops, strict=True) if b - a > 1]


def _between_odd_turns(part: slice, placed: Placed, length: float) -> list[slice]:
    """Cut a stretch where the rider turned away from the ends of the road, as one does to come back to a line."""
    station, direction = placed.station[part], placed.direction[part]
    turned = 1 + np.flatnonzero(np.diff(direction) != 0)
    odd = [int(k) for k in turned if min(abs(station[k]), abs(station[k] - length)) > END_OF_ROAD]
    cuts = [part.start, *(part.start + k for k in odd), part.stop]
    return [slice(a, b) for a, b in pairwise(cuts) if b - a > 1]


def _in_spell(
    run: TracedRun,
    progress: Progress,
    gate: Gate,
    lap: float,
    settle: float,
    fixed: bool,
    presses: Sequence[float],
    notes: list[str],
) -> list[ProposedRun]:
    """Return the runs of one spell whose way round the venue is known."""
    passing = progress.passing(gate.place, lap)
    if passing.size < 2:
        return []
    pressed = _snapped(presses, passing, gate, notes) if gate.basis == "lap button" else set()
    laps = [Lap(float(a), float(b), _level(run, float(a), float(b))) for a, b in pairwise(passing)]
    groups = groups_of_laps(laps, pressed, notes)
    found = []
    previous_end = float(run.time[0])
    for number, group in enumerate(groups):
        first, last = group[0].start, group[-1].end
        on_the_move = number > 0 and first <= previous_end + 1.0
        begin = first
        if on_the_move or not _settled(run, first, settle, group):
            begin += settle
        begin = max(begin, float(run.time[0]) + settle)
        previous_end = last
        times = tuple(t for t in (group[0].start, *(part.end for part in group)) if t >= begin)
        if last - begin < min(0.5 * (last - first), WORTH):
            continue
        found.append(
            ProposedRun(begin, last, times, _reason(group, pressed, gate, fixed), _trust(pressed, fixed))
        )
    return found


def _reason(group: Sequence[Lap], pressed: set[float], gate: Gate, fixed: bool) -> str:
    count = f"{len(group)} lap" + ("s" if len(group) > 1 else "")
    if pressed:
        how = "moved to the gate by position" if fixed else "at the gate"
        return f"{count} between presses of the lap button, {how}"
    return f"{count} between passes of a gate found from the {'position' if fixed else 'distance'}"


def _trust(pressed: set[float], fixed: bool) -> float:
    if pressed:
        return 0.95 if fixed else 0.8
    return 0.7 if fixed else 0.5


def _snapped(marks: Sequence[float], passing: FloatArray, gate: Gate, notes: list[str]) -> set[float]:
    """Return the passes of the gate that presses meant, with a note for each press far off."""
    meant = set()
    for press in marks:
        nearest = float(passing[int(np.argmin(np.abs(passing - press)))])
        off = press - nearest
        if abs(off) <= LATE_PRESS:
            meant.add(nearest)
            if abs(off) > 3.0:
                word = "late" if off > 0 else "early"
                notes.append(f"The lap button was pressed {abs(off):.0f} s {word} at {clock(press)}.")
        elif passing[0] < press < passing[-1]:
            notes.append(f"The lap button was pressed away from the gate at {clock(press)}: passed over.")
    return meant


def _level(run: TracedRun, start: float, end: float) -> float:
    """Return the mean power of a span, or the mean speed without power. [W or m/s]"""
    inside = (run.time > start) & (run.time <= end)
    if not inside.any():
        return 0.0
    power = run.power[inside]
    if np.isfinite(run.power).mean() > 0.5:
        return float(np.nanmean(power)) if np.isfinite(power).any() else 0.0
    return float(run.speed[inside].mean())


def _settled(run: TracedRun, start: float, settle: float, group: Sequence[Lap]) -> bool:
    """Return whether the rider was at the run's level already while approaching its start."""
    if start - settle < run.time[0]:
        return False
    return _level(run, start - settle, start) >= STEADY * float(np.mean([lap.level for lap in group]))


def _by_marks_alone(
    traced: Sequence[TracedRun], marks: Marks, settle: float, reason: str, trust: float
) -> Proposal:
    """Return the spans between marks and U-turns of each spell, for a venue that does not repeat.

    With two marks or more in a spell, what lies before the first and after the last is the way there and back.
    """
    runs = []
    for run in traced:
        turned = tuple(float(t) for t in np.interp(run.turns, run.travelled, run.time))
        ends = (run.marks[0], run.marks[-1]) if len(run.marks) > 1 else (run.time[0], run.time[-1])
        low, high = float(ends[0]), float(ends[1])
        edges = [t for t in sorted({low, high, *run.marks, *turned}) if low <= t <= high]
        spans = spans_of_marks([Lap(a, b, _level(run, a, b)) for a, b in pairwise(edges)])
        previous_end = -np.inf
        for lap in spans:
            steady = lap.start > previous_end + 1.0 and _settled(run, lap.start, settle, [lap])
            begin = lap.start if steady else lap.start + settle
            previous_end = lap.end
            if lap.end - begin >= WORTH:
                text = "between lap marks" if run.marks else reason
                runs.append(ProposedRun(begin, lap.end, (), text, trust))
    return Proposal(tuple(runs), ())
