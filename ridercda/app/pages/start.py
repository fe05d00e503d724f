"""The start page: a sample in one click, recent sessions, or ride files dropped in."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial
from pathlib import Path

from PySide6.QtCore import QRectF, Qt, Signal
from PySide6.QtGui import QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QFrame, QHBoxLayout, QLabel, QPushButton, QSizePolicy, QVBoxLayout, QWidget

from ridercda.app.cautions import caution_texts
from ridercda.app.desk import Desk
from ridercda.app.samples import samples
from ridercda.app.theme import Theme, Type
from ridercda.app.widgets import drawing
from ridercda.app.widgets.card import Card


class StartPage(QWidget):
    """What is seen while no session is open."""

    sample_chosen = Signal(object)
    recent_chosen = Signal(object)
    open_asked = Signal()
    rides_asked = Signal()
    new_asked = Signal()

    def __init__(self, desk: Desk) -> None:
        super().__init__()
        self._desk = desk
        theme, px = desk.theme, desk.theme.px
        self._sentence = QLabel(self.tr("Which setup is faster, and how sure is that?"))
        self._words = QLabel(
            self.tr(
                "Ride files from a test day in; drag area per setup and rolling resistance per tyre set out, "
                "with honest intervals."
            )
        )
        self._words.setProperty("quiet", True)
        self._words.setWordWrap(True)
        self._samples = Card(theme, self.tr("Try a sample day"))
        self._recent = Card(theme, self.tr("Recent sessions"))
        self._begin = Card(theme, self.tr("Begin"))
        self._drop = _DropArea(theme)
        add = QPushButton(self.tr("Add ride files…"))
        add.setProperty("main", True)
        add.clicked.connect(self.rides_asked)
        open_ = QPushButton(self.tr("Open session…"))
        open_.clicked.connect(self.open_asked)
        new = QPushButton(self.tr("Empty session"))
        new.clicked.connect(self.new_asked)
        self._begin.body.addWidget(self._drop, 1)
        line = QHBoxLayout()
        for button in (add, open_, new):
            button.setFont(theme.font(strong=button is add))
            line.addWidget(button)
        line.addStretch(1)
        self._begin.body.addLayout(line)
        cards = QHBoxLayout()
        cards.setSpacing(px(12))
        for card in (self._begin, self._samples, self._recent):
            card.setMinimumHeight(px(250))
            card.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
            cards.addWidget(card, 4 if card is self._begin else 3)
        self._cautions = QLabel("  ".join(caution_texts()))
        self._cautions.setProperty("quiet", True)
        self._cautions.setWordWrap(True)
        inside = QWidget()
        inside.setMaximumWidth(px(1080))
        column = QVBoxLayout(inside)
        column.setSpacing(px(6))
        for widget in (self._sentence, self._words):
            column.addWidget(widget)
        column.addSpacing(px(14))
        column.addLayout(cards)
        column.addSpacing(px(10))
        column.addWidget(self._cautions)
        outer = QVBoxLayout(self)
        outer.addStretch(2)
        middle = QHBoxLayout()
        middle.addStretch(1)
        middle.addWidget(inside, 20)
        middle.addStretch(1)
        outer.addLayout(middle)
        outer.addStretch(3)
        self._rows: list[QWidget] = []
        theme.changed.connect(self._on_theme_changed)
        self._on_theme_changed()
        self.refresh()

    def _on_theme_changed(self) -> None:
        theme = self._desk.theme
        font = theme.font(Type.SENTENCE, strong=True)
        font.setPixelSize(round(font.pixelSize() * 1.2))
        self._sentence.setFont(font)
        self._words.setFont(theme.font(Type.PAGE))
        self._cautions.setFont(theme.font(Type.AXIS))

    def refresh(self) -> None:
        """List samples and recent sessions."""
        for row in self._rows:
            row.deleteLater()
        self._rows = []
        known = samples()
        for sample in known:
            self._add(self._samples, sample.name, sample.about, "", partial(self.sample_chosen.emit, sample))
        if not known:
            self._say(self._samples, self.tr("The samples did not come with this installation."))
        else:
            self._say(
                self._samples,
                self.tr("Invented days. A copy is put into your documents, so that you can change anything."),
            )
        folders = self._desk.settings.recent
        for folder in folders[:5]:
            where = str(folder.parent)
            self._add(self._recent, folder.name, where, str(folder), partial(self.recent_chosen.emit, folder))
        if not folders:
            self._say(self._recent, self.tr("Sessions you open are listed here."))
        for card in (self._samples, self._recent):
            card.body.addStretch(1)

    def _add(self, card: Card, words: str, note: str, tip: str, act: Callable[[], None]) -> None:
        button = _Entry(self._desk.theme, words, note)
        button.setToolTip(tip)
        button.clicked.connect(act)
        card.body.addWidget(button)
        self._rows.append(button)

    def _say(self, card: Card, words: str) -> None:
        label = QLabel(words)
        label.setProperty("quiet", True)
        label.setWordWrap(True)
        label.setFont(self._desk.theme.font(Type.AXIS))
        label.setContentsMargins(0, self._desk.theme.px(4), 0, 0)
        card.body.addWidget(label)
        self._rows.append(label)


class _Entry(QPushButton):
    """A name to press with a quiet line under it."""

    def __init__(self, theme: Theme, words: str, note: str) -> None:
        super().__init__()
        self._theme, self._words, self._note = theme, words, note
        self.setAccessibleName(words)
        self.setAccessibleDescription(note)
        self.setCursor(Qt.CursorShape.PointingHandCursor)
        self.setMinimumHeight(theme.px(40))

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw both lines; under the pointer or the keyboard, a ground."""
        px = self._theme.px
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        area = QRectF(self.rect())
        if self.underMouse() or self.hasFocus():
            painter.setPen(self._theme.colour("accent") if self.hasFocus() else Qt.PenStyle.NoPen)
            painter.setBrush(self._theme.colour("hover"))
            painter.drawRoundedRect(area.adjusted(0.5, 0.5, -0.5, -0.5), px(6), px(6))
            area.adjust(px(8), 0, -px(8), 0)
        upper = QRectF(area.left(), area.center().y() - px(18), area.width(), px(20))
        drawing.text(painter, upper, self._words, self._theme.font(), self._theme.colour("accent"))
        small = self._theme.font(Type.AXIS)
        drawing.text(painter, upper.translated(0, px(17)), self._note, small, self._theme.colour("quiet"))
        painter.end()


class _DropArea(QFrame):
    """Says that files can be dropped; the whole window takes them."""

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self._theme = theme
        self.setMinimumHeight(theme.px(110))
        words = QLabel(self.tr("Drop ride files here\nFIT, TCX, GPX or delimited text, also gzipped"))
        words.setAlignment(Qt.AlignmentFlag.AlignCenter)
        words.setProperty("quiet", True)
        words.setFont(theme.font())
        layout = QVBoxLayout(self)
        layout.addWidget(words)

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw a dashed edge."""
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(self._theme.colour("axis"), self._theme.px(1.2), Qt.PenStyle.DashLine))
        painter.drawRoundedRect(self.rect().adjusted(1, 1, -1, -1), self._theme.px(8), self._theme.px(8))
        painter.end()


def is_session(path: Path) -> bool:
    """Return whether a dropped path is a session folder or file."""
    return (path / "session.toml").is_file() or path.name == "session.toml"
