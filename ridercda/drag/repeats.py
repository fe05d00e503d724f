"""From runs to setups: repeats counted as repeats.

The fit gives every run its own CdA, with the covariance that gusts, noise, wind, profile and rolling leave. Here the
working prior on repeats is taken out again and the spread between repeats is estimated and counted, together with a
drift of CdA common to all setups. Three repeats then beat one long run, as they should.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from ridercda.drag import priors
from ridercda.drag.layout import repeats_precision
from ridercda.drag.likelihood import Fit
from ridercda.drag.mixed_model import MOST_DEGREES, Component, MixedFit, fit_mixed
from ridercda.session.document import RunKind

FloatArray = npt.NDArray[np.float64]

FLAT = 1e-3  # of the working prior's precision, left in so that a day without an answer stays finite


@dataclass(frozen=True, slots=True, eq=False)
class RunFigures:
    """What the fit says of the runs without any prior on repeats, and of what they share.

    Entries: CdA per run, then the shared unknowns (Crr of each tyre set that is not known exactly, power scale).
    """

    values: FloatArray  # (n,)
    covariance: FloatArray  # (n, n), given the noise parameters
    by_noise: FloatArray  # (n, noises): how the values move with the logarithms of the noise parameters
    runs: int
    tyres: tuple[int, ...]  # tyre sets in the shared part
    rows: tuple[int, ...]  # of the fit's parameter vector


@dataclass(frozen=True, slots=True, eq=False)
class Pooled:
    """Setups, Crr and power scale, with the spread between repeats found."""

    figures: RunFigures
    mixed: MixedFit
    design: (
        FloatArray  # (n, k): columns are setups present, coast-down offset if any, then the shared unknowns
    )
    covariance: FloatArray  # (k, k) of the coefficients, the doubt about the noise parameters included
    noise_doubt: FloatArray  # (k, k): that doubt's part of it
    setups: tuple[int, ...]  # setup of each of the first columns
    shared: slice  # columns of the shared unknowns
    drift: FloatArray  # (n, n): covariance of the common drift

    @property
    def between_run_sd(self) -> float:
        """Spread between repeats. [m^2]"""
        return float(np.sqrt(self.mixed.variances[0]))

    def column(self, setup: int) -> int:
        """Return the column of a setup."""
        return self.setups.index(setup)

    def degrees_of_freedom(self, line: FloatArray) -> float:
        """Return Satterthwaite's degrees of freedom of a contrast; the doubt about the noise adds to its variance."""
        within = float(line @ self.mixed.covariance @ line)
        whole = float(line @ self.covariance @ line)
        return min(self.mixed.degrees_of_freedom(line) * (whole / within) ** 2, MOST_DEGREES)

    def contrast(self, setup: int, against: int) -> FloatArray:
        """Return the contrast of two setups."""
        line = np.zeros(self.design.shape[1])
        line[self.column(setup)] = 1.0
        line[self.column(against)] = -1.0
        return line


def run_figures(fit: Fit, given_noise: FloatArray) -> RunFigures:
    """Return the runs' figures, the working prior on repeats taken out.

    Parameters
    ----------
    fit : Fit
    given_noise : ndarray, shape (p, p)
        Covariance of the fit's unknowns for known noise.
    """
    layout = fit.model.layout
    runs = layout.runs
    tyres = tuple(t for t in range(layout.crr.stop - layout.crr.start) if layout.free[layout.crr.start + t])
    rows = [*range(runs), *(layout.crr.start + t for t in tyres)]
    if layout.free[layout.power_scale]:
        rows.append(layout.power_scale)
    with_prior = _inverse(given_noise[np.ix_(rows, rows)])
    precision = with_prior.copy()
    pull = with_prior @ fit.parameters[rows]
    working = (1.0 - FLAT) * repeats_precision(fit.model.day)
    precision[:runs, :runs] -= working
    pull[:runs] -= working @ layout.mean[:runs]
    cleaned = _inverse(precision)
    by_noise = cleaned @ with_prior @ fit.by_noise[rows]
    return RunFigures(cleaned @ pull, cleaned, by_noise, runs, tyres, tuple(rows))


