"""Spans that nothing in the model explains: found in the innovations, left out by name, never silently."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from ridercda.drag.day import Day
from ridercda.drag.likelihood import Fit

TOO_FAR = 5.0  # standard deviations of an innovation
BESIDE = 3  # records left out on either side
MOST_SHARE = 0.1  # of a run; beyond that it is the model that is wrong, and the run is kept whole


def leave_out_oddities(fit: Fit) -> tuple[Day, str]:
    """Return the day without records whose innovations are impossible, and a sentence saying which; "" if none."""
    day = fit.model.day
    begin = 0
    runs = []
    told = []
    for run, table in zip(day.runs, fit.model.tables, strict=True):
        n = run.records.size
        e = fit.last.innovation[begin : begin + n]
        begin += table.rows
        far = np.flatnonzero(np.abs(e) > TOO_FAR)
        if day.flat or not far.size:
            runs.append(run)
            continue
        usable = run.records.usable.copy()
        for k in far:
            usable[max(k - BESIDE, 0) : k + BESIDE + 1] = False
        lost = int(run.records.usable.sum() - usable.sum())
        if lost == 0 or lost > MOST_SHARE * n:
            runs.append(run)
            continue
        seconds = float(run.records.interval[run.records.usable & ~usable].sum())
        told.append(f"{seconds:.0f} s of run {run.id} near {_clock(run.records.time[far[0]])}")
        runs.append(replace(run, records=replace(run.records, usable=usable)))
    if not told:
        return day, ""
    shown = "; ".join(told[:6]) + (f"; and {len(told) - 6} more runs" if len(told) > 6 else "")
    return (
        replace(day, runs=tuple(runs)),
        f"Left out, because speed and power there cannot belong to one rider on this road (braking, a passing car, "
        f"a sensor's slip): {shown}.",
    )


def _clock(seconds: float) -> str:
    whole = int(seconds)
    return f"{whole // 3600}:{whole % 3600 // 60:02d}:{whole % 60:02d}"
