"""Runs of neighbouring records that share a property."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from ridercda.rides.ride import FloatArray

BoolArray = npt.NDArray[np.bool_]
IndexArray = npt.NDArray[np.intp]
Span = tuple[int, int]


def true_spans(mask: BoolArray) -> list[Span]:
    """Return (first, last) of each run of True; both ends belong to it."""
    edges = np.flatnonzero(np.diff(np.concatenate(([False], mask, [False])).astype(np.int8)))
    return [(int(first), int(last) - 1) for first, last in zip(edges[::2], edges[1::2], strict=True)]


def equal_spans(values: FloatArray) -> list[Span]:
    """Return (first, last) of each run of equal finite values, runs of one included."""
    if not values.size:
        return []
    starts = np.concatenate(([0], np.flatnonzero(values[1:] != values[:-1]) + 1))
    ends = np.concatenate((starts[1:] - 1, [values.size - 1]))
    known = np.isfinite(values[starts])
    return [(int(first), int(last)) for first, last in zip(starts[known], ends[known], strict=True)]


def median_about(values: FloatArray, width: int) -> FloatArray:
    """Return the running median over `width` records; holes are bridged first. All NaN where nothing is known."""
    from scipy.ndimage import median_filter

    known = np.isfinite(values)
    if not known.any():
        return np.full(values.size, np.nan)
    at = np.arange(values.size)
    filled = np.interp(at, at[known], values[known])
    return np.asarray(median_filter(filled, size=min(width, values.size), mode="nearest"), dtype=np.float64)


def scatter_of(values: FloatArray) -> float:
    """Return a robust standard deviation (1.4826 times the median absolute deviation); NaN without values."""
    known = values[np.isfinite(values)]
    if not known.size:
        return float("nan")
    return 1.4826 * float(np.median(np.abs(known - np.median(known))))


def signed(value: float, decimals: int = 1) -> str:
    """Return a number with its sign, a true minus for a negative one."""
    return f"{value:+.{decimals}f}".replace("-", "−")
