"""The ladder of words."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from ridercda.drag.verdict import Verdict, verdict

ends = st.floats(-0.1, 0.1, allow_nan=False)


def test_the_rungs() -> None:
    assert verdict((-0.018, -0.008)) is Verdict.LOWER
    assert verdict((0.001, 0.002)) is Verdict.HIGHER
    assert verdict((-0.001, 0.004)) is Verdict.NOT_SEPARATED
    assert verdict((-0.001, 0.0015), 0.002) is Verdict.EQUIVALENT


def test_a_direction_worth_nothing_is_equivalent() -> None:
    assert verdict((-0.0015, -0.0001), 0.002) is Verdict.EQUIVALENT


@given(ends, ends)
def test_swapping_the_setups_swaps_the_word(one: float, other: float) -> None:
    low, high = min(one, other), max(one, other)
    mirror = {Verdict.LOWER: Verdict.HIGHER, Verdict.HIGHER: Verdict.LOWER}
    said = verdict((low, high))
    assert verdict((-high, -low)) is mirror.get(said, said)


@pytest.mark.parametrize("interval", [(0.2, 0.1), (float("nan"), 0.1), (0.0, float("nan"))])
def test_a_reversed_interval_is_refused(interval: tuple[float, float]) -> None:
    with pytest.raises(ValueError, match="from low to high"):
        verdict(interval)


def test_a_worthwhile_difference_is_positive() -> None:
    with pytest.raises(ValueError, match="positive, not 0"):
        verdict((0.0, 0.1), 0.0)
