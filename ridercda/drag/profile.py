"""The venue's profile as slopes at evenly spaced nodes, shared by all laps and both directions."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from ridercda.drag import priors
from ridercda.drag.day import Day, RunRecords

FloatArray = npt.NDArray[np.float64]
IntArray = npt.NDArray[np.int64]

CLOSURE_SD = 0.003  # [m] what a lap may gain or lose in height: nothing, but for the sums' own error


@dataclass(frozen=True, slots=True)
class VenueNodes:
    """Evenly spaced knots along the venue; the slope is a uniform cubic B-spline over them, periodic on a lap."""

    gaps: int
    spacing: float  # [m]
    closed: bool
    flat: bool = False

    @property
    def count(self) -> int:
        """Number of slope coefficients."""
        if self.flat:
            return 1
        return self.gaps if self.closed else self.gaps + 3

    def place(self, position: FloatArray) -> tuple[IntArray, FloatArray]:
        """Return the four coefficients that act at each position and their weights, both shape (n, 4)."""
        if self.flat:
            return np.zeros((position.size, 4), dtype=np.int64), np.zeros((position.size, 4))
        scaled = position / self.spacing
        if self.closed:
            first = np.floor(scaled).astype(np.int64)
        else:
            scaled = np.clip(scaled, 0.0, float(self.gaps))
            first = np.minimum(np.floor(scaled).astype(np.int64), self.gaps - 1)
        t = scaled - first
        basis = [(1 - t) ** 3, 3 * t**3 - 6 * t**2 + 4, 3 * (t**2 + t - t**3) + 1, t**3]
        share: FloatArray = np.stack(basis, axis=1, dtype=np.float64) * (1.0 / 6.0)
        acts = first[:, None] + np.arange(4)
        if self.closed:
            acts = (acts - 1) % self.count
        return acts, share

    @property
    def knots(self) -> FloatArray:
        """Positions of the knots, the end of an open venue included. [m]"""
        return self.spacing * np.arange(self.gaps if self.closed else self.gaps + 1, dtype=np.float64)

    def slope(self, coefficients: FloatArray, position: FloatArray) -> FloatArray:
        """Return the slope at positions along the venue."""
        acts, share = self.place(position)
        return np.asarray((share * coefficients[acts]).sum(axis=1))

    @property
    def rise(self) -> FloatArray:
        """Matrix (knots, count): height at each knot above the first, by Simpson's rule between knots. [m]"""
        knots = self.knots
        middle = self._design(knots[:-1] + 0.5 * self.spacing)
        ends = self._design(knots)
        steps = self.spacing / 6.0 * (ends[:-1] + 4.0 * middle + ends[1:])
        return np.concatenate([np.zeros((1, self.count)), np.cumsum(steps, axis=0)])

    def _design(self, position: FloatArray) -> FloatArray:
        """Return the weights of all coefficients at positions, shape (n, count)."""
        acts, share = self.place(position)
        matrix = np.zeros((position.size, self.count))
        np.add.at(matrix, (np.arange(position.size)[:, None], acts), share)
        return matrix


def venue_nodes(day: Day) -> VenueNodes:
    """Return the knots of a day's venue: about 40 m apart, farther on a long one."""
    if day.flat:
        return VenueNodes(1, day.venue_length, day.closed, flat=True)
    gaps = int(np.clip(round(day.venue_length / priors.NODE_SPACING), 6, priors.MOST_NODES))
    return VenueNodes(gaps, day.venue_length / gaps, day.closed)


def profile_evidence(day: Day, nodes: VenueNodes) -> tuple[FloatArray, FloatArray]:
    """Return precision and mean of the slope coefficients: smoothness, closure of a lap, and recorded altitude."""
    n = nodes.count
    step_sd = priors.SLOPE_STEP_SD * np.sqrt(nodes.spacing / priors.NODE_SPACING)
    difference = np.roll(np.eye(n), 1, axis=1) - np.eye(n)
    if not nodes.closed:
        difference = difference[:-1]
    bend_sd = priors.SLOPE_BEND_SD * (nodes.spacing / priors.NODE_SPACING) ** 1.5
    bend = np.roll(np.eye(n), 1, axis=1) + np.roll(np.eye(n), -1, axis=1) - 2.0 * np.eye(n)
    if not nodes.closed:
        bend = bend[1:-1]
    precision = np.eye(n) / (n * priors.SLOPE_SD**2) + difference.T @ difference / step_sd**2
    precision += bend.T @ bend / bend_sd**2
    if nodes.closed:
        total = np.full(n, nodes.spacing)
        precision = precision + np.outer(total, total) / CLOSURE_SD**2
    pull = np.zeros(n)
    measured = mean_altitude(day, nodes)
    seen = np.isfinite(measured)
    if seen.sum() >= 4:
        sd = priors.ALTITUDE_SD if day.altitude_sd is None else day.altitude_sd
        slow = priors.ALTITUDE_DRIFT if day.altitude_sd is None else 0.0
        along = nodes.knots
        apart = np.abs(along[:, None] - along[None, :])
        if nodes.closed:
            apart = np.minimum(apart, day.venue_length - apart)
        scale = max(day.venue_length / 4.0, nodes.spacing)
        covariance = sd**2 * np.eye(along.size) + slow**2 * np.exp(-apart / scale) + 1e4  # level unknown
        rise = nodes.rise[seen]
        weight = np.linalg.inv(covariance[np.ix_(seen, seen)])
        precision = precision + rise.T @ weight @ rise
        pull = rise.T @ weight @ measured[seen]
    return precision, np.linalg.solve(precision, pull)


def mean_altitude(day: Day, nodes: VenueNodes) -> FloatArray:
    """Return the recorded altitude averaged near each knot over all passes, each run less its mean; NaN unseen."""
    knots = nodes.knots.size
    total = np.zeros(knots)
    count = np.zeros(knots)
    for run in day.runs:
        records: RunRecords = run.records
        use = records.usable & np.isfinite(records.altitude)
        if use.sum() < 10:
            continue
        nearest = np.round(records.position[use] / nodes.spacing).astype(np.int64)
        nearest = nearest % knots if nodes.closed else np.clip(nearest, 0, knots - 1)
        height = records.altitude[use]
        total += np.bincount(nearest, height - height.mean(), minlength=knots)
        count += np.bincount(nearest, minlength=knots)
    return np.where(count > 0, total / np.maximum(count, 1), np.nan)
