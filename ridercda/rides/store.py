"""Parsed rides kept by content, so that a second open is immediate. A damaged entry is read anew."""

from __future__ import annotations

import contextlib
import datetime as dt
import hashlib
import json
import os
import tempfile
import zipfile
from dataclasses import asdict
from pathlib import Path
from types import MappingProxyType

import numpy as np

from ridercda import __version__
from ridercda.rides.format import ReadOptions
from ridercda.rides.ride import Fault, FaultKind, LapMark, LapTrigger, Ride

FORMAT = 1  # raised whenever a reader gives other arrays for the same bytes


class RideCache:
    """A folder of parsed rides, one file each, named by content, options and version."""

    def __init__(self, folder: Path) -> None:
        self._folder = folder

    def get(self, sha256: str, options: ReadOptions) -> Ride | None:
        """Return a kept ride, None where there is none or it is damaged."""
        path = self._path(sha256, options)
        try:
            with np.load(path, allow_pickle=False) as kept:
                about = json.loads(str(kept["about"]))
                channels = {name: kept[f"channel:{name}"] for name in about["channels"]}
                return Ride(
                    time=kept["time"],
                    channels=MappingProxyType(channels),
                    start=dt.datetime.fromisoformat(about["start"]) if about["start"] else None,
                    laps=tuple(LapMark(a, b, LapTrigger(c)) for a, b, c in about["laps"]),
                    source=about["source"],
                    device=about["device"],
                    sha256=about["sha256"],
                    faults=tuple(
                        Fault(**{**fault, "kind": FaultKind(fault["kind"]), "choices": tuple(fault["choices"])})
                        for fault in about["faults"]
                    ),
                    notes=MappingProxyType(about["notes"]),
                )
        except (OSError, ValueError, KeyError, TypeError, EOFError, zipfile.BadZipFile):
            return None

    def put(self, sha256: str, options: ReadOptions, ride: Ride) -> None:
        """Keep a ride; a folder that cannot be written keeps nothing."""
        about = {
            "channels": list(ride.channels),
            "start": ride.start.isoformat() if ride.start else "",
            "laps": [(lap.start, lap.end, lap.trigger.value) for lap in ride.laps],
            "source": ride.source,
            "device": ride.device,
            "sha256": ride.sha256,
            "faults": [asdict(fault) for fault in ride.faults],
            "notes": dict(ride.notes),
        }
        arrays = {f"channel:{name}": values for name, values in ride.channels.items()}
        path = self._path(sha256, options)
        with contextlib.suppress(OSError):
            path.parent.mkdir(parents=True, exist_ok=True)
            handle, name = tempfile.mkstemp(dir=path.parent, suffix=".part")
            try:
                with os.fdopen(handle, "wb") as file:
                    np.savez(file, about=np.array(json.dumps(about)), time=ride.time, **arrays)
                os.replace(name, path)
            except BaseException:
                with contextlib.suppress(OSError):
                    os.unlink(name)
                raise

    def _path(self, sha256: str, options: ReadOptions) -> Path:
        words = f"{FORMAT} {__version__} {options!r}"
        return self._folder / "rides" / f"{sha256}-{hashlib.sha256(words.encode()).hexdigest()[:16]}.npz"
