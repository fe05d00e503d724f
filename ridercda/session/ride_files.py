"""The ride files of a session, known by content: changed and missing ones are noticed and found again."""

from __future__ import annotations

import hashlib
from collections.abc import Iterator
from dataclasses import dataclass
from enum import StrEnum
from pathlib import Path

from ridercda.errors import SessionError
from ridercda.session.document import CourseEntry, RideEntry, Session

_CHUNK = 1 << 20


class FileState(StrEnum):
    """How a file stands to what the session knows of it."""

    GOOD = "good"
    NEW = "new"  # the session has no hash of it yet
    CHANGED = "changed"
    MISSING = "missing"


@dataclass(frozen=True, slots=True)
class RideFile:
    """A ride's file as it is on disk now."""

    ride: str
    path: Path
    state: FileState
    sha256: str  # empty where the file is missing


def file_hash(path: Path) -> str:
    """Return the SHA-256 of a file's bytes, in hexadecimal."""
    digest = hashlib.sha256()
    with path.open("rb") as file:
        while chunk := file.read(_CHUNK):
            digest.update(chunk)
    return digest.hexdigest()


def file_of(folder: Path, entry: RideEntry | CourseEntry) -> Path:
    """Return where the file of a ride or course is.

    Raises
    ------
    SessionError
        If it is not there.
    """
    path = folder / entry.file
    if not path.is_file():
        table = "ride" if isinstance(entry, RideEntry) else "course"
        raise SessionError(
            f"there is no file {entry.file!r} in {folder}; put it there or mend the name",
            key=f"{table}[{entry.id}].file",
        )
    return path


def check_files(folder: Path, session: Session) -> tuple[RideFile, ...]:
    """Return how each ride's file stands to the hash in the session."""
    return tuple(_checked(folder, entry) for entry in session.rides)


def _checked(folder: Path, entry: RideEntry) -> RideFile:
    path = folder / entry.file
    if not path.is_file():
        return RideFile(entry.id, path, FileState.MISSING, "")
    sha256 = file_hash(path)
    if not entry.sha256:
        return RideFile(entry.id, path, FileState.NEW, sha256)
    state = FileState.GOOD if sha256 == entry.sha256.lower() else FileState.CHANGED
    return RideFile(entry.id, path, state, sha256)


def locate(entry: RideEntry, search_folder: Path) -> Path | None:
    """Return a file with the content of a ride, in a folder or below it; None if there is none.

    Files of the same name are tried first. A ride whose content is not known yet is found by name alone.
    """
    name = Path(entry.file).name
    files = sorted(_files(search_folder), key=lambda path: (path.name != name, str(path)))
    if not entry.sha256:
        return next((path for path in files if path.name == name), None)
    return next((path for path in files if _has_hash(path, entry.sha256.lower())), None)


def _files(folder: Path) -> Iterator[Path]:
    for path in folder.rglob("*"):
        if path.is_file():
            yield path


def _has_hash(path: Path, sha256: str) -> bool:
    try:
        return file_hash(path) == sha256
    except OSError:
        return False


def relative_name(folder: Path, path: Path) -> str:
    """Return how a session names a file: relative to its folder where it can be, with forward slashes."""
    try:
        return path.resolve().relative_to(folder.resolve()).as_posix()
    except ValueError:
        return path.resolve().as_posix()
