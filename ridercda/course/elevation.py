"""Elevation without its noise and with its climbs: straight slopes between knots.

Method, in four steps. Points that stand out of their neighbourhood are spikes and are left out. The noise is
measured from second differences of 10 m means. A smoothing spline on those means (Whittaker's, second
differences penalised) shows where slopes change, and the fewest knots that follow it within a tolerance set by
the noise are kept. The heights at the knots are then fitted to the *recorded* points by least squares, so the
smoothing chooses where slopes change and takes nothing off the height of a climb.

Sources: E. T. Whittaker, "On a new method of graduation," Proc. Edinburgh Math. Soc. 41, 63-75, 1923,
doi:10.1017/S0013091500077853; D. H. Douglas, T. K. Peucker, "Algorithms for the reduction of the number of points
required to represent a digitized line or its caricature," Cartographica 10, 112-122, 1973,
doi:10.3138/FM57-6770-U75U-7727 (both from memory).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy.linalg import solveh_banded

from ridercda.course.route import CourseNote
from ridercda.course.simplify import kept_points
from ridercda.errors import CourseError

FloatArray = npt.NDArray[np.float64]

CELL = 10.0  # [m] over which recorded points are meaned before slopes are looked for
SPIKE_WINDOW = 120.0  # [m] to either side, whose median a point is held against
SPIKE_HEIGHT = 12.0  # [m] by which it must stand out, beyond what the slope around explains
LOWEST, HIGHEST = -500.0, 9000.0  # [m] no road is outside: such a value is a sensor's word for "nothing"
FINEST = 0.15  # [m] detail below this is worth nothing: 84 kg up 0.15 m is 0.4 s at 285 W, given back later
TOLERANCE = 0.75  # knots follow the smoothed profile within this many times the noise, and at least FINEST
LONGEST_WAVE = 120.0  # [m] half of a wave of this length is smoothed away at the most
STEEPEST = 0.45  # a slope beyond this is told: no road has it


@dataclass(frozen=True, slots=True, eq=False)
class Profile:
    """A cleaned elevation: straight slopes between knots."""

    distance: FloatArray  # of the knots, from the first point to the last [m]
    altitude: FloatArray  # [m]
    noise: float  # standard deviation of a 10 m mean, as found [m]
    notes: tuple[CourseNote, ...]


def clean_profile(distance: npt.ArrayLike, altitude: npt.ArrayLike, course_id: str = "") -> Profile:
    """Return the slopes of a recorded elevation.

    Parameters
    ----------
    distance : array_like, shape (n,)
        Along the road, strictly increasing. [m]
    altitude : array_like, shape (n,)
        As recorded; NaN where a point has none. [m]
    course_id : str
        For messages.

    Returns
    -------
    Profile
        A flat one at 0 m, with a note, where no point has an altitude.

    Raises
    ------
    CourseError
        If there are fewer than two points.
    """
    s, z = np.asarray(distance, float), np.array(altitude, float)
    if s.size < 2:
        raise CourseError(f"course {course_id!r} has {s.size} point; a course needs at least two")
    notes: list[CourseNote] = []
    ends = s[[0, -1]]
    z[(z < LOWEST) | (z > HIGHEST)] = np.nan
    known = np.isfinite(z)
    if known.sum() < 2:
        text = "no elevation in the file: taken as flat. Times are those of a flat course."
        return Profile(ends, np.zeros(2), 0.0, (CourseNote("no-elevation", text),))
    spikes = _spikes(s, z)
    if spikes.any():
        where = ", ".join(f"{x / 1000:.2f} km" for x in s[spikes][:3])
        more = " ..." if spikes.sum() > 3 else ""
        text = f"{spikes.sum()} elevation spikes left out ({where}{more})"
        notes.append(CourseNote("elevation-spikes", text))
        known &= ~spikes
    missing = 1.0 - known.mean()
    if missing > 0.1:
        text = f"{missing:.0%} of the points have no usable elevation: straight slopes in between"
        notes.append(CourseNote("elevation-gaps", text))
    s_known, z_known = s[known], z[known]
    grid, means = _cell_means(s_known, z_known, ends)
    noise = _noise(means, z_known)
    knots = grid[_knots(grid, means, noise)]
    heights = _fitted_heights(knots, s_known, z_known)
    steep = np.abs(np.diff(heights)) > STEEPEST * np.diff(knots)
    if steep.any():
        at = knots[:-1][steep][0]
        text = f"steeper than {STEEPEST:.0%} at {at / 1000:.2f} km: check the elevation there"
        notes.append(CourseNote("elevation-step", text))
    return Profile(knots, heights, noise, tuple(notes))


def _spikes(distance: FloatArray, altitude: FloatArray) -> npt.NDArray[np.bool_]:
    """Return which points stand out of their neighbourhood by more than its own slope explains."""
    spikes = np.zeros(altitude.size, bool)
    for _ in range(5):
        use = np.flatnonzero(np.isfinite(altitude) & ~spikes)
        if use.size < 5:
            break
        s, z = distance[use], altitude[use]
        first = np.searchsorted(s, s - SPIKE_WINDOW)
        last = np.searchsorted(s, s + SPIKE_WINDOW, side="right")
        # At least two neighbours to either side, at most nine: a denser record is thinned evenly.
        first = np.maximum(np.minimum(first, np.arange(s.size) - 2), 0)
        last = np.minimum(np.maximum(last, np.arange(s.size) + 3), s.size)
        picks = first[:, None] + np.linspace(0.0, 1.0, 19)[None, :] * (last - 1 - first)[:, None]
        around = picks.round().astype(np.int64)
        level = np.median(z[around], axis=1)
        spread = np.median(np.abs(z[around] - level[:, None]), axis=1)
        # A steady slope has a spread of a quarter of its rise over the window; three times that clears it.
        fresh = np.abs(z - level) > SPIKE_HEIGHT + 3.0 * spread
        if not fresh.any():
            break
        spikes[use[fresh]] = True
    return spikes


def _cell_means(
    distance: FloatArray, altitude: FloatArray, ends: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Return a grid of equal cells from end to end, and the mean altitude about each of its points."""
    cells = max(2, round(float(ends[1] - ends[0]) / CELL))
    grid = np.linspace(ends[0], ends[1], cells + 1)
    cell = np.clip(np.rint((distance - ends[0]) / (grid[1] - grid[0])), 0, cells).astype(np.int64)
    count = np.bincount(cell, minlength=cells + 1)
    filled = count > 0
    mean = np.bincount(cell, altitude, cells + 1)[filled] / count[filled]
    at = np.bincount(cell, distance, cells + 1)[filled] / count[filled]
    return grid, np.interp(grid, at, mean)


