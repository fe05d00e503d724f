"""Runs placed without fixes: by lap marks, and where the signals of the ground repeat."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from types import MappingProxyType

import numpy as np
import numpy.typing as npt

from ridercda.physics.track import TrackShape
from ridercda.runs.between_turns import place_between_turns
from ridercda.runs.ground_pattern import (
    Pattern,
    correlation_by_shift,
    first_repeat,
    folded,
    likeness,
    match,
    pattern_of,
    peak,
    pieces_of,
)
from ridercda.runs.lap_length import SHORTEST
from ridercda.runs.placement import Placed, Placement, Scale
from ridercda.runs.traced import Group, TracedRun
from ridercda.runs.wheel_distance import DistanceSource
from ridercda.session.document import Venue, VenueKind

FloatArray = npt.NDArray[np.float64]

CIRCUMFERENCE_RANGE = 0.03  # relative; no wheel is set further from the truth
PIECE = 12  # laps
PRESS_ERROR = 0.7  # [s] how late or early a lap button is pressed; common practice
GUST_ERROR = 4e-3  # relative error of a loop told by speed alone: gusts shift its pattern; common practice
LINE_ERROR = 3e-3  # relative error of a lap of a track: 0.2 m higher is 0.5 % of 250 m; common practice
ALIKE = 0.4  # correlation from which two patterns are taken to show the same ground


def place_by_closure(
    venue: Venue,
    rest: Sequence[TracedRun],
    known: Placement | None,
    located: Sequence[TracedRun],
    mass: float,
) -> Placement:
    """Place runs that have no fixes, on the coordinate of those that have, if any.

    Parameters
    ----------
    venue : Venue
    rest : sequence of TracedRun
        To be placed.
    known : Placement, optional
        Of runs with fixes.
    located : sequence of TracedRun
        The runs that `known` places.
    mass : float
        Rider and bike, roughly. [kg]

    Returns
    -------
    Placement
        Of the known runs and the others.
    """
    if venue.kind is VenueKind.OUT_AND_BACK:
        found = place_between_turns(rest, venue.lap_length, known, mass)
    elif venue.kind is VenueKind.ROAD:
        found = _end_to_end(rest, known)
    else:
        found = _round(venue, rest, known, located, mass)
    if known is None:
        return found
    return Placement(
        line=known.line,
        length=known.length,
        length_error=known.length_error,
        runs=MappingProxyType({**known.runs, **found.runs}),
        scales=MappingProxyType({**found.scales, **known.scales}),
        notes=(*known.notes, *found.notes),
    )


def _round(
    venue: Venue,
    rest: Sequence[TracedRun],
    known: Placement | None,
    located: Sequence[TracedRun],
    mass: float,
) -> Placement:
    notes: list[str] = []
    given = known.length if known is not None else venue.lap_length
    rest = [_timed_only(run, given) if run.source is DistanceSource.NONE else run for run in rest]
    unplaced = [run.run.id for run in rest if run.length <= 0]
    if unplaced:
        notes.append(
            f"Run {', '.join(unplaced)}: neither distance, speed, position nor two lap marks with a "
            "lap_length; it cannot be placed."
        )
    rest = [run for run in rest if run.length > 0]
    length = given if given is not None else _unknown_lap(rest, mass, notes)
    if length is None:
        return Placement(None, 1.0, 1.0, {}, {}, tuple(notes))
    step = float(np.clip(length / 100, 2.5, 10.0))
    patterns = {run.run.id: pattern_of(run, mass, step) for run in (*rest, *located)}
    scales = _scales(venue, rest, patterns, length, given is not None, notes)
    runs = _aligned(rest, patterns, scales, length, known, located)
    if venue.kind is VenueKind.TRACK and known is None:
        runs = _from_home_straight(venue, rest, patterns, runs, length)
    error = 0.0 if given is not None else 1e-2 * length
    return Placement(None, length, error, MappingProxyType(runs), MappingProxyType(scales), tuple(notes))


def _timed_only(run: TracedRun, length: float | None) -> TracedRun:
    """Give a run without distance the distance that its lap times show: one lap between two marks."""
    if length is None or len(run.marks) < 2:
        return run
    marks = np.asarray(run.marks)
    ridden = length * np.arange(marks.size)
    # Before the first and after the last mark the neighbouring lap's speed is held.
    ahead = marks[-1] + (marks[-1] - marks[-2]) * 100
    behind = marks[0] - (marks[1] - marks[0]) * 100
    at = np.interp(
        run.time,
        np.concatenate(([behind], marks, [ahead])),
        np.concatenate(([-100 * length], ridden, [ridden[-1] + 100 * length])),
    )
    speed = np.gradient(at, run.time) if run.time.size > 1 else np.zeros(run.time.size)
    return replace(run, travelled=at, speed=speed)


def _unknown_lap(rest: Sequence[TracedRun], mass: float, notes: list[str]) -> float | None:
    """Return a lap length from lap marks or from repeating signals; None with a note when neither tells."""
    gaps = np.concatenate([_mark_gaps(run) for run in rest] or [np.empty(0)])
    if gaps.size >= 2 and np.ptp(gaps) < 0.1 * float(np.median(gaps)):
        return float(np.median(gaps))
    repeat = first_repeat([pattern_of(run, mass, 10.0) for run in rest], SHORTEST)
    if repeat is None:
        notes.append("No lap length is given and nothing in the rides repeats: give venue.lap_length.")
        return None
    patterns = [pattern_of(run, mass, 10.0) for run in rest]
    laps = repeat * (1 + np.linspace(-CIRCUMFERENCE_RANGE, CIRCUMFERENCE_RANGE, 121))
    return float(laps[int(np.argmax(likeness(patterns, laps)))])


def _mark_gaps(run: TracedRun) -> FloatArray:
    """Return the distances between a run's lap marks. [m]"""
    return np.diff(np.interp(np.asarray(run.marks), run.time, run.travelled)) if run.marks else np.empty(0)


