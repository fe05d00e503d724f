from __future__ import annotations

import os
from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_array_equal

from ridercda.rides import store
from ridercda.rides.format import ReadOptions
from ridercda.rides.reader import read_ride
from ridercda.rides.ride import Ride
from ridercda.rides.store import RideCache

OPTIONS = ReadOptions()


@pytest.fixture
def ride(ride_file: bytes, tmp_path: Path) -> Ride:
    path = tmp_path / "ride.fit"
    path.write_bytes(ride_file[:-40])  # damaged, so that there is a fault to keep
    return read_ride(path)


@pytest.fixture
def cache(tmp_path: Path) -> RideCache:
    return RideCache(tmp_path / "cache")


def entries(tmp_path: Path) -> list[Path]:
    return sorted((tmp_path / "cache" / "rides").iterdir())


def test_a_ride_comes_back_whole(ride: Ride, cache: RideCache) -> None:
    assert ride.faults
    assert cache.get(ride.sha256, OPTIONS) is None
    cache.put(ride.sha256, OPTIONS, ride)
    kept = cache.get(ride.sha256, OPTIONS)
    assert kept is not None
    assert_array_equal(kept.time, ride.time)
    assert list(kept.channels) == list(ride.channels)
    for name, values in ride.channels.items():
        assert_array_equal(kept.channels[name], values)
    for name in ("start", "laps", "source", "device", "sha256", "faults"):
        assert getattr(kept, name) == getattr(ride, name)
    assert dict(kept.notes) == dict(ride.notes)
    with pytest.raises(ValueError, match="read-only"):
        kept.time[0] = 1.0


def test_other_options_and_other_readers_are_other_rides(
    ride: Ride, cache: RideCache, monkeypatch: pytest.MonkeyPatch
) -> None:
    cache.put(ride.sha256, OPTIONS, ride)
    assert cache.get(ride.sha256, ReadOptions(power_channel="other")) is None
    monkeypatch.setattr(store, "PARSER_VERSION", store.PARSER_VERSION + 1)
    assert cache.get(ride.sha256, OPTIONS) is None


def test_any_damage_is_noticed_and_mended(ride: Ride, cache: RideCache, tmp_path: Path) -> None:
    cache.put(ride.sha256, OPTIONS, ride)
    (path,) = entries(tmp_path)
    sound = path.read_bytes()
    rng = np.random.default_rng(5)
    for _ in range(150):
        broken = bytearray(sound[: rng.integers(1, len(sound) + 1)])
        broken[rng.integers(len(broken))] ^= int(rng.integers(1, 256))
        path.write_bytes(bytes(broken))
        kept = cache.get(ride.sha256, OPTIONS)
        assert kept is None or np.array_equal(kept.channels["power"], ride.channels["power"])
    path.write_bytes(b"")
    assert cache.get(ride.sha256, OPTIONS) is None
    cache.put(ride.sha256, OPTIONS, ride)
    assert cache.get(ride.sha256, OPTIONS) is not None


def test_nothing_half_written_is_left(
    ride: Ride, cache: RideCache, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def fails(*_: object, **__: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(store.np, "savez", fails)
    cache.put(ride.sha256, OPTIONS, ride)
    assert entries(tmp_path) == []
    assert cache.get(ride.sha256, OPTIONS) is None


def test_a_folder_that_cannot_be_made_keeps_nothing(ride: Ride, tmp_path: Path) -> None:
    (tmp_path / "file").write_bytes(b"")
    cache = RideCache(tmp_path / "file")
    cache.put(ride.sha256, OPTIONS, ride)
    assert cache.get(ride.sha256, OPTIONS) is None


def test_the_rides_used_longest_ago_go_first(
    ride: Ride, cache: RideCache, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    many = [ReadOptions(power_channel=f"p{k}") for k in range(4)]
    for k, options in enumerate(many[:3]):
        cache.put(ride.sha256, options, ride)
        newest = max(entries(tmp_path), key=lambda path: path.stat().st_mtime_ns)
        os.utime(newest, (1000.0 + k, 1000.0 + k))
    size = entries(tmp_path)[0].stat().st_size
    cache.get(ride.sha256, many[0])  # used again: no longer the oldest
    monkeypatch.setattr(store, "LARGEST_CACHE", 2 * size)
    cache.put(ride.sha256, many[3], ride)
    assert [cache.get(ride.sha256, options) is not None for options in many] == [True, False, False, True]
