"""Runs placed on the venue by their fixes: one line for all, wheel distance between the fixes."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from types import MappingProxyType

import numpy as np
import numpy.typing as npt

from ridercda.runs.gps_track import FIX_TIME, WANDER, Passage, follow, locate_run, smooth_offset
from ridercda.runs.lap_length import comes_back, lap_from_fixes
from ridercda.runs.placement import Placed, Placement, Scale
from ridercda.runs.reference_line import ReferenceLine, draw_line
from ridercda.runs.traced import Group, RideTrace, TracedRun
from ridercda.runs.turns import turn_zones
from ridercda.watch import NO_WATCH, Watch

FloatArray = npt.NDArray[np.float64]

ROUNDS = 3  # of drawing the line and placing the runs on it
STRAY = 25.0  # [m] mean distance from the line beyond which a run was ridden elsewhere
GIVEN_LENGTH_ERROR = 1e-3  # relative standard error of a lap length as people measure it; common practice
DRAWN_LENGTH_ERROR = 1e-3  # the same of a line drawn through fixes, besides their noise; common practice
END_OF_ROAD = 40.0  # [m] over which the lanes of a U-turn part
TURN_DOUBT = 2.0  # [m] how differently two U-turns at one end are ridden


@dataclass(frozen=True, slots=True, eq=False)
class _Lying:
    """A run as placed so far."""

    traced: TracedRun
    path: FloatArray  # distance with the sign of the direction, from 0 at the first record, as recorded [m]
    offset: FloatArray  # station less scaled path [m]
    error: FloatArray  # [m]
    noise: float  # of a fix along the line [m]
    passage: Passage | None = None


def place_loop_by_fixes(
    runs: Sequence[TracedRun], traces: Sequence[RideTrace], lap_length: float | None, watch: Watch = NO_WATCH
) -> Placement | None:
    """Place runs round a closed venue; None when no fixes come back to where they were.

    Parameters
    ----------
    runs : sequence of TracedRun
        With fixes, not empty.
    traces : sequence of RideTrace
        Of whole rides, for a day on which no single run is longer than a lap.
    lap_length : float, optional
        Once round, if known. [m]
    watch : Watch

    Returns
    -------
    Placement or None
        Station 0 is where the first run begins its first marked lap, or starts.
    """
    within = [(run.travelled, run.east, run.north) for run in runs]
    whole = [(trace.travelled, trace.east, trace.north) for trace in traces]
    notes: list[str] = []
    lap = lap_from_fixes(within, lap_length) or lap_from_fixes(whole, lap_length)
    if lap is None and lap_length is not None:
        lap = lap_from_fixes(within, None) or lap_from_fixes(whole, None)
        if lap is not None:
            notes.append(
                f"The recorded path comes back to itself after {lap:.0f} m, not after the given lap_length "
                f"of {lap_length:.0f} m."
            )
    if lap is None:
        return None
    guide, good = _lapping(runs, lap)
    path = guide.travelled - guide.travelled[0]
    trust = _trust(guide.travelled)[good]
    line = draw_line(
        path[good], guide.east[good], guide.north[good], trust, start=0.0, length=lap, closed=True
    )
    lying = _find(runs, line, notes)
    line, lying, scales = _settle(line, lying, watch)
    zero = _gate_station(lying[0], scales)
    stretch, error, basis = _true_scale(
        line.length,
        line.pace(_stations(lying, scales)) * line.length,
        lap_length,
        _fix_error(lying, line),
        notes,
    )
    return _told(line, lying, scales, (zero, stretch, error, basis), lap=True, notes=notes)


def place_road_by_fixes(
    runs: Sequence[TracedRun],
    guides: Sequence[TracedRun | RideTrace],
    lap_length: float | None,
    watch: Watch = NO_WATCH,
) -> Placement | None:
    """Place runs along an open road, ridden one way or there and back; None without a usable run.

    Parameters
    ----------
    runs : sequence of TracedRun
        With fixes.
    guides : sequence of TracedRun or RideTrace
        The longest draws the line first: runs where they cover the road, whole rides where each is
        further on.
    lap_length : float, optional
        There and back, if known. [m]
    watch : Watch

    Returns
    -------
    Placement or None
        Station 0 is the near end: where runs turn to go out again, else the lowest station ridden.
    """
    notes: list[str] = []
    guide = max(guides, key=lambda path: float(np.ptp(path.travelled)))
    path = _signed_path(guide, guide.travelled)
    good = np.isfinite(guide.east)
    low, high = float(path[good].min()), float(path[good].max())
    if high - low < 50.0:
        return None
    trust = _trust(guide.travelled)[good]
    line = draw_line(
        path[good], guide.east[good], guide.north[good], trust, start=low, length=high - low, closed=False
    )
    lying = _find(runs, line, notes)
    line, lying, scales = _settle(line, lying, watch)
    near, far = _ends(lying, scales, line)
    # At a U-turn the two lanes part and the line drawn between them is shorter than the way ridden.
    inset = min(END_OF_ROAD, 0.25 * (far - near))
    seen = _stations(lying, scales)
    seen = seen[(seen > near + inset) & (seen < far - inset)]
    drawn = line.pace(seen) * (far - near)
    turned_at_both = near > -np.inf and _turns_at_both_ends(lying, scales, near, far)
    known = lap_length / 2 if lap_length is not None and turned_at_both else None
    stretch, error, basis = _true_scale(far - near, drawn, known, _fix_error(lying, line), notes)
    placement = _told(line, lying, scales, (near, stretch, error, basis), lap=False, notes=notes)
    return replace(placement, length=(far - near) * stretch, length_error=error * (far - near) * stretch)


def _lapping(runs: Sequence[TracedRun], lap: float) -> tuple[TracedRun, npt.NDArray[np.bool_]]:
    """Return the run that laps the longest, and its fixes that are on the loop."""
    back = [comes_back(run.travelled, run.east, run.north, lap) for run in runs]
    ridden = [float(seen.mean()) * run.length for run, seen in zip(runs, back, strict=True)]
    most = int(np.argmax(ridden))
    if ridden[most] < lap:  # no run is longer than a lap
        most = int(np.argmax([run.length for run in runs]))
        return runs[most], np.isfinite(runs[most].east)
    return runs[most], back[most]


def _trust(travelled: FloatArray) -> FloatArray:
    """Return the weight of each fix: full at the usual pace, less when the rider creeps or stands."""
    step = np.gradient(travelled)
    usual = float(np.median(step))
    return np.clip(step / usual, 0.0, 1.0) if usual > 0 else np.ones(travelled.size)


def _signed_path(run: TracedRun | RideTrace, travelled: FloatArray) -> FloatArray:
    """Return distance ridden with its sign reversed at each U-turn, 0 at the first record."""
    inside = (run.turns > run.travelled[0]) & (run.turns < run.travelled[-1])
    knots = np.concatenate((run.travelled[:1], run.turns[inside], run.travelled[-1:]))
    legs = np.diff(knots) * (-1.0) ** np.arange(knots.size - 1)
    return np.interp(travelled, knots, np.concatenate(([0.0], np.cumsum(legs))))


def _leg_sign(run: TracedRun) -> FloatArray:
    """Return +1 and -1 by the parity of the U-turns before each record."""
    return np.asarray((-1.0) ** np.searchsorted(run.turns, run.travelled, side="left"))


def _find(runs: Sequence[TracedRun], line: ReferenceLine, notes: list[str]) -> list[_Lying]:
    lying = []
    for run in runs:
        path = _signed_path(run, run.travelled)
        offset, direction, miss = locate_run(line, path, run.east, run.north, (1.0, -1.0))
        if miss > STRAY:
            notes.append(f"Run {run.run.id} was ridden elsewhere: its fixes miss the venue's line.")
            continue
        constant = np.full(path.size, offset)
        lying.append(_Lying(run, direction * path, constant, np.full(path.size, 20.0), 3.0))
    return lying


def _settle(
    line: ReferenceLine, lying: list[_Lying], watch: Watch
) -> tuple[ReferenceLine, list[_Lying], dict[Group, tuple[float, float]]]:
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


def _placed_on(line: ReferenceLine, run: _Lying, scale: float, window: float) -> _Lying:
    dead = scale * run.path + run.offset
    return replace(run, passage=follow(line, dead, run.traced.east, run.traced.north, window))


def _smoothed(run: _Lying, scale: float) -> _Lying:
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
    return replace(run, offset=found.value, error=found.standard_error, noise=found.noise)


def _rescaled(
    lying: Sequence[_Lying], scales: dict[Group, tuple[float, float]]
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
    line: ReferenceLine, lying: Sequence[_Lying], scales: dict[Group, tuple[float, float]]
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
        trust.append(_trust(run.traced.travelled)[use])
    s, x, y, w = (np.concatenate(part) for part in (station, east, north, trust))
    if line.closed:
        return draw_line(s, x, y, w, start=line.start, length=line.length, closed=True)
    low, high = float(s.min()), float(s.max())
    return draw_line(s, x, y, w, start=low, length=high - low, closed=False)


def _fix_error(lying: Sequence[_Lying], line: ReferenceLine) -> float:
    """Return the relative error that the fixes' own noise leaves in the length of the drawn line.

    Fixes of a minute count as one draw. Pushed outward by a metre, a closed line grows by 2 pi metres; an
    open one moves at its two ends.
    """
    noise = float(np.median([run.noise for run in lying]))
    draws = sum(float(np.ptp(run.traced.time)) for run in lying) / (2 * FIX_TIME)
    spread = noise / np.sqrt(max(draws, 1.0))
    if not line.closed:
        passes = sum(run.traced.length for run in lying) / max(line.length, 1.0)
        return float(np.sqrt(2.0) * noise / np.sqrt(max(passes, 1.0)) / line.length)
    return float(2 * np.pi * spread / line.length)


def _true_scale(
    length: float, drawn: float, given: float | None, fix_error: float, notes: list[str]
) -> tuple[float, float, str]:
    """Return true metres per metre of station, its relative error, and what it rests on."""
    by_fixes, fixes_error = drawn / length, float(np.hypot(DRAWN_LENGTH_ERROR, fix_error))
    if given is None:
        return by_fixes, fixes_error, "position"
    by_length = given / length
    gap = by_length / by_fixes - 1.0
    if abs(gap) > 4 * float(np.hypot(GIVEN_LENGTH_ERROR, fixes_error)):
        notes.append(
            f"The given length ({given:.0f} m) and the recorded positions ({drawn:.0f} m) differ by "
            f"{abs(gap):.1%}; check lap_length. The given length was used."
        )
        return by_length, abs(gap) / 2, "lap length"
    a, b = GIVEN_LENGTH_ERROR**-2, fixes_error**-2
    return (a * by_length + b * by_fixes) / (a + b), float((a + b) ** -0.5), "both"


def _stations(lying: Sequence[_Lying], scales: dict[Group, tuple[float, float]]) -> FloatArray:
    return np.concatenate([scales[run.traced.group][0] * run.path + run.offset for run in lying])


def _gate_station(run: _Lying, scales: dict[Group, tuple[float, float]]) -> float:
    station = scales[run.traced.group][0] * run.path + run.offset
    at = run.traced.marks[0] if run.traced.marks else float(run.traced.time[0])
    return float(np.interp(at, run.traced.time, station))


def _turn_stations(
    lying: Sequence[_Lying], scales: dict[Group, tuple[float, float]]
) -> tuple[FloatArray, FloatArray]:
    """Return the stations of all U-turns at the near end and at the far end."""
    near, far = [], []
    for run in lying:
        traced = run.traced
        sign = _first_sign(run)
        path = sign * _signed_path(traced, traced.turns)  # not from the records: they cut the turn short
        at = scales[traced.group][0] * path + np.interp(traced.turns, traced.travelled, run.offset)
        outward = sign * (-1.0) ** np.arange(at.size)
        far.append(at[outward > 0])
        near.append(at[outward < 0])
    empty = [np.empty(0)]
    return np.concatenate(near or empty), np.concatenate(far or empty)


def _first_sign(run: _Lying) -> float:
    """Return the direction in which a run first goes along the line."""
    forward = _signed_path(run.traced, run.traced.travelled)
    moved = int(np.argmax(np.abs(forward) > 0.5 * float(np.abs(forward).max())))
    return float(np.sign(run.path[moved] * forward[moved])) or 1.0


def _ends(
    lying: Sequence[_Lying], scales: dict[Group, tuple[float, float]], line: ReferenceLine
) -> tuple[float, float]:
    near, far = _turn_stations(lying, scales)
    return (
        float(np.median(near)) if near.size else line.start,
        float(np.median(far)) if far.size else line.start + line.length,
    )


def _turns_at_both_ends(
    lying: Sequence[_Lying], scales: dict[Group, tuple[float, float]], near: float, far: float
) -> bool:
    at_near, at_far = _turn_stations(lying, scales)
    return bool(at_near.size and at_far.size and far > near)


def _told(
    line: ReferenceLine,
    lying: Sequence[_Lying],
    scales: dict[Group, tuple[float, float]],
    truth: tuple[float, float, float, str],
    *,
    lap: bool,
    notes: list[str],
) -> Placement:
    """Return the placement in true metres from the station `zero`."""
    zero, stretch, error, basis = truth
    reach = _reach(lying)
    runs = {}
    for run in lying:
        traced = run.traced
        scale = scales[traced.group][0]
        sign = _first_sign(run) * _leg_sign(traced)
        spoilt = _away(run, reach) | turn_zones(traced.turns, traced.travelled, traced.speed, traced.power)
        runs[traced.run.id] = Placed(
            station=(scale * run.path + run.offset - zero) * stretch,
            direction=sign,
            standard_error=run.error,
            off_venue=spoilt,
        )
    told = {
        group: Scale(scale * stretch, float(np.hypot(own, error)), basis)
        for group, (scale, own) in scales.items()
    }
    moved = replace(
        line,
        start=(line.start - zero) * stretch,
        step=line.step * stretch,
        d_east=line.d_east / stretch,
        d_north=line.d_north / stretch,
        dd_east=line.dd_east / stretch**2,
        dd_north=line.dd_north / stretch**2,
    )
    length = line.length * stretch
    return Placement(
        line=moved,
        length=length,
        length_error=error * length,
        runs=MappingProxyType(runs),
        scales=MappingProxyType(told),
        notes=tuple(notes),
    )


def _reach(lying: Sequence[_Lying]) -> float:
    """Return how far from the line a fix may lie and the rider still be on the venue. [m]"""
    off = [run.passage.off for run in lying if run.passage is not None]
    every = np.concatenate(off) if off else np.empty(0)
    every = every[np.isfinite(every)]
    return max(15.0, 6.0 * float(np.median(every))) if every.size else 15.0


def _away(run: _Lying, reach: float) -> npt.NDArray[np.bool_]:
    """Return where fixes lie away from the line for 8 s or more; a spike is no detour."""
    assert run.passage is not None
    far = np.isfinite(run.traced.east) & ~(run.passage.off <= reach)
    edges = np.flatnonzero(np.diff(np.concatenate(([False], far, [False])).astype(np.int8)))
    away = np.zeros(far.size, bool)
    for first, last in zip(edges[::2], edges[1::2], strict=True):
        if run.traced.time[last - 1] - run.traced.time[first] >= 8.0:
            away[first:last] = True
    return away
