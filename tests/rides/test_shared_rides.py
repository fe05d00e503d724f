"""Ride files recorded by real devices, written by nobody here. Kept outside the project; skipped where absent."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_allclose

from ridercda.rides.reader import read_ride
from ridercda.rides.repair import repair
from ridercda.rides.ride import FaultKind, LapTrigger, Ride

# Lengths, laps and channels as the folder's own README states them.
FILES = {
    "outdoor-8-laps-power.fit": 4700,
    "null-compressed-field.fit": 1808,
    "indoor-trainer-no-speed.fit": 2263,
    "no-power-3h.fit": 10686,
    "compressed-speed-distance.fit": 755,
    "tiny.fit": 14,
    "truncated.fit": 14,
    "corrupt-header.fit": 14,
}


def kinds(ride: Ride) -> set[FaultKind]:
    return {fault.kind for fault in ride.faults}


@pytest.mark.parametrize(("name", "records"), FILES.items())
def test_every_file_reads_and_is_repaired(shared_rides: Path, name: str, records: int) -> None:
    raw = read_ride(shared_rides / name)
    assert raw.time.size == records
    ride = repair(raw)
    assert (np.diff(ride.time) > 0).all()
    assert ride.time.size == records  # nothing had to be dropped


def test_no_file_of_the_folder_is_forgotten(shared_rides: Path) -> None:
    assert {path.name for path in shared_rides.glob("*.fit")} == set(FILES)


def test_outdoor_ride_with_power(shared_rides: Path) -> None:
    raw = read_ride(shared_rides / "outdoor-8-laps-power.fit")
    ride = repair(raw)
    assert raw.has(
        "power", "speed", "distance", "latitude", "longitude", "altitude", "temperature", "cadence"
    )
    assert len(raw.laps) == 8
    assert raw.laps[0].trigger is LapTrigger.MANUAL
    # The head unit's own lap summary: 1207.35 s and 9220.46 m.
    assert_allclose(raw.laps[0].end - raw.laps[0].start, 1207.35)
    lap = (raw.time > raw.laps[0].start) & (raw.time <= raw.laps[0].end)
    assert_allclose(np.ptp(raw.channels["distance"][lap]), 9220.46, rtol=2e-3)
    # Wheel and satellites are two instruments: they agree, and neither is taken for the other.
    assert FaultKind.SPEED_FROM_GPS not in kinds(ride)
    assert FaultKind.CIRCUMFERENCE not in kinds(ride)
    assert kinds(ride) == {FaultKind.ALTITUDE_STEP}


def test_a_null_compressed_field_hides_neither_speed_nor_distance(shared_rides: Path) -> None:
    raw = read_ride(shared_rides / "null-compressed-field.fit")
    assert_allclose(raw.channels["speed"][1:].sum(), raw.channels["distance"][-1], rtol=0.02)
    assert "heart_rate" not in raw.channels  # zero throughout: no strap


def test_indoor_ride_without_speed(shared_rides: Path) -> None:
    ride = repair(read_ride(shared_rides / "indoor-trainer-no-speed.fit"))
    assert "speed" not in ride.channels
    assert "distance" not in ride.channels
    missing = [fault.channel for fault in ride.faults if fault.kind is FaultKind.CHANNEL_MISSING]
    assert missing == ["speed"]


def test_long_ride_with_pauses_and_no_power(shared_rides: Path) -> None:
    ride = repair(read_ride(shared_rides / "no-power-3h.fit"))
    assert len(ride.laps) == 9
    assert FaultKind.AUTO_PAUSE in kinds(ride)
    assert [f.channel for f in ride.faults if f.kind is FaultKind.CHANNEL_MISSING] == ["power"]
    # The sum of the laps' own total_elapsed_time: pauses are inside the ride's clock.
    assert_allclose(ride.laps[-1].end - ride.laps[0].start, 12691.0, atol=15.0)


def test_compressed_speed_and_distance(shared_rides: Path) -> None:
    ride = read_ride(shared_rides / "compressed-speed-distance.fit")
    assert len(ride.laps) == 11
    # Ten laps of 1000 m and one of 247.42 m, as the unit summed them.
    assert_allclose(np.nanmax(ride.channels["distance"]), 10247.42, rtol=2e-3)
    speed, steps = ride.channels["speed"], np.diff(ride.channels["distance"]) / np.diff(ride.time)
    assert_allclose(np.nanmean(speed), np.nanmean(steps), rtol=0.1)


@pytest.mark.parametrize(
    ("name", "told"),
    [
        ("tiny.fit", "checksum does not match"),
        ("truncated.fit", "ends 3 bytes early"),
        ("corrupt-header.fit", "83 bytes after its end are not FIT"),
    ],
)
def test_broken_files_give_what_they_hold_with_a_fault(shared_rides: Path, name: str, told: str) -> None:
    (fault,) = read_ride(shared_rides / name).faults
    assert fault.kind is FaultKind.FILE_DAMAGED
    assert told in fault.cause
