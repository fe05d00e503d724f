"""The list of runs behind the strip's picture: what keyboard focus and screen readers hold on to."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QFocusEvent, QKeyEvent, QPaintEvent
from PySide6.QtWidgets import QFrame, QListWidget, QListWidgetItem, QWidget


class RunList(QListWidget):
    """Runs as a list; it is never seen, only focused and read out."""

    key_pressed = Signal(object)  # QKeyEvent
    focus_changed = Signal()

    def __init__(self, parent: QWidget) -> None:
        super().__init__(parent)
        self.setAccessibleName(self.tr("Runs of the day"))
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setVerticalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setAttribute(Qt.WidgetAttribute.WA_TransparentForMouseEvents)
        self.setAutoFillBackground(False)
        self.viewport().setAutoFillBackground(False)
        self._entries: tuple[tuple[str, str], ...] = ()

    def show_runs(self, entries: tuple[tuple[str, str], ...], current: str) -> None:
        """Show other runs: id and what is read out."""
        if [key for key, _ in entries] != [key for key, _ in self._entries]:
            self.clear()
            for key, words in entries:
                item = QListWidgetItem(words)
                item.setData(Qt.ItemDataRole.UserRole, key)
                self.addItem(item)
        elif entries != self._entries:
            for row, (_, words) in enumerate(entries):
                self.item(row).setText(words)
        self._entries = entries
        self.show_current(current)

    def show_current(self, key: str) -> None:
        """Show which run is picked."""
        for row, (each, _) in enumerate(self._entries):
            if each == key:
                self.setCurrentRow(row)
                return
        self.setCurrentRow(-1)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Hand every key to the strip."""
        event.accept()
        self.key_pressed.emit(event)

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw nothing: the strip draws itself."""

    def focusInEvent(self, event: QFocusEvent) -> None:
        """Tell the strip."""
        super().focusInEvent(event)
        self.focus_changed.emit()

    def focusOutEvent(self, event: QFocusEvent) -> None:
        """Tell the strip."""
        super().focusOutEvent(event)
        self.focus_changed.emit()
