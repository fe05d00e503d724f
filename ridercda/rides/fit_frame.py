"""The frame around FIT messages: headers, chained parts, checksums, and what is left of a damaged file.

Taken care of before decoding, so that a file whose header or end is damaged still gives what it holds, and
because a checksum in a Python loop costs more than all the rest of reading a ride.
"""

from __future__ import annotations

import struct
from dataclasses import dataclass
from functools import cache

import numpy as np
import numpy.typing as npt

from ridercda.errors import ReaderError

_MAGIC = b".FIT"
_SHORT_HEADER = 12  # bytes, without a checksum of its own
_POLYNOMIAL = (
    0xA001  # CRC-16 with x^16 + x^15 + x^2 + 1, bits reflected, as the FIT protocol uses it (from memory)
)

Table = npt.NDArray[np.uint16]


@dataclass(frozen=True, slots=True)
class FitPart:
    """One of the FIT files chained in a stream.

    Parameters
    ----------
    messages : bytes
        What lies between header and checksum.
    damage : str
        What is wrong with it, as a clause; empty for a sound part.
    """

    messages: bytes
    damage: str

    def sound_frame(self) -> bytes:
        """Return the part in a plain frame that any decoder takes; the checksum is left zero."""
        header = struct.pack("<BBHI4s", _SHORT_HEADER, 0x20, 0, len(self.messages), _MAGIC)
        return header + self.messages + b"\0\0"


def is_fit(head: bytes) -> bool:
    """Whether the first bytes are a FIT header."""
    return len(head) >= _SHORT_HEADER and head[8:12] == _MAGIC and head[0] >= _SHORT_HEADER


def split_parts(data: bytes) -> tuple[FitPart, ...]:
    """Return the FIT files chained in `data`, at least one.

    Raises
    ------
    ReaderError
        If there is no FIT header at the start, or nothing after it.
    """
    if not is_fit(data):
        raise ReaderError("the file does not start with a FIT header; it is damaged or not a FIT file")
    parts: list[FitPart] = []
    at = 0
    while is_fit(data[at : at + _SHORT_HEADER]):
        begin = at + data[at]
        (size,) = struct.unpack_from("<I", data, at + 4)
        left = len(data) - begin
        if size == 0 and left > 2:
            # A unit that lost power never went back to fill in the size.
            parts.append(FitPart(data[begin:], "the recording was not closed: its header gives no length"))
            return tuple(parts)
        if size + 2 > left:
            missing = size + 2 - max(left, 0)
            messages = data[begin : begin + size]
            parts.append(FitPart(messages, f"the file ends {missing} bytes early"))
            return _with_something(parts)
        end = begin + size
        (stored,) = struct.unpack_from("<H", data, end)
        matches = stored == crc16(data[at:end])
        parts.append(FitPart(data[begin:end], "" if matches else "its checksum does not match its content"))
        at = end + 2
    if at < len(data):
        extra = f"{len(data) - at} bytes after its end are not FIT"
        last = parts[-1]
        parts[-1] = FitPart(last.messages, f"{last.damage}; {extra}" if last.damage else extra)
    return _with_something(parts)


def _with_something(parts: list[FitPart]) -> tuple[FitPart, ...]:
    if not any(part.messages for part in parts):
        raise ReaderError("the FIT file ends after its header; nothing was recorded in it")
    return tuple(parts)


def crc16(data: bytes) -> int:
    """Return the CRC-16 of the FIT protocol.

    Notes
    -----
    A CRC is linear over bits: the data are cut into equal rows whose checksums run side by side, one byte of
    each row at a time, and are then joined by the operator that passes a checksum over a row of zeros.
    """
    count = len(data)
    width = max(1, int(count**0.5))
    rows = -(-count // width)
    # Zeros in front change nothing while the checksum is zero.
    padded = np.zeros(rows * width, np.uint8)
    if count:
        padded[-count:] = np.frombuffer(data, np.uint8)
    grid = padded.reshape(rows, width)
    table = _byte_table()
    sums = np.zeros(rows, np.uint16)
    for column in range(width):
        sums = (sums >> 8) ^ table[(sums ^ grid[:, column]) & 0xFF]
    low, high = _over_zeros(width)
    total = 0
    for row in sums.tolist():
        total = int(low[total & 0xFF]) ^ int(high[total >> 8]) ^ row
    return total


@cache
def _byte_table() -> Table:
    values = np.arange(256, dtype=np.uint16)
    for _ in range(8):
        values = np.where(values & 1, (values >> 1) ^ np.uint16(_POLYNOMIAL), values >> 1).astype(np.uint16)
    return values


def _over_zeros(count: int) -> tuple[Table, Table]:
    """Return tables, for the low and the high byte of a checksum, of its state `count` zero bytes later."""
    table = _byte_table()
    low = np.arange(256, dtype=np.uint16)
    high = (low << 8).astype(np.uint16)
    for _ in range(count):
        low = (low >> 8) ^ table[low & 0xFF]
        high = (high >> 8) ^ table[high & 0xFF]
    return low, high
