from __future__ import annotations

import datetime as dt
import io

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from ridercda.errors import Cancelled, ReaderError
from ridercda.rides.fit_file import read_fit
from ridercda.rides.format import ReadOptions
from ridercda.rides.notes import NO_SPEED_SENSOR, SPEED_FROM_SENSOR
from ridercda.rides.ride import FaultKind, LapMark, LapTrigger, Ride
from ridercda.watch import NO_WATCH

RECORD, LAP, EVENT, DEVICE, ACTIVITY = 20, 19, 21, 23, 34
T0 = 1_000_000_000


def read(data: bytes, options: ReadOptions | None = None) -> Ride:
    return read_fit(io.BytesIO(data), options or ReadOptions(), NO_WATCH)


def kinds(ride: Ride) -> list[FaultKind]:
    return [fault.kind for fault in ride.faults]


def test_values_come_in_si(fit: type) -> None:
    fields = [(253, "u32"), (0, "s32"), (1, "s32"), (2, "u16"), (3, "u8"), (4, "u8"), (5, "u32"), (6, "u16")]
    made = fit().define(1, RECORD, [*fields, (7, "u16"), (13, "s8"), (53, "u8")])
    made.add(1, T0, 2**29, -(2**30), (100 + 500) * 5, 120, 90, 100_000, 12_345, 250, 20, 64)
    made.add(1, T0 + 1, 2**29, -(2**30), (101 + 500) * 5, 120, 90, 101_234, 12_345, 250, -5, 64)
    ride = read(made.file())
    # Semicircles: 2^31 are half a turn. Scales and offsets of the FIT profile (from memory): altitude 5 and 500 m,
    # distance 100, speed 1000, fractional cadence 128.
    assert_allclose(ride.channels["latitude"], np.pi / 4)
    assert_allclose(ride.channels["longitude"], -np.pi / 2)
    assert_allclose(ride.channels["altitude"], [100.0, 101.0])
    assert_allclose(ride.channels["heart_rate"], 2.0)
    assert_allclose(ride.channels["cadence"], (90 + 0.5) / 60)
    assert_allclose(ride.channels["distance"], [0.0, 12.34])
    assert_allclose(ride.channels["speed"], 12.345)
    assert_allclose(ride.channels["power"], 250.0)
    assert_allclose(ride.channels["temperature"], [293.15, 268.15])
    assert_array_equal(ride.time, [0.0, 1.0])
    assert ride.source == "fit"
    assert ride.faults == ()


def test_start_is_the_first_record_with_the_offset_of_the_activity(fit: type, ride_file: bytes) -> None:
    epoch = dt.datetime(1989, 12, 31, tzinfo=dt.UTC)
    assert read(ride_file).start == epoch + dt.timedelta(seconds=T0)
    made = fit().define(1, RECORD, [(253, "u32"), (7, "u16")]).add(1, T0, 200)
    made.define(2, ACTIVITY, [(253, "u32"), (5, "u32")]).add(2, T0 + 1, T0 + 1 + 7200)
    start = read(made.file()).start
    assert start == epoch + dt.timedelta(seconds=T0)
    assert start is not None
    assert start.utcoffset() == dt.timedelta(hours=2)


def test_clock_since_switching_on_has_no_start(fit: type) -> None:
    ride = read(fit().define(1, RECORD, [(253, "u32"), (7, "u16")]).add(1, 1000, 1).add(1, 1002, 2).file())
    assert ride.start is None
    assert_array_equal(ride.time, [0.0, 2.0])


@pytest.mark.parametrize(
    ("number", "kind", "invalid", "channel"),
    [
        (7, "u16", 0xFFFF, "power"),
        (6, "u16", 0xFFFF, "speed"),
        (5, "u32", 0xFFFFFFFF, "distance"),
        (2, "u16", 0xFFFF, "altitude"),
        (3, "u8", 0xFF, "heart_rate"),
        (3, "u8", 0, "heart_rate"),
        (4, "u8", 0xFF, "cadence"),
        (13, "s8", 0x7F, "temperature"),
    ],
)
def test_invalid_values_are_nan(fit: type, number: int, kind: str, invalid: int, channel: str) -> None:
    made = fit().define(1, RECORD, [(253, "u32"), (number, kind)])
    ride = read(made.add(1, T0, 50).add(1, T0 + 1, invalid).add(1, T0 + 2, 60).file())
    assert_array_equal(np.isnan(ride.channels[channel]), [False, True, False])


