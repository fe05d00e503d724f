"""A ride as a FIT file: the few messages an activity needs, after the published FIT protocol.

Field numbers, scales and base types are those of the protocol's profile (from memory); the tests read the
result with an independent decoder.
"""

from __future__ import annotations

import datetime as dt
import struct
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from ridercda.rides.ride import LapMark, LapTrigger, Ride

FloatArray = npt.NDArray[np.float64]

FIT_EPOCH = dt.datetime(1989, 12, 31, tzinfo=dt.UTC)
PROTOCOL_2_0 = 0x20
PROFILE_VERSION = 2132
DEVELOPMENT = 255  # the manufacturer number set aside for nobody
SEMICIRCLES_PER_RADIAN = 2**31 / np.pi


@dataclass(frozen=True, slots=True)
class _Type:
    """A FIT base type: its number, struct code and the value that means "none"."""

    number: int
    code: str
    nothing: int

    @property
    def size(self) -> int:
        return struct.calcsize(self.code)


ENUM = _Type(0x00, "B", 0xFF)
SINT8 = _Type(0x01, "b", 0x7F)
UINT8 = _Type(0x02, "B", 0xFF)
UINT16 = _Type(0x84, "H", 0xFFFF)
SINT32 = _Type(0x85, "i", 0x7FFFFFFF)
UINT32 = _Type(0x86, "I", 0xFFFFFFFF)
UINT32Z = _Type(0x8C, "I", 0)


@dataclass(frozen=True, slots=True)
class _Message:
    """A message type: its global number, and its fields as (number, base type)."""

    number: int
    fields: tuple[tuple[int, _Type], ...]


FILE_ID = _Message(0, ((0, ENUM), (1, UINT16), (2, UINT16), (3, UINT32Z), (4, UINT32)))
EVENT = _Message(21, ((253, UINT32), (0, ENUM), (1, ENUM)))
LAP = _Message(
    19,
    (
        (253, UINT32), (0, ENUM), (1, ENUM), (2, UINT32), (7, UINT32), (8, UINT32), (9, UINT32), (24, ENUM),
        (254, UINT16),
    ),
)  # fmt: skip
SESSION = _Message(
    18,
    (
        (253, UINT32), (0, ENUM), (1, ENUM), (2, UINT32), (5, ENUM), (7, UINT32), (8, UINT32), (9, UINT32),
        (25, UINT16), (26, UINT16),
    ),
)  # fmt: skip
ACTIVITY = _Message(
    34, ((253, UINT32), (0, UINT32), (1, UINT16), (2, ENUM), (3, ENUM), (4, ENUM), (5, UINT32))
)

# Channel -> field number, base type, scale, offset: stored = (value + offset) * scale.
_RECORD_FIELDS: dict[str, tuple[int, _Type, float, float]] = {
    "latitude": (0, SINT32, SEMICIRCLES_PER_RADIAN, 0.0),
    "longitude": (1, SINT32, SEMICIRCLES_PER_RADIAN, 0.0),
    "altitude": (2, UINT16, 5.0, 500.0),
    "heart_rate": (3, UINT8, 60.0, 0.0),
    "cadence": (4, UINT8, 60.0, 0.0),
    "distance": (5, UINT32, 100.0, 0.0),
    "speed": (6, UINT16, 1000.0, 0.0),
    "power": (7, UINT16, 1.0, 0.0),
    "temperature": (13, SINT8, 1.0, -273.15),
}

_TRIGGERS = {
    LapTrigger.MANUAL: 0,
    LapTrigger.TIME: 1,
    LapTrigger.DISTANCE: 2,
    LapTrigger.POSITION: 4,
    LapTrigger.SESSION_END: 7,
    LapTrigger.UNKNOWN: UINT8.nothing,
}


def fit_bytes(ride: Ride) -> bytes:
    """Return the ride as a FIT activity file.

    Parameters
    ----------
    ride : Ride
        With a start that knows its UTC offset. Values are stored to the resolution FIT has for them (speed
        1 mm/s, power 1 W, altitude 0.2 m, time 1 s); NaN becomes "no value". Channels FIT has no common
        field for (air speed, dynamic pressure, yaw) are left out.

    Raises
    ------
    ValueError
        If the ride has no start with an offset, or no records.
    """
    if ride.start is None or ride.start.utcoffset() is None:
        raise ValueError("a FIT file needs the moment of the first record, with its offset from UTC")
    if not ride.time.size:
        raise ValueError("a FIT file needs at least one record")
    start = round((ride.start - FIT_EPOCH).total_seconds())
    end = start + round(ride.duration)
    body = b"".join(_body(ride, start, end))
    header = struct.pack("<BBHI4s", 14, PROTOCOL_2_0, PROFILE_VERSION, len(body), b".FIT")
    header += struct.pack("<H", crc16(header))
    return header + body + struct.pack("<H", crc16(header + body))


