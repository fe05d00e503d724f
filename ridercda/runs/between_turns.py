"""Runs on an out-and-back road placed without fixes, between the U-turns that their speed shows."""

from __future__ import annotations

from collections.abc import Sequence
from types import MappingProxyType

import numpy as np
import numpy.typing as npt

from ridercda.runs.ground_pattern import pattern_of
from ridercda.runs.placement import Placed, Placement, Scale
from ridercda.runs.traced import Group, TracedRun
from ridercda.runs.turns import turn_zones

FloatArray = npt.NDArray[np.float64]

STEP = 10.0  # [m] of the patterns compared
TURN_ERROR = 5.0  # [m] how far from the middle of a U-turn its slowest moment lies


def place_between_turns(
    rest: Sequence[TracedRun], lap_length: float | None, known: Placement | None, mass: float
) -> Placement:
    """Place runs by their U-turns, each of which lies at one end of the road.

    Parameters
    ----------
    rest : sequence of TracedRun
        Without fixes.
    lap_length : float, optional
        There and back. [m]
    known : Placement, optional
        Of runs with fixes on the same road; its length counts.
    mass : float
        Rider and bike, roughly. [kg]

    Returns
    -------
    Placement
        The longest run's first leg is called out; another run goes the other way first where its slopes say so.
    """
    notes = ["U-turns were found by speed alone: a stop where a turn is due looks like one."]
    gaps = np.concatenate([np.diff(run.turns) for run in rest] or [np.empty(0)])
    trusted = known is not None or lap_length is not None
    length = known.length if known is not None else (lap_length or 0.0) / 2
    if not length and gaps.size:
        length = float(np.median(gaps))
        notes.append("No lap length is given: the wheel's own distance was taken as true.")
    if not length:
        notes.append("No U-turns and no lap_length: the road's length is not known.")
        return Placement(None, 1.0, 1.0, {}, {}, tuple(notes))
    scales = _scales(rest, length) if trusted else {run.group: Scale(1.0, 1e-2, "") for run in rest}
    runs: dict[str, Placed] = {}
    reference = np.zeros(max(int(length / STEP), 4))
    for run in sorted(rest, key=lambda run: (-run.length, run.run.id)):
        placed = _between(run, scales[run.group].factor, length)
        slope = _slope_along(run, placed, reference.size, length, mass)
        other_way = -slope[::-1]
        if float(reference @ other_way) > float(reference @ slope):
            placed = _mirrored(placed, length)
            slope = other_way
        reference += slope
        runs[run.run.id] = placed
    error = 0.0 if trusted else 1e-2 * length
    return Placement(None, length, error, MappingProxyType(runs), MappingProxyType(scales), tuple(notes))


def _scales(rest: Sequence[TracedRun], length: float) -> dict[Group, Scale]:
    scales = {}
    for group in dict.fromkeys(run.group for run in rest):
        between = np.concatenate([np.diff(run.turns) for run in rest if run.group == group])
        between = between[np.abs(between / length - 1) < 0.05]
        if between.size:
            error = np.sqrt(2.0) * TURN_ERROR / length / np.sqrt(between.size)
            scales[group] = Scale(length / float(between.mean()), float(np.hypot(error, 2e-3)), "lap length")
        else:
            scales[group] = Scale(1.0, 1e-2, "")
    return scales


def _between(run: TracedRun, factor: float, length: float) -> Placed:
    """Return a run whose first leg goes out, shifted so that its U-turns fall on the ends of the road."""
    knots = np.concatenate((run.travelled[:1], run.turns, run.travelled[-1:]))
    signs = np.where(np.arange(knots.size - 1) % 2, -1.0, 1.0)
    path = factor * np.concatenate(([0.0], np.cumsum(np.diff(knots) * signs)))
    if run.turns.size:
        ends = np.where(signs[:-1] > 0, length, 0.0)
        offset = float(np.median(ends - path[1:-1]))
    else:
        offset = factor * float(run.travelled[0] - run.earlier_turns[-1]) if run.earlier_turns.size else 0.0
    return Placed(
        station=np.interp(run.travelled, knots, path) + offset,
        direction=signs[np.searchsorted(run.turns, run.travelled, side="left")],
        standard_error=np.full(run.time.size, TURN_ERROR),
        off_venue=turn_zones(run.turns, run.travelled, run.speed, run.power),
    )


def _mirrored(placed: Placed, length: float) -> Placed:
    return Placed(length - placed.station, -placed.direction, placed.standard_error, placed.off_venue)


def _slope_along(run: TracedRun, placed: Placed, bins: int, length: float, mass: float) -> FloatArray:
    """Return the mean slope out along the road as the run's signals show it, 0 where it was not ridden."""
    pattern = pattern_of(run, mass, STEP)
    s, first = np.unique(run.travelled, return_index=True)
    middle = s[0] + STEP * (np.arange(pattern.signals.shape[1]) + 0.5)
    station = np.interp(middle, s, placed.station[first])
    sign = np.interp(middle, s, placed.direction[first])
    spoilt = np.interp(middle, s, placed.off_venue[first].astype(float)) > 0
    slope = sign * (pattern.signals[0] + pattern.signals[1])
    use = (station >= 0) & (station < length) & ~spoilt & (np.abs(sign) > 0.99)
    where = np.minimum((station[use] / length * bins).astype(np.int64), bins - 1)
    count = np.maximum(np.bincount(where, minlength=bins), 1)
    mean = np.bincount(where, weights=slope[use], minlength=bins) / count
    norm = float(np.linalg.norm(mean))
    return np.asarray(mean / norm if norm > 0 else mean)
