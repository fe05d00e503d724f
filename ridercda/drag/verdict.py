"""One ladder of words for certainty, used by the drag, trade and report layers alike.

The ladder has one rule: a direction is only claimed when the interval that allows for all the comparisons made
leaves zero out. With two setups that is the plain 95 % interval; with more, the joint one, so that among equal
setups a false claim is made on one day in twenty at most. Below that nothing is called faster or lower: the
chance is given as a number, so two pages can never disagree about the same pair.
"""

from __future__ import annotations

from enum import StrEnum


class Verdict(StrEnum):
    """What an interval for a difference of drag area allows one to say."""

    LOWER = "lower"
    HIGHER = "higher"
    EQUIVALENT = "equivalent"
    NOT_SEPARATED = "not separated"


def verdict(interval: tuple[float, float], smallest_worthwhile: float | None = None) -> Verdict:
    """Return what the interval of a difference allows one to say.

    Parameters
    ----------
    interval : tuple of float
        Lower and upper end, in the unit of the difference.
    smallest_worthwhile : float, optional
        Positive; differences within it are of no use to the rider. Same unit.

    Raises
    ------
    ValueError
        If the ends are reversed or not finite, or the smallest worthwhile difference is not positive.

    Notes
    -----
    An interval within the smallest worthwhile difference is *equivalent* even when it leaves zero out,
    because a known direction that is worth nothing is of no use.
    """
    low, high = interval
    if not low <= high:  # also catches NaN
        raise ValueError(f"an interval runs from low to high, not {low} to {high}")
    if smallest_worthwhile is not None:
        if not smallest_worthwhile > 0:
            raise ValueError(f"the smallest worthwhile difference is positive, not {smallest_worthwhile}")
        if -smallest_worthwhile < low and high < smallest_worthwhile:
            return Verdict.EQUIVALENT
    if high < 0:
        return Verdict.LOWER
    if low > 0:
        return Verdict.HIGHER
    return Verdict.NOT_SEPARATED
