"""One line under the pages' names: what went wrong or was done, with what can be done about it; never a dialog."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QFrame, QHBoxLayout, QLabel, QPushButton, QSizePolicy, QToolButton, QWidget

from ridercda.app.theme import Theme
from ridercda.app.widgets.flags import set_flag


class Notice(QFrame):
    """A message that stays until it is dismissed, acted on or, if it is only news, has been there a while."""

    NEWS = 6000  # ms

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._theme = theme
        self.setObjectName("notice")
        self._words = QLabel()
        self._words.setWordWrap(True)
        self._words.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Preferred)
        self._buttons: list[QPushButton] = []
        close = QToolButton()
        close.setText("✕")
        close.setAccessibleName(self.tr("Dismiss"))
        close.clicked.connect(self.hide)
        self._line = QHBoxLayout(self)
        self._line.setContentsMargins(theme.px(12), theme.px(6), theme.px(6), theme.px(6))
        self._line.addWidget(self._words, 1)
        self._line.addWidget(close)
        self._timer = QTimer(self, singleShot=True, interval=self.NEWS)
        self._timer.timeout.connect(self.hide)
        self.hide()

    def show_trouble(self, words: str, *actions: tuple[str, Callable[[], None]]) -> None:
        """Say what went wrong."""
        self._show(words, actions, bad=True)
        self._timer.stop()

    def show_offer(self, words: str, *actions: tuple[str, Callable[[], None]]) -> None:
        """Say something that waits for an answer."""
        self._show(words, actions, bad=False)
        self._timer.stop()

    def show_news(self, words: str, *actions: tuple[str, Callable[[], None]]) -> None:
        """Say what was done; goes by itself."""
        self._show(words, actions, bad=False)
        self._timer.start()

    def _show(self, words: str, actions: tuple[tuple[str, Callable[[], None]], ...], *, bad: bool) -> None:
        set_flag(self, "bad", on=bad)
        self._words.setFont(self._theme.font())
        self._words.setText(words)
        self.setAccessibleName(words)
        for button in self._buttons:
            button.deleteLater()
        self._buttons = []
        for place, (label, act) in enumerate(actions):
            button = QPushButton(label)
            button.setFont(self._theme.font(strong=True))
            button.clicked.connect(self.hide)
            button.clicked.connect(act)
            self._line.insertWidget(1 + place, button)
            self._buttons.append(button)
        self.show()
