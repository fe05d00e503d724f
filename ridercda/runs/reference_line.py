"""The line of a venue, drawn once through the fixes of all laps of all runs."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from numba import njit
from scipy.linalg import solveh_banded

FloatArray = npt.NDArray[np.float64]

NODE = 2.0  # [m] spacing of the nodes a line is kept on: chords of a 10 m bend are 5 cm off
KNOT = 8.0  # [m] spacing of the spline's knots
SHARPEST = 20.0  # [m] shortest wave kept when the fixes are perfect
SMOOTHEST = 120.0  # [m] shortest wave kept when they are poor


@dataclass(frozen=True, slots=True, eq=False)
class ReferenceLine:
    """A smooth line by station, which is distance as the wheel sees it.

    Parameters
    ----------
    start, step : float
        Station of the first node and spacing. [m]
    closed : bool
        Whether the node after the last is the first one.
    east, north, d_east, d_north, dd_east, dd_north : ndarray, shape (m,)
        Position at the nodes and its derivatives by station. [m, 1, 1/m]
    """

    start: float
    step: float
    closed: bool
    east: FloatArray
    north: FloatArray
    d_east: FloatArray
    d_north: FloatArray
    dd_east: FloatArray
    dd_north: FloatArray

    @property
    def length(self) -> float:
        """Range of the station. [m]"""
        return self.step * (self.east.size if self.closed else self.east.size - 1)

    def pace(self, seen: FloatArray) -> float:
        """Return the drawn line's metres per metre of station, over the stretches near some stations.

        Parameters
        ----------
        seen : ndarray, shape (n,)
            Stations; stretches farther than 10 m from all of them do not count. [m]
        """
        reach = round(10.0 / self.step)
        nodes = np.round((seen - self.start) / self.step).astype(np.int64)
        m = self.east.size
        nodes = nodes % m if self.closed else nodes[(nodes >= 0) & (nodes < m)]
        near = np.zeros(m + 2 * reach, bool)
        for shift in range(2 * reach + 1):
            near[nodes + shift] = True
        return float(np.hypot(self.d_east, self.d_north)[near[reach : m + reach]].mean())

    def heading(self, station: FloatArray) -> FloatArray:
        """Return the direction of growing station, clockwise from north, 0 to 2π. [rad]"""
        return np.asarray(
            np.arctan2(self._at(self.d_east, station), self._at(self.d_north, station)) % (2 * np.pi)
        )

    def curvature(self, station: FloatArray) -> FloatArray:
        """Return the change of heading per metre, positive where the line bends to the right. [1/m]"""
        dx, dy = self._at(self.d_east, station), self._at(self.d_north, station)
        ddx, ddy = self._at(self.dd_east, station), self._at(self.dd_north, station)
        return np.asarray((ddx * dy - dx * ddy) / np.maximum(dx * dx + dy * dy, 1e-12) ** 1.5)

    def point(self, station: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return metres east and north at a station."""
        return self._at(self.east, station), self._at(self.north, station)

    def _at(self, nodes: FloatArray, station: FloatArray) -> FloatArray:
        at = (np.asarray(station, float) - self.start) / self.step
        if self.closed:
            whole = np.floor(at)
            i = whole.astype(np.int64) % nodes.size
            j = (i + 1) % nodes.size
            f = at - whole
        else:
            at = np.clip(at, 0.0, nodes.size - 1.0)
            i = np.minimum(at.astype(np.int64), nodes.size - 2)
            j = i + 1
            f = at - i
        return np.asarray(nodes[i] * (1 - f) + nodes[j] * f)


def draw_line(
    station: FloatArray,
    east: FloatArray,
    north: FloatArray,
    trust: FloatArray,
    *,
    start: float,
    length: float,
    closed: bool,
) -> ReferenceLine:
    """Return a robust penalised cubic spline through fixes whose stations are known.

    Parameters
    ----------
    station, east, north : ndarray, shape (n,)
        Finite. On a closed line stations may be of any lap. [m]
    trust : ndarray, shape (n,)
        Weight of each fix, 0 to 1: fixes taken while standing tell little of the way. [1]
    start, length : float
        Range of the line. [m]
    closed : bool
        Whether the line ends where it starts.

    Returns
    -------
    ReferenceLine

    Notes
    -----
    Cubic B-splines with a penalty on the third difference (P. H. C. Eilers and B. D. Marx, Flexible smoothing
    with B-splines and penalties, Statist. Sci. 11(2), 89-121, 1996, doi:10.1214/ss/1038425655). The penalty
    is set by the shortest wave that fixes this dense and this noisy can show; fixes far from the line count
    less (Huber).
    """
    steps = max(round(length / NODE), 8)
    step = length / steps
    if closed:
        station = start + (station - start) % length
        pad = min(2 * SMOOTHEST, 0.5 * length)
        low, high = station > start + length - pad, station < start + pad
        station = np.concatenate((station[low] - length, station, station[high] + length))
        east = np.concatenate((east[low], east, east[high]))
        north = np.concatenate((north[low], north, north[high]))
        trust = np.concatenate((trust[low], trust, trust[high]))
        lo, hi = start - pad, start + length + pad
    else:
        lo, hi = start, start + length
        inside = (station >= lo) & (station <= hi)
        station, east, north, trust = station[inside], east[inside], north[inside], trust[inside]
    spans = max(int(np.ceil((hi - lo) / KNOT)), 4)
    h = (hi - lo) / spans
    density = max(float(trust.sum()) / (hi - lo), 1e-6)
    shortest = _shortest_wave(station, east, north, density)
    penalty = density * (shortest / (2 * np.pi)) ** 6 / h**5
    coefficients = _solve(station, east, north, trust, lo, h, spans, penalty)
    for _ in range(2):
        off = np.hypot(
            east - _spline_at(coefficients[:, 0].copy(), station, lo, h, 3),
            north - _spline_at(coefficients[:, 1].copy(), station, lo, h, 3),
        )
        scale = max(float(np.median(off)), 0.05) if off.size else 1.0
        weight = trust * np.minimum(1.0, 2.0 * scale / np.maximum(off, 1e-9))
        coefficients = _solve(station, east, north, weight, lo, h, spans, penalty)
    nodes = start + step * np.arange(steps if closed else steps + 1, dtype=np.float64)
    values = [
        _spline_at(_derivative(coefficients[:, axis].copy(), h, order), nodes, lo, h, 3 - order)
        for order in range(3)
        for axis in range(2)
    ]
    return ReferenceLine(start, step, closed, *values)


