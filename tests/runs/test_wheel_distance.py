from __future__ import annotations

import numpy as np
import numpy.typing as npt
import pytest
from numpy.testing import assert_allclose

from ridercda.rides.ride import Fault, FaultKind, Ride
from ridercda.runs.wheel_distance import DistanceSource, wheel_distance

FloatArray = npt.NDArray[np.float64]
TIME = np.arange(0.0, 101.0)
NOWHERE = np.full(TIME.size, np.nan)


def test_distance_is_taken_as_recorded() -> None:
    ride = Ride(TIME, {"distance": 50.0 + 9.0 * TIME, "speed": np.full(TIME.size, 8.0)})
    found = wheel_distance(ride, NOWHERE, NOWHERE)
    assert_allclose(found.distance, 9.0 * TIME, atol=1e-9)
    assert found.source is DistanceSource.WHEEL


def test_missing_distances_are_shared_out_like_speed() -> None:
    speed = np.where(TIME <= 50, 6.0, 12.0)
    true = np.cumsum(np.where(TIME == 0, 0.0, speed))
    recorded = true.copy()
    recorded[41:60] = np.nan
    ride = Ride(TIME, {"distance": recorded, "speed": 1.02 * speed})
    assert_allclose(wheel_distance(ride, NOWHERE, NOWHERE).distance, true, atol=1e-6)


def test_a_distance_that_starts_again_goes_on() -> None:
    recorded = np.where(TIME < 60, 10.0 * TIME, 10.0 * (TIME - 60))
    ride = Ride(TIME, {"distance": recorded, "speed": np.full(TIME.size, 10.0)})
    assert_allclose(wheel_distance(ride, NOWHERE, NOWHERE).distance, 10.0 * TIME, atol=1e-6)


def test_speed_is_summed_where_there_is_no_distance() -> None:
    ride = Ride(TIME, {"speed": np.full(TIME.size, 11.0)})
    found = wheel_distance(ride, NOWHERE, NOWHERE)
    assert_allclose(found.distance, 11.0 * TIME, atol=1e-9)
    assert found.source is DistanceSource.SPEED


@pytest.mark.parametrize("missing", [slice(0, 5), slice(40, 44), slice(95, 101)])
def test_speeds_that_are_missing_are_bridged(missing: slice) -> None:
    speed = np.full(TIME.size, 11.0)
    speed[missing] = np.nan
    found = wheel_distance(Ride(TIME, {"speed": speed}), NOWHERE, NOWHERE)
    assert_allclose(found.distance, 11.0 * TIME, atol=1e-9)
    assert found.doubt[missing].max() > 0


def test_a_wheel_that_fell_silent_is_carried_on_by_the_position() -> None:
    true = 10.0 * TIME
    steps = np.where((TIME > 30) & (TIME <= 60), 0.0, 10.0)
    steps[0] = 0.0
    ride = Ride(TIME, {"distance": np.cumsum(steps), "speed": steps})
    found = wheel_distance(ride, true, np.zeros(TIME.size))
    assert_allclose(found.distance[-1], true[-1], atol=10.0)
    assert found.doubt[45] > 0
    assert found.doubt[80] == 0


def test_position_alone_gives_a_distance() -> None:
    ride = Ride(TIME, {"power": np.full(TIME.size, 200.0)})
    found = wheel_distance(ride, 6.0 * TIME, 8.0 * TIME)
    assert_allclose(found.distance, 10.0 * TIME, atol=1e-6)
    assert found.source is DistanceSource.POSITION


def test_speed_made_from_position_is_told() -> None:
    fault = Fault(FaultKind.SPEED_FROM_GPS, 0.0, 100.0, "speed", "no wheel")
    ride = Ride(TIME, {"speed": np.full(TIME.size, 10.0)}, faults=(fault,))
    assert wheel_distance(ride, NOWHERE, NOWHERE).source is DistanceSource.POSITION


def test_a_ride_of_power_alone_has_no_distance() -> None:
    found = wheel_distance(Ride(TIME, {"power": np.full(TIME.size, 200.0)}), NOWHERE, NOWHERE)
    assert found.source is DistanceSource.NONE
    assert not found.distance.any()


def test_intervals_of_any_length() -> None:
    time = np.cumsum([0.0, 1.0, 0.5, 4.0, 1.0, 2.0, 7.0, 1.0])
    ride = Ride(time, {"speed": np.full(time.size, 10.0)})
    assert_allclose(wheel_distance(ride, np.full(8, np.nan), np.full(8, np.nan)).distance, 10 * time)
