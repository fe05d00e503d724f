from __future__ import annotations

import numpy as np

from ridercda.runs.lap_groups import Lap, groups_of_laps, lap_time_groups


def _laps(levels: list[float], length: float = 200.0) -> list[Lap]:
    return [Lap(k * length, (k + 1) * length, level) for k, level in enumerate(levels)]


def _shape(groups: list[list[Lap]]) -> list[list[float]]:
    return [[lap.level for lap in group] for group in groups]


def test_laps_of_one_effort_are_a_run() -> None:
    groups = groups_of_laps(_laps([200, 205, 196, 300, 310, 296]), set(), [])
    assert _shape(groups) == [[200, 205, 196], [300, 310, 296]]


def test_easy_laps_between_efforts_are_left_out() -> None:
    groups = groups_of_laps(_laps([200, 205, 196, 110, 210, 200, 202]), set(), [])
    assert _shape(groups) == [[200, 205, 196], [210, 200, 202]]


def test_presses_at_every_lap_are_one_run() -> None:
    laps = _laps([200, 230, 180, 210])
    groups = groups_of_laps(laps, {0.0, 200.0, 400.0, 600.0, 800.0}, [])
    assert _shape(groups) == [[200, 230, 180, 210]]


def test_a_missing_press_is_bridged_and_told() -> None:
    notes: list[str] = []
    groups = groups_of_laps(_laps([200, 205, 196, 204, 201]), {0.0, 200.0, 600.0, 800.0, 1000.0}, notes)
    assert _shape(groups) == [[200, 205, 196, 204, 201]]
    assert "missing between 0:03:20 and 0:10:00" in notes[0]


def test_a_last_lap_that_only_a_stop_ends_is_counted_and_told() -> None:
    notes: list[str] = []
    groups = groups_of_laps(_laps([200, 205, 196]), {0.0, 200.0, 400.0}, notes)
    assert _shape(groups) == [[200, 205, 196]]
    assert "No press of the lap button ends the lap at 0:10:00" in notes[0]


def test_an_easy_last_lap_is_not() -> None:
    groups = groups_of_laps(_laps([200, 205, 120]), {0.0, 200.0, 400.0}, [])
    assert _shape(groups) == [[200, 205]]


def test_laps_without_presses_between_runs_are_no_run() -> None:
    pressed = {0.0, 200.0, 400.0, 1000.0, 1200.0, 1400.0}
    groups = groups_of_laps(_laps([200, 205, 110, 90, 150, 300, 310]), pressed, [])
    assert _shape(groups) == [[200, 205], [300, 310]]


def test_presses_every_few_laps_begin_another_run() -> None:
    pressed = {0.0, 800.0, 1600.0, 2400.0}
    groups = groups_of_laps(_laps([200.0] * 12), pressed, [])
    assert [len(group) for group in groups] == [4, 4, 4]


def test_presses_at_start_and_end_of_runs_leave_the_recovery_out() -> None:
    pressed = {0.0, 800.0, 1400.0, 2200.0}
    groups = groups_of_laps(_laps([200.0] * 4 + [100, 150, 280] + [300.0] * 4), pressed, [])
    assert _shape(groups) == [[200.0] * 4, [300.0] * 4]


def test_lap_times_alone_make_runs() -> None:
    edges = [0.0, *np.cumsum([18.0] * 6 + [90.0] + [16.0] * 5).tolist()]
    time = np.arange(0.0, edges[-1] + 1)
    power = np.where(time <= 108, 220.0, np.where(time <= 198, 100.0, 300.0))
    groups = lap_time_groups(edges, 250.0, time, power)
    assert [len(group) for group in groups] == [6, 5]
    assert groups[1][0].start == 198.0
