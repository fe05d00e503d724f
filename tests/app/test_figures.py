from __future__ import annotations

import datetime as dt

import pytest

from ridercda.app.figures import bounds_text, clock, date_text, decimals_for, duration, plus_minus, value_text
from ridercda.app.quantities import UnitChoice, plain
from ridercda.drag.estimate import Figure
from ridercda.units import Kind, UnitSystem


def test_a_value_carries_only_the_digits_its_interval_allows() -> None:
    figure = Figure(-0.013142, 0.0019, (-0.0169, -0.0093))
    assert value_text(figure) == "−0.013"
    assert plus_minus(figure) == "±\u00a00.004"
    assert bounds_text(figure.interval) == ("−0.017", "−0.009")
    assert value_text(Figure(0.2601, 0.0015, (0.2567, 0.2635))) == "0.2601"


def test_no_interval_gives_no_decimals() -> None:
    assert decimals_for(0.0) == 0
    assert decimals_for(float("nan")) == 0


@pytest.mark.parametrize(
    ("seconds", "words"),
    [
        (45, "45\u00a0s"),
        (452, "8\u00a0min"),
        (7380, "2\u00a0h\u00a003\u00a0min"),
        (3600, "1\u00a0h\u00a000\u00a0min"),
    ],
)
def test_spans_read_at_once(seconds: float, words: str) -> None:
    assert duration(seconds) == words


def test_clock_and_date() -> None:
    assert clock(8 * 3600 + 5 * 60 + 20) == "8:05"
    assert clock(8 * 3600 + 5 * 60 + 40) == "8:06"
    assert clock(8 * 3600 + 5 * 60 + 40, with_seconds=True) == "8:05:40"
    assert clock(25 * 3600) == "1:00"
    assert date_text(dt.date(2026, 5, 9)) == "9 May 2026"


def test_thousands_stand_apart_and_zero_has_no_sign() -> None:
    assert plain(12345.6, 1) == "12\u2009345.6"
    assert plain(-0.00001, 3) == "0.000"
    assert plain(-0.5, 1, signed=True) == "−0.5"
    assert plain(0.5, 1, signed=True) == "+0.5"
    assert plain(float("nan"), 1) == "–"


def test_units_change_for_all_and_for_one(qapp: object) -> None:
    units = UnitChoice()
    assert units.text(10.0, Kind.SPEED) == "36.0\u00a0km/h"
    units.choose_system(UnitSystem.IMPERIAL)
    assert units.text(10.0, Kind.SPEED) == "22.4\u00a0mph"
    units.choose_for(Kind.SPEED, UnitSystem.METRIC)
    assert units.text(10.0, Kind.SPEED) == "36.0\u00a0km/h"
    assert units.symbol(Kind.MASS) == "lb"
    assert units.number(None, Kind.SPEED) == "–"
    assert units.scale(Kind.TEMPERATURE) == pytest.approx(1.8)
