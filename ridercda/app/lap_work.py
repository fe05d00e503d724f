"""Works the laps out at the estimate's figures; runs in the other process, which has the compiled layers (no Qt)."""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt

from ridercda.app.lap_traces import Laps, LapTrace
from ridercda.drag.day import Day
from ridercda.drag.estimate import Estimate, RunEstimate
from ridercda.drag.virtual_elevation import virtual_elevation

FloatArray = npt.NDArray[np.float64]
GRID = 240  # points of the shared profile


def laps_of(day: Day, estimate: Estimate) -> Laps | None:
    """Return the laps of a day at the figures of its estimate; None where there is no figure or no lap."""
    levels = {setup.id: setup.cda.value for setup in estimate.setups if setup.cda}
    crr = {tyres.id: tyres.crr.value for tyres in estimate.tyres if tyres.crr}
    found = {run.id: run for run in estimate.runs}
    raw: list[tuple[str, int, FloatArray, FloatArray, FloatArray]] = []
    for run in day.runs:
        setup = day.setups[run.setup]
        if setup not in levels or day.tyres[run.tyres].id not in crr or run.id not in found:
            continue
        rolling = crr[day.tyres[run.tyres].id]
        risen = virtual_elevation(run, levels[setup], rolling, _wind(found[run.id]), day.gravity)
        for lap in range(run.laps):
            inside = run.records.lap == lap
            if inside.sum() < 10:
                continue
            elevation = risen[inside]
            position = _within_lap(run.records.position[inside], day.venue_length)
            whole = (position >= 0.0) & (position <= day.venue_length)
            raw.append((run.id, lap, run.records.time[inside][whole], position[whole], elevation[whole]))
    if not raw:
        return None
    grid = np.linspace(0.0, day.venue_length, GRID)
    on_grid = []
    for _, _, _, position, elevation in raw:
        order = np.argsort(position, kind="stable")
        on_grid.append(np.interp(grid, position[order], elevation[order], left=np.nan, right=np.nan))
    stack = np.vstack(on_grid)
    stack -= np.nanmean(stack, axis=1, keepdims=True)
    counted = np.isfinite(stack).any(axis=0)
    profile = np.full(GRID, np.nan)
    profile[counted] = np.nanmean(stack[:, counted], axis=0)
    traces = []
    for (run_id, lap, time, position, elevation), row in zip(raw, on_grid, strict=True):
        shifted = elevation - np.nanmean(row)
        shared = np.interp(position, grid[counted], profile[counted])
        order = np.argsort(position, kind="stable")
        traces.append(
            LapTrace(run_id, lap, time[order], position[order], shifted[order], (shifted - shared)[order])
        )
    return Laps(grid[counted], profile[counted], tuple(traces))


def _within_lap(position: FloatArray, length: float) -> FloatArray:
    """Return places along one lap, begun and ended without a jump where the lap's line is crossed. [m]"""
    place = position % length
    edge = max(1, place.size // 10)
    first, last = place[:edge], place[-edge:]
    first[first > 0.8 * length] -= length
    last[last < 0.2 * length] += length
    return place


def _wind(figure: RunEstimate) -> tuple[float, float]:
    """Return the components the wind comes from, east and north; still air where it is not known. [m/s]"""
    if figure.wind_speed is None or figure.wind_from is None:
        return 0.0, 0.0
    return figure.wind_speed * math.sin(figure.wind_from), figure.wind_speed * math.cos(figure.wind_from)
