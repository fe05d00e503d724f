"""What is seen while a session is open: strip, page names, page, and the side as a column or a drawer."""

from __future__ import annotations

from PySide6.QtCore import QEvent, QObject, QRect, Qt, Signal
from PySide6.QtGui import QKeyEvent, QResizeEvent, QShowEvent
from PySide6.QtWidgets import (
    QButtonGroup,
    QFrame,
    QHBoxLayout,
    QPushButton,
    QStackedWidget,
    QVBoxLayout,
    QWidget,
)

from ridercda.app.desk import Desk
from ridercda.app.pages import PAGES
from ridercda.app.pages.page import Page
from ridercda.app.run_edits import RunEdits
from ridercda.app.side.panel import SidePanel
from ridercda.app.strip.day_strip import DayStrip
from ridercda.app.theme import Type
from ridercda.app.widgets.card import rule

DRAWER_BELOW = 1100  # px at size 1; narrower, the side is a drawer


class Workbench(QWidget):
    """Lays out the parts; it decides nothing."""

    page_changed = Signal(str)
    asked = Signal(str, object)  # what a page asks for: an action's id and what it is about
    side_changed = Signal()

    def __init__(self, desk: Desk, runs: RunEdits, notice: QWidget) -> None:
        super().__init__()
        self._desk, self._runs = desk, runs
        px = desk.theme.px
        self.strip = DayStrip(desk, runs)
        strip_card = QFrame()
        strip_card.setObjectName("card")
        inner = QVBoxLayout(strip_card)
        inner.setContentsMargins(1, 1, 1, 1)
        inner.addWidget(self.strip)
        self.side = SidePanel(desk, runs)
        self.pages: dict[str, Page] = {}  # those that were shown
        self._stack = QStackedWidget()
        self._names = QButtonGroup(self)
        line = QHBoxLayout()
        line.setSpacing(px(4))
        self._drawer_button = QPushButton(self.tr("Setups"))
        self._drawer_button.setProperty("framed", True)
        self._drawer_button.setCheckable(True)
        self._drawer_button.clicked.connect(self.toggle_side)
        line.addWidget(self._drawer_button)
        for place, spec in enumerate(PAGES):
            button = QPushButton(spec.title())
            button.setCheckable(True)
            button.setProperty("page", True)
            self._names.addButton(button, place)
            line.addWidget(button)
            self._stack.addWidget(QWidget())
        line.addStretch(1)
        self._names.idClicked.connect(lambda place: self.show_page(PAGES[place].id))
        self._side_wanted = True
        self._body = QWidget()
        self._row = QHBoxLayout(self._body)
        self._row.setContentsMargins(0, 0, 0, 0)
        self._row.setSpacing(px(16))
        self._row.addWidget(self.side)
        self._row.addWidget(self._stack, 1)
        outer = QVBoxLayout(self)
        outer.setContentsMargins(0, 0, 0, 0)
        outer.setSpacing(px(4))
        outer.addWidget(strip_card)
        tabs = QVBoxLayout()
        tabs.setSpacing(0)
        tabs.addLayout(line)
        tabs.addWidget(rule())
        outer.addLayout(tabs)
        outer.addWidget(notice)
        outer.addSpacing(px(6))
        outer.addWidget(self._body, 1)
        self._drawer_open = False
        self._is_drawer = False
        desk.theme.changed.connect(self._on_theme_changed)
        self._on_theme_changed()

    def _on_theme_changed(self) -> None:
        for button in self._names.buttons():
            button.setFont(self._desk.theme.font(Type.PAGE, strong=button.isChecked()))
        self._drawer_button.setFont(self._desk.theme.font())
        self._lay_out_side()

    @property
    def page(self) -> str:
        """The page that is seen."""
        return PAGES[self._stack.currentIndex()].id

    def show_page(self, page_id: str) -> None:
        """Show a page."""
        place = next(k for k, spec in enumerate(PAGES) if spec.id == page_id)
        if page_id not in self.pages:
            self._build_page(place)
        self.pages[page_id].catch_up()
        self._stack.setCurrentIndex(place)
        self._names.button(place).setChecked(True)
        for button in self._names.buttons():
            button.setFont(self._desk.theme.font(Type.PAGE, strong=button.isChecked()))
        self.page_changed.emit(page_id)

    def _build_page(self, place: int) -> None:
        page = PAGES[place].build(self._desk, self._runs)
        page.asked.connect(self.asked)
        self.pages[PAGES[place].id] = page
        blank = self._stack.widget(place)
        self._stack.insertWidget(place, page)
        if blank is not None:
            self._stack.removeWidget(blank)
            blank.deleteLater()

    # -- the side ----------------------------------------------------------------------------------------

    @property
    def side_is_shown(self) -> bool:
        """Whether the side is seen, as a column or a drawer."""
        return self.side.isVisible()

    def toggle_side(self) -> None:
        """Show or hide the side."""
        if self._is_drawer:
            self._drawer_open = not self._drawer_open
        else:
            self._side_wanted = not self._side_wanted
        self._lay_out_side()

    def show_side(self) -> None:
        """Show the side."""
        if not self.side_is_shown:
            self.toggle_side()

    def _lay_out_side(self) -> None:
        if (
            not self.isVisible()
        ):  # before it is shown its width means nothing, and moving the side about is slow
            return
        narrow = self.width() < self._desk.theme.px(DRAWER_BELOW)
        if narrow != self._is_drawer:
            self._is_drawer = narrow
            self.side.set_drawer(on=narrow)
            self._drawer_open = False
            self._row.removeWidget(self.side)
            if narrow:
                self.side.setParent(self._body)
                self.side.installEventFilter(self)
            else:
                self._row.insertWidget(0, self.side)
        self._drawer_button.setVisible(narrow)
        self._drawer_button.setChecked(narrow and self._drawer_open)
        self.side.setVisible(self._drawer_open if narrow else self._side_wanted)
        if narrow and self._drawer_open:
            self.side.setGeometry(QRect(0, 0, self.side.minimumWidth(), self._body.height()))
            self.side.raise_()
        self.side_changed.emit()

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        """Escape closes the drawer."""
        if (
            self._is_drawer
            and isinstance(event, QKeyEvent)
            and event.type() is QEvent.Type.KeyPress
            and event.key() == Qt.Key.Key_Escape
        ):
            self._drawer_open = False
            self._lay_out_side()
            return True
        return super().eventFilter(watched, event)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Change between column and drawer."""
        self._lay_out_side()

    def showEvent(self, event: QShowEvent) -> None:
        """Decide between column and drawer."""
        self._lay_out_side()
