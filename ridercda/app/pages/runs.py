"""Runs: proposed ones to accept, the table of runs, and every lap against the profile of the venue."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from PySide6.QtWidgets import QHBoxLayout, QLabel, QPushButton, QSizePolicy, QVBoxLayout, QWidget

from ridercda.app.desk import Desk
from ridercda.app.figures import clock, duration, elapsed, plus_minus, value_text
from ridercda.app.letters import Badge
from ridercda.app.pages.lap_view import LapOverlay
from ridercda.app.pages.page import Blank, Page
from ridercda.app.quantities import plain
from ridercda.app.reasons import reason_menu
from ridercda.app.run_edits import RunEdits
from ridercda.app.side.run_facts import wind_text
from ridercda.app.strip.picture import axis_of
from ridercda.app.theme import Type
from ridercda.app.widgets.card import Card
from ridercda.app.widgets.field import TextField
from ridercda.app.widgets.links import link, link_line
from ridercda.app.widgets.table import Column, TableModel, TableView
from ridercda.drag.estimate import RunEstimate
from ridercda.session.document import Run, VenueKind
from ridercda.units import Kind


@dataclass(frozen=True, slots=True, eq=False)
class RunRow:
    """A run in the table."""

    run: Run
    badge: Badge
    moment: float  # start, seconds of the day
    dated: bool
    length: float | None  # [s]
    figure: RunEstimate | None


class RunsPage(Page):
    """Table and overlay."""

    def __init__(self, desk: Desk, runs: RunEdits) -> None:
        super().__init__(desk, runs)
        px = self.theme.px
        self._model = TableModel[RunRow](
            self._columns(), key=lambda row: row.run.id, quiet=lambda row: bool(row.run.excluded)
        )
        self._table = TableView(self.theme, self._model)
        self._table.keys_picked.connect(desk.selection.pick_runs)
        self._card = Card(self.theme, self.tr("Runs of the day"))
        self._offer = QWidget()
        line = QHBoxLayout(self._offer)
        line.setContentsMargins(0, 0, 0, 0)
        self._offer_words = QLabel()
        self._offer_words.setWordWrap(True)
        self._offer_words.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Preferred)
        self._accept = QPushButton(self.tr("Accept"))
        self._accept.setProperty("main", True)
        self._accept.clicked.connect(lambda: self.asked.emit("run.accept", None))
        line.addWidget(self._offer_words, 1)
        line.addWidget(self._accept)
        self._card.body.addWidget(self._offer)
        self._card.body.addWidget(self._table, 1)
        self._leave_out = link(self.tr("Leave out"))
        self._leave_out.setProperty("dropdown", True)
        self._leave_out.setMenu(reason_menu(self, lambda reason: runs.exclude(desk.selection.runs, reason)))
        self._count = link(self.tr("Count again"))
        self._count.clicked.connect(lambda: runs.include(desk.selection.runs))
        self._merge = link(self.tr("Merge"))
        self._merge.clicked.connect(lambda: runs.merge(desk.selection.runs))
        self._remove = link(self.tr("Remove"))
        self._remove.clicked.connect(lambda: runs.remove(desk.selection.runs))
        self._buttons = (self._leave_out, self._count, self._merge, self._remove)
        foot = link_line(self.theme, *self._buttons)
        self._order_words = QLabel(self.tr("Ridden in the order"))
        self._order_words.setProperty("quiet", True)
        self._order = TextField(self.theme)
        self._order.setPlaceholderText("A B C C B A")
        self._order.setToolTip(
            self.tr("Letters of the setups, run by run; – leaves a run out. New letters make setups.")
        )
        self._order.setAccessibleName(self._order_words.text())
        self._order.setFixedWidth(px(170))
        self._order.committed.connect(runs.assign_in_order)
        foot.addWidget(self._order_words)
        foot.addWidget(self._order)
        self._card.body.addLayout(foot)
        self._overlay = LapOverlay(desk)
        layout = QVBoxLayout(self.content)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(px(12))
        layout.addWidget(self._card, 6)
        layout.addWidget(self._overlay, 5)
        self.follow(desk.proposals.changed, desk.laps.changed)

    def _columns(self) -> tuple[Column[RunRow], ...]:
        return (
            Column(
                self.tr("Run"), _name, raw=_order, chip=lambda row: row.badge, tip=lambda row: row.badge.name
            ),
            Column(self.tr("CdA [m²]"), _cda_text, raw=_cda),
            Column(
                self.tr("vs repeats [σ]"),
                _repeats_text,
                raw=lambda row: row.figure.against_repeats if row.figure else None,
                header_tip=self.tr("How far this run lies from its repeats, in standard errors"),
            ),
            Column(
                self.tr("Starts"),
                lambda row: clock(row.moment) if row.dated else elapsed(row.run.start),
                raw=lambda row: row.moment,
            ),
            Column(
                self.tr("Length"),
                lambda row: "–" if row.length is None else duration(row.length),
                raw=lambda row: row.length,
            ),
            Column(
                self.tr("Laps"),
                lambda row: str(row.figure.laps) if row.figure else "–",
                raw=lambda row: float(row.figure.laps) if row.figure else None,
            ),
            self._figure(self.tr("Power"), Kind.POWER, lambda figure: figure.power),
            self._figure(self.tr("Speed"), Kind.SPEED, lambda figure: figure.speed),
            self._figure(self.tr("Air"), Kind.DENSITY, lambda figure: figure.air_density),
            Column(
                self.tr("Wind"),
                lambda row: wind_text(self.desk, row.figure) if row.figure else "–",
                raw=lambda row: row.figure.wind_speed if row.figure else None,
            ),
            Column(
                self.tr("Left out"),
                lambda row: row.run.excluded,
                tip=lambda row: row.run.note or row.run.excluded,
            ),
        )

    def _figure(self, title: str, kind: Kind, pick: Callable[[RunEstimate], float | None]) -> Column[RunRow]:
        units = self.desk.units

        def raw(row: RunRow) -> float | None:
            return pick(row.figure) if row.figure else None

        return Column(f"{title} [{units.symbol(kind)}]", lambda row: units.number(raw(row), kind), raw=raw)

    def _first(self) -> QWidget:
        return self._accept if self.desk.proposals.runs else self._table

    def blank(self) -> Blank | None:
        """Say how runs come to be."""
        if self.desk.session.runs or self.desk.proposals.runs:
            return None
        if not self.desk.session.rides:
            return Blank(
                self.tr("No rides yet"),
                self.tr("Runs are cut from the rides of the day."),
                "ride.add",
                self.tr("Add ride files…"),
            )
        if self.desk.shelf.reading or self.desk.proposals.is_busy:
            return Blank(
                self.tr("Looking for runs…"),
                self.tr("Laps that repeat are found in the rides and proposed as runs."),
            )
        words = self.tr(
            "Drag over the day strip where a setup was ridden; letter keys say which setup it was."
        )
        return Blank(self.tr("No runs found by themselves"), " ".join((*self.desk.proposals.notes, words)))

    def _offered(self, count: int) -> str:
        words = self.tr("%n run(s) proposed; they stand dashed in the day strip.", "", count)
        kinds = {
            VenueKind.LOOP: self.tr("The venue is taken as a loop."),
            VenueKind.OUT_AND_BACK: self.tr("The venue is taken as out and back."),
        }
        kind = self.desk.proposals.kind
        return f"{words} {kinds[kind]}" if kind in kinds else words

    def refresh(self) -> None:
        """Show runs and laps."""
        desk = self.desk
        badges = desk.badges()
        for button in (*self._buttons, self._accept):
            button.setFont(self.theme.font())
        self._order_words.setFont(self.theme.font())
        self._order.set_value(" ".join(badges[run.setup].letter for run in desk.session.runs))
        self._offer_words.setFont(self.theme.font(Type.PAGE))
        proposed = desk.proposals.runs
        self._offer.setVisible(bool(proposed))
        self._offer_words.setText(self._offered(len(proposed)))
        rides = desk.shelf.rides()
        axis = axis_of(desk.session, rides)
        estimate = desk.solving.estimate
        figures = {run.id: run for run in estimate.runs} if estimate else {}
        rows = []
        for run in desk.session.runs:
            ride = rides.get(run.ride)
            end = (
                run.end
                if run.end is not None
                else float(ride.time[-1])
                if ride is not None and ride.time.size
                else None
            )
            length = end - run.start if end is not None else None
            rows.append(
                RunRow(
                    run,
                    badges[run.setup],
                    axis.offsets.get(run.ride, 0.0) + run.start,
                    axis.dated,
                    length,
                    figures.get(run.id),
                )
            )
        self._model.set_columns(self._columns())
        self._model.set_rows(tuple(rows))
        self._table.show_keys(desk.selection.runs)
        picked = [run for run in desk.session.runs if run.id in desk.selection.runs]
        self._leave_out.setEnabled(any(not run.excluded for run in picked))
        self._count.setEnabled(any(run.excluded for run in picked))
        self._merge.setEnabled(len(picked) > 1)
        self._remove.setEnabled(bool(picked))
        self._overlay.refresh()


def _name(row: RunRow) -> str:
    return f"{row.run.id} · {row.badge.name}"


def _order(row: RunRow) -> float | str:
    return float(row.run.id) if row.run.id.isdigit() else row.run.id


def _cda(row: RunRow) -> float | None:
    return row.figure.cda.value if row.figure and row.figure.cda else None


def _cda_text(row: RunRow) -> str:
    if row.figure is None or row.figure.cda is None:
        return "–"
    return f"{value_text(row.figure.cda)} {plus_minus(row.figure.cda)}"


def _repeats_text(row: RunRow) -> str:
    if row.figure is None or row.figure.against_repeats is None:
        return "–"
    return plain(row.figure.against_repeats, 1, signed=True)
