"""Differences between setups: intervals one by one and all at once, what they allow one to say, what limits them."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from types import MappingProxyType

import numpy as np
import numpy.typing as npt
from scipy.special import stdtr, stdtrit

from ridercda.drag import innovations as at
from ridercda.drag.estimate import Difference, Figure, NextStep
from ridercda.drag.likelihood import Fit
from ridercda.drag.repeats import Pooled, contrast_variance, run_figures
from ridercda.drag.verdict import verdict

FloatArray = npt.NDArray[np.float64]

FEWEST_DEGREES = 1.0
JOINT_DRAWS = 20_000
POWER_OF_TEST = 0.8
ANALYSIS_SEED = 20260509  # of the draws for the joint intervals: the same day gives the same figures


def student_figure(value: float, variance: float, degrees: float, confidence: float) -> Figure:
    """Return a value with its Student interval."""
    degrees = max(degrees, FEWEST_DEGREES)
    error = float(np.sqrt(max(variance, 0.0)))
    half = error * float(stdtrit(degrees, 0.5 + 0.5 * confidence))
    return Figure(value, error, (value - half, value + half), degrees)


def all_differences(
    fit: Fit, pooled: Pooled, worthwhile: float | None, known_apart: bool
) -> tuple[Difference, ...]:
    """Return every unordered pair of setups once, the baseline always as `against`.

    Parameters
    ----------
    fit : Fit
    pooled : Pooled
    worthwhile : float or None
        Smallest worthwhile difference. [m^2]
    known_apart : bool
        Whether CdA and Crr are told apart; without that only setups on the same tyres can be compared.
    """
    day = fit.model.day
    pairs = _pairs(pooled.setups, day.baseline)
    if not pairs:
        return ()
    lines = [pooled.contrast(a, b) for a, b in pairs]
    degrees = [pooled.degrees_of_freedom(line) for line in lines]
    critical = _joint_critical(lines, pooled.covariance, min(degrees), day.confidence)
    shares = _Shares(fit, pooled)
    tyres = {run.setup: run.tyres for run in day.runs}
    found = []
    for (setup, against), line, freedom in zip(pairs, lines, degrees, strict=True):
        name, other = day.setups[setup], day.setups[against]
        if not known_apart and tyres[setup] != tyres[against]:
            reason = "on different tyres, and the speeds do not tell drag area and rolling resistance apart"
            found.append(Difference(name, other, None, None, None, None, reason=reason))
            continue
        value = float(line @ pooled.mixed.coefficients)
        variance = float(line @ pooled.covariance @ line)
        figure = student_figure(value, variance, freedom, day.confidence)
        # All pairs at once can never be narrower than one by one.
        single = float(stdtrit(figure.degrees_of_freedom, 0.5 + 0.5 * day.confidence))
        half = figure.standard_error * max(critical, single)
        joint = (value - half, value + half)
        detectable = figure.standard_error * (
            single + float(stdtrit(figure.degrees_of_freedom, POWER_OF_TEST))
        )
        found.append(
            Difference(
                setup=name,
                against=other,
                cda=figure,
                verdict=verdict(joint, worthwhile),
                chance_lower=float(
                    stdtr(figure.degrees_of_freedom, -value / max(figure.standard_error, 1e-12))
                ),
                detectable=detectable,
                variance_shares=shares.of(line, variance),
                joint_interval=joint,
            )
        )
    return tuple(found)


def next_steps(fit: Fit, pooled: Pooled, differences: Sequence[Difference]) -> tuple[NextStep, ...]:
    """Return what two more repeats of both setups would do for each difference, the open ones first."""
    day = fit.model.day
    count = {s: sum(run.setup == s for run in day.runs) for s in pooled.setups}
    seconds = {
        s: float(np.median([r.end - r.start for r in day.runs if r.setup == s])) for s in pooled.setups
    }
    steps = []
    for difference in differences:
        if difference.cda is None:
            continue
        a, b = day.setups.index(difference.setup), day.setups.index(difference.against)
        now = 1.0 / count[a] + 1.0 / count[b]
        then = 1.0 / (count[a] + 2) + 1.0 / (count[b] + 2)
        error = difference.cda.standard_error * float(np.sqrt(then / now))
        degrees = difference.cda.degrees_of_freedom + 4.0
        half = error * float(stdtrit(degrees, 0.5 + 0.5 * day.confidence))
        minutes = 2.0 * (seconds[a] + seconds[b]) / 60.0
        before = 0.5 * (difference.cda.interval[1] - difference.cda.interval[0])
        text = (
            f"Two more repeats each (about {minutes:.0f} min of riding) would bring the interval "
            f"from ± {before:.4f} to about ± {half:.4f} m²."
        )
        steps.append(NextStep(difference.setup, difference.against, text, half))
    return tuple(steps)


def _pairs(setups: Sequence[int], baseline: int | None) -> list[tuple[int, int]]:
    """Return (setup, against) for every pair, the baseline always second."""
    first = [(s, baseline) for s in setups if s != baseline and baseline in setups]
    rest = [(b, a) for i, a in enumerate(setups) for b in setups[i + 1 :] if baseline not in (a, b)]
    return [(s, a) for s, a in first if a is not None] + rest


def _joint_critical(
    lines: Sequence[FloatArray], covariance: FloatArray, degrees: float, confidence: float
) -> float:
    """Return the multiple of the standard errors that holds for all contrasts at once.

    The quantile of the largest of the correlated Student variables, by draws (the single-step method of Tukey's
    kind for any covariance: F. Bretz, A. Genz and L. A. Hothorn, "On the numerical availability of multiple
    comparison procedures", Biometrical Journal 43 (2001) 645-656, cited from memory).
    """
    degrees = max(degrees, FEWEST_DEGREES)
    if len(lines) == 1:
        return float(stdtrit(degrees, 0.5 + 0.5 * confidence))
    matrix = np.stack(lines)
    spread = matrix @ covariance @ matrix.T
    size = np.sqrt(np.diag(spread))
    value, vector = np.linalg.eigh(spread / np.outer(size, size))
    root = vector * np.sqrt(np.maximum(value, 0.0))
    rng = np.random.default_rng(ANALYSIS_SEED)
    draws = rng.standard_normal((JOINT_DRAWS, value.size)) @ root.T
    draws /= np.sqrt(rng.chisquare(degrees, JOINT_DRAWS) / degrees)[:, None]
    return float(np.quantile(np.abs(draws).max(axis=1), confidence))


class _Shares:
    """What each difference's variance is due to, by letting one source at a time grow or vanish."""

    def __init__(self, fit: Fit, pooled: Pooled) -> None:
        self._pooled = pooled
        layout = fit.model.layout
        self._base = pooled.figures.covariance
        self._grown: dict[str, FloatArray] = {}
        for name, which in (
            ("gusts", at.GUST_SD),
            ("power", at.POWER_NOISE),
            ("speed", at.SPEED_NOISE),
            ("air speed", at.AIR_SPEED_NOISE),
        ):
            if which in fit.grown:
                self._grown[name] = run_figures(fit, fit.grown[which]).covariance
        self._known: dict[str, FloatArray] = {}
        for name, rows in (("rolling", layout.crr), ("profile", layout.slopes)):
            held = _given(fit.covariance, layout.free, rows)
            if held is not None:
                self._known[name] = held
        self._fit = fit

    def of(self, line: FloatArray, variance: float) -> Mapping[str, float]:
        """Return the shares of one contrast; they sum to 1."""
        pooled = self._pooled
        runs = pooled.figures.runs
        weights = (line @ pooled.mixed.weights)[:runs]
        parts = {"repeats": pooled.mixed.variances[0] * float(weights @ weights)}
        parts["drift"] = contrast_variance(pooled, pooled.drift, line)
        doubt = float(line @ pooled.noise_doubt @ line)
        within = max(variance - doubt - sum(parts.values()), 0.0)
        base = contrast_variance(pooled, self._base, line)
        pieces: dict[str, float] = {}
        for name, grown in self._grown.items():
            # A variance of noise raised by 2 h raises its own part by the same share.
            step = max(contrast_variance(pooled, grown, line) / base - 1.0, 0.0)
            pieces[name] = step / (2.0 * self._fit.grown_by)
        plain = np.zeros(self._fit.covariance.shape[0])
        plain[:runs] = weights
        whole = float(plain @ self._fit.covariance @ plain)
        for name, held in self._known.items():
            rest = float(plain @ held @ plain)
            pieces[name] = max(1.0 - rest / whole, 0.0) if whole > 0 else 0.0
        total = sum(pieces.values())
        if total > 0:
            parts.update({name: within * piece / total for name, piece in pieces.items()})
        else:
            parts["other"] = within
        parts["gusts"] = (
            parts.get("gusts", 0.0) + doubt
        )  # the doubt about the noise is mostly about the gusts
        everything = sum(parts.values())
        ordered = sorted(parts.items(), key=lambda item: -item[1])
        return MappingProxyType({n: v / everything for n, v in ordered if v > 0.005 * everything})


def _given(covariance: FloatArray, free: npt.NDArray[np.bool_], rows: slice) -> FloatArray | None:
    """Return the covariance if the unknowns in `rows` were known."""
    held = np.arange(covariance.shape[0])[rows]
    held = held[free[held]]
    if not held.size:
        return None
    block = covariance[np.ix_(held, held)]
    return covariance - covariance[:, held] @ np.linalg.solve(block, covariance[held])
