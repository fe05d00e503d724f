from __future__ import annotations

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from ridercda.app.widgets.scale import Scale, decimals_of, padded, step_for, tick_step, ticks, time_step

SPANS = st.floats(1e-6, 1e6)
STARTS = st.floats(-1e5, 1e5)


@given(low=STARTS, span=SPANS, count=st.integers(1, 12))
@settings(max_examples=150)
def test_ticks_are_round_within_the_range_and_not_too_many(low: float, span: float, count: int) -> None:
    high = low + span
    if not high - low > abs(low) * 1e-9:
        return
    places = ticks(low, high, count)
    assert 2 <= len(places) <= max(count + 2, 6)
    step = tick_step(low, high, count)
    mantissa = step / 10.0 ** math.floor(math.log10(step) + 1e-9)
    assert min(abs(mantissa - each) for each in (1, 2, 5, 10)) < 1e-6
    assert all(low - 1e-6 * span <= place <= high + 1e-6 * span for place in places)


def test_labels_have_the_decimals_their_step_needs() -> None:
    assert [decimals_of(step) for step in (100.0, 5.0, 0.5, 0.02, 0.005)] == [0, 0, 1, 2, 3]
    assert step_for(0.03, 5) == pytest.approx(0.01)


def test_a_scale_maps_there_and_back() -> None:
    scale = Scale(-0.02, 0.01, 100.0, 400.0)
    assert scale(-0.02) == 100.0
    assert scale(0.01) == pytest.approx(400.0)
    assert scale.back(scale(0.004)) == pytest.approx(0.004)


def test_an_empty_range_is_padded_open() -> None:
    low, high = padded(0.25, 0.25)
    assert low < 0.25 < high
    low, high = padded(0.0, 0.0)
    assert low < 0.0 < high


def test_clock_ticks_are_steps_people_read() -> None:
    assert time_step(7200.0, 12) == 600.0
    assert time_step(50.0, 5) == 10.0
    assert time_step(10 * 86400.0, 2) == 86400.0
