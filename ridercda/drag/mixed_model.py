"""Linear mixed model with few variance components: restricted likelihood and Satterthwaite degrees of freedom.

References
----------
H. D. Patterson and R. Thompson, "Recovery of inter-block information when block sizes are unequal", Biometrika 58
(1971) 545-554, doi:10.1093/biomet/58.3.545; F. E. Satterthwaite, "An approximate distribution of estimates of
variance components", Biometrics Bulletin 2 (1946) 110-114, doi:10.2307/3002019 (both cited from memory).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from ridercda.errors import NotConverged

FloatArray = npt.NDArray[np.float64]

ROUNDS = 200
SETTLED = 1e-11  # of the logarithm of a variance
MOST_DEGREES = 1e4


@dataclass(frozen=True, slots=True, eq=False)
class Component:
    """One unknown variance: what it multiplies, and what is known of it beforehand.

    `prior` is the median and the logarithmic standard deviation of its square root; None: nothing is known.
    """

    structure: FloatArray  # (n, n)
    prior: tuple[float, float] | None = None


@dataclass(frozen=True, slots=True, eq=False)
class MixedFit:
    """A settled mixed model."""

    coefficients: FloatArray  # (k,)
    covariance: FloatArray  # (k, k), at the variances found
    variances: FloatArray  # (components,)
    variance_covariance: FloatArray  # (components, components)
    slopes: FloatArray  # (components, k, k): derivative of `covariance` by each variance
    weights: FloatArray  # (k, n): coefficients = weights @ y

    def degrees_of_freedom(self, contrast: FloatArray) -> float:
        """Return Satterthwaite's degrees of freedom of a contrast of the coefficients, at most 10 000."""
        variance = float(contrast @ self.covariance @ contrast)
        slope = np.array([contrast @ s @ contrast for s in self.slopes])
        spread = float(slope @ self.variance_covariance @ slope)
        if spread <= 2.0 * variance**2 / MOST_DEGREES:
            return MOST_DEGREES
        return 2.0 * variance**2 / spread


def fit_mixed(
    y: FloatArray, design: FloatArray, fixed: FloatArray, components: Sequence[Component]
) -> MixedFit:
    """Fit y = design @ b + noise with covariance fixed + sum of variance_i * structure_i.

    Parameters
    ----------
    y : ndarray, shape (n,)
        Finite.
    design : ndarray, shape (n, k)
        Of full column rank.
    fixed : ndarray, shape (n, n)
        What is known of the covariance; may be zero.
    components : sequence of Component
        At least one.

    Raises
    ------
    NotConverged
        If the covariance is singular.

    Notes
    -----
    Fisher scoring on the logarithms of the variances, which keeps them positive; one that wants to vanish ends
    many decades below the rest. With a prior the mode is penalised by it and its curvature adds to the
    information, so two repeats do not pass for certainty.
    """
    base = max(float(np.var(y - design @ np.linalg.lstsq(design, y, rcond=None)[0])), 1e-300)
    start = [
        np.log(c.prior[0] ** 2)
        if c.prior
        else np.log(base / len(components) / max(np.trace(c.structure) / y.size, 1e-12))
        for c in components
    ]
    log_variance = np.array(start)
    floor = np.log(base) - 40.0
    score_size = np.inf
    for _ in range(ROUNDS):
        pieces = _pieces(y, design, fixed, components, np.exp(log_variance))
        score, information = _score(pieces, components, log_variance)
        move = np.clip(np.linalg.solve(information + 1e-12 * np.eye(score.size), score), -1.0, 1.0)
        log_variance = np.maximum(log_variance + move, floor)
        settled = (np.abs(move) < SETTLED) | (log_variance <= floor)
        score_size = float(np.abs(move).max())
        if settled.all():
            break
    if not np.isfinite(score_size):
        raise NotConverged("the spread between repeats did not settle")
    variances = np.exp(log_variance)
    pieces = _pieces(y, design, fixed, components, variances)
    _, information = _score(pieces, components, log_variance)
    scale: FloatArray = np.outer(variances, variances)
    by_log: FloatArray = np.asarray(np.linalg.pinv(information), dtype=np.float64)
    slopes = np.stack([pieces.weights @ c.structure @ pieces.weights.T for c in components])
    return MixedFit(pieces.coefficients, pieces.covariance, variances, by_log * scale, slopes, pieces.weights)


@dataclass(frozen=True, slots=True, eq=False)
class _Pieces:
    coefficients: FloatArray
    covariance: FloatArray
    weights: FloatArray
    projected: tuple[FloatArray, ...]  # variance_i * P @ structure_i
    residual: FloatArray  # P @ y
    y: FloatArray


def _pieces(
    y: FloatArray,
    design: FloatArray,
    fixed: FloatArray,
    components: Sequence[Component],
    variances: FloatArray,
) -> _Pieces:
    total = fixed + sum(v * c.structure for v, c in zip(variances, components, strict=True))
    try:
        inverse = np.linalg.inv(total)
        normal = np.linalg.inv(design.T @ inverse @ design)
    except np.linalg.LinAlgError as error:
        raise NotConverged("the runs' covariance is singular") from error
    weights = normal @ design.T @ inverse
    projection = inverse - inverse @ design @ weights
    return _Pieces(
        weights @ y,
        np.asarray(normal),
        weights,
        tuple(v * projection @ c.structure for v, c in zip(variances, components, strict=True)),
        projection @ y,
        y,
    )


def _score(
    pieces: _Pieces, components: Sequence[Component], log_variance: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Return score and expected information of the logarithms of the variances, priors included."""
    count = len(components)
    score = np.empty(count)
    information = np.empty((count, count))
    for i, c in enumerate(components):
        squared = float(np.exp(log_variance[i]) * pieces.residual @ c.structure @ pieces.residual)
        score[i] = -0.5 * (np.trace(pieces.projected[i]) - squared)
        for k in range(count):
            information[i, k] = 0.5 * float(np.sum(pieces.projected[i] * pieces.projected[k].T))
        if c.prior is not None:
            middle, spread = 2.0 * np.log(c.prior[0]), 2.0 * c.prior[1]
            score[i] -= (log_variance[i] - middle) / spread**2
            information[i, i] += 1.0 / spread**2
    return score, information
