"""A small builder of FIT bytes, and a clean ride from a little physics of its own: no code of the package is used."""

from __future__ import annotations

import struct
from collections.abc import Callable
from pathlib import Path
from types import MappingProxyType

import numpy as np
import pytest

from ridercda.rides.ride import Ride

# Base types of the FIT protocol by a letter of our own: (identifier, struct code, size).
_BASE = {
    "enum": (0x00, "B"),
    "s8": (0x01, "b"),
    "u8": (0x02, "B"),
    "s16": (0x83, "h"),
    "u16": (0x84, "H"),
    "s32": (0x85, "i"),
    "u32": (0x86, "I"),
    "f32": (0x88, "f"),
    "string16": (0x07, "16s"),
    "bytes3": (0x0D, "3s"),
    "bytes16": (0x0D, "16s"),
}

RECORD, LAP, EVENT, DEVICE, ACTIVITY, FILE_ID, DEVELOPER_ID, FIELD_DESCRIPTION = (
    20,
    19,
    21,
    23,
    34,
    0,
    207,
    206,
)
T0 = 1_000_000_000  # seconds of the FIT epoch


def plain_crc(data: bytes) -> int:
    """CRC-16 bit by bit."""
    crc = 0
    for byte in data:
        crc ^= byte
        for _ in range(8):
            crc = (crc >> 1) ^ 0xA001 if crc & 1 else crc >> 1
    return crc


class FitBytes:
    """Definition and data messages one after another."""

    def __init__(self, endian: str = "<") -> None:
        self.endian = endian
        self.body = b""
        self._formats: dict[int, str] = {}

    def define(
        self,
        local: int,
        message: int,
        fields: list[tuple[int, str]],
        developer: list[tuple[int, str, int]] | None = None,
    ) -> FitBytes:
        """Add a definition: fields are (number, type), developer fields (number, type, developer index)."""
        header = 0x40 | (0x20 if developer else 0) | local
        order = 0 if self.endian == "<" else 1
        self.body += struct.pack("BBB", header, 0, order) + struct.pack(
            f"{self.endian}HB", message, len(fields)
        )
        codes = self.endian
        for number, kind in fields:
            identifier, code = _BASE[kind]
            self.body += struct.pack("BBB", number, struct.calcsize(code), identifier)
            codes += code
        if developer:
            self.body += struct.pack("B", len(developer))
            for number, kind, index in developer:
                _, code = _BASE[kind]
                self.body += struct.pack("BBB", number, struct.calcsize(code), index)
                codes += code
        self._formats[local] = codes
        return self

    def add(self, local: int, *values: int | float | bytes) -> FitBytes:
        """Add a data message."""
        self.body += struct.pack("B", local) + struct.pack(self._formats[local], *values)
        return self

    def add_compressed(self, local: int, seconds: int, *values: int | float | bytes) -> FitBytes:
        """Add a data message with a compressed timestamp: the lowest five bits of the time."""
        self.body += struct.pack("B", 0x80 | local << 5 | seconds & 0x1F)
        self.body += struct.pack(self._formats[local], *values)
        return self

    def describe(self, number: int, name: str, units: str, base: int, native: int = 0xFF) -> FitBytes:
        """Add a developer field of developer 0."""
        fields = [(0, "u8"), (1, "u8"), (2, "u8"), (3, "string16"), (8, "string16"), (15, "u8")]
        self.define(15, FIELD_DESCRIPTION, fields)
        return self.add(15, 0, number, base, name.encode(), units.encode(), native)

    def developer(self) -> FitBytes:
        """Add developer 0."""
        return self.define(14, DEVELOPER_ID, [(1, "bytes16"), (3, "u8")]).add(14, b"\1" * 16, 0)

    def file(self) -> bytes:
        """Return the whole file with header and checksum."""
        header = struct.pack("<BBHI4s", 14, 0x20, 2100, len(self.body), b".FIT")
        header += struct.pack("<H", plain_crc(header))
        return header + self.body + struct.pack("<H", plain_crc(header + self.body))


@pytest.fixture
def fit() -> type[FitBytes]:
    return FitBytes


@pytest.fixture
def ride_file(fit: type[FitBytes]) -> bytes:
    """A sound little FIT file: ten records with all the usual fields, a lap, an event."""
    made = fit().define(0, FILE_ID, [(0, "enum"), (1, "u16"), (2, "u16")]).add(0, 4, 255, 7)
    made.define(
        1, RECORD, [(253, "u32"), (7, "u16"), (6, "u16"), (5, "u32"), (0, "s32"), (1, "s32"), (2, "u16")]
    )
    for k in range(10):
        made.add(1, T0 + k, 200 + k, 10_000 + k, 1000 * k, 500_000_000 + 100 * k, 100_000_000, 2600 + k)
    made.define(2, LAP, [(253, "u32"), (2, "u32"), (7, "u32"), (24, "enum")]).add(2, T0 + 9, T0, 9000, 0)
    return made.file()


