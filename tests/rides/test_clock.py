from __future__ import annotations

from types import MappingProxyType

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.testing import assert_array_equal

from ridercda.errors import InputError
from ridercda.rides.repair import Choice, repair
from ridercda.rides.ride import FaultKind, Ride


def ride_at(times: list[float] | np.ndarray) -> Ride:
    time = np.asarray(times, float)
    return Ride(time=time, channels=MappingProxyType({"power": 200.0 + np.arange(time.size)}))


def clock_faults(ride: Ride) -> list[tuple[str, str | None]]:
    kinds = (FaultKind.CLOCK_BACKWARD, FaultKind.CLOCK_DUPLICATE)
    return [(fault.kind.value, fault.repair) for fault in ride.faults if fault.kind in kinds]


def test_a_sound_clock_is_left_alone() -> None:
    raw = ride_at(np.arange(100.0))
    assert clock_faults(repair(raw)) == []
    assert_array_equal(repair(raw).time, raw.time)


def test_records_in_the_wrong_order_are_sorted() -> None:
    ride = repair(ride_at([0, 1, 2, 4, 3, 5, 6]))
    assert clock_faults(ride) == [("clock-backward", "sort")]
    assert_array_equal(ride.time, np.arange(7.0))
    assert_array_equal(ride.channels["power"], [200, 201, 202, 204, 203, 205, 206])


@pytest.mark.parametrize("wild", [500.0, -40.0, 2.5])
def test_a_single_wild_time_is_dropped(wild: float) -> None:
    ride = repair(ride_at([0, 1, 2, 3, 4, wild, 6, 7, 8, 9]))
    assert clock_faults(ride) == [("clock-backward", "drop")]
    assert_array_equal(ride.time, [0, 1, 2, 3, 4, 6, 7, 8, 9])


def test_a_clock_set_back_is_moved_on() -> None:
    raw = ride_at([*range(50), *range(20, 60)])
    ride = repair(raw)
    assert clock_faults(ride) == [("clock-backward", "shift")]
    assert_array_equal(ride.time, np.arange(90.0))
    assert_array_equal(ride.channels["power"], raw.channels["power"])
    (fault,) = [fault for fault in ride.faults if fault.kind is FaultKind.CLOCK_BACKWARD]
    assert "set back by 29 s" in fault.cause
    assert fault.choices == ("shift", "drop")


def test_or_its_records_are_dropped_until_it_has_caught_up() -> None:
    ride = repair(ride_at([*range(50), *range(20, 60)]), [Choice("clock-backward", "drop")])
    assert_array_equal(ride.time, np.arange(60.0))
    assert ride.channels["power"][50] == 280.0


def test_records_of_one_moment_are_merged() -> None:
    raw = ride_at([0, 1, 2, 2, 3, 4])
    ride = repair(raw)
    assert clock_faults(ride) == [("clock-duplicate", "merge")]
    assert_array_equal(ride.time, [0, 1, 2, 3, 4])
    assert_array_equal(ride.channels["power"], [200, 201, 202.5, 204, 205])
    first = repair(raw, [Choice("clock-duplicate", "keep-first")])
    assert_array_equal(first.channels["power"], [200, 201, 202, 204, 205])
    last = repair(raw, [Choice("clock-duplicate", "keep-last")])
    assert_array_equal(last.channels["power"], [200, 201, 203, 204, 205])


def test_merging_takes_what_values_there_are() -> None:
    time = np.array([0.0, 1.0, 1.0, 2.0])
    power = np.array([200.0, np.nan, 210.0, 220.0])
    heart = np.array([2.0, 2.1, np.nan, 2.2])
    ride = repair(Ride(time=time, channels=MappingProxyType({"power": power, "heart_rate": heart})))
    assert_array_equal(ride.channels["power"], [200, 210, 220])
    assert_array_equal(ride.channels["heart_rate"], [2.0, 2.1, 2.2])


@pytest.mark.parametrize("times", [[0, 1, 3, 3, 4, 5], [0, 1, 2, 2, 4, 5]])
def test_a_pair_beside_a_missing_record_is_spread(times: list[float]) -> None:
    ride = repair(ride_at(times))
    assert clock_faults(ride) == [("clock-duplicate", "spread")]
    assert_array_equal(ride.time, np.arange(6.0))
    assert_array_equal(ride.channels["power"], 200.0 + np.arange(6))


def test_a_choice_for_a_span_goes_before_one_for_the_ride() -> None:
    raw = ride_at([0, 1, 1, 2, 3, 3, 4, 5])
    choices = [
        Choice("clock-duplicate", "keep-first", start=2.5, end=3.5),
        Choice("clock-duplicate", "keep-last"),
    ]
    ride = repair(raw, choices)
    assert_array_equal(ride.channels["power"], [200, 202, 203, 204, 206, 207])


def test_a_clock_fault_cannot_be_left() -> None:
    with pytest.raises(
        InputError, match=r"'leave' is no repair for clock-duplicate; those on offer are merge"
    ):
        repair(ride_at([0, 1, 1, 2]), [Choice("clock-duplicate", "leave")])


@settings(max_examples=200, deadline=None)
@given(st.lists(st.integers(-30, 60) | st.floats(-1e6, 1e6), min_size=1, max_size=60))
def test_time_strictly_increases_whatever_the_clock_did(times: list[float]) -> None:
    raw = ride_at(times)
    ride = repair(raw)
    assert ride.time.size >= 1
    assert (np.diff(ride.time) > 0).all()
    assert set(ride.channels["power"].tolist()) <= set(
        np.arange(200.0, 200.0 + len(times), 0.5).tolist()
    ) or any(fault.repair == "merge" for fault in ride.faults)


@settings(max_examples=50, deadline=None)
@given(st.permutations(list(range(12))))
def test_no_power_is_invented_by_sorting(order: list[int]) -> None:
    ride = repair(ride_at([float(k) for k in order]))
    assert np.isin(ride.channels["power"], 200.0 + np.arange(12)).all()
