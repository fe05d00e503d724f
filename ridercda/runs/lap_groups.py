"""Laps grouped into runs."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
import numpy.typing as npt

from ridercda.runs.marks import clock

FloatArray = npt.NDArray[np.float64]

ALIKE = 0.15  # relative difference of effort up to which laps belong to one run; common practice
RECOVERY = 0.8  # of the efforts on both sides: easy laps between runs
LONE_LAP = 120.0  # [s] a lap this long may be a run by itself
LAP_SPEEDS = (5.0, 22.0)  # [m/s] a lap time outside this is no lap


@dataclass(frozen=True, slots=True)
class Lap:
    """One lap: when it began and ended [s], and the effort in it [W, or m/s without power]."""

    start: float
    end: float
    level: float


def groups_of_laps(laps: Sequence[Lap], pressed: set[float], notes: list[str]) -> list[list[Lap]]:
    """Return the laps of one spell as runs.

    Parameters
    ----------
    laps : sequence of Lap
        Each begins where the one before it ends.
    pressed : set of float
        Ends and starts of laps at which the lap button was pressed; empty without a lap button. [s]
    notes : list of str
        Takes what the rider should know.

    Notes
    -----
    Presses at most passes of the gate are laps of a run; passes without one between them break it unless the
    effort goes on; a last lap that only a stop ends belongs to it too. Presses at few passes each begin another
    run. Without presses a run is what is ridden at one effort. Easy laps between efforts are left out.
    """
    if not pressed:
        return _without_recovery(_by_effort(laps))
    edges = [laps[0].start, *(lap.end for lap in laps)]
    on = [k for k, edge in enumerate(edges) if edge in pressed]
    if len(on) < 2:
        # One press says where a run begins or ends, not both.
        return _without_recovery(_by_effort(laps))
    inner = on[-1] - on[0]
    if len(on) - 1 < 0.6 * inner and inner > 2:
        spans = [list(laps[a:b]) for a, b in pairwise(on)]
        return _without_recovery(spans)
    groups: list[list[Lap]] = [[]]
    for a, b in pairwise(on):
        span = list(laps[a:b])
        if b - a == 1:
            if groups[-1] and groups[-1][-1].end != span[0].start:
                groups.append([])
            groups[-1] += span
            continue
        around = _mean(groups[-1]) if groups[-1] else _mean(laps[b : b + 1] or span)
        if _all_alike(span, around):
            notes.append(
                f"A press of the lap button is missing between {clock(span[0].start)} and "
                f"{clock(span[-1].end)}; the laps were told by the gate."
            )
            groups[-1] += span
        else:
            groups.append([])
    last = laps[on[-1] :]
    if len(last) == 1 and groups[-1] and _all_alike(last, _mean(groups[-1])):
        notes.append(
            f"No press of the lap button ends the lap at {clock(last[0].end)}, after which the rider stopped; it "
            "was counted."
        )
        groups[-1] += last
    return [group for group in groups if group]


def _all_alike(laps: Sequence[Lap], level: float) -> bool:
    return level > 0 and all(abs(lap.level / level - 1) <= 1.5 * ALIKE for lap in laps)


def _mean(laps: Sequence[Lap]) -> float:
    time = sum(lap.end - lap.start for lap in laps)
    return sum(lap.level * (lap.end - lap.start) for lap in laps) / time if time > 0 else 0.0


def _by_effort(laps: Sequence[Lap]) -> list[list[Lap]]:
    groups: list[list[Lap]] = []
    for lap in laps:
        if groups and _mean(groups[-1]) > 0 and abs(lap.level / _mean(groups[-1]) - 1) <= ALIKE:
            groups[-1].append(lap)
        else:
            groups.append([lap])
    # A short lap on its own is the change from one effort to the next.
    kept = [g for g in groups if len(g) > 1 or g[0].end - g[0].start >= LONE_LAP]
    return kept or groups


def _without_recovery(groups: list[list[Lap]]) -> list[list[Lap]]:
    """Leave out groups shorter than a neighbour that hold laps much easier than both neighbours."""
    kept = []
    for k, group in enumerate(groups):
        if 0 < k < len(groups) - 1:
            around = (groups[k - 1], groups[k + 1])
            easiest = min(lap.level for lap in group)
            shorter = group[-1].end - group[0].start < max(g[-1].end - g[0].start for g in around)
            if shorter and easiest < RECOVERY * min(_mean(g) for g in around):
                continue
        kept.append(group)
    return kept


def spans_of_marks(spans: Sequence[Lap]) -> list[Lap]:
    """Return the spans between marks on a venue without laps, easy ones between efforts left out."""
    return [group[0] for group in _without_recovery([[span] for span in spans])]


def lap_time_groups(
    times: Sequence[float], lap_length: float, time: FloatArray, power: FloatArray
) -> list[list[Lap]]:
    """Return runs told by lap times alone: laps on end, at a speed and an effort that go together.

    Parameters
    ----------
    times : sequence of float
        Lap marks. [s]
    lap_length : float
        [m]
    time, power : ndarray, shape (n,)
        Power NaN where unknown. [s, W]
    """
    groups: list[list[Lap]] = [[]]
    for start, end in pairwise(times):
        pace = lap_length / (end - start)
        inside = (time > start) & (time <= end) & np.isfinite(power)
        lap = Lap(start, end, float(power[inside].mean()) if inside.any() else pace)
        lengths = [part.end - part.start for part in groups[-1]]
        fits = not lengths or abs((end - start) / float(np.median(lengths)) - 1) <= ALIKE
        same = not groups[-1] or abs(lap.level / max(_mean(groups[-1]), 1e-9) - 1) <= 2 * ALIKE
        if not LAP_SPEEDS[0] <= pace <= LAP_SPEEDS[1]:
            groups.append([])
        elif fits and same:
            groups[-1].append(lap)
        else:
            groups.append([lap])
    return [group for group in groups if len(group) > 1]