RideMaker = Callable[..., Ride]


def make_clean_ride(seconds: int = 3600, seed: int = 1, interval: int = 1) -> Ride:
    """Return a ride round a stadium of 2.9 km: power with coasting and one stop, a wheel, fixes, a barometer."""
    rng = np.random.default_rng(seed)
    per_second = 10
    dt = 1.0 / per_second
    n = seconds * per_second
    wander = np.zeros(n)
    kicks = rng.standard_normal(n) * np.sqrt(2.0 * dt / 8.0) * 25.0
    for k in range(1, n):
        wander[k] = wander[k - 1] * (1.0 - dt / 8.0) + kicks[k]
    clock = np.arange(n) * dt
    coasting = (clock % 300.0 > 280.0) & (clock % 300.0 < 288.0)
    braking = (clock > seconds / 2) & (clock < seconds / 2 + 30.0)
    target = np.where(
        coasting | braking, 0.0, np.maximum(230.0 + wander + 40.0 * np.sin(clock / 200.0), 60.0)
    )
    speed, way = np.zeros(n), np.zeros(n)
    v, x = 8.0, 0.0
    for k in range(n):
        slope = 0.01 * np.sin(2.0 * np.pi * x / 2900.0)
        force = target[k] / max(v, 2.0) - 0.18 * v * v - 85.0 * 9.81 * (slope + 0.004)
        v = max(0.0, v + dt * (force / 85.0 - (3.0 if braking[k] else 0.0)))
        x += v * dt
        speed[k], way[k] = v, x
    step = per_second * interval
    mean = speed.reshape(-1, step).mean(axis=1)
    power = target.reshape(-1, step).mean(axis=1)
    count = mean.size
    distance = way[step - 1 :: step]
    east, north, height = _stadium(distance)
    fixes = np.zeros((2, count))
    drift = rng.standard_normal((2, count)) * np.sqrt(2.0 / 40.0) * 1.5
    for k in range(1, count):
        fixes[:, k] = fixes[:, k - 1] * (1.0 - 1.0 / 40.0) + drift[:, k]
    fixes += 0.15 * rng.standard_normal((2, count))
    latitude = np.radians(50.0) + (north + fixes[1]) / 6_375_700.0
    longitude = np.radians(8.0) + (east + fixes[0]) / (6_390_700.0 * np.cos(np.radians(50.0)))
    pedalled = power > 0
    channels = {
        "power": np.round(power * (1.0 + 0.03 * rng.standard_normal(count))) * pedalled,
        "speed": np.round(np.maximum(mean + 0.02 * rng.standard_normal(count) * (mean > 0.5), 0.0), 3),
        "distance": np.round(distance - distance[0], 2),
        "latitude": latitude,
        "longitude": longitude,
        "altitude": 100.0 + np.round((height + 0.1 * rng.standard_normal(count)) / 0.2) * 0.2,
        "cadence": np.where(pedalled, 1.5 + 0.03 * rng.standard_normal(count), 0.0),
    }
    time = np.arange(count) * float(interval)
    return Ride(time=time, channels=MappingProxyType(channels), source="fit")


def _stadium(distance: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Two straights of 1000 m and two bends of 450 m; the slope of `make_clean_ride` integrated."""
    lap = distance % 2900.0
    radius = 450.0 / np.pi
    turn = np.clip(lap - 1000.0, 0.0, 450.0) / radius
    back = np.clip(lap - 1450.0, 0.0, 1000.0)
    home = np.clip(lap - 2450.0, 0.0, 450.0) / radius
    east = np.clip(lap, 0.0, 1000.0) - back + radius * np.sin(turn) - radius * np.sin(home)
    north = radius * (1.0 - np.cos(turn)) - radius * (1.0 - np.cos(home))
    height = -0.01 * 2900.0 / (2.0 * np.pi) * np.cos(2.0 * np.pi * distance / 2900.0)
    return east, north, height


@pytest.fixture(scope="session")
def clean_ride() -> Ride:
    """One clean hour at 1 Hz."""
    return make_clean_ride()


@pytest.fixture(scope="session")
def make_ride() -> RideMaker:
    return make_clean_ride


@pytest.fixture
def shared_rides() -> Path:
    """Ride files of real devices, kept beside the project and never in it."""
    folder = Path(__file__).resolve().parents[2].parent / "shared" / "rides"
    if not folder.is_dir():
        pytest.skip("no folder ../shared/rides with ride files of real devices")
    return folder