def test_positions_without_a_fix_are_nan(fit: type) -> None:
    made = fit().define(1, RECORD, [(253, "u32"), (0, "s32"), (1, "s32")])
    made.add(1, T0, 0x7FFFFFFF, 0x7FFFFFFF).add(1, T0 + 1, 0, 0).add(1, T0 + 2, 2**29, 2**29)
    ride = read(made.file())
    assert_array_equal(np.isnan(ride.channels["latitude"]), [True, True, False])
    assert_array_equal(np.isnan(ride.channels["longitude"]), [True, True, False])


def test_enhanced_fields_go_first_and_the_plain_ones_fill_in(fit: type) -> None:
    made = fit().define(1, RECORD, [(253, "u32"), (73, "u32"), (78, "u32")])
    made.add(1, T0, 70_000, (10_000 + 500) * 5)
    made.define(1, RECORD, [(253, "u32"), (6, "u16"), (2, "u16")]).add(1, T0 + 1, 9_000, (80 + 500) * 5)
    ride = read(made.file())
    assert_allclose(ride.channels["speed"], [70.0, 9.0])
    assert_allclose(ride.channels["altitude"], [10_000.0, 80.0])


def test_compressed_timestamps_roll_over(fit: type) -> None:
    start = T0 - T0 % 32 + 29
    made = fit().define(0, RECORD, [(253, "u32"), (7, "u16")]).add(0, start, 100)
    made.define(1, RECORD, [(7, "u16")])
    for k in range(1, 70):
        made.add_compressed(1, start + k, 100 + k)
    ride = read(made.file())
    assert_array_equal(ride.time, np.arange(70.0))
    assert_array_equal(ride.channels["power"], 100.0 + np.arange(70))


def test_compressed_speed_and_distance_accumulate(fit: type) -> None:
    made = fit().define(1, RECORD, [(253, "u32"), (8, "bytes3")])
    counter = 0
    for k in range(40):
        counter += 160 * 16  # 160 m in sixteenths
        word = 1234 | (counter & 0xFFF) << 12
        made.add(1, T0 + 20 * k, word.to_bytes(3, "little"))
    ride = read(made.file())
    assert_allclose(ride.channels["speed"], 12.34)
    assert_allclose(ride.channels["distance"], 160.0 * np.arange(40))


def test_a_null_compressed_field_hides_nothing(fit: type) -> None:
    made = fit().define(1, RECORD, [(253, "u32"), (8, "bytes3"), (6, "u16"), (5, "u32")])
    ride = read(made.add(1, T0, b"\xff\xff\xff", 5000, 100).add(1, T0 + 1, b"\xff\xff\xff", 5000, 600).file())
    assert_allclose(ride.channels["speed"], 5.0)
    assert_allclose(ride.channels["distance"], [0.0, 5.0])


def test_big_endian_messages(fit: type) -> None:
    made = fit(">").define(1, RECORD, [(253, "u32"), (7, "u16"), (5, "u32")])
    ride = read(made.add(1, T0, 258, 100).add(1, T0 + 1, 259, 66_000).file())
    assert_array_equal(ride.channels["power"], [258.0, 259.0])
    assert_allclose(ride.channels["distance"], [0.0, 659.0])


def test_developer_fields_by_name_and_unit(fit: type) -> None:
    made = fit().developer().describe(3, "Air Speed", "km/h", 0x88)
    made.define(1, RECORD, [(253, "u32"), (7, "u16")], [(3, "f32", 0)])
    ride = read(made.add(1, T0, 200, 36.0).add(1, T0 + 1, 200, 45.0).file())
    assert_allclose(ride.channels["air_speed"], [10.0, 12.5])
    assert "Air Speed" in ride.notes["air_speed"]


def test_a_developer_field_may_stand_for_a_native_one(fit: type) -> None:
    made = fit().developer().describe(1, "pw", "watts", 0x84, native=7)
    made.define(1, RECORD, [(253, "u32")], [(1, "u16", 0)])
    assert_array_equal(read(made.add(1, T0, 321).file()).channels["power"], [321.0])


