"""Fixes projected onto a reference line with continuity, and what they say of the wheel's dead reckoning."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from numba import njit

from ridercda.runs.reference_line import ReferenceLine

FloatArray = npt.NDArray[np.float64]
BoolArray = npt.NDArray[np.bool_]

GATE = 30.0  # [m] a fix farther from the line says nothing of the station
WANDER = 1e-3  # [m^2/m] variance by which the ridden path and the line part per metre: 1 m a kilometre
DISAGREEMENT = 15.0  # [m] a lasting gap between fixes and wheel beyond this is no wander
LOST = 10.0  # [m] standard deviation of a step of the wheel while they disagree
FIX_TIME = 30.0  # [s] over which the errors of fixes stay alike; common practice
FIX_NOISE = (0.5, 15.0)  # [m] least and greatest standard deviation of a fix along the line


@dataclass(frozen=True, slots=True, eq=False)
class Passage:
    """A run's fixes on the line.

    Parameters
    ----------
    station : ndarray, shape (n,)
        Unwrapped station of each fix; NaN where there is none within reach. [m]
    off : ndarray, shape (n,)
        Distance of each fix from the line; NaN where there is no fix. [m]
    """

    station: FloatArray
    off: FloatArray


def follow(
    line: ReferenceLine,
    dead: FloatArray,
    east: FloatArray,
    north: FloatArray,
    window: float,
    first: float = 0.0,
) -> Passage:
    """Project fixes near where dead reckoning expects them, so that no fix jumps to another lap or lane.

    Parameters
    ----------
    line : ReferenceLine
    dead : ndarray, shape (n,)
        Station by dead reckoning, unwrapped. [m]
    east, north : ndarray, shape (n,)
        NaN where there is no fix. [m]
    window : float
        Reach of the search along the line; it grows while no fix is found. [m]
    first : float
        Offset from dead reckoning expected at the first record. [m]

    Returns
    -------
    Passage
    """
    x, y = line.east, line.north
    if line.closed:
        x, y = np.append(x, x[0]), np.append(y, y[0])
    station, off = _follow(dead - line.start, east, north, x, y, line.step, line.closed, GATE, window, first)
    return Passage(station + line.start, off)


@njit(cache=True, nogil=True)
def _follow(
    dead: FloatArray,
    east: FloatArray,
    north: FloatArray,
    x: FloatArray,
    y: FloatArray,
    step: float,
    closed: bool,
    gate: float,
    window: float,
    first: float,
) -> tuple[FloatArray, FloatArray]:
    n = dead.size
    segments = x.size - 1
    station = np.full(n, np.nan)
    off = np.full(n, np.nan)
    offset = first
    missed = 0
    for k in range(n):
        if not (np.isfinite(east[k]) and np.isfinite(north[k])):
            missed += 1
            continue
        expected = dead[k] + offset
        reach = window + min(5.0 * max(missed - 3, 0), 400.0)
        lo = int(np.floor((expected - reach) / step))
        hi = int(np.ceil((expected + reach) / step))
        if closed:
            hi = min(hi, lo + segments)
        best = 1e300
        foot = np.nan
        inside = False
        for i in range(lo, hi):
            j = i
            if closed:
                j = i % segments
            elif i < 0 or i >= segments:
                continue
            dx = x[j + 1] - x[j]
            dy = y[j + 1] - y[j]
            length2 = dx * dx + dy * dy
            t = 0.0
            if length2 > 0.0:
                t = ((east[k] - x[j]) * dx + (north[k] - y[j]) * dy) / length2
            c = min(max(t, 0.0), 1.0)
            ex = x[j] + c * dx - east[k]
            ey = y[j] + c * dy - north[k]
            d2 = ex * ex + ey * ey
            if d2 < best:
                best = d2
                foot = (i + c) * step
                # Beyond the end of an open line the foot says only that the rider is beyond it.
                inside = closed or not ((j == 0 and t < 0.0) or (j == segments - 1 and t > 1.0))
        if best < 1e299:
            off[k] = np.sqrt(best)
        if best < gate * gate and inside:
            station[k] = foot
            if missed > 8 and abs(foot - expected) > window:
                offset = foot - dead[k]
            else:
                offset += 0.1 * (foot - expected)
            missed = 0
        else:
            missed += 1
    return station, off


@dataclass(frozen=True, slots=True, eq=False)
class Offset:
    """What to add to dead reckoning.

    Parameters
    ----------
    value : ndarray, shape (n,)
        [m]
    standard_error : ndarray, shape (n,)
        Of the value, given that the noise of the fixes has been judged right. [m]
    noise : float
        Standard deviation of a single fix along the line. [m]
    apart : ndarray of bool, shape (n,)
        Where fixes and wheel contradicted each other and the fixes were followed.
    """

    value: FloatArray
    standard_error: FloatArray
    noise: float
    apart: BoolArray


def smooth_offset(
    offset: FloatArray, time: FloatArray, travelled: FloatArray, doubt: FloatArray
) -> Offset | None:
    """Return the slowly varying offset between fixes and dead reckoning; None without fixes.

    Parameters
    ----------
    offset : ndarray, shape (n,)
        Station of each fix less dead reckoning; NaN without a fix. [m]
    time : ndarray, shape (n,)
        [s]
    travelled : ndarray, shape (n,)
        Distance ridden, never falling. [m]
    doubt : ndarray, shape (n,)
        Standard deviation of the step ending at each record, beyond that of a good sensor. [m]

    Returns
    -------
    Offset or None

    Notes
    -----
    A random walk in distance seen through fixes whose errors stay alike for half a minute, smoothed in both
    directions (H. E. Rauch, F. Tung and C. T. Striebel, Maximum likelihood estimates of linear dynamic
    systems, AIAA J. 3(8), 1445-1450, 1965, doi:10.2514/3.3166). The fixes' correlated error is counted as a
    white one of the same mean over a minute and more, and wild fixes weigh less (Huber). Three rounds set the
    noise from what the fixes leave. Where fixes stay away from that, the wheel has lost the way (a U-turn not
    seen, a sensor that fell silent) and the fixes are followed.
    """
    if not np.isfinite(offset).any():
        return None
    dt = np.diff(time, prepend=time[0] - 1.0)
    walk = WANDER * np.diff(travelled, prepend=travelled[:1]) + doubt**2
    inflate = np.maximum(2 * FIX_TIME / np.clip(dt, 0.1, 2 * FIX_TIME), 1.0)
    value, variance, noise = _smooth_robustly(offset, inflate, walk, *FIX_NOISE)
    apart = _disagreeing(offset - value, max(DISAGREEMENT, 5 * noise))
    if apart.any():
        value, variance, noise = _smooth_robustly(offset, inflate, walk + apart * LOST**2, *FIX_NOISE)
    return Offset(value, np.sqrt(variance), noise, apart)


@njit(cache=True, nogil=True)
def _disagreeing(left: FloatArray, reach: float) -> BoolArray:
    """Return the records between which most of eleven fixes on end lie beyond reach on one side."""
    apart = np.zeros(left.size, np.bool_)
    known = np.flatnonzero(np.isfinite(left))
    for i in range(known.size - 10):
        above = 0
        below = 0
        for k in range(i, i + 11):
            if left[known[k]] > reach:
                above += 1
            elif left[known[k]] < -reach:
                below += 1
        if above >= 8 or below >= 8:
            apart[known[i] : known[i + 10] + 1] = True
    return apart


@njit(cache=True, nogil=True)
def _smooth_robustly(
    offset: FloatArray, inflate: FloatArray, walk: FloatArray, least: float, greatest: float
) -> tuple[FloatArray, FloatArray, float]:
    known = np.flatnonzero(np.isfinite(offset))
    value = np.full(offset.size, np.median(offset[known]))
    variance = value
    noise = least
    seen_noise = np.ones(offset.size)
    for _ in range(3):
        left = np.abs(offset[known] - value[known])
        noise = min(max(1.4826 * np.median(left), least), greatest)
        for i in range(known.size):
            k = known[i]
            weight = min(1.0, 2.0 * noise / max(left[i], 1e-9))
            seen_noise[k] = noise**2 * inflate[k] / weight
        value, variance = _smooth(offset, seen_noise, walk)
    return value, variance, noise


@njit(cache=True, nogil=True)
def _smooth(seen: FloatArray, noise: FloatArray, walk: FloatArray) -> tuple[FloatArray, FloatArray]:
    n = seen.size
    mean = np.empty(n)
    variance = np.empty(n)
    m = 0.0
    p = 1e8
    for k in range(n):
        if k > 0:
            p += walk[k]
        if np.isfinite(seen[k]):
            gain = p / (p + noise[k])
            m += gain * (seen[k] - m)
            p *= 1.0 - gain
        mean[k] = m
        variance[k] = p
    for k in range(n - 2, -1, -1):
        ahead = variance[k] + walk[k + 1]
        c = variance[k] / ahead if ahead > 0.0 else 0.0
        mean[k] += c * (mean[k + 1] - mean[k])
        variance[k] += c * c * (variance[k + 1] - ahead)
    return mean, variance


def locate_run(
    line: ReferenceLine, dead: FloatArray, east: FloatArray, north: FloatArray, directions: tuple[float, ...]
) -> tuple[float, float, float]:
    """Find where on the line a run lies that may be anywhere, and in which direction it goes.

    Parameters
    ----------
    line : ReferenceLine
    dead : ndarray, shape (n,)
        Dead reckoning from 0, forward positive. [m]
    east, north : ndarray, shape (n,)
        [m]
    directions : tuple of float
        Those to try, +1 or -1.

    Returns
    -------
    offset, direction, near : float
        So that ``direction * dead + offset`` is the station; `near` is the share of fixes that then lie within
        25 m of their station. [m, 1, 1]
    """
    good = np.flatnonzero(np.isfinite(east) & np.isfinite(north))
    if good.size == 0:
        return 0.0, directions[0], 0.0
    pick = good[np.linspace(0, good.size - 1, min(good.size, 80)).astype(int)]
    s, x, y = dead[pick], east[pick], north[pick]
    best = (0.0, directions[0], np.inf)
    for direction in directions:
        if line.closed:
            low, high = line.start, line.start + line.length
        else:
            reach = direction * s
            low, high = line.start - float(reach.max()), line.start + line.length - float(reach.min())
        grid = np.arange(low, high, 20.0)
        for width in (20.0, 2.0):
            miss, _ = _misses(
                line.east, line.north, line.start, line.step, line.closed, direction * s, x, y, grid
            )
            at = int(np.argmin(miss))
            if width == 20.0:
                grid = grid[at] + np.arange(-24.0, 25.0, 2.0)
        if miss[at] < best[2]:
            best = (float(grid[at]), direction, float(miss[at]))
    offset, direction, _ = best
    _, near = _misses(
        line.east, line.north, line.start, line.step, line.closed, direction * s, x, y, np.array([offset])
    )
    return offset, direction, float(near[0])


@njit(cache=True, nogil=True)
def _misses(
    lx: FloatArray,
    ly: FloatArray,
    start: float,
    step: float,
    closed: bool,
    s: FloatArray,
    x: FloatArray,
    y: FloatArray,
    grid: FloatArray,
) -> tuple[FloatArray, FloatArray]:
    """Return the mean distance, each fix counting 60 m at most, and the share of near fixes, by offset."""
    cap = 60.0
    m = lx.size
    out = np.empty(grid.size)
    near = np.zeros(grid.size)
    for g in range(grid.size):
        total = 0.0
        for k in range(s.size):
            i = int(np.round((s[k] + grid[g] - start) / step))
            if closed:
                i = i % m
            elif i < 0 or i >= m:
                total += 0.5 * cap
                continue
            d = np.sqrt((lx[i] - x[k]) ** 2 + (ly[i] - y[k]) ** 2)
            total += min(d, cap)
            if d < 25.0:
                near[g] += 1.0 / s.size
        out[g] = total / s.size
    return out, near
