from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest
from numpy.testing import assert_allclose

from ridercda.rides.ride import FaultKind, Ride
from ridercda.runs.lap_speed import speed_from_laps, with_lap_speed
from ridercda.session.document import Run, Session, Setup, Venue, VenueKind
from ridercda.synthetic.day import SyntheticDay
from ridercda.synthetic.spec import TRACK_DAY, DaySpec

TIME = np.arange(0.0, 101.0)
TRACK = Venue(VenueKind.TRACK, lap_length=250.0)


def test_speed_is_constant_within_a_lap() -> None:
    found = speed_from_laps(TIME, [(10.0, 30.0, 55.0)], 250.0)
    assert_allclose(found.speed[11:31], 12.5)
    assert_allclose(found.speed[31:56], 10.0)
    assert np.isnan(found.speed[:11]).all()
    assert np.isnan(found.speed[56:]).all()
    assert found.laps == 2


def test_every_lap_keeps_its_distance() -> None:
    edges = (10.3, 28.7, 46.2, 66.9)
    found = speed_from_laps(TIME, [edges], 250.0)
    ridden = np.concatenate(([0.0], np.cumsum(np.nan_to_num(found.speed[1:]))))
    inner = np.interp(edges[1:3], TIME, ridden)
    assert_allclose(np.diff(inner), 250.0, atol=1.0)


def test_a_pause_is_no_lap() -> None:
    found = speed_from_laps(TIME, [(0.0, 2.0, 22.0)], 250.0)  # the first would be 125 m/s
    assert found.laps == 1
    assert np.isnan(found.speed[2])


@pytest.mark.parametrize("length", [0.0, -250.0])
def test_a_lap_has_a_length(length: float) -> None:
    with pytest.raises(ValueError, match="a lap length is positive"):
        speed_from_laps(TIME, [(0.0, 20.0)], length)


def _session(runs: tuple[Run, ...]) -> Session:
    return Session("x", TRACK, setups=(Setup("a"),), runs=runs)


def test_a_ride_of_power_gets_speed_and_a_fault_that_says_so() -> None:
    ride = Ride(TIME, {"power": np.full(TIME.size, 250.0)})
    made = with_lap_speed(ride, "r", _session((Run("1", "r", "a", 0.0, laps=(10.0, 30.0, 50.0)),)))
    assert_allclose(made.channels["speed"][11:51], 12.5)
    (fault,) = made.faults
    assert fault.kind is FaultKind.CHANNEL_MISSING
    assert "2 lap times on a lap of 250 m" in fault.cause
    assert fault.repair == "lap-times"
    assert "lap times" in made.notes["speed"]


def test_lap_marks_of_the_ride_serve_where_a_run_has_no_laps(lap_marks: Callable) -> None:
    ride = Ride(TIME, {"power": np.full(TIME.size, 250.0)}, laps=lap_marks([10.0, 30.0, 55.0, 80.0]))
    made = with_lap_speed(ride, "r", _session((Run("1", "r", "a", 9.5, 56.0),)))
    assert np.isfinite(made.channels["speed"][11:56]).all()
    assert np.isnan(made.channels["speed"][60:]).all()


@pytest.mark.parametrize("name", ["speed", "distance"])
def test_a_ride_with_a_sensor_is_left_as_it_is(name: str) -> None:
    ride = Ride(TIME, {name: 10.0 * TIME + 1.0})
    assert with_lap_speed(ride, "r", _session((Run("1", "r", "a", 0.0, laps=(10.0, 30.0)),))) is ride


def test_without_lap_times_or_length_nothing_is_made_up() -> None:
    ride = Ride(TIME, {"power": np.full(TIME.size, 250.0)})
    assert with_lap_speed(ride, "r", _session((Run("1", "r", "a", 0.0),))) is ride
    no_length = replace(_session((Run("1", "r", "a", 0.0, laps=(10.0, 30.0)),)), venue=Venue(VenueKind.LOOP))
    assert with_lap_speed(ride, "r", no_length) is ride


def test_mean_speed_of_an_invented_track_day(
    day: Callable[[DaySpec, int], SyntheticDay], altered: Callable
) -> None:
    made = day(TRACK_DAY, 1)
    ride = made.rides["day"]
    bare = altered(ride, speed=None, distance=None)
    speed = with_lap_speed(bare, "day", made.session).channels["speed"]
    for truth in made.truth.runs:
        inside = (ride.time > truth.lap_times[0] + 1) & (ride.time < truth.lap_times[-1])
        # The rider rides a little outside the line: the sensor's lap is a little longer.
        assert_allclose(speed[inside].mean(), ride.channels["speed"][inside].mean(), rtol=5e-3)