def _scales(
    venue: Venue,
    rest: Sequence[TracedRun],
    patterns: dict[str, Pattern],
    length: float,
    trusted: bool,
    notes: list[str],
) -> dict[Group, Scale]:
    """Return true over recorded distance for each ride and tyre set."""
    shared = LINE_ERROR if venue.kind is VenueKind.TRACK else 1e-3
    if not trusted:
        shared = 1e-2
        notes.append("No lap length is given: the wheel's own distance was taken as true.")
    scales = {}
    for group in dict.fromkeys(run.group for run in rest):
        runs = [run for run in rest if run.group == group]
        if all(run.source is DistanceSource.NONE for run in runs):
            scales[group] = Scale(1.0, 0.0, "lap length")
            continue
        by_marks = _lap_by_marks(runs, length)
        by_ground = _lap_by_ground(runs, patterns, length, by_marks)
        if by_ground is not None and venue.kind is VenueKind.LOOP and _speed_alone(runs, patterns):
            by_ground = (by_ground[0], float(np.hypot(by_ground[1], GUST_ERROR * length)))
        found = by_ground or by_marks
        if found is None:
            scales[group] = Scale(1.0, 1e-2, "")
        else:
            lap, error = found
            scales[group] = Scale(length / lap, float(np.hypot(error / lap, shared)), "lap length")
    return scales


def _speed_alone(runs: Sequence[TracedRun], patterns: dict[str, Pattern]) -> bool:
    return not any(patterns[run.run.id].signals[:2].any() for run in runs)


def _lap_by_marks(runs: Sequence[TracedRun], length: float) -> tuple[float, float] | None:
    """Return a lap in recorded distance by the lap marks, and its standard error; None without. [m, m]"""
    weighted = weight = 0.0
    for run in runs:
        at = np.interp(np.asarray(run.marks), run.time, run.travelled) if run.marks else np.empty(0)
        if at.size < 2:
            continue
        laps = np.round((at - at[0]) / length)
        off = np.abs((at - at[0]) - laps * length)
        use = off < CIRCUMFERENCE_RANGE * np.maximum(laps, 1) * length + 15.0
        if use.sum() < 2 or laps[use].max() == 0:
            continue
        lever = laps[use] - laps[use].mean()
        press = PRESS_ERROR * float(np.median(run.speed))
        info = float(lever @ lever) / press**2
        weighted += info * float(lever @ at[use]) / float(lever @ lever)
        weight += info
    return (weighted / weight, weight**-0.5) if weight > 0 else None


