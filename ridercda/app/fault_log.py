"""Where our own faults are written down: one line for the user, the trace for whoever mends it."""

from __future__ import annotations

import contextlib
import datetime as dt
from pathlib import Path

import platformdirs


def noted(trace: str) -> Path:
    """Append a trace to the log and return where that is."""
    path = Path(platformdirs.user_log_dir("RiderCdA", appauthor=False)) / "faults.log"
    with contextlib.suppress(OSError):
        path.parent.mkdir(parents=True, exist_ok=True)
        with path.open("a", encoding="utf-8") as file:
            file.write(f"{dt.datetime.now(dt.UTC).isoformat(timespec='seconds')}\n{trace}\n")
    return path
