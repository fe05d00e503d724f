from __future__ import annotations

import struct

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from ridercda.errors import ReaderError
from ridercda.rides.fit_frame import crc16, is_fit, split_parts


def _bitwise(data: bytes) -> int:
    crc = 0
    for byte in data:
        crc ^= byte
        for _ in range(8):
            crc = (crc >> 1) ^ 0xA001 if crc & 1 else crc >> 1
    return crc


def test_checksum_has_the_published_check_value() -> None:
    # CRC-16/ARC of "123456789" in the common catalogues of CRC algorithms (from memory).
    assert crc16(b"123456789") == 0xBB3D


@settings(max_examples=60, deadline=None)
@given(st.binary(max_size=700))
def test_checksum_agrees_with_the_bitwise_definition(data: bytes) -> None:
    assert crc16(data) == _bitwise(data)


def test_a_sound_file_is_one_part(ride_file: bytes) -> None:
    (part,) = split_parts(ride_file)
    assert part.damage == ""
    assert part.messages == ride_file[14:-2]


def test_chained_files_are_told_apart(ride_file: bytes) -> None:
    assert [part.damage for part in split_parts(ride_file + ride_file + ride_file)] == ["", "", ""]


def test_a_flipped_byte_shows_in_the_checksum(ride_file: bytes) -> None:
    broken = bytearray(ride_file)
    broken[60] ^= 1
    assert split_parts(bytes(broken))[0].damage == "its checksum does not match its content"


def test_a_file_cut_short_keeps_what_there_is(ride_file: bytes) -> None:
    (part,) = split_parts(ride_file[:-50])
    assert part.damage == "the file ends 50 bytes early"
    assert part.messages == ride_file[14:-50]


def test_a_recording_that_was_not_closed_keeps_everything(ride_file: bytes) -> None:
    unclosed = ride_file[:4] + struct.pack("<I", 0) + ride_file[8:-2]
    (part,) = split_parts(unclosed)
    assert part.messages == ride_file[14:-2]
    assert "was not closed" in part.damage


def test_what_follows_the_end_is_told(ride_file: bytes) -> None:
    parts = split_parts(ride_file + b"rubbish")
    assert [part.damage for part in parts] == ["7 bytes after its end are not FIT"]


def test_no_header_is_refused() -> None:
    assert not is_fit(b"PK\3\4 not a FIT file")
    with pytest.raises(ReaderError, match="does not start with a FIT header"):
        split_parts(b"PK\3\4 not a FIT file")


def test_a_bare_header_is_refused(ride_file: bytes) -> None:
    with pytest.raises(ReaderError, match="ends after its header"):
        split_parts(ride_file[:14])
