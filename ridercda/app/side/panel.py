"""The side of the window: the setups above, the details of what is picked below."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial

from PySide6.QtCore import QSize, Qt, Signal
from PySide6.QtGui import QPainter, QPaintEvent
from PySide6.QtWidgets import (
    QButtonGroup,
    QFrame,
    QHBoxLayout,
    QLabel,
    QPushButton,
    QScrollArea,
    QSizePolicy,
    QStackedWidget,
    QVBoxLayout,
    QWidget,
)

from ridercda.app.desk import Desk
from ridercda.app.run_edits import RunEdits
from ridercda.app.side.day_form import DayForm
from ridercda.app.side.run_facts import RunFacts
from ridercda.app.side.setup_form import SetupForm
from ridercda.app.side.setup_list import SetupList
from ridercda.app.theme import Type

RUN, SETUP, DAY = "run", "setup", "day"
WIDTH = 276


class SidePanel(QWidget):
    """Setups and details; it can be a column of the window or a drawer over it."""

    exclude_requested = Signal(object)

    def __init__(self, desk: Desk, runs: RunEdits, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self._is_drawer = False
        px = desk.theme.px
        self._heading = QLabel(self.tr("Setups"))
        self._heading.setProperty("quiet", True)
        add = QPushButton(self.tr("+ Setup"))
        add.clicked.connect(runs.add_setup)
        head = QHBoxLayout()
        head.addWidget(self._heading, 1)
        head.addWidget(add)
        self.setups = SetupList(desk)
        self.setups.edit_requested.connect(lambda _: self.show_details(SETUP))
        self.setups.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Preferred)
        self.facts = RunFacts(desk, runs)
        self.facts.exclude_requested.connect(self.exclude_requested)
        self._stack = QStackedWidget()
        self._tabs = QButtonGroup(self)
        line = QHBoxLayout()
        line.setSpacing(0)
        self._keys = {}
        pages = (
            (RUN, self.tr("Run"), self.facts),
            (SETUP, self.tr("Setup"), None),
            (DAY, self.tr("Test day"), None),
        )
        for place, (key, words, page) in enumerate(pages):
            button = QPushButton(words)
            button.setCheckable(True)
            button.setProperty("page", True)
            self._tabs.addButton(button, place)
            self._keys[key] = place
            line.addWidget(button)
            self._stack.addWidget(_scrolled(page, px(14)) if page else QWidget())
        self._unbuilt: dict[int, Callable[[], QWidget]] = {
            self._keys[SETUP]: partial(SetupForm, desk, runs),
            self._keys[DAY]: partial(DayForm, desk),
        }
        line.addStretch(1)
        self._tabs.idClicked.connect(self._show_place)
        card = QFrame()
        card.setObjectName("card")
        inner = QVBoxLayout(card)
        inner.setContentsMargins(1, 1, 1, 1)
        inner.addWidget(self._stack)
        outer = QVBoxLayout(self)
        outer.setContentsMargins(0, 0, 0, 0)
        outer.setSpacing(px(6))
        outer.addLayout(head)
        outer.addWidget(self.setups)
        outer.addSpacing(px(4))
        outer.addLayout(line)
        card.setMinimumHeight(px(220))
        outer.addWidget(card, 1)
        self.show_details(RUN)
        desk.theme.changed.connect(self._on_theme_changed)
        desk.selection.changed.connect(self._on_selection_changed)
        self._seen = (desk.selection.run, desk.selection.setup)
        self._on_theme_changed()

    def show_details(self, key: str) -> None:
        """Show the details of the run, the setup or the day."""
        self._show_place(self._keys[key])

    def _show_place(self, place: int) -> None:
        if build := self._unbuilt.pop(
            place, None
        ):  # forms hold many fields, so they wait until they are wanted
            blank = self._stack.widget(place)
            self._stack.insertWidget(place, _scrolled(build(), self._desk.theme.px(14)))
            if blank is not None:
                self._stack.removeWidget(blank)
                blank.deleteLater()
        self._stack.setCurrentIndex(place)
        self._tabs.button(place).setChecked(True)

    def sizeHint(self) -> QSize:
        """Ask for the width a figure with its interval needs."""
        return QSize(self._desk.theme.px(WIDTH), self._desk.theme.px(400))

    def _on_theme_changed(self) -> None:
        margin = self._desk.theme.px(16) if self._is_drawer else 0
        self.setContentsMargins(0, 0, margin, 0)
        self.setFixedWidth(self._desk.theme.px(WIDTH) + margin)
        self._heading.setFont(self._desk.theme.font(Type.AXIS, strong=True))
        for button in (*self._tabs.buttons(), *self.findChildren(QPushButton)):
            button.setFont(self._desk.theme.font())

    def set_drawer(self, *, on: bool) -> None:
        """Lie over the page with an edge of its own, or beside it."""
        self._is_drawer = on
        self._on_theme_changed()

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw the drawer's ground and edge."""
        if self._is_drawer:
            painter = QPainter(self)
            painter.fillRect(self.rect(), self._desk.theme.colour("paper"))
            edge = self.rect().right()
            painter.fillRect(edge, 0, 1, self.height(), self._desk.theme.colour("axis"))
            painter.end()

    def _on_selection_changed(self) -> None:
        run, setup = self._desk.selection.run, self._desk.selection.setup
        if run and run != self._seen[0]:
            self.show_details(RUN)
        elif setup and setup != self._seen[1] and not run:
            self.show_details(SETUP)
        self._seen = (run, setup)


def _scrolled(widget: QWidget, margin: int) -> QScrollArea:
    area = QScrollArea()
    area.setWidgetResizable(True)
    area.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
    area.setFocusPolicy(Qt.FocusPolicy.NoFocus)
    inside = QWidget()
    layout = QVBoxLayout(inside)
    layout.setContentsMargins(margin, margin, margin, margin)
    layout.addWidget(widget)
    area.setWidget(inside)
    return area
