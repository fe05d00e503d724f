"""The picked run: its span, what was ridden and found, and leaving it out."""

from __future__ import annotations

import math
from dataclasses import replace

from PySide6.QtCore import QCoreApplication, Qt, Signal
from PySide6.QtWidgets import QHBoxLayout, QLabel, QWidget

from ridercda.app.desk import Desk
from ridercda.app.figures import plus_minus, value_text
from ridercda.app.letters import badges
from ridercda.app.quantities import plain
from ridercda.app.run_edits import RunEdits
from ridercda.app.side.quantity_rows import Figure, FigureRows
from ridercda.app.widgets.card import chip_pixmap
from ridercda.app.widgets.field import Assumed, TextField
from ridercda.app.widgets.form import Form
from ridercda.app.widgets.links import link, link_line
from ridercda.drag.estimate import RunEstimate
from ridercda.session import edits
from ridercda.session.document import Run, Session
from ridercda.units import Kind


class RunFacts(Form):
    """What there is to know of one run."""

    exclude_requested = Signal(object)  # run ids

    def __init__(self, desk: Desk, runs: RunEdits, parent: QWidget | None = None) -> None:
        super().__init__(desk.theme, parent)
        self._desk, self._runs = desk, runs
        head = QWidget()
        line = QHBoxLayout(head)
        line.setContentsMargins(0, 0, 0, 0)
        line.setSpacing(self.theme.px(8))
        self._chip, self._title = QLabel(), QLabel()
        self._title.setFont(self.theme.font(strong=True))
        line.addWidget(self._chip)
        line.addWidget(self._title, 1)
        self.widget(head)
        self._reason = self.note("")
        self._facts: dict[str, QLabel] = {}
        for key, words in (
            ("laps", self.tr("Laps")),
            ("power", self.tr("Power")),
            ("speed", self.tr("Speed")),
            ("air", self.tr("Air density")),
            ("wind", self.tr("Wind at the rider")),
            ("cda", self.tr("CdA of this run")),
            ("repeats", self.tr("Against repeats")),
        ):
            label = QLabel()
            label.setAlignment(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignTop)
            label.setFont(self.theme.font())
            label.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
            self.row(words, label)
            self._facts[key] = label
        self._rows = FigureRows(desk, self)
        end_of_ride = Assumed(None, self.tr("to the end of the ride"))
        self._rows.add(
            Figure(
                self.tr("Starts"),
                Kind.DURATION,
                "Run",
                "start",
                lambda s: self._edge(s, "start"),
                self._put_start,
                required=True,
            )
        )
        self._rows.add(
            Figure(
                self.tr("Ends"),
                Kind.DURATION,
                "Run",
                "end",
                lambda s: self._edge(s, "end"),
                self._put_end,
                assumed=end_of_ride,
            )
        )
        self._note = TextField(self.theme)
        self._note.committed.connect(self._on_note_committed)
        self.row(self.tr("Note"), self._note)
        self._leave_out = link(self.tr("Leave out…"))
        self._leave_out.clicked.connect(self._on_leave_out_clicked)
        self.line(link_line(self.theme, self._leave_out))
        self.stretch()
        for signal in (
            desk.document.session_changed,
            desk.selection.changed,
            desk.solving.changed,
            desk.units.changed,
            desk.theme.changed,
        ):
            signal.connect(self.refresh)
        self.refresh()

    def _run(self, session: Session) -> Run | None:
        return next((run for run in session.runs if run.id == self._desk.selection.run), None)

    def _edge(self, session: Session, name: str) -> float | None:
        run = self._run(session)
        return getattr(run, name) if run else None

    def _put_start(self, session: Session, value: float | None) -> Session:
        run = session.run(self._desk.selection.run)
        return edits.trim_run(session, run.id, value if value is not None else run.start, run.end)

    def _put_end(self, session: Session, value: float | None) -> Session:
        run = session.run(self._desk.selection.run)
        return edits.trim_run(session, run.id, run.start, value)

    def _on_note_committed(self, text: str) -> None:
        run_id = self._desk.selection.run
        if run_id:
            self._desk.document.edit(
                self.tr("Note on run {}").format(run_id),
                lambda s: edits.change_run(s, run_id, replace(s.run(run_id), note=text)),
            )

    def _on_leave_out_clicked(self) -> None:
        run = self._run(self._desk.session)
        if run is None:
            return
        if run.excluded:
            self._runs.include(self._desk.selection.runs)
        else:
            self.exclude_requested.emit(self._desk.selection.runs)

    def refresh(self) -> None:
        """Show the picked run."""
        session = self._desk.session
        run = self._run(session)
        self.setEnabled(run is not None)
        for label in self._facts.values():
            label.setFont(self.theme.font())
        if run is None:
            self._chip.clear()
            self._title.setText(self.tr("No run picked"))
            self._reason.setText(
                self.tr("Click a run in the day strip, or step through them with the arrow keys.")
            )
            self._reason.setVisible(True)
            for label in self._facts.values():
                label.setText("–")
            return
        badge = badges(session)[run.setup]
        self._chip.setPixmap(chip_pixmap(self.theme, badge.index, badge.letter, self.devicePixelRatioF()))
        count = len(self._desk.selection.runs)
        title = self.tr("Run {}").format(run.id)
        self._title.setText(self.tr("{} and %n more", "", count - 1).format(title) if count > 1 else title)
        self._reason.setText(self.tr("Left out: {}").format(run.excluded) if run.excluded else "")
        self._reason.setVisible(bool(run.excluded))
        self._leave_out.setText(self.tr("Count again") if run.excluded else self.tr("Leave out…"))
        self._note.set_value(run.note)
        self._rows.refresh(session)
        estimate = self._desk.solving.estimate
        figure = next((r for r in estimate.runs if r.id == run.id), None) if estimate else None
        self._show_figures(figure)

    def _show_figures(self, figure: RunEstimate | None) -> None:
        units = self._desk.units
        texts = dict.fromkeys(self._facts, "–")
        if figure is not None:
            texts["laps"] = str(figure.laps)
            texts["power"] = units.text(figure.power, Kind.POWER)
            texts["speed"] = units.text(figure.speed, Kind.SPEED)
            texts["air"] = units.text(figure.air_density, Kind.DENSITY)
            texts["wind"] = wind_text(self._desk, figure)
            if figure.cda is not None:
                texts["cda"] = f"{value_text(figure.cda)} {plus_minus(figure.cda)}\u00a0m²"
            if figure.against_repeats is not None:
                texts["repeats"] = f"{plain(figure.against_repeats, 1, signed=True)}\u00a0σ"
        for key, text in texts.items():
            self._facts[key].setText(text)


def wind_text(desk: Desk, figure: RunEstimate) -> str:
    """Return a run's wind as words."""
    if figure.wind_speed is None:
        return "–"
    speed = desk.units.text(figure.wind_speed, Kind.WIND_SPEED)
    if figure.wind_from is None:
        return speed
    bearing = desk.units.text(figure.wind_from % math.tau, Kind.ANGLE)
    return QCoreApplication.translate("RunFacts", "{} from {}").format(speed, bearing)
