"""Days of the simulator, with instruments that err as stated: what is wrong is listed, and nothing else."""

from __future__ import annotations

from collections import Counter
from dataclasses import replace

import numpy as np
import pytest

from ridercda.rides.lag import power_lag
from ridercda.rides.repair import repair
from ridercda.rides.ride import FaultKind, Ride
from ridercda.synthetic.day import simulate_day
from ridercda.synthetic.faults import FaultSpec, InjectedFault
from ridercda.synthetic.sensors import PowerAveraging, SpeedSource
from ridercda.synthetic.spec import REFERENCE_DAY, TRACK_DAY, DaySpec, gps_speed, noise_free

SENSORS = REFERENCE_DAY.sensors
POWER, SPEED = SENSORS.power, SENSORS.speed


def ridden(spec: DaySpec, seed: int = 1) -> Ride:
    """Return the raw ride of a day."""
    (ride,) = simulate_day(spec, seed).rides.values()
    return replace(ride, faults=())


def kinds(spec: DaySpec, seed: int = 1) -> set[FaultKind]:
    return {fault.kind for fault in repair(ridden(spec, seed)).faults}


CLEAN = {
    "reference": REFERENCE_DAY,
    "without noise": noise_free(REFERENCE_DAY),
    "track": TRACK_DAY,
    "track without noise": noise_free(TRACK_DAY),
    "rounded": replace(
        REFERENCE_DAY,
        sensors=replace(
            SENSORS,
            power=replace(POWER, resolution=1.0),
            speed=replace(SPEED, source=SpeedSource.WHEEL_EVENTS, resolution=0.001),
        ),
    ),
    "four records a second": replace(REFERENCE_DAY, sensors=replace(SENSORS, interval=0.25)),
}


@pytest.mark.parametrize("spec", CLEAN.values(), ids=CLEAN)
@pytest.mark.parametrize("seed", [1, 2])
def test_days_with_sound_instruments_list_no_fault(spec: DaySpec, seed: int) -> None:
    assert kinds(spec, seed) == set()


def test_a_crank_meter_holds_its_last_turn_and_nothing_else() -> None:
    spec = replace(
        REFERENCE_DAY,
        sensors=replace(SENSORS, power=replace(POWER, resolution=1.0, averaging=PowerAveraging.REVOLUTION)),
    )
    raw = ridden(spec)
    mended = repair(raw)
    assert {fault.kind for fault in mended.faults} <= {FaultKind.POWER_HELD}
    changed = raw.channels["power"] != mended.channels["power"]
    assert (raw.channels["cadence"][changed] == 0).all()


def test_injected_faults_are_found_where_they_are() -> None:
    put_in = {
        InjectedFault.GAP: (400.0, 5.0),
        InjectedFault.POWER_DROPOUT: (1000.0, 4.0),
        InjectedFault.POWER_ZERO: (1600.0, 3.0),
        InjectedFault.POWER_HELD: (2200.0, 10.0),
        InjectedFault.POWER_SPIKE: (2800.0, 3.0),
        InjectedFault.SPEED_ZERO: (3400.0, 5.0),
    }
    faults = tuple(FaultSpec(kind, start, span) for kind, (start, span) in put_in.items())
    found = {fault.start: fault for fault in repair(ridden(replace(REFERENCE_DAY, faults=faults))).faults}
    assert Counter(fault.kind for fault in found.values()) == {
        FaultKind.GAP: 1,
        FaultKind.POWER_DROPOUT: 2,
        FaultKind.CHANNEL_FROZEN: 2,
        FaultKind.POWER_SPIKE: 1,
    }
    for kind, (start, span) in put_in.items():
        first = start - 1.0 if kind is InjectedFault.GAP else start
        last = start + span if kind is InjectedFault.GAP else start + span - 1.0
        assert found[first].end == last


@pytest.mark.parametrize("late", [1.3, 2.3])
def test_a_lag_is_measured_within_its_error(late: float) -> None:
    errors = []
    for seed in range(4):
        spec = replace(REFERENCE_DAY, sensors=replace(SENSORS, power=replace(POWER, lag=late)))
        lag = power_lag(ridden(spec, seed))
        assert lag is not None
        assert abs(lag.value - late) < 3.0 * lag.standard_error
        errors.append(lag.value - late)
    assert abs(float(np.mean(errors))) < 0.15


def test_satellite_speed_is_told_by_how_late_it_comes() -> None:
    assert FaultKind.SPEED_FROM_GPS in kinds(replace(REFERENCE_DAY, sensors=gps_speed(SENSORS)))


@pytest.mark.parametrize("error", [-0.02, 0.015])
def test_a_circumference_that_is_off(error: float) -> None:
    spec = replace(REFERENCE_DAY, sensors=replace(SENSORS, speed=replace(SPEED, circumference_error=error)))
    (fault,) = repair(ridden(spec)).faults
    assert fault.kind is FaultKind.CIRCUMFERENCE
    assert fault.value == pytest.approx(1.0 / (1.0 + error), abs=0.003)
