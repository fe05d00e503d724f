"""A session on disk: loaded, saved and created, always whole."""

from __future__ import annotations

import os
import shutil
import tempfile
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from dataclasses import dataclass
from pathlib import Path

from ridercda.errors import SessionError
from ridercda.session.document import Session
from ridercda.session.load import session_from_text
from ridercda.session.save import text_of_edited, text_of_new
from ridercda.session.validate import validate

FILE_NAME = "session.toml"
PREVIOUS = ".previous"
"""Added to the name of the file for the copy that the last save kept."""


@dataclass(frozen=True, slots=True)
class StoredSession:
    """A session with the text of its file as it stands on disk."""

    path: Path
    text: str
    session: Session

    @property
    def folder(self) -> Path:
        """The session folder, which the file names within are relative to."""
        return self.path.parent


def session_path(given: Path) -> Path:
    """Return the session file that a folder or a file name stands for.

    Raises
    ------
    SessionError
        If there is none.
    """
    path = given / FILE_NAME if given.is_dir() else given
    if not path.exists():
        what = f"the folder holds no {FILE_NAME}" if given.is_dir() else "there is no such file or folder"
        raise SessionError(f"{what}; name a session folder or its {FILE_NAME}", path=given)
    return path.absolute()


def load_session(path: Path) -> StoredSession:
    """Load a session from its folder or file.

    Raises
    ------
    SessionError
        If there is none or anything in it cannot be used.
    """
    path = session_path(path)
    text = _read(path)
    return StoredSession(path, text, session_from_text(text, path, path.parent.name))


def save_session(stored: StoredSession, session: Session) -> StoredSession:
    """Save an edited session over the one that was loaded.

    Only what was edited changes in the text; the file is whole at every moment, and the one before is kept
    beside it as ``session.toml.previous``.

    Raises
    ------
    SessionError
        If the session is not valid, the file was changed by someone else meanwhile or cannot be written.
    """
    validate(session, stored.path)
    text = text_of_edited(stored.text, stored.session, session, stored.path, stored.folder.name)
    if stored.path.exists():
        if _read(stored.path) != stored.text:
            raise SessionError(
                "was changed by another program since it was loaded; load it again", path=stored.path
            )
        if text == stored.text:
            return StoredSession(stored.path, text, session)
        _write(stored.path.with_name(stored.path.name + PREVIOUS), stored.text)
    _write(stored.path, text)
    return StoredSession(stored.path, text, session)


def create_session(folder: Path, session: Session) -> StoredSession:
    """Write a new session into a folder, which is made where there is none.

    Raises
    ------
    SessionError
        If the session is not valid, the folder holds one already or cannot be written.
    """
    path = folder.absolute() / FILE_NAME
    validate(session, path)
    if path.exists():
        raise SessionError("is there already; choose another folder or open it", path=path)
    text = text_of_new(session)
    with _told(path, "written"):
        path.parent.mkdir(parents=True, exist_ok=True)
    _write(path, text)
    return StoredSession(path, text, session)


def _read(path: Path) -> str:
    with _told(path, "read"):
        content = path.read_bytes()
    try:
        return content.decode("utf-8")
    except UnicodeDecodeError as error:
        raise SessionError(f"is not UTF-8 text (byte {error.start}); save it as UTF-8", path=path) from error


def _write(path: Path, text: str) -> None:
    """Replace a file in one step: at every moment either the old or the new one is there, whole."""
    path = path.resolve()
    with _told(path, "written"):
        handle, name = tempfile.mkstemp(prefix=f".{path.name}-", dir=path.parent)
        try:
            with os.fdopen(handle, "wb") as file:
                file.write(text.encode("utf-8"))
                file.flush()
                os.fsync(file.fileno())
            if path.exists():
                shutil.copymode(path, name)
            else:
                os.chmod(name, 0o666 & ~_umask())
            os.replace(name, path)
        except BaseException:
            with suppress(OSError):
                os.unlink(name)
            raise
        if os.name == "posix":  # the rename itself is safe only once the folder is
            folder = os.open(path.parent, os.O_RDONLY)
            try:
                os.fsync(folder)
            finally:
                os.close(folder)


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask


@contextmanager
def _told(path: Path, what: str) -> Iterator[None]:
    """Turn an error of the file system into one clear message."""
    try:
        yield
    except OSError as error:
        reason = error.strerror or str(error)
        raise SessionError(
            f"cannot be {what}: {reason}; check the disk and who may use it", path=path
        ) from error
