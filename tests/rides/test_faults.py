"""Faults put into a clean ride are found where they are and nowhere else; a clean ride lists none."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from types import MappingProxyType

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from ridercda.errors import InputError
from ridercda.rides.notes import NO_SPEED_SENSOR, SPEED_FROM_SENSOR
from ridercda.rides.repair import Choice, repair
from ridercda.rides.ride import Fault, FaultKind, Ride

RideMaker = Callable[..., Ride]


def changed(ride: Ride, **channels: np.ndarray | None) -> Ride:
    """Return the ride with channels replaced, or left out where None."""
    kept = {**ride.channels, **channels}
    return replace(ride, channels=MappingProxyType({name: v for name, v in kept.items() if v is not None}))


def without(ride: Ride, records: np.ndarray | slice) -> Ride:
    """Return the ride without some records."""
    kept = np.ones(ride.time.size, bool)
    kept[records] = False
    channels = {name: values[kept] for name, values in ride.channels.items()}
    return replace(ride, time=ride.time[kept], channels=MappingProxyType(channels))


def only(ride: Ride, kind: FaultKind) -> Fault:
    """Return the one fault of a ride, which is of this kind."""
    assert [fault.kind for fault in ride.faults] == [kind]
    return ride.faults[0]


def steady_moment(ride: Ride, after: float = 0.0) -> int:
    """Return a record in the midst of half a minute of pedalling."""
    pedalled = np.convolve(ride.channels["power"] > 60, np.ones(41), mode="same") == 41
    return int(np.flatnonzero(pedalled & (ride.time > after))[20])


@pytest.mark.parametrize("seed", range(2, 8))
def test_a_clean_ride_lists_none(make_ride: RideMaker, seed: int) -> None:
    assert repair(make_ride(2400, seed)).faults == ()


def test_a_clean_ride_of_two_hours_or_two_second_records_lists_none(make_ride: RideMaker) -> None:
    assert repair(make_ride(7200, 20)).faults == ()
    assert repair(make_ride(3600, 21, 2)).faults == ()


def test_a_clean_ride_comes_back_as_it_was(clean_ride: Ride) -> None:
    ride = repair(clean_ride)
    for name, values in clean_ride.channels.items():
        assert_array_equal(ride.channels[name], values)
    assert_array_equal(ride.time, clean_ride.time)


def test_noise_free_and_constant_power_is_not_called_frozen(clean_ride: Ride) -> None:
    steps = np.where(clean_ride.time < 1500, 200.0, 280.0)
    power = np.where(clean_ride.channels["power"] > 0, steps, 0.0)
    kinds = {fault.kind for fault in repair(changed(clean_ride, power=power)).faults}
    assert FaultKind.CHANNEL_FROZEN not in kinds
    assert FaultKind.CHANNEL_SMOOTHED not in kinds


# ---- sampling


def test_gap(clean_ride: Ride) -> None:
    k = steady_moment(clean_ride, 1000)
    ride = repair(without(clean_ride, slice(k, k + 9)))
    fault = only(ride, FaultKind.GAP)
    assert (fault.start, fault.end) == (clean_ride.time[k - 1], clean_ride.time[k + 9])
    far = clean_ride.channels["distance"][k + 9] - clean_ride.channels["distance"][k - 1]
    assert fault.cause == f"9 records missing: 10 s without one, {far:.0f} m further on"
    assert fault.repair is None
    assert ride.time.size == clean_ride.time.size - 9  # nothing is filled in


def test_a_single_missing_record_is_a_gap(clean_ride: Ride) -> None:
    k = steady_moment(clean_ride)
    assert only(repair(without(clean_ride, slice(k, k + 1))), FaultKind.GAP).cause.startswith(
        "1 record missing: 2 s"
    )


def test_a_gap_while_standing_is_a_pause(clean_ride: Ride) -> None:
    standing = np.flatnonzero(clean_ride.channels["speed"] == 0)
    assert standing.size > 12
    fault = only(repair(without(clean_ride, standing[2:-2])), FaultKind.AUTO_PAUSE)
    assert "stood still" in fault.cause


def test_a_pause_the_reader_listed_is_not_listed_twice(clean_ride: Ride) -> None:
    k = steady_moment(clean_ride)
    start, end = float(clean_ride.time[k - 1]), float(clean_ride.time[k + 30])
    listed = Fault(FaultKind.AUTO_PAUSE, start, end, "", "Auto-pause stopped the recording for 31 s")
    ride = replace(without(clean_ride, slice(k, k + 30)), faults=(listed,))
    assert repair(ride).faults == (listed,)


def test_smart_recording(clean_ride: Ride) -> None:
    rng = np.random.default_rng(3)
    kept = np.unique(np.cumsum(rng.integers(1, 8, 900)))
    kept = kept[kept < clean_ride.time.size]
    dropped = np.setdiff1d(np.arange(clean_ride.time.size), kept)
    faults = [fault.kind for fault in repair(without(clean_ride, dropped)).faults]
    assert faults.count(FaultKind.SMART_RECORDING) == 1
    assert FaultKind.GAP not in faults


def test_mixed_sampling(clean_ride: Ride) -> None:
    every_other = np.arange(1000, 2000, 2)
    fault = only(repair(without(clean_ride, every_other)), FaultKind.MIXED_SAMPLING)
    assert fault.cause == "Records every 2 s, elsewhere every 1 s"
    assert fault.start == pytest.approx(1000, abs=35)
    assert fault.end == pytest.approx(2000, abs=35)


# ---- channels


def test_missing_power_and_speed(clean_ride: Ride) -> None:
    fault = only(repair(changed(clean_ride, power=None)), FaultKind.CHANNEL_MISSING)
    assert "no power" in fault.cause
    ride = repair(changed(clean_ride, speed=None))
    fault = only(ride, FaultKind.CHANNEL_MISSING)
    assert fault.repair == "from-distance"
    assert_allclose(ride.channels["speed"][1:], np.diff(clean_ride.channels["distance"]), atol=1e-9)


def test_speed_from_position_where_there_is_nothing_else(clean_ride: Ride) -> None:
    ride = repair(changed(clean_ride, speed=None, distance=None))
    assert [fault.kind for fault in ride.faults if fault.channel == "speed"] == [
        FaultKind.CHANNEL_MISSING,
        FaultKind.SPEED_FROM_GPS,
    ]
    error = ride.channels["speed"] - clean_ride.channels["speed"]
    assert abs(float(np.nanmedian(error))) < 0.1


def test_neither_speed_nor_position(clean_ride: Ride) -> None:
    bare = changed(clean_ride, speed=None, distance=None, latitude=None, longitude=None)
    fault = only(repair(bare), FaultKind.CHANNEL_MISSING)
    assert "only lap times" in fault.cause
    assert fault.choices == ()


def test_a_hole_in_positions(clean_ride: Ride) -> None:
    latitude, longitude = (clean_ride.channels[name].copy() for name in ("latitude", "longitude"))
    latitude[500:540] = longitude[500:540] = np.nan
    fault = only(
        repair(changed(clean_ride, latitude=latitude, longitude=longitude)), FaultKind.CHANNEL_MISSING
    )
    assert (fault.channel, fault.start, fault.end) == ("latitude", 500.0, 539.0)


def test_a_wheel_that_falls_silent(clean_ride: Ride) -> None:
    k = steady_moment(clean_ride)
    speed = clean_ride.channels["speed"].copy()
    speed[k : k + 5] = 0.0
    ride = repair(changed(clean_ride, speed=speed))
    fault = only(ride, FaultKind.CHANNEL_FROZEN)
    assert (fault.channel, fault.start, fault.end, fault.repair) == ("speed", k, k + 4, "blank")
    assert np.isnan(ride.channels["speed"][k : k + 5]).all()
    assert np.isfinite(ride.channels["speed"][[k - 1, k + 5]]).all()


def test_speed_zero_throughout_is_told_by_distance(clean_ride: Ride) -> None:
    ride = repair(changed(clean_ride, speed=np.zeros(clean_ride.time.size)))
    fault = only(ride, FaultKind.CHANNEL_FROZEN)
    assert fault.repair == "from-distance"
    assert float(np.nanmean(ride.channels["speed"])) == pytest.approx(
        float(clean_ride.channels["speed"].mean()), rel=0.01
    )


@pytest.mark.parametrize("channel", ["power", "speed"])
def test_a_frozen_channel(clean_ride: Ride, channel: str) -> None:
    k = steady_moment(clean_ride, 600)
    values = clean_ride.channels[channel].copy()
    values[k : k + 12] = values[k]
    ride = repair(changed(clean_ride, **{channel: values}))
    fault = only(ride, FaultKind.CHANNEL_FROZEN)
    assert (fault.channel, fault.start, fault.end) == (channel, k + 1, k + 11)
    assert np.isnan(ride.channels[channel][k + 1 : k + 12]).all()
    assert ride.channels[channel][k] == values[k]


def test_frozen_positions(clean_ride: Ride) -> None:
    k = steady_moment(clean_ride)
    latitude, longitude = (clean_ride.channels[name].copy() for name in ("latitude", "longitude"))
    latitude[k : k + 20], longitude[k : k + 20] = latitude[k], longitude[k]
    ride = repair(changed(clean_ride, latitude=latitude, longitude=longitude))
    fault = ride.faults[0]
    assert (fault.kind, fault.channel) == (FaultKind.CHANNEL_FROZEN, "latitude")
    assert np.isnan(ride.channels["longitude"][k + 1 : k + 20]).all()


@pytest.mark.parametrize("width", [3, 5, 10])
def test_power_that_is_a_running_mean(clean_ride: Ride, width: int) -> None:
    rng = np.random.default_rng(4)
    noisy = clean_ride.channels["power"] * (1.0 + 0.08 * rng.standard_normal(clean_ride.time.size))
    mean = np.convolve(noisy, np.full(width, 1.0 / width), mode="full")[: noisy.size]
    faults = repair(changed(clean_ride, power=mean)).faults
    smoothed = [fault for fault in faults if fault.kind is FaultKind.CHANNEL_SMOOTHED]
    assert [fault.value for fault in smoothed] == [width]


def test_power_held_between_records(clean_ride: Ride) -> None:
    power = np.repeat(clean_ride.channels["power"][::3], 3)
    faults = repair(changed(clean_ride, power=power)).faults
    smoothed = [fault for fault in faults if fault.kind is FaultKind.CHANNEL_SMOOTHED]
    assert [fault.value for fault in smoothed] == [3.0]


# ---- power


@pytest.mark.parametrize(("size", "span"), [(5000.0, 1), (900.0, 1), (1200.0, 4)])
def test_a_power_spike(clean_ride: Ride, size: float, span: int) -> None:
    k = steady_moment(clean_ride, 300)
    power = clean_ride.channels["power"].copy()
    power[k : k + span] += size
    ride = repair(changed(clean_ride, power=power))
    fault = only(ride, FaultKind.POWER_SPIKE)
    assert (fault.start, fault.end, fault.repair) == (k, k + span - 1, "blank")
    assert np.isnan(ride.channels["power"][k : k + span]).all()
    assert np.isnan(ride.channels["power"]).sum() == span


def test_a_sprint_is_no_spike(clean_ride: Ride) -> None:
    k = steady_moment(clean_ride, 300)
    power, speed = clean_ride.channels["power"].copy(), clean_ride.channels["speed"].copy()
    power[k : k + 5] += 900.0
    gained = np.sqrt(speed[k - 1] ** 2 + 2.0 * 900.0 * np.arange(1, 6) / 85.0)
    speed[k : k + 5] = gained
    speed[k + 5 : k + 25] = np.linspace(gained[-1], speed[k + 25], 20)
    kinds = [fault.kind for fault in repair(changed(clean_ride, power=power, speed=speed)).faults]
    assert FaultKind.POWER_SPIKE not in kinds


@pytest.mark.parametrize("span", [1, 3, 8])
def test_a_dropout_to_zero(clean_ride: Ride, span: int) -> None:
    k = steady_moment(clean_ride, 900)
    power = clean_ride.channels["power"].copy()
    power[k : k + span] = 0.0
    raw = changed(clean_ride, power=power)
    ride = repair(raw)
    fault = only(ride, FaultKind.POWER_DROPOUT)
    assert (fault.start, fault.end, fault.repair) == (k, k + span - 1, "blank")
    assert np.isnan(ride.channels["power"][k : k + span]).all()
    drawn = repair(raw, [Choice("power-dropout", "interpolate")])
    line = np.interp(np.arange(k, k + span), [k - 1, k + span], power[[k - 1, k + span]])
    assert_allclose(drawn.channels["power"][k : k + span], line)
    left = repair(raw, [Choice("power-dropout", "leave")])
    assert only(left, FaultKind.POWER_DROPOUT).repair is None
    assert_array_equal(left.channels["power"], power)


def test_a_dropout_without_cadence_is_told_by_speed(clean_ride: Ride) -> None:
    k = steady_moment(clean_ride, 900)
    power = clean_ride.channels["power"].copy()
    power[k : k + 6] = 0.0
    ride = repair(changed(clean_ride, power=power, cadence=None))
    assert [(f.start, f.end) for f in ride.faults if f.kind is FaultKind.POWER_DROPOUT] == [(k, k + 5)]


def test_a_hole_in_power(clean_ride: Ride) -> None:
    k = steady_moment(clean_ride)
    power = clean_ride.channels["power"].copy()
    power[k : k + 4] = np.nan
    fault = only(repair(changed(clean_ride, power=power)), FaultKind.POWER_DROPOUT)
    assert (fault.start, fault.end, fault.repair) == (k, k + 3, None)
    assert fault.choices == ("leave", "interpolate")


def test_power_held_after_the_cranks_stopped(clean_ride: Ride) -> None:
    power = clean_ride.channels["power"].copy()
    stops = np.flatnonzero((power[1:] == 0) & (power[:-1] > 0)) + 1
    for k in stops:
        power[k : k + 3] = power[k - 1]
    raw = changed(clean_ride, power=power)
    ride = repair(raw)
    assert [fault.kind for fault in ride.faults] == [FaultKind.POWER_HELD] * stops.size
    assert {fault.repair for fault in ride.faults} == {"zero"}
    assert_array_equal(ride.channels["power"][stops], 0.0)
    assert_array_equal(ride.channels["power"], clean_ride.channels["power"])


def test_power_held_is_told_by_the_drop_where_there_is_no_cadence(clean_ride: Ride) -> None:
    power = clean_ride.channels["power"].copy()
    k = int(np.flatnonzero((power[1:] == 0) & (power[:-1] > 0))[2]) + 1
    power[k : k + 5] = power[k - 1]
    ride = repair(changed(clean_ride, power=power, cadence=None))
    fault = only(ride, FaultKind.POWER_HELD)
    assert (fault.start, fault.end, fault.repair) == (k, k + 4, "blank")


# ---- position and altitude


def test_a_wild_fix(clean_ride: Ride) -> None:
    latitude = clean_ride.channels["latitude"].copy()
    latitude[700:703] += 2e-4  # 1.3 km
    ride = repair(changed(clean_ride, latitude=latitude))
    fault = only(ride, FaultKind.POSITION_SPIKE)
    assert (fault.start, fault.end, fault.repair) == (700.0, 702.0, "blank")
    assert np.isnan(ride.channels["latitude"][700:703]).all()
    assert np.isnan(ride.channels["longitude"][700:703]).all()
    assert np.isnan(ride.channels["latitude"]).sum() == 3


def test_the_first_fixes_may_be_elsewhere(clean_ride: Ride) -> None:
    latitude = clean_ride.channels["latitude"].copy()
    latitude[:4] += 1e-4
    fault = only(repair(changed(clean_ride, latitude=latitude)), FaultKind.POSITION_SPIKE)
    assert (fault.start, fault.end) == (0.0, 3.0)


def test_a_step_in_altitude(clean_ride: Ride) -> None:
    altitude = clean_ride.channels["altitude"].copy()
    altitude[1500:] += 12.0
    ride = repair(changed(clean_ride, altitude=altitude))
    fault = only(ride, FaultKind.ALTITUDE_STEP)
    assert (fault.start, fault.end, fault.repair) == (1499.0, 1500.0, "shift")
    assert fault.value == pytest.approx(12.0, abs=0.5)
    assert_allclose(ride.channels["altitude"], clean_ride.channels["altitude"], atol=0.5)


def test_altitude_that_leaves_its_line_for_a_moment(clean_ride: Ride) -> None:
    altitude = clean_ride.channels["altitude"].copy()
    altitude[1500:1502] -= 15.0
    ride = repair(changed(clean_ride, altitude=altitude))
    fault = only(ride, FaultKind.ALTITUDE_STEP)
    assert (fault.start, fault.end, fault.repair) == (1500.0, 1501.0, "blank")
    assert np.isnan(ride.channels["altitude"]).sum() == 2


# ---- wheel


def speed_of_fixes(ride: Ride) -> np.ndarray:
    """Return speed as positions alone give it."""
    north = 6_375_700.0 * ride.channels["latitude"]
    east = 6_390_700.0 * np.cos(np.radians(50.0)) * ride.channels["longitude"]
    return np.hypot(np.diff(north, prepend=north[:1]), np.diff(east, prepend=east[:1]))


def test_speed_computed_from_positions(clean_ride: Ride) -> None:
    faults = repair(changed(clean_ride, speed=speed_of_fixes(clean_ride))).faults
    (fault,) = [fault for fault in faults if fault.kind is FaultKind.SPEED_FROM_GPS]
    assert "computed from them" in fault.cause


def test_positions_without_scatter_do_not_make_a_wheel_look_like_them(clean_ride: Ride) -> None:
    # Distance along a straight road is told by a wheel and by perfect fixes alike.
    longitude = np.radians(8.0) + clean_ride.channels["distance"] / (6_390_700.0 * np.cos(np.radians(50.0)))
    latitude = np.full(clean_ride.time.size, np.radians(50.0))
    kinds = [f.kind for f in repair(changed(clean_ride, latitude=latitude, longitude=longitude)).faults]
    assert FaultKind.SPEED_FROM_GPS not in kinds


def test_the_sensors_a_file_lists_decide(clean_ride: Ride) -> None:
    told = replace(clean_ride, notes=MappingProxyType({"speed": NO_SPEED_SENSOR}))
    assert only(repair(told), FaultKind.SPEED_FROM_GPS).cause.startswith("The file lists its sensors")
    wheel = changed(clean_ride, speed=speed_of_fixes(clean_ride))
    wheel = replace(wheel, notes=MappingProxyType({"speed": SPEED_FROM_SENSOR}))
    assert FaultKind.SPEED_FROM_GPS not in [fault.kind for fault in repair(wheel).faults]


def test_speed_that_comes_late_is_no_wheels(clean_ride: Ride) -> None:
    speed = np.concatenate(
        (np.repeat(clean_ride.channels["speed"][:1], 2), clean_ride.channels["speed"][:-2])
    )
    kinds = [fault.kind for fault in repair(changed(clean_ride, speed=speed)).faults]
    assert FaultKind.SPEED_FROM_GPS in kinds


@pytest.mark.parametrize("factor", [0.97, 1.015])
def test_a_circumference_that_is_off(clean_ride: Ride, factor: float) -> None:
    wheel = {name: clean_ride.channels[name] * factor for name in ("speed", "distance")}
    raw = changed(clean_ride, **wheel)
    ride = repair(raw)
    fault = only(ride, FaultKind.CIRCUMFERENCE)
    assert fault.value is not None
    assert fault.value * factor == pytest.approx(1.0, abs=0.003)
    assert fault.repair is None
    assert_array_equal(ride.channels["speed"], raw.channels["speed"])
    scaled = repair(raw, [Choice("circumference", "scale", value=1.0 / factor)])
    assert_allclose(scaled.channels["distance"], clean_ride.channels["distance"])


def test_a_circumference_that_drifts(make_ride: RideMaker) -> None:
    ride = make_ride(7200, 9)
    speed = ride.channels["speed"] * np.where(ride.time < 3600, 1.0, 1.012)
    distance = np.cumsum(speed)
    fault = only(repair(changed(ride, speed=speed, distance=distance)), FaultKind.CIRCUMFERENCE)
    assert "drifts" in fault.cause


# ---- lag


@pytest.mark.parametrize("late", [-3, 1, 2, 4])
def test_power_that_comes_late(clean_ride: Ride, late: int) -> None:
    power = np.roll(clean_ride.channels["power"], late)
    raw = changed(clean_ride, power=power, cadence=None)
    faults = [fault for fault in repair(raw).faults if fault.kind is FaultKind.POWER_LAG]
    assert [fault.value for fault in faults] == [pytest.approx(late, abs=0.4)]
    assert faults[0].repair is None
    assert faults[0].choices == ("leave", "shift")


def test_shifting_moves_power_and_mixes_nothing(clean_ride: Ride) -> None:
    raw = changed(clean_ride, power=np.roll(clean_ride.channels["power"], 2), cadence=None)
    for lag in (1.6, 2.0, 2.4):  # to the nearest record
        ride = repair(raw, [Choice("power-lag", "shift", value=lag)])
        assert_array_equal(ride.channels["power"][:-2], clean_ride.channels["power"][:-2])
        assert np.isnan(ride.channels["power"][-2:]).all()


def test_a_lag_of_half_a_record_moves_all_values_alike(clean_ride: Ride) -> None:
    ride = repair(clean_ride, [Choice("power-lag", "shift", value=0.5)])
    moved = ride.channels["power"][:-1]
    same, next_one = clean_ride.channels["power"][:-1], clean_ride.channels["power"][1:]
    assert np.array_equal(moved, next_one) or np.array_equal(moved, same)


def test_no_power_is_carried_across_a_gap(clean_ride: Ride) -> None:
    k = steady_moment(clean_ride)
    ride = repair(without(clean_ride, slice(k, k + 20)), [Choice("power-lag", "shift", value=3.0)])
    assert np.isnan(ride.channels["power"][k - 3 : k]).all()
    assert np.isfinite(ride.channels["power"][k - 4])
    (fault,) = [fault for fault in ride.faults if fault.kind is FaultKind.POWER_LAG]
    assert (fault.cause, fault.repair, fault.value) == ("Given by hand", "shift", 3.0)


# ---- choices


def test_a_choice_that_is_not_on_offer_is_one_message(clean_ride: Ride) -> None:
    k = steady_moment(clean_ride)
    power = clean_ride.channels["power"].copy()
    power[k] = 5000.0
    raw = changed(clean_ride, power=power)
    with pytest.raises(
        InputError, match=r"'mend' is no repair for power-spike; those on offer are blank, interpolate, leave"
    ):
        repair(raw, [Choice("power-spike", "mend")])
    with pytest.raises(InputError, match=r"there is no fault 'spike'; the kinds are altitude-step"):
        repair(raw, [Choice("spike", "blank")])
    with pytest.raises(InputError, match=r"'zero' is no repair for power-lag"):
        repair(raw, [Choice("power-lag", "zero", value=1.0)])


def test_a_choice_for_a_span_leaves_the_rest_to_the_default(clean_ride: Ride) -> None:
    power = clean_ride.channels["power"].copy()
    first, second = steady_moment(clean_ride), steady_moment(clean_ride, 2500)
    power[[first, second]] = 5000.0
    ride = repair(
        changed(clean_ride, power=power),
        [Choice("power-spike", "leave", start=second - 5.0, end=second + 5.0)],
    )
    assert [fault.repair for fault in ride.faults] == ["blank", None]
    assert np.isnan(ride.channels["power"][first])
    assert ride.channels["power"][second] == 5000.0


def test_faults_of_the_reader_stay_and_all_are_in_order(clean_ride: Ride) -> None:
    listed = Fault(FaultKind.FILE_DAMAGED, 0.0, 3599.0, "", "Its checksum does not match its content")
    k = steady_moment(clean_ride)
    ride = repair(replace(without(clean_ride, slice(k, k + 5)), faults=(listed,)))
    assert [fault.kind for fault in ride.faults] == [FaultKind.FILE_DAMAGED, FaultKind.GAP]


@pytest.mark.parametrize("size", [1, 2, 3, 10, 70])
def test_short_rides_are_no_trouble(clean_ride: Ride, size: int) -> None:
    short = without(clean_ride, slice(size, None))
    assert repair(short).time.size == size
