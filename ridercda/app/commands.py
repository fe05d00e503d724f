"""The one undo command: it swaps whole sessions, so undo is right by construction."""

from __future__ import annotations

import zlib
from typing import TYPE_CHECKING

from PySide6.QtGui import QUndoCommand

from ridercda.session.document import Session

if TYPE_CHECKING:
    from ridercda.app.document import SessionDocument


class EditSession(QUndoCommand):
    """From the session as it stands to the session after one pure edit."""

    def __init__(self, document: SessionDocument, text: str, after: Session, merge_key: str = "") -> None:
        super().__init__(text)
        self._document, self._before, self._after = document, document.session, after
        self._merge_key = merge_key

    def redo(self) -> None:
        """Show the session after the edit."""
        self._document.replace(self._after)

    def undo(self) -> None:
        """Show the session before the edit."""
        self._document.replace(self._before)

    def id(self) -> int:
        """Return a number that steps of one gesture share; -1 where a step stands for itself."""
        return zlib.crc32(self._merge_key.encode()) & 0x7FFFFFFF if self._merge_key else -1

    def mergeWith(self, other: QUndoCommand) -> bool:
        """Take over the end of a later step of the same gesture."""
        if not isinstance(other, EditSession) or other._merge_key != self._merge_key:
            return False
        self._after = other._after
        if self._after == self._before:
            self.setObsolete(True)
        return True
