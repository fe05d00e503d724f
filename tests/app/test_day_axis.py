from __future__ import annotations

import datetime as dt

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from ridercda.app.strip.day_axis import FOLDED_TO, RideSpan, day_axis

EIGHT = dt.datetime(2026, 5, 9, 8, 0, tzinfo=dt.UTC)


def test_a_ride_lies_at_its_time_of_day() -> None:
    axis = day_axis([RideSpan("am", EIGHT, 3600.0, ((0.0, 3600.0),))])
    assert axis.dated
    assert axis.place("am", 0.0) == 0.0
    assert axis.place("am", 1800.0) == pytest.approx(1800.0)
    assert axis.day_at(0.0) == 8 * 3600.0
    assert axis.moment(axis.place("am", 1234.0), "am") == pytest.approx(1234.0)


def test_long_idle_time_folds_and_short_pauses_do_not() -> None:
    axis = day_axis([RideSpan("am", EIGHT, 9000.0, ((0.0, 3000.0), (3300.0, 4000.0), (8000.0, 9000.0)))])
    assert len(axis.folds) == 1
    start, end = axis.folds[0]
    assert start == pytest.approx(8 * 3600 + 4060)
    assert end == pytest.approx(8 * 3600 + 7940)
    assert axis.of_day(end) - axis.of_day(start) == pytest.approx(FOLDED_TO)
    assert axis.place("am", 3300.0) - axis.place("am", 3000.0) == pytest.approx(300.0)


def test_rides_without_a_time_of_day_follow_each_other() -> None:
    axis = day_axis([RideSpan("one", None, 600.0, ()), RideSpan("two", None, 600.0, ())])
    assert not axis.dated
    assert axis.place("two", 0.0) > axis.place("one", 600.0)


def test_an_empty_day_has_an_axis() -> None:
    assert day_axis([]).length > 0


@given(st.lists(st.tuples(st.floats(0, 30000), st.floats(1, 4000)), min_size=1, max_size=12))
@settings(max_examples=80)
def test_the_axis_never_runs_backwards(spans: list[tuple[float, float]]) -> None:
    duration = max(start + length for start, length in spans) + 100.0
    axis = day_axis([RideSpan("am", EIGHT, duration, tuple((a, a + n) for a, n in sorted(spans)))])
    places = axis.places("am", np.linspace(0.0, duration, 300))
    assert np.all(np.diff(places) >= 0.0)
    assert places[0] >= 0.0
    assert places[-1] <= axis.length + 1e-6