def _lap_by_ground(
    runs: Sequence[TracedRun],
    patterns: dict[str, Pattern],
    length: float,
    by_marks: tuple[float, float] | None,
) -> tuple[float, float] | None:
    """Return a lap in recorded distance by what repeats, and its standard error; None if too little does."""
    own = [patterns[run.run.id] for run in runs]
    longest = max(run.length for run in runs)
    if longest < 1.3 * length:
        return None
    step = own[0].step
    reach = CIRCUMFERENCE_RANGE * length
    middle = length
    if by_marks is not None:
        middle, reach = by_marks[0], min(reach, 4 * by_marks[1] + step)
    # Long runs resolve a lap so finely that all of the range would take long: first pieces of a few laps.
    pieces = [piece for pattern in own for piece in pieces_of(pattern, PIECE * length)]
    if longest > 2 * PIECE * length:
        fine = 0.25 * step / PIECE
        laps = middle + np.arange(-reach, reach + fine, fine)
        middle, reach = float(laps[int(np.argmax(likeness(pieces, laps)))]), 8 * fine
    fine = 0.25 * step * length / longest
    laps = middle + np.arange(-reach, reach + fine, fine)
    score = likeness(own, laps)
    top = int(np.argmax(score))
    # Against lap lengths at which nothing is expected to repeat.
    elsewhere = likeness(own, length * (1 + CIRCUMFERENCE_RANGE * np.linspace(-1, 1, 21)))
    if score[top] - float(np.median(elsewhere)) < 4.0 or top in (0, laps.size - 1):
        return None
    refined = laps[top] + fine * (peak(score, top) - top)
    # Two units below the top lie two standard errors away; the grid itself is worth a fraction of a step.
    likely = laps[score > score[top] - 2.0]
    error = 0.25 * float(np.ptp(likely))
    return float(refined), float(np.hypot(error, 0.25 * step * length / longest))


def _aligned(
    rest: Sequence[TracedRun],
    patterns: dict[str, Pattern],
    scales: dict[Group, Scale],
    length: float,
    known: Placement | None,
    located: Sequence[TracedRun],
) -> dict[str, Placed]:
    """Return the runs on one coordinate round the lap."""
    if not rest:
        return {}
    bins = max(int(length / patterns[rest[0].run.id].step), 8)
    reference = np.zeros((3, bins))
    count = 0
    for run in located:
        assert known is not None
        placed = known.runs[run.run.id]
        if placed.direction[0] > 0:
            phase = _grid_phase(run, patterns[run.run.id], placed.station, length)
            reference += folded(patterns[run.run.id], phase, bins)
            count += 1
    runs: dict[str, Placed] = {}
    # The longest first: it sets the pattern for the others where no run has fixes.
    for run in sorted(rest, key=lambda run: (-run.length, run.run.id)):
        path = scales[run.group].factor * (run.travelled - run.travelled[0])
        gate = _gate_offset(run, path, length)
        phase = _grid_phase(run, patterns[run.run.id], path, length)
        own = folded(patterns[run.run.id], phase, bins)
        offset, direction, error = _offset(reference / max(count, 1), own, gate, length, count)
        station = direction * path + offset
        runs[run.run.id] = Placed(
            station=station,
            direction=np.full(path.size, direction),
            standard_error=np.full(path.size, error),
            off_venue=np.zeros(path.size, bool),
        )
        if direction > 0:
            reference += folded(patterns[run.run.id], phase + offset / length, bins)
            count += 1
    if known is None:
        first = rest[0]
        at = first.marks[0] if first.marks else float(first.time[0])
        zero = float(np.interp(at, first.time, runs[first.run.id].station))
        runs = {key: _shifted(placed, -zero) for key, placed in runs.items()}
    return runs


def _shifted(placed: Placed, by: float) -> Placed:
    return Placed(placed.station + by, placed.direction, placed.standard_error, placed.off_venue)