def _shortest_wave(station: FloatArray, east: FloatArray, north: FloatArray, density: float) -> float:
    if east.size < 8:
        return SMOOTHEST
    noise2 = float(np.median(np.diff(east, 2) ** 2 + np.diff(north, 2) ** 2)) / 12 / 0.7
    return float(np.clip(25.0 * (max(noise2, 1e-9) / density / 0.1) ** (1 / 6), SHARPEST, SMOOTHEST))


def _solve(
    station: FloatArray,
    east: FloatArray,
    north: FloatArray,
    weight: FloatArray,
    lo: float,
    h: float,
    spans: int,
    penalty: float,
) -> FloatArray:
    band, rhs = _normal_equations(station, east, north, weight, lo, h, spans + 3)
    difference = np.array([-1.0, 3.0, -3.0, 1.0])
    rows = spans  # third differences of spans + 3 coefficients
    for a in range(4):
        for b in range(a, 4):
            band[b - a, a : a + rows] += penalty * difference[a] * difference[b]
    band[0] += 1e-9 * max(float(band[0].max()), 1.0)
    return np.asarray(solveh_banded(band, rhs, lower=True, check_finite=False))


@njit(cache=True, nogil=True)
def _normal_equations(
    station: FloatArray,
    east: FloatArray,
    north: FloatArray,
    weight: FloatArray,
    lo: float,
    h: float,
    size: int,
) -> tuple[FloatArray, FloatArray]:
    band = np.zeros((4, size))
    rhs = np.zeros((size, 2))
    basis = np.empty(4)
    for k in range(station.size):
        t = (station[k] - lo) / h
        i = min(max(int(np.floor(t)), 0), size - 4)
        f = t - i
        g = 1.0 - f
        basis[0] = g * g * g / 6.0
        basis[1] = (4.0 - 6.0 * f * f + 3.0 * f * f * f) / 6.0
        basis[2] = (4.0 - 6.0 * g * g + 3.0 * g * g * g) / 6.0
        basis[3] = f * f * f / 6.0
        for a in range(4):
            wa = weight[k] * basis[a]
            rhs[i + a, 0] += wa * east[k]
            rhs[i + a, 1] += wa * north[k]
            for b in range(a, 4):
                band[b - a, i + a] += wa * basis[b]
    return band, rhs


def _derivative(coefficients: FloatArray, h: float, order: int) -> FloatArray:
    """Return the coefficients of a derivative of a uniform B-spline, whose degree is lower by `order`."""
    for _ in range(order):
        coefficients = (coefficients[1:] - coefficients[:-1]) / h
    return coefficients


@njit(cache=True, nogil=True)
def _spline_at(coefficients: FloatArray, station: FloatArray, lo: float, h: float, degree: int) -> FloatArray:
    out = np.empty(station.size)
    for k in range(station.size):
        t = (station[k] - lo) / h
        i = min(max(int(np.floor(t)), 0), coefficients.size - degree - 1)
        f = t - i
        g = 1.0 - f
        if degree == 3:
            out[k] = (
                g * g * g * coefficients[i]
                + (4.0 - 6.0 * f * f + 3.0 * f * f * f) * coefficients[i + 1]
                + (4.0 - 6.0 * g * g + 3.0 * g * g * g) * coefficients[i + 2]
                + f * f * f * coefficients[i + 3]
            ) / 6.0
        elif degree == 2:
            out[k] = 0.5 * (
                g * g * coefficients[i]
                + (1.0 + 2.0 * f * g) * coefficients[i + 1]
                + f * f * coefficients[i + 2]
            )
        else:
            out[k] = g * coefficients[i] + f * coefficients[i + 1]
    return out
