"""Critical power and W': the two-parameter hyperbola and the balance through a ride."""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]


class CriticalPower(NamedTuple):
    """The line of work against time to exhaustion."""

    critical_power: float  # [W]
    w_prime: float  # [J]


def time_to_exhaustion(
    power: npt.ArrayLike, critical_power: npt.ArrayLike, w_prime: npt.ArrayLike
) -> FloatArray:
    """Return how long a constant power can be held; infinite at or below critical power. [s]

    Parameters
    ----------
    power : array_like, shape (...)
        Constant power. [W]
    critical_power : array_like, shape (...)
        Critical power. [W]
    w_prime : array_like, shape (...)
        Work that can be done above it. [J]

    Notes
    -----
    t = W'/(P - CP); fair from about 2 to 30 min (P. F. Skiba, D. C. Clarke, "The W' balance model:
    mathematical and methodological considerations," Int. J. Sports Physiol. Perform. 16, 1561, 2021,
    doi:10.1123/ijspp.2021-0205). NaN where any input is NaN.
    """
    above = np.asarray(power, float) - np.asarray(critical_power, float)
    with np.errstate(divide="ignore", invalid="ignore"):
        held = np.asarray(w_prime, float) / above
    return np.asarray(np.where(above <= 0.0, np.inf, held))


def power_for_duration(
    duration: npt.ArrayLike, critical_power: npt.ArrayLike, w_prime: npt.ArrayLike
) -> FloatArray:
    """Return the constant power that can be held for a time: CP + W'/t. [W]

    Parameters
    ----------
    duration : array_like, shape (...)
        Time, positive. [s]
    critical_power : array_like, shape (...)
        Critical power. [W]
    w_prime : array_like, shape (...)
        Work that can be done above it. [J]

    Raises
    ------
    ValueError
        If a duration is not positive.
    """
    t = np.asarray(duration, float)
    if np.any(t <= 0.0):
        raise ValueError(f"a duration must be positive (s), not {np.nanmin(t):g}")
    return np.asarray(np.asarray(critical_power, float) + np.asarray(w_prime, float) / t)


def w_balance(
    power: npt.ArrayLike,
    duration: npt.ArrayLike,
    critical_power: float,
    w_prime: float,
    start: float | None = None,
) -> FloatArray:
    r"""Return what is left of W' at the end of each piece of constant power.

    Parameters
    ----------
    power : array_like, shape (n,)
        Power of each piece. [W]
    duration : array_like, shape (n,) or ()
        Length of each piece, 0 or more. [s]
    critical_power : float
        Critical power. [W]
    w_prime : float
        W' of the rested rider, positive. [J]
    start : float, optional
        What is left at the beginning; by default all of it. [J]

    Returns
    -------
    ndarray, shape (n,)
        Balance at the end of each piece; negative where the rider did more than the model allows. [J]

    Raises
    ------
    ValueError
        If W' is not positive, or a power or duration is not finite, or a duration is negative.

    Notes
    -----
    Differential form: above critical power :math:`dW/dt = -(P - CP)`, below it
    :math:`dW/dt = (1 - W/W')(CP - P)`, each piece solved exactly, so that a piece cut in two gives the same
    end.

    References
    ----------
    P. F. Skiba, D. C. Clarke, 2021, doi:10.1123/ijspp.2021-0205 (equation from memory).
    """
    watts, seconds = np.broadcast_arrays(np.asarray(power, float), np.asarray(duration, float))
    if not (math.isfinite(w_prime) and w_prime > 0.0):
        raise ValueError(f"W' must be positive (J), not {w_prime:g}")
    if watts.ndim != 1:
        raise ValueError(f"power must be one row of pieces, not of shape {watts.shape}")
    if not (np.all(np.isfinite(watts)) and np.all(np.isfinite(seconds)) and np.all(seconds >= 0.0)):
        raise ValueError("power and duration must be finite and no duration negative")
    spent = 0.0 if start is None else w_prime - start
    surplus = (watts - critical_power) * seconds
    kept = np.where(surplus < 0.0, np.exp(np.minimum(surplus, 0.0) / w_prime), 1.0)
    added = np.maximum(surplus, 0.0)
    balance = np.empty(watts.shape)
    for i, (share, joules) in enumerate(zip(kept.tolist(), added.tolist(), strict=True)):
        spent = spent * share + joules
        balance[i] = w_prime - spent
    return balance


def fit_critical_power(duration: npt.ArrayLike, power: npt.ArrayLike) -> CriticalPower:
    """Return critical power and W' from best efforts, by the straight line of work against time.

    Parameters
    ----------
    duration : array_like, shape (n,)
        Times to exhaustion, positive, two or more of them different. [s]
    power : array_like, shape (n,)
        Constant power held for each. [W]

    Raises
    ------
    ValueError
        If there are fewer than two different durations, or a value is not finite or not positive.

    Notes
    -----
    Ordinary least squares on W = W' + CP·t, the form of H. Monod, J. Scherrer, "The work capacity of a
    synergic muscular group," Ergonomics 8, 329-338, 1965 (citation from memory).
    """
    t, p = np.asarray(duration, float), np.asarray(power, float)
    if t.ndim != 1 or t.shape != p.shape:
        raise ValueError(f"each effort needs a duration and a power: shapes {t.shape} and {p.shape}")
    if not (np.all(np.isfinite(t)) and np.all(np.isfinite(p)) and np.all(t > 0.0) and np.all(p > 0.0)):
        raise ValueError("durations and powers must be finite and positive")
    if np.unique(t).size < 2:
        raise ValueError("two efforts of different length are needed")
    centred = t - t.mean()
    work = p * t
    slope = float(centred @ work / (centred @ centred))
    return CriticalPower(slope, float(work.mean() - slope * t.mean()))
