"""What the estimator is shown, and what is left out with its reason."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from ridercda.drag.prepare import braking, prepare_day
from ridercda.errors import SessionError
from ridercda.session.document import Rider, VenueKind
from ridercda.synthetic.day import SyntheticDay, simulate_day
from ridercda.synthetic.spec import REFERENCE_DAY


@pytest.fixture(scope="module")
def day() -> SyntheticDay:
    return simulate_day(replace(REFERENCE_DAY, order="ABC", laps=1), 11)


def test_an_excluded_run_is_left_out_with_its_reason(day: SyntheticDay) -> None:
    runs = (replace(day.session.runs[0], excluded="sat up"), *day.session.runs[1:])
    prepared = prepare_day(replace(day.session, runs=runs), day.rides)
    assert [run.id for run in prepared.runs] == [run.id for run in runs[1:]]
    assert prepared.left_out[0].reason == "sat up"


def test_a_missing_ride_leaves_its_runs_out(day: SyntheticDay) -> None:
    prepared = prepare_day(day.session, {})
    assert not prepared.runs
    assert {out.reason for out in prepared.left_out} == {"its ride file is missing"}


def test_a_day_without_mass_is_refused(day: SyntheticDay) -> None:
    with pytest.raises(SessionError, match=r"rider\.mass: is needed to solve"):
        prepare_day(replace(day.session, rider=Rider()), day.rides)


def test_the_truth_is_seen(day: SyntheticDay) -> None:
    prepared = prepare_day(day.session, day.rides)
    assert prepared.venue is VenueKind.LOOP
    assert prepared.venue_length == pytest.approx(day.truth.lap_length, rel=2e-3)
    for run, true in zip(prepared.runs, day.truth.runs, strict=True):
        assert run.mass == pytest.approx(true.mass)
        assert run.records.density.mean() == pytest.approx(true.density, rel=1e-6)
        assert run.records.usable.mean() > 0.9


def test_braking_is_low_power_that_slows() -> None:
    power = np.full(40, 300.0)
    speed = np.full(40, 12.0)
    power[20:23] = 20.0
    speed[20:26] = [11.4, 10.8, 10.5, 10.6, 10.8, 11.0]
    marked = braking(power, speed, np.ones(40))
    assert marked[19:24].all()
    assert not marked[:18].any()
    assert not marked[26:].any()


def test_easing_off_without_slowing_is_kept() -> None:
    power = np.full(40, 300.0)
    power[20:23] = 100.0  # a tailwind gust, the speed holds
    assert not braking(power, np.full(40, 12.0), np.ones(40)).any()
