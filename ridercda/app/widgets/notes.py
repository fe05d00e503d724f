"""A quiet line that holds several messages: one line until it is opened."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtGui import QFontMetricsF, QResizeEvent
from PySide6.QtWidgets import QHBoxLayout, QLabel, QPushButton, QSizePolicy, QWidget

from ridercda.app.theme import Theme, Type


class Notes(QWidget):
    """Messages of caution; the first stands there, the others on request."""

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self._theme = theme
        self._messages: tuple[str, ...] = ()
        self._words = QLabel()
        self._words.setProperty("caution", True)
        self._words.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
        self._words.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self._more = QPushButton()
        self._more.setProperty("flush", True)
        self._more.setCheckable(True)
        self._more.toggled.connect(self._show)
        line = QHBoxLayout(self)
        line.setContentsMargins(0, 0, 0, 0)
        line.setSpacing(theme.px(12))
        line.addWidget(self._words, 1)
        line.addWidget(self._more, 0, Qt.AlignmentFlag.AlignTop)
        theme.changed.connect(self._show)

    def show_messages(self, messages: tuple[str, ...]) -> None:
        """Show other messages."""
        if messages != self._messages:
            self._messages = messages
            self._show()

    def _show(self) -> None:
        font = self._theme.font(Type.AXIS)
        self._words.setFont(font)
        self._more.setFont(font)
        opened = self._more.isChecked()
        self._words.setWordWrap(opened)
        text = "\n".join(self._messages) if opened else " ".join(self._messages)
        width = self._words.width()
        metrics = QFontMetricsF(font)
        cut = not opened and metrics.horizontalAdvance(text) > width
        self._words.setText(metrics.elidedText(text, Qt.TextElideMode.ElideRight, width) if cut else text)
        self._words.setAccessibleName("\n".join(self._messages))
        self._more.setText(self.tr("Less") if opened else self.tr("%n note(s)", "", len(self._messages)))
        self._more.setVisible(bool(self._messages) and (opened or cut or len(self._messages) > 1))

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Fit the line."""
        super().resizeEvent(event)
        if not self._more.isChecked():
            self._show()
