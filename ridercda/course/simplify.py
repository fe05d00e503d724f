"""The fewest points of a line that follow it within a tolerance."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
from numba import njit

FloatArray = npt.NDArray[np.float64]
IntArray = npt.NDArray[np.int64]


def kept_points(along: npt.ArrayLike, values: npt.ArrayLike, tolerance: float) -> IntArray:
    """Return the points to keep so that straight lines between them follow the rest.

    Parameters
    ----------
    along : array_like, shape (n,)
        What the values are a function of, increasing. [m]
    values : array_like, shape (n, k)
        k functions of it, e.g. an altitude, or metres east and north. [m]
    tolerance : float
        Largest distance, in the space of the values, of any point from the line at the same `along`. [m]

    Returns
    -------
    ndarray of int, shape (m,)
        Increasing, the first and the last point among them.

    Notes
    -----
    D. H. Douglas, T. K. Peucker 1973, doi:10.3138/FM57-6770-U75U-7727 (from memory), with the distance taken at
    the same place along the line, so that it also works where the line comes back on itself.
    """
    s = np.ascontiguousarray(along, dtype=np.float64)
    x = np.ascontiguousarray(values, dtype=np.float64)
    keep = np.zeros(s.size, dtype=np.bool_)
    _mark(s, x, tolerance * tolerance, keep)
    return np.flatnonzero(keep)


@njit(cache=True, nogil=True, error_model="numpy")
def _mark(s: FloatArray, x: FloatArray, tolerance2: float, keep: npt.NDArray[np.bool_]) -> None:
    """Set `keep` where a point is kept; an own stack in place of recursion."""
    stack = np.empty((s.size + 1, 2), dtype=np.int64)
    stack[0, 0], stack[0, 1] = 0, s.size - 1
    keep[0] = keep[s.size - 1] = True
    depth = 1
    while depth > 0:
        depth -= 1
        first, last = stack[depth, 0], stack[depth, 1]
        worst, where = tolerance2, -1
        for i in range(first + 1, last):
            share = (s[i] - s[first]) / (s[last] - s[first])
            miss2 = 0.0
            for j in range(x.shape[1]):
                miss = x[i, j] - x[first, j] - share * (x[last, j] - x[first, j])
                miss2 += miss * miss
            if miss2 > worst:
                worst, where = miss2, i
        if where >= 0:
            keep[where] = True
            stack[depth, 0], stack[depth, 1] = first, where
            stack[depth + 1, 0], stack[depth + 1, 1] = where, last
            depth += 2
