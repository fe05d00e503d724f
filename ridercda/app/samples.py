"""The sample sessions that come with the program; one is copied to the user's folder before it is opened."""

from __future__ import annotations

import shutil
from dataclasses import dataclass
from pathlib import Path

import platformdirs
from PySide6.QtCore import QCoreApplication

import ridercda
from ridercda.errors import SessionError
from ridercda.session.document import Session
from ridercda.session.store import FILE_NAME, load_session


def _tr(text: str) -> str:
    return QCoreApplication.translate("Samples", text)


@dataclass(frozen=True, slots=True)
class Sample:
    """An invented test day."""

    folder: Path
    session: Session

    @property
    def name(self) -> str:
        """What the day is called."""
        return self.session.name

    @property
    def about(self) -> str:
        """What was ridden, in a few words."""
        session = self.session
        words = {
            "": "",
            "loop": _tr("loop"),
            "out-and-back": _tr("out and back"),
            "track": _tr("indoor track"),
            "road": _tr("road"),
        }
        place = words[session.venue.kind.value if session.venue else ""]
        facts = _tr("{} setups, {} runs").format(len(session.setups), len(session.runs))
        return f"{place} · {facts}" if place else facts

    @property
    def id(self) -> str:
        """Name of its folder."""
        return self.folder.name


def samples_root() -> Path | None:
    """Return where the samples are: in the installed package, else beside it in the source tree."""
    package = Path(ridercda.__file__).parent
    for root in (package / "sample_sessions", package.parent / "sample_sessions"):
        if root.is_dir():
            return root
    return None


def samples() -> tuple[Sample, ...]:
    """Return the samples that come with the program, in the order of their folders."""
    root = samples_root()
    if root is None:
        return ()
    found = []
    for path in sorted(root.glob(f"*/{FILE_NAME}")):
        try:
            found.append(Sample(path.parent, load_session(path).session))
        except SessionError:
            continue
    return tuple(found)


def user_folder() -> Path:
    """Return where the user's sessions are kept unless another place is chosen."""
    return Path(platformdirs.user_documents_dir()) / "RiderCdA"


def copy_sample(sample: Sample, into: Path | None = None) -> Path:
    """Copy a sample to the user's folder and return the copy; an earlier copy is kept and a new one numbered."""
    root = (into or user_folder()) / "samples"
    folder, number = root / sample.id, 1
    while folder.exists():
        number += 1
        folder = root / f"{sample.id}-{number}"
    shutil.copytree(sample.folder, folder)
    return folder
