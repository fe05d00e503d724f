from __future__ import annotations

import hashlib
from pathlib import Path

import pytest

from ridercda.errors import SessionError
from ridercda.session.document import RideEntry, Session
from ridercda.session.ride_files import FileState, check_files, file_hash, file_of, locate, relative_name

BYTES = b"time,power\n0,200\n" * 100_000  # more than one chunk


def test_the_hash_is_that_of_the_bytes(tmp_path: Path) -> None:
    (tmp_path / "a").write_bytes(BYTES)
    assert file_hash(tmp_path / "a") == hashlib.sha256(BYTES).hexdigest()


def test_changed_and_missing_files_are_noticed(tmp_path: Path) -> None:
    (tmp_path / "rides").mkdir()
    for name in ("good", "new", "changed"):
        (tmp_path / "rides" / name).write_bytes(name.encode())
    hashes = {"good": hashlib.sha256(b"good").hexdigest().upper(), "changed": "0" * 64, "missing": "0" * 64}
    names = ("good", "new", "changed", "missing")
    session = Session("x", rides=tuple(RideEntry(n, f"rides/{n}", hashes.get(n, "")) for n in names))
    found = check_files(tmp_path, session)
    assert [file.state for file in found] == [FileState(n) for n in names]
    assert found[2].sha256 == hashlib.sha256(b"changed").hexdigest()
    assert found[3].sha256 == ""


def test_a_moved_file_is_found_by_its_content(tmp_path: Path) -> None:
    (tmp_path / "deep" / "er").mkdir(parents=True)
    (tmp_path / "am.csv").write_bytes(b"another ride of the same name")
    (tmp_path / "deep" / "er" / "renamed.csv").write_bytes(BYTES)
    entry = RideEntry("am", "rides/am.csv", hashlib.sha256(BYTES).hexdigest())
    assert locate(entry, tmp_path) == tmp_path / "deep" / "er" / "renamed.csv"
    assert locate(RideEntry("am", "rides/am.csv", "0" * 64), tmp_path) is None
    assert locate(RideEntry("am", "rides/am.csv"), tmp_path) == tmp_path / "am.csv"


def test_a_missing_file_is_one_clear_message(tmp_path: Path) -> None:
    with pytest.raises(SessionError, match=r"ride\[am\]\.file: there is no file 'rides/am\.csv' in"):
        file_of(tmp_path, RideEntry("am", "rides/am.csv"))
    (tmp_path / "x").write_bytes(b"")
    assert file_of(tmp_path, RideEntry("am", "x")) == tmp_path / "x"


def test_files_are_named_relative_to_the_folder_where_they_can_be(tmp_path: Path) -> None:
    assert relative_name(tmp_path, tmp_path / "rides" / "a.fit") == "rides/a.fit"
    assert relative_name(tmp_path / "day", tmp_path / "a.fit") == (tmp_path / "a.fit").resolve().as_posix()
