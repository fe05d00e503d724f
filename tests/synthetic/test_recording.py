"""Instruments and faults: each error does what it says, and nothing else."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from ridercda.rides.ride import Ride
from ridercda.synthetic.day import simulate_day
from ridercda.synthetic.faults import FaultSpec, InjectedFault
from ridercda.synthetic.sensors import (
    AirProbeSpec,
    BarometerSpec,
    PositionSpec,
    PowerAveraging,
    PowerSpec,
    SensorSpec,
    SpeedSource,
    SpeedSpec,
    ThermometerSpec,
)
from ridercda.synthetic.spec import REFERENCE_DAY, exact_sensors

SHORT = replace(REFERENCE_DAY, order="AB")


def ridden(sensors: SensorSpec, faults: tuple[FaultSpec, ...] = ()) -> Ride:
    return simulate_day(replace(SHORT, sensors=sensors, faults=faults), 21).rides["day"]


@pytest.fixture(scope="module")
def exact() -> Ride:
    return ridden(exact_sensors())


def with_power(**changes: object) -> Ride:
    base = exact_sensors()
    return ridden(replace(base, power=replace(base.power, **changes)))  # type: ignore[arg-type]


def with_speed(**changes: object) -> Ride:
    base = exact_sensors()
    return ridden(replace(base, speed=replace(base.speed, **changes)))  # type: ignore[arg-type]


def test_power_noise_is_relative_and_white(exact: Ride) -> None:
    true = exact.channels["power"]
    on = true > 100
    ratio = with_power(noise=0.03).channels["power"][on] / true[on] - 1
    assert ratio.std() == pytest.approx(0.03, rel=0.1)
    assert abs(np.corrcoef(ratio[1:], ratio[:-1])[0, 1]) < 0.1


def test_power_scale_and_zero(exact: Ride) -> None:
    true = exact.channels["power"]
    on = true > 100
    assert with_power(scale=0.02).channels["power"][on] == pytest.approx(1.02 * true[on])
    drifting = with_power(zero=3.0, zero_drift_per_hour=6.0).channels["power"]
    assert drifting[on] - true[on] == pytest.approx(3.0 + 6.0 * exact.time[on] / 3600)
    assert np.all(drifting[true == 0] == 0)  # a coasting meter shows nothing
    assert with_power(resolution=1.0).channels["power"] == pytest.approx(np.round(true))


def test_power_scale_is_drawn_only_when_asked_for() -> None:
    spec = replace(SHORT, sensors=replace(exact_sensors(), power=PowerSpec(noise=0.0, scale_sd=0.015)))
    scales = [simulate_day(replace(spec, order="A"), s).truth.power_scale for s in range(12)]
    assert 0.005 < np.std(scales) < 0.03
    assert simulate_day(SHORT, 1).truth.power_scale == 0.0


def test_efficiency_is_drawn_only_when_asked_for() -> None:
    power = PowerSpec(noise=0.0, efficiency_sd=0.005)
    spec = replace(SHORT, order="A", sensors=replace(exact_sensors(), power=power))
    days = [simulate_day(spec, s) for s in range(12)]
    assert 0.002 < np.std([d.truth.efficiency for d in days]) < 0.01
    assert simulate_day(SHORT, 1).truth.efficiency == 0.977
    day = days[0]
    assert day.rides["day"].channels["power"] * day.truth.efficiency == pytest.approx(day.truth.records.power)


def test_power_lag_shifts_power_in_time(exact: Ride) -> None:
    late = with_power(lag=2.0).channels["power"]
    assert late[50:-10] == pytest.approx(exact.channels["power"][48:-12], abs=1e-6)


def test_power_by_revolution_keeps_the_work_and_hangs_after_pedalling_stops(exact: Ride) -> None:
    true = exact.channels["power"]
    turns = with_power(averaging=PowerAveraging.REVOLUTION).channels["power"]
    assert turns.sum() == pytest.approx(true.sum(), rel=3e-3)
    stopped = np.flatnonzero((true[1:] == 0) & (true[:-1] > 10)) + 1
    assert stopped.size
    assert np.all(turns[stopped] > 0)
    coasting = np.convolve(true == 0, np.ones(5), mode="full")[: len(true)] == 5
    assert coasting.any()
    assert np.all(turns[coasting] == 0)


def test_wheel_noise_is_white_and_circumference_scales(exact: Ride) -> None:
    true = exact.channels["speed"]
    moving = true > 2
    error = (with_speed(noise=0.02).channels["speed"] - true)[moving]
    assert error.std() == pytest.approx(0.02, rel=0.1)
    large = with_speed(circumference_error=0.01).channels
    assert large["speed"] == pytest.approx(1.01 * true)
    assert large["distance"] == pytest.approx(1.01 * exact.channels["distance"])


def test_noise_of_wheel_events_cancels_over_records(exact: Ride) -> None:
    events = with_speed(source=SpeedSource.WHEEL_EVENTS, noise=0.02).channels
    error = (events["speed"] - exact.channels["speed"])[exact.channels["speed"] > 2]
    assert error.std() == pytest.approx(0.02, rel=0.1)
    assert np.corrcoef(error[1:], error[:-1])[0, 1] == pytest.approx(-0.5, abs=0.08)
    assert np.abs(events["distance"] - exact.channels["distance"]).max() < 0.2


def test_gps_speed_is_late_and_smooth(exact: Ride) -> None:
    gps = with_speed(source=SpeedSource.GPS, noise=0.0, gps_smoothing=1.0, gps_delay=1.0).channels["speed"]
    true = exact.channels["speed"]
    lags = np.arange(0, 5)
    mismatch = [np.mean((gps[10:-10] - true[10 - k : len(true) - 10 - k]) ** 2) for k in lags]
    # A record's mean lies half a second back; delay and smoothing put two seconds on the instant.
    assert int(lags[np.argmin(mismatch)]) in (1, 2)
    assert np.abs(np.diff(gps, 2)).max() < np.abs(np.diff(true, 2)).max()


def test_no_speed_sensor_no_speed() -> None:
    ride = with_speed(source=SpeedSource.NONE)
    assert "speed" not in ride.channels
    assert "distance" not in ride.channels


def test_position_wanders_slowly(exact: Ride) -> None:
    ride = ridden(replace(exact_sensors(), position=PositionSpec(wander=2.0, wander_time=10.0, jitter=0.3)))
    north = (ride.channels["latitude"] - exact.channels["latitude"]) * 6.37e6
    assert north.std() == pytest.approx(math.hypot(2.0, 0.3), rel=0.25)
    assert np.corrcoef(north[1:], north[:-1])[0, 1] > 0.8


def test_barometer_and_thermometer(exact: Ride) -> None:
    barometer = BarometerSpec(noise=0.0, offset_sd=0.0, drift_per_hour=0.0, resolution=0.0)
    day = simulate_day(replace(SHORT, sensors=replace(exact_sensors(), barometer=barometer)), 21)
    height = day.truth.height(day.truth.records.place)
    assert day.rides["day"].channels["altitude"] - height == pytest.approx(180.0, abs=1e-6)
    warm = ridden(replace(exact_sensors(), thermometer=ThermometerSpec(warm_bias=2.5, noise=0.0)))
    assert warm.channels["temperature"] == pytest.approx(293.15 + 2.5, abs=0.51)  # whole degrees


def test_air_probe_reads_the_air_along_the_bike() -> None:
    probe = AirProbeSpec(factor_sd=0.0, setup_factor_sd=0.0, noise=0.0)
    day = simulate_day(replace(SHORT, sensors=replace(exact_sensors(), air_probe=probe)), 21)
    records, read = day.truth.records, day.rides["day"].channels["air_speed"]
    run = day.truth.runs[0]
    inside = (records.time > run.start + 1) & (records.time < run.end)
    north, east = day.truth.heading(records.place)
    along = records.speed - records.wind_east * east - records.wind_north * north
    # Heading half a record later, and the lean of the mass into bends, make the rest.
    assert (read - along)[inside].std() < 0.06
    assert (read - records.speed)[inside].std() > 0.5
    rough = replace(exact_sensors(), air_probe=AirProbeSpec(0.05, 0.0, 0.0))
    factors = [simulate_day(replace(SHORT, order="A", sensors=rough), s) for s in range(8)]
    ratio = [d.rides["day"].channels["air_speed"].mean() / d.truth.records.speed.mean() for d in factors]
    assert np.std(ratio) > 0.01


def test_faults_are_put_where_asked(exact: Ride) -> None:
    base = exact_sensors()

    def broken(kind: InjectedFault, duration: float = 10.0) -> Ride:
        return ridden(base, (FaultSpec(kind, 200.0, duration),))

    spot = slice(200, 210)
    gap = broken(InjectedFault.GAP)
    assert len(gap.time) == len(exact.time) - 10
    assert np.diff(gap.time).max() == 11.0
    assert np.isnan(broken(InjectedFault.POWER_DROPOUT).channels["power"][spot]).all()
    assert np.all(broken(InjectedFault.POWER_ZERO).channels["power"][spot] == 0)
    held = broken(InjectedFault.POWER_HELD).channels["power"]
    assert np.all(held[spot] == exact.channels["power"][199])
    spike = broken(InjectedFault.POWER_SPIKE, 1.0).channels["power"]
    assert spike[200] - exact.channels["power"][200] == pytest.approx(1500.0)
    assert np.all(broken(InjectedFault.SPEED_ZERO).channels["speed"][spot] == 0)
    rest = np.r_[0:200, 210 : len(exact.time)]
    assert np.array_equal(held[rest], exact.channels["power"][rest])


def test_speed_spec_defaults_are_those_of_the_reference_day() -> None:
    assert SpeedSpec().noise == 0.02
    assert PowerSpec().noise == 0.03
    assert SensorSpec().interval == 1.0
