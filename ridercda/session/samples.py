"""Where the sample sessions that ship with the program lie."""

from __future__ import annotations

from pathlib import Path


def samples_folder() -> Path | None:
    """Return the folder of the samples, in an installed package or a source tree; None where there is none."""
    package = Path(__file__).resolve().parent.parent
    for folder in (package / "sample_sessions", package.parent / "sample_sessions"):
        if folder.is_dir():
            return folder
    return None
