"""The FIT writer, read back with an independent decoder."""

from __future__ import annotations

import datetime as dt
import io
from dataclasses import replace

import fitdecode
import numpy as np
import pytest

from ridercda.rides.ride import LapMark, LapTrigger, Ride
from ridercda.synthetic.day import simulate_day
from ridercda.synthetic.fit_writer import crc16, fit_bytes
from ridercda.synthetic.spec import REFERENCE_DAY


@pytest.fixture(scope="module")
def ride() -> Ride:
    return simulate_day(replace(REFERENCE_DAY, order="AB"), 3).rides["day"]


def messages(data: bytes, name: str) -> list[dict[str, object]]:
    with fitdecode.FitReader(io.BytesIO(data), check_crc=fitdecode.CrcCheck.RAISE) as reader:
        return [
            {field.name: field.value for field in frame.fields}
            for frame in reader
            if isinstance(frame, fitdecode.FitDataMessage) and frame.name == name
        ]


def test_checksum_has_the_catalogued_check_value() -> None:
    # CRC-16/ARC of the ASCII digits 1 to 9 in the CRC catalogues: 0xBB3D.
    assert crc16(b"123456789") == 0xBB3D


def test_records_come_back_to_the_resolution_of_the_format(ride: Ride) -> None:
    records = messages(fit_bytes(ride), "record")
    assert len(records) == len(ride.time)
    assert ride.start is not None
    for name, channel, factor, offset, tolerance in (
        ("power", "power", 1.0, 0.0, 0.5),
        ("speed", "speed", 1.0, 0.0, 0.0005),
        ("distance", "distance", 1.0, 0.0, 0.005),
        ("altitude", "altitude", 1.0, 0.0, 0.1),
        ("position_lat", "latitude", 2**31 / np.pi, 0.0, 0.5),
        ("position_long", "longitude", 2**31 / np.pi, 0.0, 0.5),
        ("heart_rate", "heart_rate", 60.0, 0.0, 0.5),
        ("cadence", "cadence", 60.0, 0.0, 0.5),
        ("temperature", "temperature", 1.0, -273.15, 0.5),
    ):
        found = np.array([record[name] for record in records], float)
        assert found == pytest.approx(ride.channels[channel] * factor + offset, abs=tolerance * 1.001)
    times = [(record["timestamp"] - ride.start).total_seconds() for record in records]  # type: ignore[operator]
    assert times == pytest.approx(ride.time)


def test_laps_session_and_activity_tell_of_the_whole(ride: Ride) -> None:
    data = fit_bytes(ride)
    laps = messages(data, "lap")
    assert len(laps) == len(ride.laps)
    for found, lap in zip(laps, ride.laps, strict=True):
        assert found["total_elapsed_time"] == pytest.approx(lap.end - lap.start, abs=1e-3)
        assert found["lap_trigger"] == "manual"
    (session,) = messages(data, "session")
    assert session["num_laps"] == len(ride.laps)
    assert session["sport"] == "cycling"
    assert session["total_distance"] == pytest.approx(ride.channels["distance"][-1], abs=0.01)
    (activity,) = messages(data, "activity")
    assert ride.start is not None
    offset = activity["local_timestamp"].replace(tzinfo=None) - activity["timestamp"].replace(tzinfo=None)  # type: ignore[attr-defined]
    assert offset == ride.start.utcoffset()
    (file_id,) = messages(data, "file_id")
    assert (file_id["type"], file_id["manufacturer"]) == ("activity", "development")
    assert [event["event_type"] for event in messages(data, "event")] == ["start", "stop_all"]


def test_missing_and_impossible_values_become_no_value() -> None:
    start = dt.datetime(2026, 5, 9, 9, tzinfo=dt.UTC)
    power = np.array([np.nan, -3.0, 70000.0, 200.0])
    ride = Ride(np.arange(4.0), {"power": power}, start, laps=(LapMark(0.0, 3.0, LapTrigger.TIME),))
    data = fit_bytes(ride)
    assert [r["power"] for r in messages(data, "record")] == [None, None, None, 200]
    assert messages(data, "lap")[0]["lap_trigger"] == "time"


def test_a_flipped_bit_is_noticed(ride: Ride) -> None:
    data = bytearray(fit_bytes(ride))
    data[len(data) // 2] ^= 4
    with pytest.raises(fitdecode.FitCRCError, match="CRC"):
        messages(bytes(data), "record")


def test_ride_without_moment_or_records_is_an_error() -> None:
    with pytest.raises(ValueError, match="moment of the first record"):
        fit_bytes(Ride(np.arange(3.0), {"power": np.ones(3)}))
    start = dt.datetime(2026, 5, 9, 9, tzinfo=dt.UTC)
    with pytest.raises(ValueError, match="at least one record"):
        fit_bytes(Ride(np.empty(0), {}, start))
