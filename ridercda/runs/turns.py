"""U-turns found from the path: it comes back the way it went."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
from numba import njit

FloatArray = npt.NDArray[np.float64]

GRID = 4.0  # [m] spacing of the path on which turns are sought
REACH = (12.0, 120.0)  # [m] nearest and farthest pair of points compared across a turn
LIKENESS = 0.05  # mean square gap between the two ways over that of a straight road


def u_turns(travelled: FloatArray, east: FloatArray, north: FloatArray) -> FloatArray:
    """Return the distances ridden at which the path turns back on itself.

    Parameters
    ----------
    travelled : ndarray, shape (n,)
        Distance ridden, never falling. [m]
    east, north : ndarray, shape (n,)
        NaN without a fix. [m]

    Returns
    -------
    ndarray, shape (k,)
        Middle of each U-turn, increasing. [m]

    Notes
    -----
    Points at equal distances before and after a U-turn lie side by side; on a straight road they are twice
    that distance apart. The ratio of the mean squares is 0 in a perfect turn and 1 on a straight; lanes 20 m
    apart give about 0.02.
    """
    good = np.isfinite(east) & np.isfinite(north)
    if good.sum() < 10:
        return np.empty(0)
    s, first = np.unique(travelled[good], return_index=True)
    x, y = east[good][first], north[good][first]
    if s[-1] - s[0] < 4 * REACH[0]:
        return np.empty(0)
    grid = np.arange(s[0], s[-1], GRID)
    gx, gy = np.interp(grid, s, x), np.interp(grid, s, y)
    ratio = _likeness(gx, gy, int(REACH[0] / GRID), int(REACH[1] / GRID))
    turns: list[float] = []
    for at in np.flatnonzero(ratio < LIKENESS):
        near = slice(max(at - int(REACH[1] / GRID), 0), at + int(REACH[1] / GRID) + 1)
        if ratio[at] == ratio[near].min() and (not turns or grid[at] - turns[-1] > REACH[1]):
            turns.append(grid[at] + GRID * _vertex(*ratio[at - 1 : at + 2]))
    return np.array(turns)


def _vertex(before: float, at: float, after: float) -> float:
    """Return where the parabola through three equally spaced values is least, -0.5 to 0.5 spacings."""
    bend = before - 2 * at + after
    if not np.isfinite(bend) or bend <= 0:
        return 0.0
    return float(np.clip(0.5 * (before - after) / bend, -0.5, 0.5))


@njit(cache=True, nogil=True)
def _likeness(x: FloatArray, y: FloatArray, near: int, far: int) -> FloatArray:
    """Return the mean square gap across each point over that of a straight road; inf too near the ends."""
    n = x.size
    ratio = np.full(n, np.inf)
    for k in range(n):
        reach = min(far, k, n - 1 - k)
        if reach < near + 4:
            continue
        gap2 = 0.0
        straight2 = 0.0
        for lag in range(near, reach + 1):
            gap2 += (x[k + lag] - x[k - lag]) ** 2 + (y[k + lag] - y[k - lag]) ** 2
            straight2 += (2 * lag * GRID) ** 2
            if lag == near + 8 and gap2 > 0.5 * straight2:
                break
        ratio[k] = gap2 / straight2
    return ratio


def turns_by_speed(travelled: FloatArray, speed: FloatArray, leg: float | None) -> FloatArray:
    """Return the distances ridden at which a rider slowed down to turn, for a ride without positions.

    Parameters
    ----------
    travelled, speed : ndarray, shape (n,)
        [m, m/s]
    leg : float, optional
        The road one way, if known. [m]

    Returns
    -------
    ndarray, shape (k,)
        Slowest point of each slow spell, increasing. [m]

    Notes
    -----
    A turn is slower than 60 % of the usual speed. With the leg known, a slow spell counts only where another lies
    one leg away: a stop for a drink does not. Of two spells nearer to each other than 60 % of a leg the one that
    lies a leg behind the turn before counts, else the one ridden through rather than the stop, else the
    slower. Common practice.
    """
    moving = speed[speed > 1.0]
    if moving.size == 0:
        return np.empty(0)
    slow = speed < 0.6 * float(np.median(moving))
    edges = np.flatnonzero(np.diff(np.concatenate(([False], slow, [False])).astype(np.int8)))
    spells: list[tuple[float, float]] = []
    for first, last in zip(edges[::2], edges[1::2], strict=True):
        if first == 0 or last == speed.size:
            continue  # setting off and rolling out are no turns
        k = first + int(np.argmin(speed[first:last]))
        # A speed belongs to the middle of the interval before its record.
        spells.append((0.5 * float(travelled[k] + travelled[k - 1]), float(speed[k])))
    if leg is not None and len(spells) > 2:
        spells = _one_leg_apart(spells, leg)
    apart = 0.6 * leg if leg is not None else 150.0
    found: list[tuple[float, float]] = []
    for here in spells:
        if not found or here[0] - found[-1][0] >= apart:
            found.append(here)
        elif leg is not None and len(found) > 1:
            before = found[-2][0] + leg
            found[-1] = min(found[-1], here, key=lambda spell: abs(spell[0] - before))
        elif _is_rather_a_turn(here[1], found[-1][1]):
            found[-1] = here
    return np.array([at for at, _ in found])


def _one_leg_apart(spells: list[tuple[float, float]], leg: float) -> list[tuple[float, float]]:
    at = np.array([place for place, _ in spells])
    gap = np.abs(at[:, None] - at[None, :])
    neighbours = (np.abs(gap - leg) < 0.06 * leg).sum(axis=1)
    return [spell for spell, count in zip(spells, neighbours, strict=True) if count]


def _is_rather_a_turn(speed: float, other: float) -> bool:
    stands, other_stands = speed < 0.5, other < 0.5
    return other_stands if stands != other_stands else speed < other


def turn_zones(
    turns: FloatArray, travelled: FloatArray, speed: FloatArray, power: FloatArray | None
) -> npt.NDArray[np.bool_]:
    """Return the records spoilt by U-turns: braking before, the turn itself, straightening up after.

    Parameters
    ----------
    turns : ndarray, shape (k,)
        From `u_turns`, or known otherwise. [m]
    travelled, speed : ndarray, shape (n,)
        [m, m/s]
    power : ndarray, shape (n,), optional
        NaN where unknown. [W]

    Returns
    -------
    ndarray of bool, shape (n,)

    Notes
    -----
    From 15 m before to 15 m after the middle of the turn, and further back, up to 100 m, while the rider is
    slower than 85 % of the usual speed or coasts: before a U-turn coasting and braking look alike. Further
    on, up to 60 m, while slower than half the usual speed. Common practice.
    """
    spoilt = np.zeros(travelled.size, bool)
    if turns.size == 0 or travelled.size == 0:
        return spoilt
    usual = float(np.nanmedian(speed))
    slow = speed < 0.85 * usual
    if power is not None and np.isfinite(power).any():
        slow |= power < 0.25 * float(np.nanmedian(power))
    crawling = speed < 0.5 * usual
    for turn in turns:
        spoilt |= np.abs(travelled - turn) <= 15.0
        k = int(np.searchsorted(travelled, turn - 15.0)) - 1
        while k >= 0 and slow[k] and travelled[k] > turn - 100.0:
            spoilt[k] = True
            k -= 1
        k = int(np.searchsorted(travelled, turn + 15.0, side="right"))
        while k < travelled.size and crawling[k] and travelled[k] < turn + 60.0:
            spoilt[k] = True
            k += 1
    return spoilt