def _grid_phase(run: TracedRun, pattern: Pattern, station: FloatArray, length: float) -> FloatArray:
    s, first = np.unique(run.travelled, return_index=True)
    middle = s[0] + pattern.step * (np.arange(pattern.signals.shape[1]) + 0.5)
    return np.asarray(np.interp(middle, s, station[first]) / length)


def _gate_offset(run: TracedRun, path: FloatArray, length: float) -> float | None:
    """Return what brings a run's lap marks to station 0, or None without marks."""
    if not run.marks:
        return None
    at = np.interp(np.asarray(run.marks), run.time, path)
    turn = np.exp(2j * np.pi * at / length)
    return -float(np.angle(turn.mean())) / (2 * np.pi) * length


def _offset(
    reference: FloatArray, own: FloatArray, gate: float | None, length: float, count: int
) -> tuple[float, float, float]:
    """Return offset, direction and standard error of a run. [m, 1, m]"""
    bins = own.shape[1]
    # A slope that has to explain the power tells places apart best, speed least: it depends on the rider.
    weights = np.array([1.0, 1.0, 0.5])
    if gate is not None:
        press = 10.0
        if count == 0:
            return gate, 1.0, press
        correlation = correlation_by_shift(reference, own, weights)
        near = (
            np.abs((np.arange(bins) / bins * length - gate + length / 2) % length - length / 2) <= 3 * press
        )
        at = int(np.argmax(np.where(near, correlation, -np.inf)))
        if near.any() and correlation[at] >= ALIKE:
            return peak(correlation, at) / bins * length, 1.0, 0.5 * length / bins
        return gate, 1.0, press
    if count == 0:
        return 0.0, 1.0, 0.5 * length / bins
    found = match(reference, own, weights)
    if found.correlation < ALIKE:
        return 0.0, 1.0, 0.3 * length
    return found.shift * length, found.direction, 0.5 * length / bins


def _from_home_straight(
    venue: Venue,
    rest: Sequence[TracedRun],
    patterns: dict[str, Pattern],
    runs: dict[str, Placed],
    length: float,
) -> dict[str, Placed]:
    """Shift stations so that 0 is the middle of a straight, where the wheel's speed shows the bends.

    In a bend the wheel runs a wider circle than the leaning rider and turns faster.
    """
    if venue.bend_radius is None or not runs:
        return runs
    step = next(iter(patterns.values())).step
    bins = max(int(length / step), 8)
    seen = np.zeros(bins)
    for run in rest:
        phase = _grid_phase(run, patterns[run.run.id], runs[run.run.id].station, length)
        seen += folded(patterns[run.run.id], phase, bins)[2]
    shape = TrackShape(length, venue.bend_radius, venue.transition_length or 0.0)
    bends = shape.curvature((np.arange(bins) + 0.5) / bins * length)
    three = np.zeros((3, bins))
    expected, found = three.copy(), three.copy()
    expected[2], found[2] = bends - bends.mean(), seen - seen.mean()
    correlation = correlation_by_shift(expected, found, np.array([0.0, 0.0, 1.0]))
    at = int(np.argmax(correlation))
    if correlation[at] < 0.5:
        return runs
    # Both straights look alike: the nearer one is called home.
    half = length / 2
    shift = (peak(correlation, at) / bins * length + half / 2) % half - half / 2
    return {key: _shifted(placed, shift) for key, placed in runs.items()}


def _end_to_end(rest: Sequence[TracedRun], known: Placement | None) -> Placement:
    """Lay the rides one behind the other along a road of which nothing is known but the distance."""
    runs, scales = {}, {}
    start = known.length if known is not None else 0.0
    origin: dict[str, float] = {}
    end = start
    for run in rest:
        if run.run.ride not in origin:
            origin[run.run.ride] = end - float(run.travelled[0])
        station = run.travelled + origin[run.run.ride]
        end = max(end, float(station[-1]))
        n = run.time.size
        runs[run.run.id] = Placed(station, np.ones(n), np.full(n, 1e-2 * run.length), np.zeros(n, bool))
        scales[run.group] = Scale(1.0, 1e-2, "")
    return Placement(None, max(end, 1.0), 1e-2 * max(end, 1.0), runs, scales)
