from __future__ import annotations

from collections.abc import Callable
from itertools import pairwise

import numpy as np
import pytest

from ridercda.rides.ride import LapMark, LapTrigger, Ride
from ridercda.runs.marks import clock, sorted_marks

TIME = np.arange(0.0, 1801.0)
TRAVELLED = 10.0 * TIME + 30.0 * np.sin(TIME / 50.0)


def _ride(laps: tuple[LapMark, ...]) -> Ride:
    return Ride(TIME, {"speed": np.full(TIME.size, 10.0)}, laps=laps)


def test_presses_are_the_ends_of_laps(lap_marks: Callable) -> None:
    found = sorted_marks(_ride(lap_marks([300.0, 620.0, 900.0])), TRAVELLED, None)
    assert found.times == (300.0, 620.0, 900.0)
    assert not found.notes


@pytest.mark.parametrize("trigger", [LapTrigger.DISTANCE, LapTrigger.TIME])
def test_laps_the_head_unit_closed_are_passed_over(lap_marks: Callable, trigger: LapTrigger) -> None:
    found = sorted_marks(_ride(lap_marks([300.0, 600.0], trigger)), TRAVELLED, None)
    assert found.times == ()
    assert found.notes == (f"2 laps closed by {trigger.value} were passed over: the head unit made them.",)


def test_the_end_of_the_recording_is_no_mark() -> None:
    laps = (
        LapMark(0.0, 700.0, LapTrigger.MANUAL),
        LapMark(700.0, 1700.0, LapTrigger.SESSION_END),
    )
    assert sorted_marks(_ride(laps), TRAVELLED, None).times == (700.0,)


def test_presses_among_distance_laps_are_kept() -> None:
    laps = (
        LapMark(0.0, 100.0, LapTrigger.DISTANCE),
        LapMark(100.0, 140.0, LapTrigger.MANUAL),
        LapMark(140.0, 240.0, LapTrigger.DISTANCE),
    )
    assert sorted_marks(_ride(laps), TRAVELLED, None).times == (140.0,)


def test_the_start_of_a_lap_rounded_otherwise_than_the_end_before_is_no_second_press() -> None:
    starts = (0.0, 300.0, 650.0, 900.0, 1230.0)
    laps = tuple(LapMark(a, b - 0.8, LapTrigger.MANUAL) for a, b in pairwise(starts))
    found = sorted_marks(_ride(laps), TRAVELLED, None)
    assert found.times == (299.2, 649.2, 899.2, 1229.2)
    assert not found.notes


def test_a_double_press_counts_once(lap_marks: Callable) -> None:
    found = sorted_marks(_ride(lap_marks([300.0, 302.0, 600.0])), TRAVELLED, None)
    assert found.times == (300.0, 600.0)
    assert found.notes == ("The lap button was pressed twice at 0:05:00: the first press counts.",)


def _at(distances: np.ndarray) -> list[float]:
    return [float(np.ceil(t)) for t in np.interp(distances, TRAVELLED, TIME)]


@pytest.mark.parametrize("every", [1000.0, 1609.344, 2000.0])
def test_unnamed_laps_of_one_round_distance_are_the_head_units(lap_marks: Callable, every: float) -> None:
    marks = lap_marks(_at(every * np.arange(1, 9)), LapTrigger.UNKNOWN)
    found = sorted_marks(_ride(marks), TRAVELLED, None)
    assert found.times == ()
    assert "the head unit made them" in found.notes[0]


def test_equal_distances_that_are_laps_of_the_venue_are_presses(lap_marks: Callable) -> None:
    marks = lap_marks(_at(2000.0 * np.arange(1, 9)), LapTrigger.UNKNOWN)
    assert len(sorted_marks(_ride(marks), TRAVELLED, 2000.0).times) == 8
    assert len(sorted_marks(_ride(marks), TRAVELLED, 1000.0).times) == 8
    assert sorted_marks(_ride(marks), TRAVELLED, 2700.0).times == ()


def test_three_marks_alike_may_be_chance(lap_marks: Callable) -> None:
    marks = lap_marks(_at(1000.0 * np.arange(1, 4)))
    assert len(sorted_marks(_ride(marks), TRAVELLED, None).times) == 3


@pytest.mark.parametrize(("time", "text"), [(0.0, "0:00:00"), (3725.4, "1:02:05"), (59.7, "0:01:00")])
def test_times_are_written_as_in_session_files(time: float, text: str) -> None:
    assert clock(time) == text
