"""What a page is: it reads from the desk, refreshes itself while it is seen, and says what to do when it is empty.

A page is added by writing a module here and naming it in `ridercda.app.pages.PAGES`.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from PySide6.QtCore import Qt, QTimer, Signal
from PySide6.QtGui import QShowEvent
from PySide6.QtWidgets import QLabel, QPushButton, QScrollArea, QStackedLayout, QVBoxLayout, QWidget

from ridercda.app.desk import Desk
from ridercda.app.run_edits import RunEdits
from ridercda.app.theme import Theme, Type


class Page(QWidget):
    """A page of the window.

    Subclasses build their widgets into `content`, name in `__init__` the signals they follow besides the usual
    ones with `follow`, and show everything in `refresh`. `blank` decides between content and the empty page.
    """

    asked = Signal(str, object)  # an action's id and what it is about; the window knows how

    def __init__(self, desk: Desk, runs: RunEdits, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.desk, self.runs, self.theme = desk, runs, desk.theme
        self.content = QWidget()
        self._empty = EmptyPage(desk.theme)
        self._empty.asked.connect(lambda action: self.asked.emit(action, None))
        self._stack = QStackedLayout(self)
        self._stack.setContentsMargins(0, 0, 0, 0)
        self._scroll = QScrollArea()  # where a page is higher than the window
        self._scroll.setWidgetResizable(True)
        self._scroll.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self._scroll.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self._scroll.setWidget(self.content)
        self._stack.addWidget(self._scroll)
        self._stack.addWidget(self._empty)
        self._dirty = True
        self._soon = QTimer(self, singleShot=True, interval=0)
        self._soon.timeout.connect(self._on_soon)
        self.follow(
            desk.document.session_changed,
            desk.shelf.changed,
            desk.solving.changed,
            desk.selection.changed,
            desk.units.changed,
            desk.theme.changed,
        )

    def follow(self, *signals: object) -> None:
        """Refresh after each of these signals, once for all that come together."""
        for signal in signals:
            signal.connect(self._on_change)  # type: ignore[attr-defined]

    def blank(self) -> Blank | None:
        """Return what the page says instead of its content; None where there is something to show."""
        return None

    def refresh(self) -> None:
        """Show what holds now."""

    def _on_change(self, *_: object) -> None:
        self._dirty = True
        if self.isVisible():
            self._soon.start()

    def _on_soon(self) -> None:
        if self._dirty and self.isVisible():
            self.refresh_now()

    def catch_up(self) -> None:
        """Show what was missed while the page was not seen."""
        if self._dirty:
            self.refresh_now()

    def focus_first(self) -> None:
        """Put the keyboard where the work of this page begins."""
        if self._stack.currentWidget() is self._empty:
            self._empty.focus_button()
        else:
            self._first().setFocus()

    def _first(self) -> QWidget:
        return self.content

    def refresh_now(self) -> None:
        """Show what holds, at once."""
        self._dirty = False
        blank = self.blank()
        if blank is not None:
            self._empty.show_blank(blank)
            self._stack.setCurrentWidget(self._empty)
        else:
            self._stack.setCurrentWidget(self._scroll)
            self.refresh()

    def showEvent(self, event: QShowEvent) -> None:
        """Catch up with what was missed."""
        super().showEvent(event)
        if self._dirty:
            self._soon.start()  # not here: an exception inside a show event takes the process down


@dataclass(frozen=True, slots=True)
class Blank:
    """What an empty, busy or failed page says, and the one thing to do next."""

    title: str
    words: str
    action: str = ""  # id of the action its button asks for
    button: str = ""


class EmptyPage(QWidget):
    """A few words in the middle of the page."""

    asked = Signal(str)

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self._theme = theme
        self._action = ""
        self._title, self._words = QLabel(), QLabel()
        self._words.setProperty("quiet", True)
        self._button = QPushButton()
        self._button.setProperty("main", True)
        self._button.clicked.connect(lambda: self.asked.emit(self._action))
        layout = QVBoxLayout(self)
        layout.addStretch(2)
        for label in (self._title, self._words):
            label.setAlignment(Qt.AlignmentFlag.AlignHCenter)
            label.setWordWrap(True)
            layout.addWidget(label)
        layout.addSpacing(theme.px(12))
        layout.addWidget(self._button, 0, Qt.AlignmentFlag.AlignHCenter)
        layout.addStretch(3)
        theme.changed.connect(self._on_theme_changed)
        self._on_theme_changed()

    def _on_theme_changed(self) -> None:
        self._title.setFont(self._theme.font(Type.SENTENCE, strong=True))
        self._words.setFont(self._theme.font())
        self._button.setFont(self._theme.font(strong=True))

    def focus_button(self) -> None:
        """Put the keyboard on the button."""
        self._button.setFocus()

    def show_blank(self, blank: Blank) -> None:
        """Say something else."""
        self._title.setText(blank.title)
        self._words.setText(blank.words)
        self._action = blank.action
        self._button.setText(blank.button)
        self._button.setVisible(bool(blank.button))


@dataclass(frozen=True, slots=True)
class PageSpec:
    """A page in the order of work."""

    id: str
    title: Callable[[], str]  # translated when asked
    build: Callable[[Desk, RunEdits], Page]
