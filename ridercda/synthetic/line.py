"""The line ridden: geometry of a venue sampled evenly along the wheel's path."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from numba import njit

FloatArray = npt.NDArray[np.float64]

STANDARD_GRAVITY = 9.80665  # [m/s^2]
NO_LIMIT = 99.0  # [m/s] faster than anybody rides here


@dataclass(frozen=True, slots=True, eq=False)
class Line:
    """A path on the ground, sampled every `step` metres; closed lines repeat after `length`.

    Parameters
    ----------
    step : float
        Between samples. [m]
    length : float
        Of the whole line; of a closed one, once round. [m]
    closed : int
        1 where the line repeats, 0 where it ends.
    east, north, height : ndarray, shape (n,)
        Local coordinates. [m]
    cos_heading, sin_heading : ndarray, shape (n,)
        North and east part of the unit vector along the line. [1]
    curvature : ndarray, shape (n,)
        Magnitude. [1/m]
    grade_sine : ndarray, shape (n,)
        Rise over distance along the line. [1]
    speed_limit : ndarray, shape (n,)
        Above it the rider brakes. [m/s]
    """

    step: float
    length: float
    closed: int
    east: FloatArray
    north: FloatArray
    height: FloatArray
    cos_heading: FloatArray
    sin_heading: FloatArray
    curvature: FloatArray
    grade_sine: FloatArray
    speed_limit: FloatArray

    def at(self, values: FloatArray, position: npt.ArrayLike) -> FloatArray:
        """Return a sampled quantity at positions along the line, linear between samples.

        Parameters
        ----------
        values : ndarray, shape (n,)
            One of the sampled arrays, or one of the same length.
        position : array_like, shape (...)
            Along the line; wraps round a closed one, holds at the ends of an open one. [m]
        """
        x = np.asarray(position, float) / self.step
        if self.closed:
            cell = np.floor(x).astype(np.int64)
            part = x - cell
            n = len(values)
            return np.asarray(values[cell % n] * (1 - part) + values[(cell + 1) % n] * part)
        return np.asarray(np.interp(x, np.arange(len(values)), values))


def closed_line(points: FloatArray, smoothing: float, length: float | None, grip: float) -> Line:
    """Return the closed line through a polygon of points, its corners rounded.

    Parameters
    ----------
    points : ndarray, shape (k, 3)
        East, north, height of the corners, first not repeated. [m]
    smoothing : float
        Standard deviation along the line of the Gaussian that rounds the corners. [m]
    length : float or None
        Length to scale the plan to; None keeps it. [m]
    grip : float
        Lateral acceleration the rider allows, over g. [1]
    """
    ring = np.vstack((points, points[:1]))
    for _ in range(2):  # the second pass makes the samples even along the rounded line
        arc = _arc_length(ring)
        count = 4096 if arc[-1] < 2000 else 8192
        even = np.linspace(0.0, arc[-1], count, endpoint=False)
        ring = np.column_stack([np.interp(even, arc, ring[:, j]) for j in range(3)])
        if smoothing > 0:
            wave = np.fft.rfftfreq(count, arc[-1] / count)
            window = np.exp(-0.5 * (2 * np.pi * wave * smoothing) ** 2)[:, None]
            ring = np.fft.irfft(np.fft.rfft(ring, axis=0) * window, count, axis=0)
            smoothing = 0.0
        ring = np.vstack((ring, ring[:1]))
    arc = _arc_length(ring)
    if length is not None:
        ring[:, :2] *= length / arc[-1]
        arc = _arc_length(ring)
    total = float(arc[-1])
    n = round(total / 0.5)
    step = total / n
    even = np.arange(n) * step
    east, north, height = (np.interp(even, arc, ring[:, j]) for j in range(3))
    wave = 2j * np.pi * np.fft.rfftfreq(n, step)
    # The interpolation above leaves ripples at the sample spacing, which two derivatives would blow up.
    calm = np.exp(-0.5 * (np.abs(wave) * 1.0) ** 2)
    east, north, height = (np.fft.irfft(np.fft.rfft(a) * calm, n) for a in (east, north, height))
    d_east, d_north, d_height = (np.fft.irfft(np.fft.rfft(a) * wave, n) for a in (east, north, height))
    dd_east, dd_north = (np.fft.irfft(np.fft.rfft(a) * wave**2, n) for a in (east, north))
    speed = np.hypot(d_east, d_north)
    curvature = np.abs(d_east * dd_north - d_north * dd_east) / speed**3
    return Line(
        step=step,
        length=total,
        closed=1,
        east=east,
        north=north,
        height=height,
        cos_heading=d_north / speed,
        sin_heading=d_east / speed,
        curvature=curvature,
        grade_sine=d_height,
        speed_limit=_speed_limit(curvature, step, grip),
    )


def line_from_curvature(
    curvature: FloatArray, step: float, height: FloatArray, heading: float, closed: int, grip: float
) -> Line:
    """Return the line with this signed curvature, starting at the origin.

    Parameters
    ----------
    curvature : ndarray, shape (n,)
        Positive to the left. [1/m]
    step : float
        Between samples. [m]
    height : ndarray, shape (n,)
        [m]
    heading : float
        At the start, clockwise from north. [rad]
    closed : int
        1 where the line repeats.
    grip : float
        Lateral acceleration the rider allows, over g. [1]
    """
    turned = np.concatenate(([0.0], np.cumsum(0.5 * (curvature[1:] + curvature[:-1]) * step)))
    bearing = heading - turned
    cosine, sine = np.cos(bearing), np.sin(bearing)

    def along(part: FloatArray) -> FloatArray:
        return np.concatenate(([0.0], np.cumsum(0.5 * (part[1:] + part[:-1]) * step)))

    beyond = (height[-1], height[0]) if closed else (2 * height[0] - height[1], 2 * height[-1] - height[-2])
    rise = (np.append(height[1:], beyond[1]) - np.insert(height[:-1], 0, beyond[0])) / (2 * step)
    bend = np.abs(curvature)
    return Line(
        step=step,
        length=step * (len(bend) if closed else len(bend) - 1),
        closed=closed,
        east=along(sine),
        north=along(cosine),
        height=np.asarray(height, float),
        cos_heading=cosine,
        sin_heading=sine,
        curvature=bend,
        grade_sine=rise,
        speed_limit=_speed_limit(bend, step, grip),
    )


def _arc_length(ring: FloatArray) -> FloatArray:
    return np.concatenate(([0.0], np.cumsum(np.hypot(np.diff(ring[:, 0]), np.diff(ring[:, 1])))))


BRAKING = 1.8  # [m/s^2] an easy squeeze before a turn


def _speed_limit(curvature: FloatArray, step: float, grip: float) -> FloatArray:
    if not math.isfinite(grip):
        return np.full(len(curvature), NO_LIMIT)
    limit = np.sqrt(grip * STANDARD_GRAVITY / np.maximum(curvature, 1e-9))
    limit = np.minimum(limit, NO_LIMIT)
    _brake_in_time(limit, 2 * BRAKING * step)
    return limit


@njit(cache=True, nogil=True)
def _brake_in_time(limit: FloatArray, gain: float) -> None:
    n = len(limit)
    for j in range(2 * n - 2, -1, -1):  # twice round, so a corner just after the line is seen before it
        i = j % n
        ahead = limit[(i + 1) % n]
        reach = math.sqrt(ahead * ahead + gain)
        if limit[i] > reach:
            limit[i] = reach
