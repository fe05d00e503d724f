"""The questions about files that need a dialog."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject
from PySide6.QtWidgets import QFileDialog, QMessageBox

from ridercda.app.desk import Desk
from ridercda.app.files import RIDE_SUFFIXES, SessionFiles
from ridercda.app.samples import user_folder

if TYPE_CHECKING:
    from ridercda.app.window import MainWindow


class Questions(QObject):
    """Asks, and hands the answer on."""

    def __init__(self, window: MainWindow, desk: Desk, files: SessionFiles) -> None:
        super().__init__(window)
        self._window, self._desk, self._files = window, desk, files

    def open(self) -> None:
        """Ask which session to open."""
        name, _ = QFileDialog.getOpenFileName(
            self._window, self.tr("Open session"), str(user_folder()), self.tr("Sessions (session.toml)")
        )
        if name:
            self._window.open_session(Path(name))

    def rides(self) -> None:
        """Ask which ride files to add."""
        patterns = " ".join(f"*{suffix}" for suffix in RIDE_SUFFIXES)
        kinds = self.tr("Ride files ({});;All files (*)").format(patterns)
        names, _ = QFileDialog.getOpenFileNames(
            self._window, self.tr("Add ride files"), str(Path.home()), kinds
        )
        self._files.add_rides(map(Path, names))

    def save(self) -> bool:
        """Save, asking for a place the first time."""
        return self._files.save() if self._files.has_place else self.save_as()

    def save_as(self) -> bool:
        """Ask for a folder and save there."""
        user_folder().mkdir(parents=True, exist_ok=True)
        wish = str(user_folder() / (self._desk.session.name or "session"))
        name, _ = QFileDialog.getSaveFileName(self._window, self.tr("Save session as a folder"), wish)
        return bool(name) and self._files.save_as(Path(name))

    def may_leave(self) -> bool:
        """Return whether the open session may be left: saved, or given up on request."""
        if self._desk.document.undo_stack.isClean():
            return True
        buttons = QMessageBox.StandardButton
        answer = QMessageBox.question(
            self._window,
            self.tr("Save changes?"),
            self.tr("“{}” has changes that are not saved.").format(self._desk.session.name),
            buttons.Save | buttons.Discard | buttons.Cancel,
        )
        if answer == buttons.Save:
            return self.save()
        if answer == buttons.Discard:
            self._window.autosave.forget()
            return True
        return False
