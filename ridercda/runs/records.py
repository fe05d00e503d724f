"""Which records of a ride a run covers."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt

from ridercda.session.document import Exclusion, Run

FloatArray = npt.NDArray[np.float64]
BoolArray = npt.NDArray[np.bool_]

# Times typed by hand or printed to the millisecond still meet the record they were read from.
TIME_TOLERANCE = 1e-3  # [s]


def points_in(time: FloatArray, start: float, end: float | None) -> slice:
    """Return the records whose moment lies in [start, end].

    Parameters
    ----------
    time : ndarray, shape (n,)
        Strictly increasing. [s]
    start, end : float
        On the same clock; `end` None: to the last record. [s]

    Returns
    -------
    slice
        With non-negative bounds; empty when no record lies inside.
    """
    first = int(np.searchsorted(time, start - TIME_TOLERANCE, side="left"))
    if end is None:
        return slice(first, int(time.size))
    return slice(first, max(first, int(np.searchsorted(time, end + TIME_TOLERANCE, side="right"))))


def records_in(time: FloatArray, start: float, end: float | None) -> slice:
    """Return the record intervals (t[k-1], t[k]] that lie inside [start, end].

    Neighbouring runs may share an edge: the interval before it belongs to the first run, the one after it to
    the second. The first record of a ride has no interval.

    Parameters
    ----------
    time : ndarray, shape (n,)
        Strictly increasing. [s]
    start, end : float
        On the same clock; `end` None: to the last record. [s]

    Returns
    -------
    slice
        Of the records k that end an interval; one shorter than `points_in`, empty when none lies inside.
    """
    points = points_in(time, start, end)
    return slice(min(points.start + 1, points.stop), points.stop)


def counted(time: FloatArray, records: slice, exclusions: Sequence[Exclusion]) -> BoolArray:
    """Return which of the intervals in `records` no exclusion touches.

    Parameters
    ----------
    time : ndarray, shape (n,)
        Strictly increasing. [s]
    records : slice
        From `records_in`.
    exclusions : sequence of Exclusion
        Spans left out; an interval that only shares an edge with one is kept.

    Returns
    -------
    ndarray of bool, shape (records.stop - records.start,)
    """
    end = time[records]
    begin = time[records.start - 1 : records.stop - 1] if end.size else end
    kept = np.ones(end.size, bool)
    for span in exclusions:
        kept &= (end <= span.start + TIME_TOLERANCE) | (begin >= span.end - TIME_TOLERANCE)
    return kept


def run_records(time: FloatArray, run: Run) -> tuple[slice, BoolArray]:
    """Return the intervals a run covers and which of them no exclusion touches."""
    records = records_in(time, run.start, run.end)
    return records, counted(time, records, run.exclusions)
