"""From days to the rows of the calibration table."""

from __future__ import annotations

import math
from collections import Counter
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from oracle import Answer, OracleEstimate
from solved_day import SolvedDay

from ridercda.synthetic.truth import Truth

FloatArray = npt.NDArray[np.float64]


# Said of every day without a weather report: no sign that something is wrong.
EXPECTED = frozenset({"wind-unknown"})


@dataclass(frozen=True, slots=True)
class Shot:
    """One figure of one day: how far off, how wide, whether it held the truth; and the oracle's."""

    seed: int
    figure: str
    error: float  # estimate less truth; absolutes with the meter's known scale taken out
    standard_error: float
    width: float
    held: bool
    oracle_error: float
    oracle_width: float  # of the interval with an estimated spread between runs
    oracle_known_width: float
    oracle_held: bool


@dataclass(frozen=True, slots=True, eq=False)
class DayScore:
    """One day of a scenario."""

    scenario: str
    seed: int
    differences: tuple[Shot, ...]
    absolutes: tuple[Shot, ...]
    rolling: tuple[Shot, ...]
    asked: int  # differences there were to answer
    false_lower: int  # pairs called lower that are not
    warnings: tuple[str, ...]
    refusal: str
    prepare_seconds: float
    solve_seconds: float


def score(scenario: str, seed: int, truth: Truth, solved: SolvedDay, oracle: OracleEstimate) -> DayScore:
    """Return one day's score."""
    meter = (1 + truth.power_scale) * 0.977 / truth.efficiency
    differences = []
    for pair, told in solved.differences.items():
        true = truth.cda[pair[0]] - truth.cda[pair[1]]
        known, reml = oracle.known_differences[pair], oracle.reml_differences[pair]
        differences.append(_shot(seed, " - ".join(pair), told, true, 1.0, known, reml))
    absolutes = [
        _shot(seed, setup, told, truth.cda[setup], meter, oracle.known[setup], oracle.reml[setup])
        for setup, told in solved.absolutes.items()
    ]
    nothing = Answer(math.nan, math.nan, math.nan, math.nan)
    rolling = [
        _shot(seed, tyres, told, truth.crr[tyres], meter, nothing, nothing)
        for tyres, told in solved.crr.items()
    ]
    wrong = sum(1 for setup, against in solved.lower if not truth.cda[setup] < truth.cda[against])
    return DayScore(
        scenario,
        seed,
        tuple(differences),
        tuple(absolutes),
        tuple(rolling),
        len(oracle.known_differences),
        wrong,
        solved.warnings,
        solved.refusal,
        solved.prepare_seconds,
        solved.solve_seconds,
    )


def _shot(
    seed: int, figure: str, told: Answer, true: float, meter: float, known: Answer, reml: Answer
) -> Shot:
    return Shot(
        seed,
        figure,
        told.value / meter - true,
        told.standard_error,
        told.high - told.low,
        told.low <= true <= told.high,
        known.value / meter - true,
        reml.high - reml.low,
        known.high - known.low,
        reml.low <= true <= reml.high,
    )


@dataclass(frozen=True, slots=True)
class Tally:
    """A kind of figure over all days of a scenario. SI."""

    count: int
    bias: float
    bias_error: float  # standard error of the bias, days independent
    bias_in_errors: float  # bias over the mean stated standard error
    rms: float
    oracle_rms: float
    coverage: float
    coverage_band: tuple[float, float]  # 95 %, days independent
    oracle_coverage: float
    width_ratio: float  # mean width over the oracle's
    known_width_ratio: float  # over that of an oracle that knows every variance

    @property
    def rms_ratio(self) -> float:
        """RMS error over the oracle's."""
        return self.rms / self.oracle_rms


@dataclass(frozen=True, slots=True)
class Row:
    """One scenario of the table."""

    scenario: str
    days: int
    answered: float  # share of differences answered
    absolutes_answered: float  # share of days with every absolute
    warned: float  # share of days with any warning but those that every such day gets
    differences: Tally | None
    absolutes: Tally | None
    rolling: Tally | None
    false_lower: float  # share of days with a pair called lower that is not
    warnings: dict[str, float]  # share of days by code
    refusals: dict[str, float]
    prepare_seconds: float  # median
    solve_seconds: float


def tally(days: list[DayScore]) -> Row:
    """Return the row of one scenario's days."""
    n = len(days)
    return Row(
        scenario=days[0].scenario,
        days=n,
        answered=sum(len(d.differences) for d in days) / sum(d.asked for d in days),
        absolutes_answered=sum(1 for d in days if d.absolutes) / n,
        warned=sum(1 for d in days if set(d.warnings) - EXPECTED) / n,
        differences=_tally([s for d in days for s in d.differences]),
        absolutes=_tally([s for d in days for s in d.absolutes]),
        rolling=_tally([s for d in days for s in d.rolling]),
        false_lower=sum(1 for d in days if d.false_lower) / n,
        warnings={k: c / n for k, c in Counter(w for d in days for w in d.warnings).most_common()},
        refusals={k: c / n for k, c in Counter(d.refusal for d in days if d.refusal).most_common()},
        prepare_seconds=float(np.median([d.prepare_seconds for d in days])),
        solve_seconds=float(np.median([d.solve_seconds for d in days])),
    )


def _tally(shots: list[Shot]) -> Tally | None:
    if not shots:
        return None
    seeds = np.array([s.seed for s in shots])
    error = np.array([s.error for s in shots])
    held = np.array([s.held for s in shots], float)
    width = np.array([s.width for s in shots])
    coverage = float(held.mean())
    return Tally(
        count=len(shots),
        bias=float(error.mean()),
        bias_error=_clustered_error(error, seeds),
        bias_in_errors=float(error.mean() / np.mean([s.standard_error for s in shots])),
        rms=float(np.sqrt(np.mean(error**2))),
        oracle_rms=float(np.sqrt(np.mean([s.oracle_error**2 for s in shots]))),
        coverage=coverage,
        coverage_band=_band(held, seeds),
        oracle_coverage=float(np.mean([s.oracle_held for s in shots])),
        width_ratio=float(width.mean() / np.mean([s.oracle_width for s in shots])),
        known_width_ratio=float(width.mean() / np.mean([s.oracle_known_width for s in shots])),
    )


def _clustered_error(values: FloatArray, seeds: npt.NDArray[np.int64]) -> float:
    days = np.unique(seeds)
    sums = np.array([(values[seeds == d] - values.mean()).sum() for d in days])
    return float(np.sqrt((sums**2).sum()) / len(values))


def _band(held: FloatArray, seeds: npt.NDArray[np.int64]) -> tuple[float, float]:
    """Wilson's interval, with as many trials as the figures of a day are worth: they share its weather."""
    share = float(held.mean())
    trials = float(len(np.unique(seeds)))
    if 0 < share < 1:
        spread = _clustered_error(held, seeds)
        if spread > 0:
            trials = share * (1 - share) / spread**2
    z = 1.959964
    middle = (share + z * z / (2 * trials)) / (1 + z * z / trials)
    half = z * math.sqrt(share * (1 - share) / trials + z * z / (4 * trials**2)) / (1 + z * z / trials)
    return middle - half, middle + half
