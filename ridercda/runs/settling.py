"""Runs placed on a line and the line drawn through the runs, by turns, until both agree."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from ridercda.runs.gps_track import FIX_TIME, WANDER, Passage, follow, locate_run, smooth_offset
from ridercda.runs.lap_length import comes_back
from ridercda.runs.reference_line import ReferenceLine, draw_line
from ridercda.runs.traced import Group, RideTrace, TracedRun
from ridercda.watch import Watch

FloatArray = npt.NDArray[np.float64]

ROUNDS = 3  # of drawing the line and placing the runs on it
ON_VENUE = 0.25  # share of a run's fixes near the line below which it was ridden elsewhere
TURN_DOUBT = 2.0  # [m] how differently two U-turns at one end are ridden


@dataclass(frozen=True, slots=True, eq=False)
class Lying:
    """A run as placed so far."""

    traced: TracedRun
    path: FloatArray  # distance with the sign of the direction, from 0 at the first record, as recorded [m]
    offset: FloatArray  # station less scaled path [m]
    error: FloatArray  # [m]
    noise: float  # of a fix along the line [m]
    apart: npt.NDArray[np.bool_] | None = None  # where fixes and wheel contradict each other
    passage: Passage | None = None


def lapping_run(runs: Sequence[TracedRun], lap: float) -> tuple[TracedRun, npt.NDArray[np.bool_]]:
    """Return the run that laps the longest, and its fixes that are on the loop."""
    back = [comes_back(run.travelled, run.east, run.north, lap) for run in runs]
    ridden = [float(seen.mean()) * run.length for run, seen in zip(runs, back, strict=True)]
    most = int(np.argmax(ridden))
    if ridden[most] < lap:  # no run is longer than a lap
        most = int(np.argmax([run.length for run in runs]))
        return runs[most], np.isfinite(runs[most].east)
    return runs[most], back[most]


def fix_weights(travelled: FloatArray) -> FloatArray:
    """Return the weight of each fix: full at the usual pace, less when the rider creeps or stands."""
    step = np.gradient(travelled)
    usual = float(np.median(step))
    return np.clip(step / usual, 0.0, 1.0) if usual > 0 else np.ones(travelled.size)


def signed_path(run: TracedRun | RideTrace, travelled: FloatArray) -> FloatArray:
    """Return distance ridden with its sign reversed at each U-turn, 0 at the first record."""
    inside = (run.turns > run.travelled[0]) & (run.turns < run.travelled[-1])
    knots = np.concatenate((run.travelled[:1], run.turns[inside], run.travelled[-1:]))
    legs = np.diff(knots) * (-1.0) ** np.arange(knots.size - 1)
    return np.interp(travelled, knots, np.concatenate(([0.0], np.cumsum(legs))))


def leg_sign(run: TracedRun) -> FloatArray:
    """Return +1 and -1 by the parity of the U-turns before each record."""
    return np.asarray((-1.0) ** np.searchsorted(run.turns, run.travelled, side="left"))


def find_runs(runs: Sequence[TracedRun], line: ReferenceLine, notes: list[str]) -> list[Lying]:
    """Return the runs roughly where their fixes lie on the line; those ridden elsewhere are noted."""
    lying = []
    for run in runs:
        path = signed_path(run, run.travelled)
        offset, direction, near = locate_run(line, path, run.east, run.north, (1.0, -1.0))
        if near < ON_VENUE:
            notes.append(f"Run {run.run.id} was ridden elsewhere: its fixes miss the venue's line.")
            continue
        constant = np.full(path.size, offset)
        lying.append(Lying(run, direction * path, constant, np.full(path.size, 20.0), 3.0))
    return lying


def settle(
    line: ReferenceLine, lying: list[Lying], watch: Watch
) -> tuple[ReferenceLine, list[Lying], dict[Group, tuple[float, float]]]:
    """Place the runs and draw the line by turns; return also each group's scale and its relative error."""
    scales = {run.traced.group: (1.0, 1e-2) for run in lying}
    for turn in range(ROUNDS):
        watch.step(turn, ROUNDS)
        window = 60.0 if turn == 0 else 30.0
        lying = [_placed_on(line, run, scales[run.traced.group][0], window) for run in lying]
        scales = _rescaled(lying, scales)
        lying = [_smoothed(run, scales[run.traced.group][0]) for run in lying]
        if turn + 1 < ROUNDS:
            line = _redrawn(line, lying, scales)
    return line, lying, scales