def crc16(data: bytes) -> int:
    """Return the FIT checksum: CRC-16 with the reflected polynomial 0xA001, starting from 0."""
    crc = 0
    for byte in data:
        crc = _CRC_TABLE[(crc ^ byte) & 0xFF] ^ (crc >> 8)
    return crc


def _crc_table() -> tuple[int, ...]:
    table = []
    for value in range(256):
        crc = value
        for _ in range(8):
            crc = (crc >> 1) ^ (0xA001 if crc & 1 else 0)
        table.append(crc)
    return tuple(table)


_CRC_TABLE = _crc_table()


def _body(ride: Ride, start: int, end: int) -> Iterator[bytes]:
    yield _definition(0, FILE_ID) + _data(0, FILE_ID, 4, DEVELOPMENT, 0, 1, start)
    yield _definition(1, EVENT) + _data(1, EVENT, start, 0, 0)
    yield from _records(ride, start)
    yield _data(1, EVENT, end, 0, 4)
    laps = ride.laps or (LapMark(0.0, ride.duration, LapTrigger.SESSION_END),)
    yield _definition(3, LAP)
    for index, lap in enumerate(laps):
        elapsed = round(1000 * (lap.end - lap.start))
        yield _data(
            3, LAP, start + round(lap.end), 9, 1, start + round(lap.start), elapsed, elapsed,
            round(100 * _covered(ride, lap)), _TRIGGERS[lap.trigger], index,
        )  # fmt: skip
    elapsed = round(1000 * ride.duration)
    whole = LapMark(0.0, ride.duration)
    yield _definition(4, SESSION) + _data(
        4, SESSION, end, 8, 1, start, 2, elapsed, elapsed, round(100 * _covered(ride, whole)), 0, len(laps)
    )
    offset = ride.start.utcoffset() if ride.start else None
    local = end + round(offset.total_seconds()) if offset is not None else end
    yield _definition(5, ACTIVITY) + _data(5, ACTIVITY, end, elapsed, 1, 0, 26, 1, local)


def _covered(ride: Ride, lap: LapMark) -> float:
    if "distance" not in ride.channels:
        return 0.0
    at = np.interp([lap.start, lap.end], ride.time, ride.channels["distance"])
    return float(at[1] - at[0])


def _records(ride: Ride, start: int) -> Iterator[bytes]:
    names = [name for name in _RECORD_FIELDS if name in ride.channels]
    fields = tuple((_RECORD_FIELDS[name][0], _RECORD_FIELDS[name][1]) for name in names)
    message = _Message(20, ((253, UINT32), *fields))
    yield _definition(2, message)
    columns = [(start + np.round(ride.time)).astype(np.int64).tolist()]
    columns += [_stored(ride.channels[name], name) for name in names]
    pack = struct.Struct("<B" + "".join(t.code for _, t in message.fields)).pack
    for row in zip(*columns, strict=True):
        yield pack(2, *row)


def _stored(values: FloatArray, name: str) -> list[int]:
    _, base, scale, offset = _RECORD_FIELDS[name]
    whole = np.round((values + offset) * scale)
    least = 0 if base.code.isupper() else -(2 ** (8 * base.size - 1))
    missing = ~np.isfinite(whole) | (whole < least) | (whole >= base.nothing)
    stored: list[int] = np.where(missing, base.nothing, whole).astype(np.int64).tolist()
    return stored


def _definition(local: int, message: _Message) -> bytes:
    head = struct.pack("<BBBHB", 0x40 | local, 0, 0, message.number, len(message.fields))
    return head + b"".join(bytes((number, base.size, base.number)) for number, base in message.fields)


def _data(local: int, message: _Message, *values: int) -> bytes:
    return struct.pack("<B" + "".join(base.code for _, base in message.fields), local, *values)
