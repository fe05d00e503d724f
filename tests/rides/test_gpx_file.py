from __future__ import annotations

import datetime as dt
import io

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from ridercda.errors import ReaderError
from ridercda.rides.format import ReadOptions
from ridercda.rides.gpx_file import READER, read_gpx
from ridercda.rides.ride import FaultKind, Ride
from ridercda.watch import NO_WATCH

HEAD = """<?xml version="1.0"?><gpx version="1.1" xmlns="http://example.org/gpx" xmlns:e="http://example.org/e">
<metadata><time>2026-05-09T06:00:00Z</time></metadata><wpt lat="1" lon="2"><ele>3</ele></wpt><trk><name>Out</name>"""
EXTENSIONS = (
    "<extensions><power>210</power><e:TrackPointExtension><e:hr>120</e:hr><e:cad>90</e:cad><e:atemp>20</e:atemp>"
    "<e:speed>10.5</e:speed></e:TrackPointExtension></extensions>"
)


def track(*points: str) -> str:
    return HEAD + "<trkseg>" + "".join(points) + "</trkseg></trk></gpx>"


def point(time: str, extensions: str = EXTENSIONS) -> str:
    return f'<trkpt lat="45.0" lon="-90.0"><ele>250</ele><time>{time}</time>{extensions}</trkpt>'


def read(text: str, options: ReadOptions | None = None) -> Ride:
    return read_gpx(io.BytesIO(text.encode()), options or ReadOptions(), NO_WATCH)


def test_values_come_in_si_whatever_the_namespace() -> None:
    ride = read(track(point("2026-05-09T09:00:00+02:00"), point("2026-05-09T09:00:01.5+02:00")))
    assert_array_equal(ride.time, [0.0, 1.5])
    assert_allclose(ride.channels["latitude"], np.pi / 4)
    assert_allclose(ride.channels["longitude"], -np.pi / 2)
    assert_allclose(ride.channels["altitude"], 250.0)
    assert_allclose(ride.channels["power"], 210.0)
    assert_allclose(ride.channels["heart_rate"], 2.0)
    assert_allclose(ride.channels["cadence"], 1.5)
    assert_allclose(ride.channels["temperature"], 293.15)
    assert_allclose(ride.channels["speed"], 10.5)
    assert ride.start == dt.datetime(2026, 5, 9, 7, tzinfo=dt.UTC)
    assert ride.start is not None
    assert ride.start.utcoffset() == dt.timedelta(hours=2)


def test_power_as_other_devices_write_it() -> None:
    other = "<extensions><e:PowerInWatts>180</e:PowerInWatts></extensions>"
    assert_allclose(read(track(point("2026-05-09T09:00:00Z", other))).channels["power"], 180.0)


def test_a_moment_without_an_offset_has_none() -> None:
    start = read(track(point("2026-05-09T09:00:00"))).start
    assert start == dt.datetime(2026, 5, 9, 9)


def test_a_course_without_times_is_no_ride() -> None:
    text = track('<trkpt lat="45.0" lon="-90.0"><ele>250</ele></trkpt>')
    with pytest.raises(ReaderError, match="is it a course or a workout rather than a ride"):
        read(text)


def test_no_point_is_one_message() -> None:
    with pytest.raises(ReaderError, match="no track points in this GPX file"):
        read(HEAD + "</trk></gpx>")


def test_a_file_that_breaks_off_keeps_its_points() -> None:
    whole = track(*(point(f"2026-05-09T09:00:{k:02d}Z") for k in range(20)))
    ride = read(whole[: whole.index("09:00:12Z")])
    assert ride.time.size == 12
    assert [fault.kind for fault in ride.faults] == [FaultKind.FILE_DAMAGED]


def test_entities_and_outside_files_are_refused() -> None:
    outside = '<?xml version="1.0"?><!DOCTYPE gpx [<!ENTITY f SYSTEM "file:///etc/hostname">]><gpx><trk>&f;</trk></gpx>'
    with pytest.raises(ReaderError, match="declares a document type or entities"):
        read(outside)


def test_it_is_told_by_its_root() -> None:
    assert READER.sniff(track().encode())
    assert READER.sniff(b'<?xml version="1.0"?>\n<!-- made by hand -->\n<gpx version="1.1">')
    assert READER.sniff(track().encode("utf-16"))
    assert not READER.sniff(b"<kml></kml>")


def test_utf_16_is_read() -> None:
    text = track(point("2026-05-09T09:00:00Z")).replace(
        '<?xml version="1.0"?>', '<?xml version="1.0" encoding="UTF-16"?>'
    )
    ride = read_gpx(io.BytesIO(text.encode("utf-16")), ReadOptions(), NO_WATCH)
    assert_allclose(ride.channels["power"], 210.0)