def pool(fit: Fit, figures: RunFigures) -> Pooled:
    """Return the setups' figures, the spread between repeats estimated with its prior."""
    day = fit.model.day
    n = figures.values.size
    runs = figures.runs
    setups = tuple(sorted({run.setup for run in day.runs}))
    coasting = np.array([run.kind is RunKind.COAST_DOWN for run in day.runs])
    size = max(float(np.median(figures.values[:runs])), 0.1)
    design = np.zeros((n, len(setups) + (n - runs)))
    for r, run in enumerate(day.runs):
        design[r, setups.index(run.setup)] = 1.0
    design[runs:, len(setups) :] = np.eye(n - runs)
    repeats = np.zeros((n, n))
    repeats[:runs, :runs] = np.eye(runs)
    hour = np.array([run.hour for run in day.runs])
    hour = hour - hour.mean()
    drift = np.zeros((n, n))
    drift[:runs, :runs] = (priors.CDA_DRIFT_SD * size) ** 2 * np.outer(hour, hour)
    offset = np.zeros((n, n))
    offset[:runs, :runs] = (priors.COAST_DOWN_OFFSET_SD * size) ** 2 * np.outer(coasting, coasting)
    if fit.model.day_has_air_speed:  # drag goes with the square of what the probe reads
        setup = np.array([run.setup for run in day.runs])
        same = setup[:, None] == setup[None, :]
        offset[:runs, :runs] += (2.0 * priors.AIR_SPEED_FACTOR_BY_SETUP_SD * size) ** 2 * same
    median, spread = priors.BETWEEN_RUN
    mixed = fit_mixed(
        figures.values,
        design,
        figures.covariance + drift + offset,
        [Component(repeats, (median * size, spread))],
    )
    moved = mixed.weights @ figures.by_noise
    doubt = moved @ fit.log_noise_covariance @ moved.T
    return Pooled(
        figures,
        mixed,
        design,
        mixed.covariance + doubt,
        doubt,
        setups,
        slice(len(setups), design.shape[1]),
        drift,
    )


def run_alone(fit: Fit, pooled: Pooled, run: int) -> tuple[float, float]:
    """Return one run's own CdA and standard error, given what all runs say of the shared unknowns."""
    f = pooled.figures
    shared = slice(f.runs, f.values.size)
    block = f.covariance[shared, shared]
    gain = np.linalg.solve(block, f.covariance[shared, run]) if block.size else np.zeros(0)
    found = pooled.mixed.coefficients[pooled.shared]
    value = f.values[run] + gain @ (found - f.values[shared])
    own = f.covariance[run, run] - gain @ f.covariance[shared, run]
    known = gain @ pooled.mixed.covariance[pooled.shared, pooled.shared] @ gain
    moved = f.by_noise[run] + gain @ ((pooled.mixed.weights @ f.by_noise)[pooled.shared] - f.by_noise[shared])
    doubt = moved @ fit.log_noise_covariance @ moved
    return float(value), float(np.sqrt(max(own + known + doubt, 0.0)))


def residuals(pooled: Pooled) -> tuple[float | None, ...]:
    """Return each run minus the mean of its repeats, in standard errors of that difference; None without repeats.

    Compared at the shared unknowns as found, so that a doubt all runs share moves none of them.
    """
    f = pooled.figures
    runs = slice(0, f.runs)
    shared = slice(f.runs, f.values.size)
    block = f.covariance[shared, shared]
    gain = np.linalg.solve(block, f.covariance[shared, runs]).T if block.size else np.zeros((f.runs, 0))
    value = f.values[runs] + gain @ (pooled.mixed.coefficients[pooled.shared] - f.values[shared])
    spread = f.covariance[runs, runs] - gain @ f.covariance[shared, runs]
    spread = spread + pooled.drift[runs, runs] + pooled.mixed.variances[0] * np.eye(f.runs)
    setup = pooled.design[runs, : len(pooled.setups)].argmax(axis=1)
    found: list[float | None] = []
    for r in range(f.runs):
        others = np.flatnonzero((setup == setup[r]) & (np.arange(f.runs) != r))
        if not others.size:
            found.append(None)
            continue
        line = np.zeros(f.runs)
        line[r] = 1.0
        line[others] = -1.0 / others.size
        found.append(float(line @ value / np.sqrt(max(line @ spread @ line, 1e-30))))
    return tuple(found)


def without_run(pooled: Pooled, run: int) -> FloatArray | None:
    """Return the coefficients with one run left out at the same spread; None if its setup then has none."""
    f = pooled.figures
    keep = np.arange(f.values.size) != run
    design = pooled.design[keep]
    if np.linalg.matrix_rank(design) < design.shape[1]:
        return None
    n = f.values.size
    structure = np.zeros((n, n))
    structure[: f.runs, : f.runs] = np.eye(f.runs)
    total = (f.covariance + pooled.drift + pooled.mixed.variances[0] * structure)[np.ix_(keep, keep)]
    inverse = _inverse(total)
    return np.asarray(np.linalg.solve(design.T @ inverse @ design, design.T @ inverse @ f.values[keep]))


def contrast_variance(pooled: Pooled, covariance: FloatArray, contrast: FloatArray) -> float:
    """Return the variance of a contrast if the runs' covariance were another, at the same weights."""
    weights = contrast @ pooled.mixed.weights
    return float(weights @ covariance @ weights)


def _inverse(matrix: FloatArray) -> FloatArray:
    size = np.sqrt(np.abs(np.diag(matrix)))
    outer = np.outer(size, size)
    value, vector = np.linalg.eigh(0.5 * (matrix + matrix.T) / outer)
    value = np.maximum(value, 1e-13 * value.max())  # the working prior taken out may leave nothing behind
    return np.asarray((vector / value) @ vector.T / outer)
