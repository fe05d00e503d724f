"""What is not saved yet is kept aside every few seconds, and found again after a crash."""

from __future__ import annotations

import contextlib
import json
import os
import shutil
import threading
import uuid
from dataclasses import dataclass
from pathlib import Path

import platformdirs
from PySide6.QtCore import QObject, QTimer

from ridercda.app.document import SessionDocument
from ridercda.errors import SessionError
from ridercda.session.document import Session
from ridercda.session.save import text_of_new
from ridercda.session.store import FILE_NAME, load_session

EVERY = 2000  # ms after the first change that is not kept yet
_ORIGIN = "origin.json"


def kept_root() -> Path:
    """Return where unsaved work is kept."""
    return Path(platformdirs.user_state_dir("RiderCdA", appauthor=False)) / "unsaved"


@dataclass(frozen=True, slots=True)
class Kept:
    """Work of an earlier start that was not saved."""

    place: Path
    session: Session
    folder: Path | None  # where it belongs


class Autosave(QObject):
    """Follows the document; writes whole files only."""

    def __init__(
        self, document: SessionDocument, root: Path | None = None, parent: QObject | None = None
    ) -> None:
        super().__init__(parent)
        self._document = document
        self._root = root or kept_root()
        self._place: Path | None = None
        self._thread: threading.Thread | None = None
        self._timer = QTimer(self, singleShot=True, interval=EVERY)
        self._timer.timeout.connect(self.keep)
        document.session_changed.connect(self._on_session_changed)
        document.session_opened.connect(self.forget)
        document.undo_stack.cleanChanged.connect(self._on_clean_changed)

    def _on_session_changed(self) -> None:
        if not self._timer.isActive():
            self._timer.start()

    def _on_clean_changed(self, clean: bool) -> None:
        if clean:
            self.forget()

    def keep(self) -> None:
        """Keep the session aside, if it is not saved."""
        self._timer.stop()
        if self._document.undo_stack.isClean():
            return
        if self._place is None:
            self._place = self._root / uuid.uuid4().hex
            self._place.mkdir(parents=True, exist_ok=True)
            origin = {"folder": str(self._document.folder or ""), "process": os.getpid()}
            _write_whole(self._place / _ORIGIN, json.dumps(origin))
        self._finish()
        self._thread = threading.Thread(
            target=_keep, args=(self._place / FILE_NAME, self._document.session), daemon=True
        )
        self._thread.start()

    def _finish(self) -> None:
        """Wait until what is being kept is on disk."""
        if self._thread is not None:
            self._thread.join()
            self._thread = None

    def forget(self) -> None:
        """Drop what is kept: it is saved, or given up."""
        self._timer.stop()
        self._finish()
        if self._place is not None:
            shutil.rmtree(self._place, ignore_errors=True)
            self._place = None

    def adopt(self, kept: Kept) -> None:
        """Go on with work of an earlier start, in its place."""
        self.forget()
        self._place = kept.place
        kept.place.mkdir(parents=True, exist_ok=True)
        origin = {"folder": str(kept.folder or ""), "process": os.getpid()}
        _write_whole(kept.place / _ORIGIN, json.dumps(origin))


def unsaved_work(root: Path | None = None) -> tuple[Kept, ...]:
    """Return what earlier starts left unsaved, the newest first; what a running program keeps is its own."""
    root = root or kept_root()
    found = []
    for origin in root.glob(f"*/{_ORIGIN}"):
        try:
            about = json.loads(origin.read_text(encoding="utf-8"))
            session = load_session(origin.parent).session
        except (OSError, ValueError, SessionError):
            continue
        if _is_running(int(about.get("process", 0))):
            continue
        folder = Path(about["folder"]) if about.get("folder") else None
        found.append((origin.stat().st_mtime, Kept(origin.parent, session, folder)))
    return tuple(kept for _, kept in sorted(found, key=lambda each: -each[0]))


def drop(kept: Kept) -> None:
    """Give up work of an earlier start."""
    shutil.rmtree(kept.place, ignore_errors=True)


def _is_running(process: int) -> bool:
    if process <= 0 or process == os.getpid():
        return process == os.getpid()
    if os.name != "posix":
        return False
    try:
        os.kill(process, 0)
    except ProcessLookupError:
        return False
    except PermissionError:
        return True
    return True


def _keep(path: Path, session: Session) -> None:
    """Write a session aside; in a thread, because turning one into text takes a tenth of a second."""
    with contextlib.suppress(OSError):  # a full disk must not take the window down; the next time may do
        _write_whole(path, text_of_new(session))


def _write_whole(path: Path, text: str) -> None:
    """Write a file so that it is there whole or not at all."""
    fresh = path.with_name(path.name + ".new")
    with fresh.open("w", encoding="utf-8") as file:
        file.write(text)
        file.flush()
        os.fsync(file.fileno())
    fresh.replace(path)
