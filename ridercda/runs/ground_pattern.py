"""What the ground leaves in a ride's signals, and where it repeats: laps without positions."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from numba import njit

from ridercda.runs.traced import TracedRun

FloatArray = npt.NDArray[np.float64]
IntArray = npt.NDArray[np.int64]

GRAVITY = 9.81  # [m/s^2]
# A rider of middling drag: only the swing of the result from place to place is used, never its level.
TYPICAL_CDA = 0.30  # [m^2]
TYPICAL_CRR = 0.005
TYPICAL_DENSITY = 1.2  # [kg/m^3]


@dataclass(frozen=True, slots=True, eq=False)
class Pattern:
    """Signals of one run on an even grid of distance.

    Parameters
    ----------
    step : float
        Spacing of the grid. [m]
    signals : ndarray, shape (3, m)
        Slope that explains the power, slope of the recorded altitude, speed: each without trend and of unit
        spread; zero where the ride does not have it.
    """

    step: float
    signals: FloatArray

    @property
    def length(self) -> float:
        """Range of the grid. [m]"""
        return self.step * float(self.signals.shape[1])


def pieces_of(pattern: Pattern, length: float) -> list[Pattern]:
    """Return a pattern in pieces of some length, the last one shorter. [m]"""
    size = max(int(length / pattern.step), 1)
    count = pattern.signals.shape[1]
    return [Pattern(pattern.step, pattern.signals[:, k : k + size].copy()) for k in range(0, count, size)]


def pattern_of(run: TracedRun, mass: float, step: float) -> Pattern:
    """Return the signals of a run on a grid of distance ridden.

    Parameters
    ----------
    run : TracedRun
        With a distance.
    mass : float
        Rider and bike, roughly. [kg]
    step : float
        [m]

    Notes
    -----
    The first signal is the slope of the virtual elevation (R. A. Chung, Estimating CdA with a power meter,
    2012) at typical drag and rolling resistance.
    """
    s, first = np.unique(run.travelled, return_index=True)
    m = max(int((s[-1] - s[0]) / step), 0)
    grid = s[0] + step * np.arange(m + 1)
    signals = np.zeros((3, m))
    if m < 4:
        return Pattern(step, signals)
    dt = np.diff(run.time, prepend=run.time[:1])
    # A recorded speed is the mean before the record; at the record it is between the means on its two sides.
    at_record = 0.5 * (run.speed + np.append(run.speed[1:], run.speed[-1]))
    if np.isfinite(run.power).mean() > 0.5:
        power = np.nan_to_num(run.power)
        drag = 0.5 * TYPICAL_DENSITY * TYPICAL_CDA * run.speed**3
        rise = (power - drag) * dt / (mass * GRAVITY)
        elevation = np.cumsum(rise) - at_record**2 / (2 * GRAVITY)
        signals[0] = np.diff(np.interp(grid, s, elevation[first])) / step
    if np.isfinite(run.altitude).mean() > 0.5:
        good = np.isfinite(run.altitude)
        filled = np.interp(run.time, run.time[good], run.altitude[good])
        signals[1] = np.diff(np.interp(grid, s, filled[first])) / step
    speed = np.interp(grid, s, at_record[first])
    signals[2] = 0.5 * (speed[1:] + speed[:-1])
    return Pattern(step, np.array([_standard(signal) for signal in signals]))


def _standard(signal: FloatArray) -> FloatArray:
    """Return a signal smoothed over five steps, without trend, wild values held, of unit spread."""
    kernel = np.ones(5) / 5
    padded = np.pad(signal, 2, mode="edge")
    smooth = np.convolve(padded, kernel, mode="valid")
    x = np.linspace(-1, 1, smooth.size)
    smooth = smooth - smooth.mean() - x * (smooth @ x) / (x @ x)
    scale = 1.4826 * float(np.median(np.abs(smooth)))
    if scale <= 1e-12:
        return np.zeros(signal.size)
    held = np.clip(smooth, -4 * scale, 4 * scale)
    held -= held.mean()
    return np.asarray(held / max(float(held.std()), 1e-12))


def likeness(patterns: Sequence[Pattern], laps: FloatArray) -> FloatArray:
    """Return how well signals repeat at each trial lap length, as a log likelihood without its constant.

    Parameters
    ----------
    patterns : sequence of Pattern
        Of one circumference error.
    laps : ndarray, shape (k,)
        In distance as recorded. [m]

    Notes
    -----
    Phase dispersion (R. F. Stellingwerf, Period determination using phase dispersion minimization, Astrophys.
    J. 224, 953-960, 1978, doi:10.1086/156444): a signal folded at the true period varies least within its
    bins. Bins filled once explain themselves and say nothing.
    """
    score = np.zeros(laps.size)
    for pattern in patterns:
        _add_likeness(pattern.signals, pattern.step, laps, score)
    return score


@njit(cache=True, nogil=True)
def _add_likeness(signals: FloatArray, step: float, laps: FloatArray, score: FloatArray) -> None:
    n = signals.shape[1]
    for i in range(laps.size):
        bins = max(int(laps[i] / step), 2)
        if n <= 1.2 * bins:
            continue
        bin_of = np.empty(n, np.int64)
        count = np.zeros(bins)
        for k in range(n):
            bin_of[k] = min(int((k * step / laps[i]) % 1.0 * bins), bins - 1)
            count[bin_of[k]] += 1.0
        for row in range(signals.shape[0]):
            total = np.zeros(bins)
            repeated = 0.0
            for k in range(n):
                total[bin_of[k]] += signals[row, k]
                if count[bin_of[k]] > 1.0:
                    repeated += signals[row, k] ** 2
            if repeated <= 0.0:
                continue
            between = 0.0
            for b in range(bins):
                if count[b] > 1.0:
                    between += total[b] ** 2 / count[b]
            # Five steps were smoothed into one another.
            score[i] -= 0.5 * n / 5 * np.log(max((repeated - between) / repeated, 1e-6))


def first_repeat(patterns: Sequence[Pattern], shortest: float) -> float | None:
    """Return the shortest distance after which signals repeat; None when they do not.

    Parameters
    ----------
    patterns : sequence of Pattern
        Of one step.
    shortest : float
        [m]

    Notes
    -----
    The first peak of the autocorrelation that reaches 80 % of the highest one.
    """
    longest = max((p.signals.shape[1] for p in patterns), default=0)
    if longest < 8:
        return None
    step = patterns[0].step
    best: tuple[float, float] | None = None
    for row in range(3):
        product, overlap = np.zeros(longest), np.zeros(longest)
        for pattern in patterns:
            signal = pattern.signals[row]
            n = signal.size
            size = 1 << (2 * n - 1).bit_length()
            spectrum = np.fft.rfft(signal, size)
            product[:n] += np.fft.irfft(spectrum * spectrum.conj(), size)[:n]
            overlap[:n] += np.arange(n, 0, -1) * float(np.any(signal))
        low = max(int(shortest / step), 2)
        high = int(0.7 * longest)
        if high <= low + 2 or not overlap.any():
            continue
        correlation = product[low:high] / np.maximum(overlap[low:high], 1.0)
        top = float(correlation.max())
        if top < 0.3:
            continue
        peaks = np.flatnonzero(
            (correlation[1:-1] >= correlation[:-2])
            & (correlation[1:-1] > correlation[2:])
            & (correlation[1:-1] >= 0.8 * top)
        )
        if peaks.size and (best is None or top > best[0]):
            best = (top, float(low + 1 + peaks[0]) * step)
    return best[1] if best is not None else None


def folded(pattern: Pattern, phase: FloatArray, bins: int) -> FloatArray:
    """Return the mean of each signal in bins of the lap.

    Parameters
    ----------
    pattern : Pattern
    phase : ndarray, shape (m,)
        Of the grid's intervals, 0 to 1 round the lap.
    bins : int

    Returns
    -------
    ndarray, shape (3, bins)
        0 in bins that were not ridden.
    """
    where = np.minimum((phase % 1.0 * bins).astype(np.int64), bins - 1)
    count = np.maximum(np.bincount(where, minlength=bins), 1)
    return np.array([np.bincount(where, weights=s, minlength=bins) / count for s in pattern.signals])


@dataclass(frozen=True, slots=True)
class Match:
    """How one folded pattern lies on another."""

    shift: float  # share of a lap to add to its phase, 0 to 1
    direction: float  # -1: the ground was ridden the other way
    correlation: float


def match(reference: FloatArray, pattern: FloatArray, weights: FloatArray) -> Match:
    """Return the shift and sense at which a folded pattern agrees best with a reference.

    Parameters
    ----------
    reference, pattern : ndarray, shape (3, bins)
        From `folded`, the pattern by distance ridden.
    weights : ndarray, shape (3,)
        Trust in each signal.

    Notes
    -----
    Only slopes tell which way the ground was ridden: speed the other way round is another signal. The other
    way must agree better by 0.1, because most days go one way.
    """
    bins = reference.shape[1]
    forward = correlation_by_shift(reference, pattern, weights)
    ahead = int(np.argmax(forward))
    slopes = weights * np.array([1.0, 1.0, 0.0])
    backward = correlation_by_shift(reference, -pattern[:, ::-1], slopes)
    behind = int(np.argmax(backward))
    if backward[behind] > float(correlation_by_shift(reference, pattern, slopes).max()) + 0.1:
        return Match(peak(backward, behind) / bins % 1.0, -1.0, float(backward[behind]))
    return Match(peak(forward, ahead) / bins % 1.0, 1.0, float(forward[ahead]))


def peak(circle: FloatArray, at: int) -> float:
    """Return where the parabola through a highest value and its neighbours on a circle is highest. [index]"""
    before, here, after = circle[at - 1], circle[at], circle[(at + 1) % circle.size]
    bend = before - 2 * here + after
    return at + float(np.clip(0.5 * (before - after) / bend, -0.5, 0.5)) if bend < 0 else float(at)


def correlation_by_shift(reference: FloatArray, pattern: FloatArray, weights: FloatArray) -> FloatArray:
    """Return the correlation at each shift of a whole number of bins, shape (bins,); see `match`."""
    bins = reference.shape[1]
    product = np.zeros(bins)
    norm_r = norm_p = 0.0
    for r, p, w in zip(reference, pattern, weights, strict=True):
        if not (r.any() and p.any()):
            continue
        product += w * np.fft.irfft(np.fft.rfft(r) * np.fft.rfft(p).conj(), bins)
        norm_r += w * float(r @ r)
        norm_p += w * float(p @ p)
    return np.asarray(product / max(np.sqrt(norm_r * norm_p), 1e-12))
