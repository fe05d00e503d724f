"""Where the trace of our own fault is kept."""

from __future__ import annotations

import datetime as dt
import sys
import tempfile
import traceback
from pathlib import Path

from ridercda import __version__


def keep_trace() -> Path:
    """Write the trace of the exception being handled to a file and return its path."""
    from platformdirs import user_log_path

    stamp = dt.datetime.now().astimezone().strftime("%Y%m%d-%H%M%S")
    text = f"ridercda {__version__}, Python {sys.version}\n\n{traceback.format_exc()}"
    for folder in (user_log_path("ridercda", appauthor=False), Path(tempfile.gettempdir())):
        try:
            folder.mkdir(parents=True, exist_ok=True)
            path = folder / f"fault-{stamp}.log"
            path.write_text(text, encoding="utf-8")
        except OSError:
            continue
        return path
    return Path("(no log could be written)")
