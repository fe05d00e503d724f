"""Parsed rides kept by content, so that a second open is immediate. A damaged entry is read anew."""

from __future__ import annotations

import contextlib
import datetime as dt
import hashlib
import json
import os
import tempfile
import zipfile
import zlib
from dataclasses import asdict
from pathlib import Path
from types import MappingProxyType
from typing import Any

import numpy as np

from ridercda.rides.format import ReadOptions
from ridercda.rides.reader import PARSER_VERSION
from ridercda.rides.ride import Fault, FaultKind, LapMark, LapTrigger, Ride

LARGEST_CACHE = 512 * 2**20  # beyond it the rides used longest ago are dropped [bytes]
_DAMAGED = (
    OSError,
    ValueError,
    KeyError,
    TypeError,
    EOFError,
    NotImplementedError,
    zipfile.BadZipFile,
    zlib.error,
)


class RideCache:
    """A folder of parsed rides, one file each, named by content, options and version of the readers.

    Parameters
    ----------
    folder : Path
        The rides go into ``rides`` below it; it is made when the first ride is kept.
    """

    def __init__(self, folder: Path) -> None:
        self._folder = folder / "rides"

    def get(self, sha256: str, options: ReadOptions) -> Ride | None:
        """Return a kept ride, None where there is none or it is damaged.

        Parameters
        ----------
        sha256 : str
            Of the file's bytes as stored.
        options : ReadOptions
            It was read with.
        """
        path = self._path(sha256, options)
        try:
            # Opened here: the library forgets to close a file it cannot make sense of.
            with path.open("rb") as file, np.load(file, allow_pickle=False) as kept:
                ride = _from_arrays(kept)
        except _DAMAGED:
            return None
        if ride.sha256 != sha256:
            return None
        with contextlib.suppress(OSError):
            os.utime(path)
        return ride

    def put(self, sha256: str, options: ReadOptions, ride: Ride) -> None:
        """Keep a ride; a folder that cannot be written keeps nothing. Whole or not at all, whoever else writes."""
        path = self._path(sha256, options)
        with contextlib.suppress(OSError):
            self._folder.mkdir(parents=True, exist_ok=True)
            handle, name = tempfile.mkstemp(dir=self._folder, suffix=".part")
            try:
                with os.fdopen(handle, "wb") as file:
                    arrays: dict[str, Any] = {
                        f"channel:{each}": values for each, values in ride.channels.items()
                    }
                    np.savez(file, about=np.array(_about(ride)), time=ride.time, **arrays)
                os.replace(name, path)
            except BaseException:
                with contextlib.suppress(OSError):
                    os.unlink(name)
                raise
            self._drop_oldest(path)

    def _path(self, sha256: str, options: ReadOptions) -> Path:
        words = f"{PARSER_VERSION} {options!r}"
        return self._folder / f"{sha256}-{hashlib.sha256(words.encode()).hexdigest()[:16]}.npz"

    def _drop_oldest(self, newest: Path) -> None:
        entries = [(each, each.stat()) for each in self._folder.glob("*.npz")]
        total = sum(stat.st_size for _, stat in entries)
        for each, stat in sorted(entries, key=lambda entry: entry[1].st_mtime):
            if total <= LARGEST_CACHE:
                return
            if each != newest:
                each.unlink(missing_ok=True)
                total -= stat.st_size


def _about(ride: Ride) -> str:
    return json.dumps(
        {
            "channels": list(ride.channels),
            "start": ride.start.isoformat() if ride.start else "",
            "laps": [(lap.start, lap.end, lap.trigger.value) for lap in ride.laps],
            "source": ride.source,
            "device": ride.device,
            "sha256": ride.sha256,
            "faults": [asdict(fault) for fault in ride.faults],
            "notes": dict(ride.notes),
        }
    )


def _from_arrays(kept: Any) -> Ride:
    about = json.loads(str(kept["about"]))
    return Ride(
        time=kept["time"],
        channels=MappingProxyType({name: kept[f"channel:{name}"] for name in about["channels"]}),
        start=dt.datetime.fromisoformat(about["start"]) if about["start"] else None,
        laps=tuple(LapMark(start, end, LapTrigger(trigger)) for start, end, trigger in about["laps"]),
        source=about["source"],
        device=about["device"],
        sha256=about["sha256"],
        faults=tuple(
            Fault(**{**fault, "kind": FaultKind(fault["kind"]), "choices": tuple(fault["choices"])})
            for fault in about["faults"]
        ),
        notes=MappingProxyType(about["notes"]),
    )