def _placed_on(line: ReferenceLine, run: Lying, scale: float, window: float) -> Lying:
    dead = scale * run.path + run.offset
    return replace(run, passage=follow(line, dead, run.traced.east, run.traced.north, window))


def _smoothed(run: Lying, scale: float) -> Lying:
    assert run.passage is not None
    doubt = run.traced.doubt
    if run.traced.turns.size:
        doubt = doubt.copy()
        at = np.searchsorted(run.traced.travelled, run.traced.turns)
        doubt[np.minimum(at, doubt.size - 1)] += TURN_DOUBT
    found = smooth_offset(
        run.passage.station - scale * run.path, run.traced.time, run.traced.travelled, doubt
    )
    if found is None:
        return run
    return replace(run, offset=found.value, error=found.standard_error, noise=found.noise, apart=found.apart)


def _rescaled(
    lying: Sequence[Lying], scales: dict[Group, tuple[float, float]]
) -> dict[Group, tuple[float, float]]:
    """Fit the scale of each group so that its runs keep pace with the line."""
    sums: dict[Group, list[float]] = {group: [0.0, 0.0, 0.0, 0.0] for group in scales}
    for run in lying:
        assert run.passage is not None
        known = np.isfinite(run.passage.station)
        if known.sum() < 3:
            continue
        scale = scales[run.traced.group][0]
        path = run.path[known]
        left = run.passage.station[known] - scale * path
        slack = left - run.offset[known]
        weight = np.minimum(1.0, 2 * run.noise / np.maximum(np.abs(slack - np.median(slack)), 1e-9))
        lever = path - np.average(path, weights=weight)
        dt = float(np.median(np.diff(run.traced.time)))
        total = sums[run.traced.group]
        info = float((weight * lever**2).sum())
        total[0] += float((weight * lever * left).sum())
        total[1] += info
        total[2] += info * run.noise**2 * max(2 * FIX_TIME / dt, 1.0)
        total[3] += info**2 * 1.2 * WANDER / max(run.traced.length, 1.0)
    result = {}
    for group, (scale, _) in scales.items():
        cross, info, fixes, wander = sums[group]
        if info <= 0:
            result[group] = (scale, 1e-2)
            continue
        step = float(np.clip(cross / info, -0.05, 0.05))
        result[group] = (scale + step, float(np.sqrt(fixes + wander) / info))
    return result


def _redrawn(
    line: ReferenceLine, lying: Sequence[Lying], scales: dict[Group, tuple[float, float]]
) -> ReferenceLine:
    station, east, north, trust = [], [], [], []
    for run in lying:
        assert run.passage is not None
        at = scales[run.traced.group][0] * run.path + run.offset
        beyond = np.zeros(at.size, bool)
        if not line.closed:
            # Ridden past the ends drawn so far, and joined to a stretch that is known.
            beyond = ((at < line.start) | (at > line.start + line.length)) & np.isfinite(run.traced.east)
        use = np.isfinite(run.passage.station) | beyond
        station.append(at[use])
        east.append(run.traced.east[use])
        north.append(run.traced.north[use])
        trust.append(fix_weights(run.traced.travelled)[use])
    s, x, y, w = (np.concatenate(part) for part in (station, east, north, trust))
    if line.closed:
        return draw_line(s, x, y, w, start=line.start, length=line.length, closed=True)
    low, high = float(s.min()), float(s.max())
    return draw_line(s, x, y, w, start=low, length=high - low, closed=False)


def stations(lying: Sequence[Lying], scales: dict[Group, tuple[float, float]]) -> FloatArray:
    """Return the stations of all records of all runs. [m]"""
    return np.concatenate([scales[run.traced.group][0] * run.path + run.offset for run in lying])


def first_sign(run: Lying) -> float:
    """Return the direction in which a run first goes along the line."""
    forward = signed_path(run.traced, run.traced.travelled)
    moved = int(np.argmax(np.abs(forward) > 0.5 * float(np.abs(forward).max())))
    return float(np.sign(run.path[moved] * forward[moved])) or 1.0