def _noise(means: FloatArray, altitude: FloatArray) -> float:
    """Return the standard deviation of the noise of the cell means. [m]

    The median of the second differences is not moved by the few places where the slope changes. An altimeter
    that counts in steps hides noise below them: a step's own standard deviation is the least there is.
    """
    if means.size < 5:
        return 0.0
    second = means[2:] - 2.0 * means[1:-1] + means[:-2]
    white = 1.4826 * float(np.median(np.abs(second))) / np.sqrt(6.0)
    jumps = np.abs(np.diff(altitude))
    jumps = jumps[jumps > 1e-6]
    step = float(jumps.min()) if jumps.size else 0.0
    stepped = jumps.size > 0 and bool(np.mean(np.abs(jumps / step - np.rint(jumps / step)) < 1e-3) > 0.95)
    return float(max(white, step / np.sqrt(12.0) if stepped else 0.0))


def _knots(grid: FloatArray, means: FloatArray, noise: float) -> npt.NDArray[np.int64]:
    """Return the grid points between which the smoothed profile is straight within the tolerance."""
    tolerance = max(FINEST, TOLERANCE * noise)
    smooth = means
    if noise > 0.02 and means.size >= 5:
        # White noise passes the spline with a variance of 0.35·(2π·cell/wave): a third of the tolerance is let by.
        spacing = float(grid[1] - grid[0])
        wave = 0.35 * 2.0 * np.pi * spacing * (3.0 * noise / tolerance) ** 2
        smooth = _spline(means, (min(wave, LONGEST_WAVE) / (2.0 * np.pi * spacing)) ** 4)
    return kept_points(grid, smooth[:, None], tolerance)


def _spline(values: FloatArray, penalty: float) -> FloatArray:
    """Return the values that minimise misfit plus penalty times the sum of squared second differences."""
    n = values.size
    bands = np.zeros((3, n))
    bands[2] = 1.0
    bands[2, :-2] += penalty
    bands[2, 1:-1] += 4.0 * penalty
    bands[2, 2:] += penalty
    bands[1, 1:-1] -= 2.0 * penalty
    bands[1, 2:] -= 2.0 * penalty
    bands[0, 2:] = penalty
    return np.asarray(solveh_banded(bands, values))


def _fitted_heights(knots: FloatArray, distance: FloatArray, altitude: FloatArray) -> FloatArray:
    """Return the heights at the knots whose straight slopes fit the points best."""
    cell = np.clip(np.searchsorted(knots, distance, side="right") - 1, 0, knots.size - 2)
    right = (distance - knots[cell]) / (knots[cell + 1] - knots[cell])
    left = 1.0 - right
    n = knots.size
    diagonal = np.asarray(
        np.bincount(cell, left**2, n) + np.bincount(cell + 1, right**2, n), dtype=np.float64
    )
    beside = np.bincount(cell, left * right, n)[:-1]
    at_knots = np.bincount(cell, left * altitude, n) + np.bincount(cell + 1, right * altitude, n)
    wanted = np.asarray(at_knots, dtype=np.float64)
    # A trace of the straight line through the points keeps knots without points of their own in place.
    between = np.interp(knots, distance, altitude)
    diagonal += 1e-3
    wanted += 1e-3 * between
    bands = np.zeros((2, n))
    bands[1] = diagonal
    bands[0, 1:] = beside
    return np.asarray(solveh_banded(bands, wanted))
