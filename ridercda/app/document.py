"""The one truth of the window: the current session, its folder and its undo stack."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from PySide6.QtCore import QObject, Signal
from PySide6.QtGui import QUndoStack

from ridercda.app.commands import EditSession
from ridercda.errors import InputError
from ridercda.session.document import Session

EMPTY = Session(name="")


class SessionDocument(QObject):
    """Holds the session; every change comes through `edit` and leaves through `session_changed`."""

    session_changed = Signal(object)  # the new frozen Session
    session_opened = Signal()  # another session altogether: the folder, and with it the rides, may be new
    edit_refused = Signal(str)  # one sentence: why nothing was changed

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.session = EMPTY
        self.folder: Path | None = None
        self.undo_stack = QUndoStack(self)
        self._gesture = 0

    @property
    def is_open(self) -> bool:
        """Whether there is a session to work on."""
        return self.session is not EMPTY

    def open(self, session: Session, folder: Path | None) -> None:
        """Take another session; its history starts empty."""
        self.folder = folder
        self.session = session
        self.undo_stack.clear()
        self.session_opened.emit()
        self.session_changed.emit(session)

    def move_to(self, folder: Path) -> None:
        """Note where the session is kept from now on."""
        self.folder = folder

    def edit(self, text: str, change: Callable[[Session], Session], *, merge: str = "") -> bool:
        """Apply a pure edit as one undoable step.

        Parameters
        ----------
        text : str
            What the step is called in the Edit menu.
        change : callable
            From Session to Session; a refusal is told through `edit_refused` and changes nothing.
        merge : str
            Steps of one gesture with the same key count as one, e.g. the moves of a dragged edge.

        Returns
        -------
        bool
            Whether the session has changed.
        """
        try:
            after = change(self.session)
        except InputError as error:
            self.edit_refused.emit(str(error))
            return False
        if after == self.session:
            return False
        key = f"{self._gesture}:{merge}" if merge else ""
        self.undo_stack.push(EditSession(self, text, after, key))
        return True

    def end_gesture(self) -> None:
        """Let the next step stand for itself, even with the same merge key."""
        self._gesture += 1

    def replace(self, session: Session) -> None:
        """Show another state of the session; called by `EditSession` only."""
        self.session = session
        self.session_changed.emit(session)
