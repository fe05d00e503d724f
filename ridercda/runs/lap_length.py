"""How far round a loop is, from fixes that come back to where they were."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt
from numba import njit

FloatArray = npt.NDArray[np.float64]
IntArray = npt.NDArray[np.int64]
BoolArray = npt.NDArray[np.bool_]

CLOSE = 25.0  # [m] two passes of one place lie within this
REPEAT = 0.35  # of the best share of repeats that the first one must reach
SHORTEST = 120.0  # [m] no venue is shorter once round


def lap_from_fixes(
    paths: Sequence[tuple[FloatArray, FloatArray, FloatArray]], expected: float | None
) -> float | None:
    """Return the distance ridden after which paths are back at the same place; None when they never are.

    Parameters
    ----------
    paths : sequence of (travelled, east, north)
        Each of shape (n,), distance never falling, NaN without a fix. [m]
    expected : float, optional
        A lap length known beforehand; looked for within 5 %. [m]

    Returns
    -------
    float or None
        In the distance as recorded. [m]

    Notes
    -----
    For each lag, the share of points that lie within 25 m of the point one lag on. The first lag whose share
    is a good part of the highest is the lap (where runs of two laps are ridden alike, the way from run to run
    repeats better than the lap does); it is refined by the least median distance.
    """
    spacing = 10.0
    gridded = [g for g in (_on_grid(*path, spacing) for path in paths) if g is not None]
    if not gridded:
        return None
    longest = max(x.size for x, _ in gridded)
    if expected is not None:
        lags = np.arange(int(0.95 * expected / spacing), int(1.05 * expected / spacing) + 2)
    else:
        lags = np.arange(int(SHORTEST / spacing), int(0.9 * longest) + 1)
    lags = lags[(lags > 0) & (lags < longest)]
    if lags.size == 0:
        return None
    # Every point of every path would be more than is needed on a long day.
    stride = max(1, sum(x.size for x, _ in gridded) // 1500)
    close = np.zeros(lags.size)
    total = np.zeros(lags.size)
    for x, y in gridded:
        _count_close(x, y, lags, stride, close, total)
    # A few points at the far end of the longest path must not decide.
    share = close / np.maximum(total, 300.0 / spacing / stride)
    best = float(share.max())
    if best < 0.15:  # an hour's way to the venue may be part of the path
        return None
    start = int(np.argmax(share >= REPEAT * best))
    stop = start
    while stop + 1 < share.size and share[stop + 1] >= REPEAT * best:
        stop += 1
    middle = 0.5 * float(lags[start] + lags[stop]) * spacing
    fine = np.arange(middle - 40.0, middle + 40.5, 4.0)
    return _refined(gridded, spacing, fine[fine > 0.5 * SHORTEST])


def comes_back(travelled: FloatArray, east: FloatArray, north: FloatArray, lap: float) -> BoolArray:
    """Return which fixes lie where the path is again, or was, one lap away.

    Parameters
    ----------
    travelled, east, north : ndarray, shape (n,)
        Distance never falling; NaN without a fix. [m]
    lap : float
        [m]

    Returns
    -------
    ndarray of bool, shape (n,)
    """
    good = np.isfinite(east) & np.isfinite(north)
    back = np.zeros(travelled.size, bool)
    if good.sum() < 4:
        return back
    s, first = np.unique(travelled[good], return_index=True)
    x, y = east[good][first], north[good][first]
    for shift in (lap, -lap):
        at = travelled + shift
        reach = (at >= s[0]) & (at <= s[-1]) & good
        gap = np.hypot(np.interp(at[reach], s, x) - east[reach], np.interp(at[reach], s, y) - north[reach])
        back[np.flatnonzero(reach)[gap < CLOSE]] = True
    return back


def _on_grid(
    travelled: FloatArray, east: FloatArray, north: FloatArray, spacing: float
) -> tuple[FloatArray, FloatArray] | None:
    good = np.isfinite(east) & np.isfinite(north)
    if good.sum() < 4:
        return None
    s, first = np.unique(travelled[good], return_index=True)
    grid = np.arange(s[0], s[-1], spacing)
    if grid.size < 4:
        return None
    return np.interp(grid, s, east[good][first]), np.interp(grid, s, north[good][first])


@njit(cache=True, nogil=True)
def _count_close(
    x: FloatArray, y: FloatArray, lags: IntArray, stride: int, close: FloatArray, total: FloatArray
) -> None:
    """Count for each lag the pairs of points and those that lie close; adds to `close` and `total`."""
    for i in range(lags.size):
        for k in range(0, x.size - lags[i], stride):
            total[i] += 1.0
            if (x[k + lags[i]] - x[k]) ** 2 + (y[k + lags[i]] - y[k]) ** 2 < CLOSE * CLOSE:
                close[i] += 1.0


def _refined(gridded: Sequence[tuple[FloatArray, FloatArray]], spacing: float, lags: FloatArray) -> float:
    median = np.empty(lags.size)
    for i, lag in enumerate(lags):
        whole = int(lag // spacing)
        f = lag / spacing - whole
        gaps = []
        for x, y in gridded:
            if x.size > whole + 1:
                xa = x[whole:-1] * (1 - f) + x[whole + 1 :] * f
                ya = y[whole:-1] * (1 - f) + y[whole + 1 :] * f
                stride = max(1, xa.size // 100)
                gaps.append(np.hypot(xa - x[: xa.size], ya - y[: ya.size])[::stride])
        median[i] = np.median(np.concatenate(gaps)) if gaps else np.inf
    return float(lags[int(np.argmin(median))])
