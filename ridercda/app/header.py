"""The top line: menus, what is open, and how the estimate stands."""

from __future__ import annotations

from PySide6.QtCore import QPointF, QSize, Qt
from PySide6.QtGui import QPainter, QPaintEvent
from PySide6.QtWidgets import QHBoxLayout, QLabel, QMenuBar, QProgressBar, QPushButton, QSizePolicy, QWidget

from ridercda.app.desk import Desk
from ridercda.app.figures import date_text
from ridercda.app.solving import State
from ridercda.app.theme import Theme, Type
from ridercda.units import Kind


class StateDot(QWidget):
    """A small mark beside the words: full when current, a ring when out of date, a square when failed."""

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self._theme = theme
        self._look = "none"

    def show_look(self, look: str) -> None:
        """Show another state."""
        self._look = look
        self.update()

    def sizeHint(self) -> QSize:
        """Ask for a little room."""
        return QSize(self._theme.px(12), self._theme.px(12))

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw the mark."""
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        size = self._theme.px(8)
        centre = QPointF(self.width() / 2, self.height() / 2)
        if self._look == "current":
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(self._theme.colour("good"))
            painter.drawEllipse(centre, size / 2, size / 2)
        elif self._look == "busy":
            painter.setPen(self._theme.colour("caution"))
            painter.drawEllipse(centre, size / 2, size / 2)
        elif self._look == "failed":
            painter.fillRect(
                round(centre.x() - size / 2),
                round(centre.y() - size / 2),
                size,
                size,
                self._theme.colour("bad"),
            )
        painter.end()


class Header(QWidget):
    """Follows the desk."""

    def __init__(self, desk: Desk, menus: QMenuBar, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self._name, self._about, self._state = QLabel(), QLabel(), QLabel()
        self._about.setProperty("quiet", True)
        self._state.setProperty("quiet", True)
        self._about.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
        self._dot = StateDot(desk.theme)
        self._bar = QProgressBar()
        self._bar.setTextVisible(False)
        self._bar.setFixedWidth(desk.theme.px(96))
        self._stop = QPushButton(self.tr("Stop"))
        self._stop.clicked.connect(self._on_stop_clicked)
        line = QHBoxLayout(self)
        line.setContentsMargins(0, 0, 0, 0)
        line.setSpacing(desk.theme.px(8))
        menus.setSizePolicy(QSizePolicy.Policy.Maximum, QSizePolicy.Policy.Preferred)
        for widget, stretch in (
            (menus, 0),
            (self._name, 0),
            (self._about, 1),
            (self._bar, 0),
            (self._stop, 0),
            (self._dot, 0),
            (self._state, 0),
        ):
            line.addWidget(widget, stretch)
        for signal in (
            desk.document.session_changed,
            desk.shelf.changed,
            desk.shelf.progressed,
            desk.solving.changed,
            desk.units.changed,
            desk.theme.changed,
            desk.document.undo_stack.cleanChanged,
        ):
            signal.connect(self.refresh)
        self.refresh()

    def _on_stop_clicked(self) -> None:
        if self._desk.shelf.reading:
            self._desk.shelf.stop_reading()
        else:
            self._desk.solving.stop()

    def refresh(self) -> None:
        """Show what holds now."""
        theme, desk = self._desk.theme, self._desk
        self._name.setFont(theme.font(Type.PAGE, strong=True))
        for label in (self._about, self._state):
            label.setFont(theme.font())
        self._stop.setFont(theme.font())
        open_ = desk.document.is_open
        for widget in (self._name, self._state, self._dot):
            widget.setVisible(open_)
        self._name.setText(desk.session.name)
        self._about.setText(" · ".join(self._facts()) if open_ else "")
        self._show_state()

    def _facts(self) -> list[str]:
        session, estimate = self._desk.session, self._desk.solving.estimate
        facts = []
        starts = [ride.start for ride in self._desk.shelf.rides().values() if ride.start]
        date = session.date or (min(starts).date() if starts else None)
        if date:
            facts.append(date_text(date))
        if session.runs:
            facts.append(self.tr("%n run(s)", "", len(session.runs)))
        if session.setups:
            facts.append(self.tr("%n setup(s)", "", len(session.setups)))
        if estimate is not None and estimate.air_density:
            facts.append(self.tr("air {}").format(self._desk.units.text(estimate.air_density, Kind.DENSITY)))
        if not self._desk.document.undo_stack.isClean():
            facts.append(self.tr("not saved"))
        return facts

    def _show_state(self) -> None:
        solving, reading = self._desk.solving, self._desk.shelf.reading
        self._bar.setVisible(bool(reading))
        self._stop.setVisible(bool(reading))
        if reading:
            done = sum(item.progress for item in reading) / len(reading)
            self._bar.setRange(0, 0 if done == 0 else 100)
            self._bar.setValue(round(100 * done))
            self._dot.show_look("busy")
            self._state.setText(self.tr("Reading %n ride(s)", "", len(reading)))
            return
        words, look = {
            State.NOTHING: (self.tr("No estimate yet"), "none"),
            State.WAITING: (self.tr("Waiting for rides"), "busy"),
            State.BUSY: (self.tr("Working it out…"), "busy"),
            State.CURRENT: (self.tr("Estimate current"), "current"),
            State.FAILED: (
                self.tr("No estimate") if solving.estimate is None else self.tr("Estimate out of date"),
                "failed",
            ),
        }[solving.state]
        if solving.state is State.CURRENT and solving.seconds:
            words = self.tr("{} · solved in {} s").format(words, f"{solving.seconds:.2f}")
        self._state.setText(words)
        self._state.setToolTip(solving.message)
        self._dot.show_look(look)