def test_the_power_channel_is_the_users_choice(fit: type) -> None:
    made = fit().developer().describe(1, "Hub Power", "W", 0x84)
    made.define(1, RECORD, [(253, "u32"), (7, "u16")], [(1, "u16", 0)])
    data = made.add(1, T0, 200, 195).add(1, T0 + 1, 210, 0xFFFF).file()
    ride = read(data)
    assert_array_equal(ride.channels["power"], [200.0, 210.0])
    assert "Hub Power" in ride.notes["power"]
    chosen = read(data, ReadOptions(power_channel="hub power"))
    assert_array_equal(chosen.channels["power"], [195.0, np.nan])
    with pytest.raises(ReaderError, match=r"no field 'Other' to take as power; its records hold .*Hub Power"):
        read(data, ReadOptions(power_channel="Other"))


def test_a_field_of_another_kind_is_no_channel(fit: type) -> None:
    made = fit().developer().describe(1, "Vent", "m/s", 0x88)
    made.define(1, RECORD, [(253, "u32"), (7, "u16")], [(1, "f32", 0)])
    data = made.add(1, T0, 200, 9.5).file()
    assert_allclose(read(data, ReadOptions.with_columns({"air_speed": "Vent"})).channels["air_speed"], 9.5)
    with pytest.raises(ReaderError, match="'Vent' cannot be temperature: 'm/s' is not a unit of temperature"):
        read(data, ReadOptions.with_columns({"temperature": "Vent"}))


def test_one_record_in_two_messages_is_joined(fit: type) -> None:
    made = fit().define(1, RECORD, [(253, "u32"), (7, "u16")]).define(2, RECORD, [(253, "u32"), (3, "u8")])
    for k in range(3):
        made.add(1, T0 + k, 200 + k).add(2, T0 + k, 120)
    ride = read(made.file())
    assert_array_equal(ride.time, [0.0, 1.0, 2.0])
    assert_array_equal(ride.channels["power"], [200.0, 201.0, 202.0])
    assert_array_equal(ride.channels["heart_rate"], [2.0, 2.0, 2.0])


def test_two_records_of_one_moment_stay_two(fit: type) -> None:
    made = fit().define(1, RECORD, [(253, "u32"), (7, "u16")]).add(1, T0, 200).add(1, T0, 210)
    assert_array_equal(read(made.file()).time, [0.0, 0.0])


def test_chained_files_go_on_where_the_one_before_ended(fit: type) -> None:
    files = b""
    for part in range(2):
        made = fit().define(1, RECORD, [(253, "u32"), (5, "u32")])
        for k in range(5):
            made.add(1, T0 + 100 * part + k, 1000 * k)
        files += made.file()
    ride = read(files)
    assert_array_equal(ride.time, [0, 1, 2, 3, 4, 100, 101, 102, 103, 104])
    assert_allclose(ride.channels["distance"], [0, 10, 20, 30, 40, 40, 50, 60, 70, 80])
    assert ride.faults == ()


def test_laps_with_their_triggers(fit: type) -> None:
    made = fit().define(1, RECORD, [(253, "u32"), (7, "u16")])
    for k in range(30):
        made.add(1, T0 + k, 200)
    made.define(2, LAP, [(253, "u32"), (2, "u32"), (7, "u32"), (24, "enum")])
    made.add(2, T0 + 10, T0, 10_250, 0).add(2, T0 + 20, T0 + 10, 10_000, 2).add(2, T0 + 29, T0 + 20, 9_000, 7)
    assert read(made.file()).laps == (
        LapMark(0.0, 10.25, LapTrigger.MANUAL),
        LapMark(10.0, 20.0, LapTrigger.DISTANCE),
        LapMark(20.0, 29.0, LapTrigger.SESSION_END),
    )


def test_timer_events_are_pauses(fit: type) -> None:
    made = fit().define(1, RECORD, [(253, "u32"), (7, "u16")])
    made.define(2, EVENT, [(253, "u32"), (0, "enum"), (1, "enum"), (3, "u32")])
    made.add(2, T0, 0, 0, 0).add(1, T0, 200).add(1, T0 + 1, 200).add(2, T0 + 2, 0, 4, 1)
    made.add(2, T0 + 40, 0, 0, 1).add(1, T0 + 41, 200).add(2, T0 + 42, 0, 4, 0)
    (fault,) = read(made.file()).faults
    assert (fault.kind, fault.start, fault.end) == (FaultKind.AUTO_PAUSE, 2.0, 40.0)
    assert fault.cause == "Auto-pause stopped the recording for 38 s"


