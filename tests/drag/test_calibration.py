"""A small seeded part of the calibration study; `tests/benchmarks/calibration.py` is the whole.

The bounds are such that a solver which keeps its promises (95 % intervals, the oracle's error) misses one of them
by bad luck with about one set of seeds in a thousand; one whose intervals are a third as wide as they should
be, or whose error is half as large again, does not pass.
"""

from __future__ import annotations

import sys
from dataclasses import replace
from pathlib import Path

import pytest

sys.path.insert(0, str(Path(__file__).parents[1] / "benchmarks"))

from calibration import run_day
from scores import DayScore, Row, Shot, tally

DAYS = {"windy": 8, "calm": 4, "holds-speed": 4}


@pytest.fixture(scope="module")
def days() -> dict[str, list[DayScore]]:
    return {name: [run_day(name, 5000 + k) for k in range(count)] for name, count in DAYS.items()}


@pytest.fixture(scope="module")
def row(days: dict[str, list[DayScore]]) -> Row:
    return tally([day for each in days.values() for day in each])


def test_every_difference_is_answered(row: Row) -> None:
    assert row.answered == 1.0
    assert not row.refusals


def test_intervals_of_differences_hold_the_truth(row: Row) -> None:
    assert row.differences is not None
    assert row.differences.count == 3 * sum(DAYS.values())
    assert row.differences.coverage >= 0.80


def test_error_of_differences_is_near_the_oracles(row: Row) -> None:
    assert row.differences is not None
    assert row.differences.rms_ratio < 1.3
    assert row.differences.width_ratio < 1.3


def test_intervals_of_absolutes_hold_the_truth(row: Row) -> None:
    assert row.absolutes is not None
    assert row.absolutes.coverage >= 0.80


def test_stiller_air_means_smaller_errors(days: dict[str, list[DayScore]]) -> None:
    calm, windy = tally(days["calm"]).differences, tally(days["windy"]).differences
    assert calm is not None
    assert windy is not None
    assert calm.rms < windy.rms


def test_the_study_notices_intervals_that_are_too_narrow(days: dict[str, list[DayScore]]) -> None:
    def narrowed(shot: Shot) -> Shot:
        return replace(shot, held=abs(shot.error) <= shot.width / 6)

    every = [day for each in days.values() for day in each]
    narrow = [replace(d, differences=tuple(narrowed(s) for s in d.differences)) for d in every]
    found = tally(narrow).differences
    assert found is not None
    assert found.coverage < 0.80
