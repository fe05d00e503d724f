from __future__ import annotations

import datetime as dt
import io

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from ridercda.errors import ReaderError
from ridercda.rides.format import ReadOptions
from ridercda.rides.ride import FaultKind, LapMark, LapTrigger, Ride
from ridercda.rides.tcx_file import READER, read_tcx
from ridercda.watch import NO_WATCH

HEAD = """<?xml version="1.0" encoding="UTF-8"?>
<TrainingCenterDatabase xmlns="http://example.org/tcx/v2" xmlns:x="http://example.org/activity/v2">
<Activities><Activity Sport="Biking"><Id>2026-05-09T07:00:00Z</Id>"""
TAIL = """<Creator><Name>Invented unit 7</Name></Creator></Activity></Activities></TrainingCenterDatabase>"""


def point(second: int, watts: object = 200, *, bare: bool = False) -> str:
    extension = (
        ""
        if bare
        else f"<Extensions><x:TPX><x:Speed>9.5</x:Speed><x:Watts>{watts}</x:Watts></x:TPX></Extensions>"
    )
    return f"""<Trackpoint><Time>2026-05-09T07:00:{second:02d}.000Z</Time>
    <Position><LatitudeDegrees>45.0</LatitudeDegrees><LongitudeDegrees>-90.0</LongitudeDegrees></Position>
    <AltitudeMeters>120.5</AltitudeMeters><DistanceMeters>{1000 + 9.5 * second}</DistanceMeters>
    <HeartRateBpm><Value>150</Value></HeartRateBpm><Cadence>90</Cadence>{extension}</Trackpoint>"""


def lap(start: int, seconds: range, trigger: str = "Manual", total: float = 10.0) -> str:
    points = "".join(point(second) for second in seconds)
    return f"""<Lap StartTime="2026-05-09T07:00:{start:02d}Z"><TotalTimeSeconds>{total}</TotalTimeSeconds>
    <DistanceMeters>95</DistanceMeters><TriggerMethod>{trigger}</TriggerMethod><Track>{points}</Track></Lap>"""


def read(text: str, options: ReadOptions | None = None) -> Ride:
    return read_tcx(io.BytesIO(text.encode()), options or ReadOptions(), NO_WATCH)


def test_values_come_in_si_whatever_the_namespace() -> None:
    ride = read(HEAD + lap(0, range(5)) + TAIL)
    assert_array_equal(ride.time, np.arange(5.0))
    assert_allclose(ride.channels["latitude"], np.pi / 4)
    assert_allclose(ride.channels["longitude"], -np.pi / 2)
    assert_allclose(ride.channels["altitude"], 120.5)
    assert_allclose(ride.channels["distance"], 9.5 * np.arange(5))
    assert_allclose(ride.channels["heart_rate"], 2.5)
    assert_allclose(ride.channels["cadence"], 1.5)
    assert_allclose(ride.channels["speed"], 9.5)
    assert_allclose(ride.channels["power"], 200.0)
    assert ride.start == dt.datetime(2026, 5, 9, 7, tzinfo=dt.UTC)
    assert ride.device == "Invented unit 7"
    assert ride.source == "tcx"
    assert ride.faults == ()


def test_a_lap_ends_where_the_next_begins_pauses_included() -> None:
    ride = read(HEAD + lap(0, range(10), total=9.0) + lap(20, range(20, 30), "Distance") + TAIL)
    assert ride.laps == (LapMark(0.0, 20.0, LapTrigger.MANUAL), LapMark(20.0, 30.0, LapTrigger.DISTANCE))


def test_missing_and_unreadable_values_are_nan() -> None:
    text = HEAD + '<Lap StartTime="2026-05-09T07:00:00Z"><Track>'
    text += point(0) + point(1, bare=True) + point(2, "n/a") + "</Track></Lap>" + TAIL
    assert_array_equal(np.isnan(read(text).channels["power"]), [False, True, True])


def test_a_file_that_breaks_off_keeps_its_points() -> None:
    whole = HEAD + lap(0, range(10)) + TAIL
    ride = read(whole[: whole.index("07:00:06.000Z")])
    assert ride.time.size == 6
    (fault,) = ride.faults
    assert fault.kind is FaultKind.FILE_DAMAGED
    assert "breaks off at line" in fault.cause


def test_entities_are_refused() -> None:
    bomb = """<?xml version="1.0"?><!DOCTYPE t [<!ENTITY a "ha"><!ENTITY b "&a;&a;&a;&a;">]>
    <TrainingCenterDatabase><Id>&b;</Id></TrainingCenterDatabase>"""
    with pytest.raises(ReaderError, match=r"declares a document type or entities.*refused"):
        read(bomb)


def test_no_trackpoint_is_one_message() -> None:
    with pytest.raises(ReaderError, match="no trackpoints in this TCX file"):
        read(HEAD + TAIL)


def test_an_element_may_be_named_for_a_channel() -> None:
    text = (HEAD + lap(0, range(3)) + TAIL).replace("x:Watts", "x:MeterB")
    assert "power" not in read(text).channels
    assert_allclose(read(text, ReadOptions(power_channel="MeterB")).channels["power"], 200.0)
    with pytest.raises(ReaderError, match="no point has an element 'other' to take as power"):
        read(text, ReadOptions(power_channel="Other"))
    with pytest.raises(ReaderError, match="'powr' is not a channel"):
        read(text, ReadOptions.with_columns({"powr": "Watts"}))


def test_it_is_told_by_its_root() -> None:
    assert READER.sniff((HEAD + TAIL).encode())
    assert READER.sniff(b"\xef\xbb\xbf" + HEAD.encode())
    assert not READER.sniff(b'<?xml version="1.0"?><gpx version="1.1">')
    assert not READER.sniff(b"time,power\n0,200\n")
