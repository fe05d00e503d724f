from __future__ import annotations

import gzip
import hashlib
from pathlib import Path

import pytest
from numpy.testing import assert_array_equal

from ridercda.errors import Cancelled, ReaderError
from ridercda.rides import packing
from ridercda.rides.delimited import UnknownColumns
from ridercda.rides.format import ReadOptions
from ridercda.rides.reader import READERS, read_ride, reader_for
from ridercda.rides.ride import FaultKind

TEXT = b"time,power,speed\n" + b"".join(b"%d,%d,10.5\n" % (k, 200 + k) for k in range(500))


@pytest.fixture
def text_file(tmp_path: Path) -> Path:
    path = tmp_path / "ride.csv"
    path.write_bytes(TEXT)
    return path


def test_the_hash_is_of_the_file_as_stored(text_file: Path, tmp_path: Path) -> None:
    assert read_ride(text_file).sha256 == hashlib.sha256(TEXT).hexdigest()
    packed = tmp_path / "ride.csv.gz"
    packed.write_bytes(gzip.compress(TEXT))
    ride = read_ride(packed)
    assert ride.sha256 == hashlib.sha256(packed.read_bytes()).hexdigest()
    assert_array_equal(ride.channels["power"], read_ride(text_file).channels["power"])


def test_gzip_of_every_kind(ride_file: bytes, tmp_path: Path) -> None:
    path = tmp_path / "morning.fit.gz"
    path.write_bytes(gzip.compress(ride_file))
    assert read_ride(path).source == "fit"


def test_gzip_members_in_a_row(tmp_path: Path) -> None:
    path = tmp_path / "ride.csv.gz"
    path.write_bytes(gzip.compress(TEXT[:1000]) + gzip.compress(TEXT[1000:]))
    assert read_ride(path).time.size == 500


def test_a_gzip_cut_short_gives_what_it_holds(tmp_path: Path) -> None:
    path = tmp_path / "ride.csv.gz"
    path.write_bytes(gzip.compress(TEXT)[:-200])
    ride = read_ride(path)
    assert 50 < ride.time.size < 500
    assert ride.faults[0].kind is FaultKind.FILE_DAMAGED
    assert "gzip around it ends early" in ride.faults[0].cause


def test_a_garbled_gzip_is_one_message(tmp_path: Path) -> None:
    path = tmp_path / "ride.csv.gz"
    path.write_bytes(b"\x1f\x8b" + bytes(range(100)))
    with pytest.raises(
        ReaderError, match=r"ride.csv.gz: this gzip is damaged; nothing in it can be unpacked"
    ):
        read_ride(path)


def test_a_file_larger_than_any_ride_is_refused(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(packing, "LARGEST_FILE", 10_000)
    path = tmp_path / "bomb.csv.gz"
    path.write_bytes(gzip.compress(b"0" * 1_000_000))
    with pytest.raises(ReaderError, match=r"larger than .* unpacked"):
        read_ride(path)


def test_content_goes_before_the_suffix(ride_file: bytes, tmp_path: Path) -> None:
    path = tmp_path / "ride.csv"
    path.write_bytes(ride_file)
    assert read_ride(path).source == "fit"


def test_the_suffix_counts_where_content_tells_nothing() -> None:
    assert reader_for(b"one column", "a.txt").name == "delimited text"
    assert reader_for(b"garbage", "a.FIT.gz").name == "FIT"


def test_an_unknown_kind_is_told_with_the_formats_read(tmp_path: Path) -> None:
    path = tmp_path / "notes.pdf"
    path.write_bytes(b"%PDF-1.7 \0\1\2")
    told = (
        r"notes.pdf: this is not a ride file .* FIT \(.fit\), TCX \(.tcx\), GPX \(.gpx\), "
        r"delimited text \(.csv, .txt, .tsv\), and a gzip"
    )
    with pytest.raises(ReaderError, match=told):
        read_ride(path)


@pytest.mark.parametrize(
    ("content", "told"),
    [
        (b"", "the file is empty"),
        (b" \n", "the file is empty"),
        (gzip.compress(b"", mtime=0), "the file is empty"),
    ],
)
def test_nothing_in_it(content: bytes, told: str, tmp_path: Path) -> None:
    path = tmp_path / "ride.fit"
    path.write_bytes(content)
    with pytest.raises(ReaderError, match=f"ride.fit: {told}"):
        read_ride(path)


def test_no_file_and_a_folder(tmp_path: Path) -> None:
    with pytest.raises(ReaderError, match=r"nowhere.fit: there is no such file"):
        read_ride(tmp_path / "nowhere.fit")
    with pytest.raises(ReaderError, match="this is a folder, not a ride file"):
        read_ride(tmp_path)


def test_an_error_keeps_what_it_knows_and_gains_the_path(tmp_path: Path) -> None:
    path = tmp_path / "ride.csv"
    path.write_bytes(b"Zeit,Watt\n0,200\n")
    with pytest.raises(UnknownColumns, match=r"ride.csv: no column holds the time") as caught:
        read_ride(path)
    assert caught.value.path == path
    assert caught.value.headers == ("Zeit", "Watt")


def test_the_watch_sees_the_whole_way(text_file: Path) -> None:
    class Noting:
        def __init__(self) -> None:
            self.seen: list[tuple[int, int]] = []

        def step(self, done: int, total: int) -> None:
            self.seen.append((done, total))

    watch = Noting()
    read_ride(text_file, watch=watch)
    assert watch.seen[-1][0] == watch.seen[-1][1]
    assert [done for done, _ in watch.seen] == sorted(done for done, _ in watch.seen)


def test_the_watch_may_stop_it(text_file: Path) -> None:
    class Impatient:
        def step(self, done: int, total: int) -> None:
            raise Cancelled("enough")

    with pytest.raises(Cancelled, match="enough"):
        read_ride(text_file, watch=Impatient())


def test_arrays_cannot_be_written_to(text_file: Path) -> None:
    ride = read_ride(text_file)
    with pytest.raises(ValueError, match="read-only"):
        ride.channels["power"][0] = 1.0


def test_options_are_hashable_and_equal_by_content() -> None:
    one = ReadOptions.with_columns({"power": "W", "time": "t"}, power_channel="x")
    other = ReadOptions.with_columns({"time": "t", "power": "W"}, power_channel="x")
    assert one == other
    assert hash(one) == hash(other)
    assert one != ReadOptions.with_columns({"time": "t"})


def test_readers_have_names_and_suffixes_of_their_own() -> None:
    suffixes = [suffix for reader in READERS for suffix in reader.suffixes]
    assert len(suffixes) == len(set(suffixes))
    assert all(suffix.startswith(".") and suffix == suffix.lower() for suffix in suffixes)
