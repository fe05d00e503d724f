"""Whatever the bytes: a ride, or one message; never another exception."""

from __future__ import annotations

import gzip
from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from ridercda.errors import ReaderError
from ridercda.rides.format import ReadOptions
from ridercda.rides.reader import read_bytes
from ridercda.rides.repair import repair

GPX = (
    "<?xml version='1.0'?><gpx xmlns='http://e.org/g'><trk><trkseg>"
    + "".join(
        f"<trkpt lat='{45 + 1e-4 * k}' lon='7'><ele>{k}</ele><time>2026-05-09T09:00:{k:02d}Z</time>"
        f"<extensions><power>{200 + k}</power></extensions></trkpt>"
        for k in range(8)
    )
    + "</trkseg></trk></gpx>"
)
TCX = (
    "<?xml version='1.0'?><TrainingCenterDatabase><Lap StartTime='2026-05-09T09:00:00Z'><Track>"
    + "".join(
        f"<Trackpoint><Time>2026-05-09T09:00:{k:02d}Z</Time><DistanceMeters>{9 * k}</DistanceMeters>"
        f"<HeartRateBpm><Value>140</Value></HeartRateBpm><Watts>{200 + k}</Watts></Trackpoint>"
        for k in range(8)
    )
    + "</Track></Lap></TrainingCenterDatabase>"
)
CSV = "time;power;speed [km/h];lap\n" + "".join(f"{k};{200 + k};36,{k};{k // 4}\n" for k in range(12))


@pytest.fixture(params=["fit", "gpx", "tcx", "csv", "fit.gz"])
def sound(request: pytest.FixtureRequest, ride_file: bytes) -> tuple[str, bytes]:
    content = {
        "fit": ride_file,
        "gpx": GPX.encode(),
        "tcx": TCX.encode(),
        "csv": CSV.encode(),
        "fit.gz": gzip.compress(ride_file, mtime=0),
    }[request.param]
    return f"ride.{request.param}", content


def ride_or_message(name: str, data: bytes) -> None:
    try:
        ride = read_bytes(data, name, ReadOptions())
    except ReaderError as error:
        message = str(error)
    else:
        message = ""
    if message:
        assert 10 < len(message) < 1500
        return
    assert ride.time.size > 0
    assert np.isfinite(ride.time).all()
    mended = repair(ride)
    assert (np.diff(mended.time) > 0).all()


Mangle = Callable[[bytes], bytes]


@settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(data=st.data())
def test_flipped_cut_and_inserted_bytes(sound: tuple[str, bytes], data: st.DataObject) -> None:
    name, content = sound
    broken = bytearray(content)
    for _ in range(data.draw(st.integers(0, 6))):
        broken[data.draw(st.integers(0, len(broken) - 1))] = data.draw(st.integers(0, 255))
    if data.draw(st.booleans()):
        at = data.draw(st.integers(0, len(broken)))
        broken[at:at] = data.draw(st.binary(max_size=20))
    end = data.draw(st.integers(0, len(broken)) | st.just(len(broken)))
    ride_or_message(name, bytes(broken[:end]))


@settings(max_examples=100, deadline=None)
@given(st.binary(max_size=300), st.sampled_from(["a.fit", "a.tcx", "a.gpx", "a.csv", "a.gz", "a"]))
def test_any_bytes_under_any_name(data: bytes, name: str) -> None:
    ride_or_message(name, data)


@settings(max_examples=100, deadline=None)
@given(st.text(alphabet="time,power;\t\n0123456789.:-Tspeed[]\"'#eE∞", max_size=200))
def test_any_text_below_a_header(text: str) -> None:
    ride_or_message("a.csv", f"time,power\n{text}".encode())
