"""Runs placed on the venue by their fixes: one line for all, wheel distance between the fixes."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from types import MappingProxyType

import numpy as np
import numpy.typing as npt

from ridercda.runs.gps_track import FIX_TIME
from ridercda.runs.lap_length import lap_from_fixes
from ridercda.runs.placement import Placed, Placement, Scale
from ridercda.runs.reference_line import ReferenceLine, draw_line
from ridercda.runs.settling import (
    Lying,
    find_runs,
    first_sign,
    fix_weights,
    lapping_run,
    leg_sign,
    settle,
    signed_path,
    stations,
)
from ridercda.runs.traced import Group, RideTrace, TracedRun
from ridercda.runs.turns import turn_zones
from ridercda.watch import NO_WATCH, Watch

FloatArray = npt.NDArray[np.float64]

GIVEN_LENGTH_ERROR = 1e-3  # relative standard error of a lap length as people measure it; common practice
DRAWN_LENGTH_ERROR = 1e-3  # the same of a line drawn through fixes, besides their noise; common practice
END_OF_ROAD = 40.0  # [m] over which the lanes of a U-turn part
SAME_END = 15.0  # [m] within which U-turns are ridden at one end


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
    guide, good = lapping_run(runs, lap)
    path = guide.travelled - guide.travelled[0]
    trust = fix_weights(guide.travelled)[good]
    line = draw_line(
        path[good], guide.east[good], guide.north[good], trust, start=0.0, length=lap, closed=True
    )
    lying = find_runs(runs, line, notes)
    if not lying:
        return None
    line, lying, scales = settle(line, lying, watch)
    zero = _gate_station(lying[0], scales)
    stretch, error, basis = _true_scale(
        line.length,
        line.pace(stations(lying, scales)) * line.length,
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
    path = signed_path(guide, guide.travelled)
    good = np.isfinite(guide.east)
    low, high = float(path[good].min()), float(path[good].max())
    if high - low < 50.0:
        return None
    trust = fix_weights(guide.travelled)[good]
    line = draw_line(
        path[good], guide.east[good], guide.north[good], trust, start=low, length=high - low, closed=False
    )
    lying = find_runs(runs, line, notes)
    if not lying:
        return None
    line, lying, scales = settle(line, lying, watch)
    near, far = _ends(lying, scales, line)
    # At a U-turn the two lanes part and the line drawn between them is shorter than the way ridden.
    inset = min(END_OF_ROAD, 0.25 * (far - near))
    seen = stations(lying, scales)
    seen = seen[(seen > near + inset) & (seen < far - inset)]
    drawn = line.pace(seen) * (far - near)
    turned_at_both = near > -np.inf and _turns_at_both_ends(lying, scales, near, far)
    known = lap_length / 2 if lap_length is not None and turned_at_both else None
    stretch, error, basis = _true_scale(far - near, drawn, known, _fix_error(lying, line), notes)
    placement = _told(line, lying, scales, (near, stretch, error, basis), lap=False, notes=notes)
    return replace(placement, length=(far - near) * stretch, length_error=error * (far - near) * stretch)


def _fix_error(lying: Sequence[Lying], line: ReferenceLine) -> float:
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


def _gate_station(run: Lying, scales: dict[Group, tuple[float, float]]) -> float:
    station = scales[run.traced.group][0] * run.path + run.offset
    at = run.traced.marks[0] if run.traced.marks else float(run.traced.time[0])
    return float(np.interp(at, run.traced.time, station))


def _turn_stations(
    lying: Sequence[Lying], scales: dict[Group, tuple[float, float]]
) -> tuple[FloatArray, FloatArray]:
    """Return the stations of all U-turns at the near end and at the far end."""
    near, far = [], []
    for run in lying:
        traced = run.traced
        sign = first_sign(run)
        path = sign * signed_path(traced, traced.turns)  # not from the records: they cut the turn short
        at = scales[traced.group][0] * path + np.interp(traced.turns, traced.travelled, run.offset)
        outward = sign * (-1.0) ** np.arange(at.size)
        far.append(at[outward > 0])
        near.append(at[outward < 0])
    empty = [np.empty(0)]
    return np.concatenate(near or empty), np.concatenate(far or empty)


def _ends(
    lying: Sequence[Lying], scales: dict[Group, tuple[float, float]], line: ReferenceLine
) -> tuple[float, float]:
    near, far = _turn_stations(lying, scales)
    return (
        _usual_end(near, -1.0) if near.size else line.start,
        _usual_end(far, 1.0) if far.size else line.start + line.length,
    )


def _usual_end(stations: FloatArray, outward: float) -> float:
    """Return where most U-turns were ridden; of places with equally many the one farther out.

    A rider may also turn on the way, to come back to a line.
    """
    near = np.abs(stations[:, None] - stations[None, :]) <= SAME_END
    count = near.sum(axis=1)
    most = np.flatnonzero(count == count.max())
    best = most[int(np.argmax(outward * stations[most]))]
    return float(np.median(stations[near[best]]))


def _turns_at_both_ends(
    lying: Sequence[Lying], scales: dict[Group, tuple[float, float]], near: float, far: float
) -> bool:
    at_near, at_far = _turn_stations(lying, scales)
    return bool(at_near.size and at_far.size and far > near)


def _told(
    line: ReferenceLine,
    lying: Sequence[Lying],
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
        sign = first_sign(run) * leg_sign(traced)
        lost = run.apart if run.apart is not None else False
        spoilt = (
            _away(run, reach) | lost | turn_zones(traced.turns, traced.travelled, traced.speed, traced.power)
        )
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


def _reach(lying: Sequence[Lying]) -> float:
    """Return how far from the line a fix may lie and the rider still be on the venue. [m]"""
    off = [run.passage.off for run in lying if run.passage is not None]
    every = np.concatenate(off) if off else np.empty(0)
    every = every[np.isfinite(every)]
    return max(15.0, 6.0 * float(np.median(every))) if every.size else 15.0


def _away(run: Lying, reach: float) -> npt.NDArray[np.bool_]:
    """Return where fixes lie away from the line for 8 s or more; a spike is no detour."""
    assert run.passage is not None
    far = np.isfinite(run.traced.east) & ~(run.passage.off <= reach)
    edges = np.flatnonzero(np.diff(np.concatenate(([False], far, [False])).astype(np.int8)))
    away = np.zeros(far.size, bool)
    for first, last in zip(edges[::2], edges[1::2], strict=True):
        if run.traced.time[last - 1] - run.traced.time[first] >= 8.0:
            away[first:last] = True
    return away