@pytest.mark.parametrize(
    ("sensors", "note"),
    [
        ((123, 120), SPEED_FROM_SENSOR),
        ((121,), SPEED_FROM_SENSOR),
        ((120, 122), NO_SPEED_SENSOR),
        ((11,), ""),
        ((), ""),
    ],
)
def test_sensors_tell_where_speed_comes_from(fit: type, sensors: tuple[int, ...], note: str) -> None:
    made = fit().define(1, RECORD, [(253, "u32"), (6, "u16")]).add(1, T0, 9000)
    made.define(2, DEVICE, [(0, "u8"), (1, "u8")])
    for k, sensor in enumerate(sensors):
        made.add(2, k + 1, sensor)
    assert read(made.file()).notes.get("speed", "") == note


@pytest.mark.parametrize(
    ("fields", "values", "told"),
    [
        ([(43, "u8"), (44, "u8")], (150, 0xFF), "Only the left leg reports torque effectiveness"),
        ([(45, "u8"), (46, "u8")], (0xFF, 40), "Only the right leg reports pedal smoothness"),
        ([(30, "u8")], (0x80 | 50,), "exactly 50 %"),
        ([(30, "u8")], (0x80,), "100 % left"),
        ([(30, "u8")], (0x80 | 100,), "100 % right"),
    ],
)
def test_one_sided_power_is_told(
    fit: type, fields: list[tuple[int, str]], values: tuple[int, ...], told: str
) -> None:
    made = fit().define(1, RECORD, [(253, "u32"), (7, "u16"), *fields])
    for k in range(100):
        made.add(1, T0 + k, 200, *values)
    (fault,) = read(made.file()).faults
    assert fault.kind is FaultKind.ONE_SIDED_POWER
    assert told in fault.cause


def test_two_sided_power_is_not(fit: type) -> None:
    made = fit().define(1, RECORD, [(253, "u32"), (7, "u16"), (30, "u8"), (43, "u8"), (44, "u8")])
    for k in range(100):
        made.add(1, T0 + k, 200, 0x80 | (48 + k % 4), 140, 150)
    assert read(made.file()).faults == ()


def test_a_checksum_error_is_a_fault_and_the_ride_is_read(ride_file: bytes) -> None:
    sound = read(ride_file)
    ride = read(ride_file[:-2] + b"\0\0")
    assert kinds(ride) == [FaultKind.FILE_DAMAGED]
    assert_array_equal(ride.channels["power"], sound.channels["power"])


def test_whatever_is_left_of_a_file_is_read(ride_file: bytes) -> None:
    seen = set()
    for length in range(1, len(ride_file)):
        try:
            ride = read(ride_file[:length])
        except ReaderError:
            continue
        assert FaultKind.FILE_DAMAGED in kinds(ride)
        seen.add(ride.time.size)
    assert seen == set(range(1, 11))


def test_no_record_is_one_message(fit: type) -> None:
    with pytest.raises(ReaderError, match="no ride records in this FIT file"):
        read(fit().define(2, LAP, [(253, "u32"), (2, "u32")]).add(2, T0, T0).file())
    with pytest.raises(ReaderError, match="no record of this FIT file has a time"):
        read(fit().define(1, RECORD, [(7, "u16")]).add(1, 200).file())


def test_records_without_a_time_are_left_out_and_told(fit: type) -> None:
    made = fit().define(1, RECORD, [(253, "u32"), (7, "u16")])
    ride = read(
        made.add(1, T0, 200).add(1, 0xFFFFFFFF, 201).add(1, T0 + 2, 202).add(1, T0 + 10**8, 203).file()
    )
    assert_array_equal(ride.time, [0.0, 2.0])
    assert "2 of 4 records have no time or an impossible one" in ride.faults[0].cause


def test_the_watch_may_stop_the_reading(ride_file: bytes) -> None:
    class Impatient:
        def step(self, done: int, total: int) -> None:
            raise Cancelled("stopped on request")

    with pytest.raises(Cancelled, match="stopped on request"):
        read_fit(io.BytesIO(ride_file), ReadOptions(), Impatient())


def test_the_circumference_of_the_head_unit_is_noted(ride_file: bytes) -> None:
    ride = read(ride_file, ReadOptions(wheel_circumference=2.096))
    assert ride.notes["wheel_circumference"] == "2.096 m as set in the head unit"
    assert_array_equal(ride.channels["speed"], read(ride_file).channels["speed"])
