"""Drag: the answer first, then the evidence for it, what limits it, and diagnostics on demand."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QHBoxLayout, QLabel, QSizePolicy, QVBoxLayout, QWidget

from ridercda.app.desk import Desk
from ridercda.app.drag_words import against_baseline, answer, difference_of
from ridercda.app.pages import drag_view
from ridercda.app.pages.page import Blank, Page
from ridercda.app.run_edits import RunEdits
from ridercda.app.solving import State
from ridercda.app.theme import Type
from ridercda.app.widgets.card import Card, ChartCard, rule
from ridercda.app.widgets.card_row import CardRow
from ridercda.app.widgets.ellipse_chart import EllipseChart
from ridercda.app.widgets.flags import set_flag
from ridercda.app.widgets.interval_chart import IntervalChart
from ridercda.app.widgets.links import link
from ridercda.app.widgets.notes import Notes
from ridercda.app.widgets.run_chart import RunChart
from ridercda.app.widgets.share_chart import ShareChart
from ridercda.app.widgets.table import TableModel, TableView
from ridercda.drag.estimate import Estimate, NextStep


class DragPage(Page):
    """Differences with their intervals, and everything that stands behind them."""

    def __init__(self, desk: Desk, runs: RunEdits) -> None:
        super().__init__(desk, runs)
        px = self.theme.px
        self._shows: object = None
        self._intervals = IntervalChart(self.theme)
        self._intervals.picked.connect(desk.selection.pick_setup)
        self._answer = ChartCard(self.theme, self.tr("Differences of CdA"), self._intervals)
        self._answer.set_title("")
        self._sentence, self._beside = QLabel(), QLabel()
        for label in (self._sentence, self._beside):
            label.setWordWrap(True)
            label.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self._beside.setProperty("quiet", True)
        self._sentence.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Preferred)
        self._answer.header.insertWidget(0, self._sentence, 100)
        self._answer.header.setAlignment(self._sentence, Qt.AlignmentFlag.AlignTop)
        self._answer.body.insertWidget(0, self._beside)
        self._evidence = self._built_evidence()
        self._diagnostics = self._built_diagnostics()
        self._diagnostics.hide()
        self._switch = link("")
        self._switch.setCheckable(True)
        self._switch.toggled.connect(self._on_switch_toggled)
        self._warnings = Notes(self.theme)
        line = QHBoxLayout()
        line.addWidget(self._warnings, 1)
        line.addWidget(self._switch, 0, Qt.AlignmentFlag.AlignTop)
        layout = QVBoxLayout(self.content)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(px(8))
        layout.addWidget(self._answer, 4)
        layout.addLayout(line)
        layout.addWidget(self._evidence, 5)
        layout.addWidget(self._diagnostics, 5)
        self._on_switch_toggled()

    def _built_evidence(self) -> CardRow:
        row = CardRow(self.theme)
        self._runs_chart = RunChart(self.theme)
        self._runs_chart.picked.connect(self.desk.selection.pick_run)
        self._runs_card = ChartCard(self.theme, self.tr("Every run, through the day"), self._runs_chart)
        row.add(self._runs_card, self.tr("Runs"), 42)
        self._region_chart = EllipseChart(self.theme)
        self._region_chart.picked.connect(self.desk.selection.pick_setup)
        self._region_card = ChartCard(self.theme, self.tr("CdA and Crr together"), self._region_chart)
        row.add(self._region_card, self.tr("CdA and Crr"), 28)
        self._limits_chart = ShareChart(self.theme)
        self._limits_card = ChartCard(self.theme, self.tr("What limits it"), self._limits_chart)
        self._limits_chart.setSizePolicy(QSizePolicy.Policy.Preferred, QSizePolicy.Policy.Preferred)
        self._step = _NextStep(self)
        self._limits_card.body.addWidget(rule())
        self._limits_card.body.addWidget(self._step)
        row.add(self._limits_card, self.tr("Limits"), 30)
        return row

    def _built_diagnostics(self) -> CardRow:
        row = CardRow(self.theme)
        self._influence = TableModel[drag_view.InfluenceRow]((), key=lambda r: r.run)
        table = TableView(self.theme, self._influence)
        table.keys_picked.connect(lambda keys: self.desk.selection.pick_runs(keys))
        self._influence_card = Card(self.theme, self.tr("Left out, a run would move"))
        self._influence_card.body.addWidget(table)
        self._influence_table = table
        row.add(self._influence_card, self.tr("Influence"), 40)
        self._trends = drag_view.trend_chart(self.theme)
        self._trend_card = ChartCard(self.theme, self.tr("Each run against its speed"), self._trends)
        row.add(self._trend_card, self.tr("Speed"), 30)
        self._yaw = drag_view.trend_chart(self.theme)
        self._yaw_card = ChartCard(self.theme, self.tr("Each run against its wind"), self._yaw)
        row.add(self._yaw_card, self.tr("Wind"), 30)
        return row

    def _on_switch_toggled(self) -> None:
        on = self._switch.isChecked()
        self._switch.setText(self.tr("Back to the evidence") if on else self.tr("Diagnostics"))
        self._evidence.setVisible(not on)
        self._diagnostics.setVisible(on)

    def show_diagnostics(self, *, on: bool) -> None:
        """Show diagnostics instead of the evidence, or go back."""
        self._switch.setChecked(on)

    def _first(self) -> QWidget:
        return self._intervals

    def blank(self) -> Blank | None:
        """Say what is missing for a figure."""
        solving, session = self.desk.solving, self.desk.session
        if solving.estimate is not None and session.setups:
            return None
        if not session.rides:
            return Blank(
                self.tr("No rides yet"),
                self.tr(
                    "Add the ride files of the test day. Each run of a setup then becomes a block in the day strip."
                ),
                "ride.add",
                self.tr("Add ride files…"),
            )
        if not session.runs:
            return Blank(
                self.tr("No runs yet"),
                self.tr("Accept the proposed runs, or drag over the day strip where a setup was ridden."),
                "page.runs",
                self.tr("Go to Runs"),
            )
        if session.rider.mass is None or session.bike.mass is None:
            return Blank(
                self.tr("How heavy are rider and bike?"),
                self.tr(
                    "Without their mass no figure can be had. Fill in what is asked for on the Rides page."
                ),
                "page.rides",
                self.tr("Go to Rides"),
            )
        if solving.state is State.WAITING:
            return Blank(
                self.tr("Reading the rides…"), self.tr("Figures follow as soon as the rides are read.")
            )
        if solving.state is State.FAILED:
            return Blank(
                self.tr("No figure from these runs"), solving.message, "solve.again", self.tr("Try again")
            )
        return Blank(self.tr("Working out the drag…"), self.tr("The first figures take a moment."))

    def refresh(self) -> None:
        """Show the estimate; what belongs to an earlier state of the session steps back."""
        estimate = self.desk.solving.estimate
        baseline = self.desk.session.baseline
        if estimate is None or baseline is None:
            return
        set_flag(self._sentence, "quiet", on=self.desk.solving.is_stale)
        badges = self.desk.badges()
        selection, theme = self.desk.selection, self.theme
        shows = (
            estimate,
            baseline.id,
            tuple(badges.items()),
            selection.runs,
            selection.setup,
            theme.roles,
            theme.zoom,
            self.desk.units.units,
            self.desk.session.smallest_worthwhile,
        )
        if shows == self._shows:  # while an edge is dragged nothing here changes until new figures come
            return
        self._shows = shows
        words = answer(estimate, badges, baseline.id)
        self._sentence.setFont(self.theme.font(Type.SENTENCE, strong=True))
        self._sentence.setText(words.sentence)
        self._beside.setFont(self.theme.font())
        self._beside.setText(words.beside)
        self._beside.setVisible(bool(words.beside))
        self._switch.setFont(self.theme.font())
        self._warnings.show_messages(tuple(warning.message for warning in estimate.warnings))
        self._intervals.show_picture(drag_view.interval_picture(self.desk, estimate, baseline.id))
        dots, levels = drag_view.run_dots(self.desk, estimate)
        self._runs_chart.show_runs(dots, levels, self.tr("CdA of each run [m²]"))
        self._region_chart.show_regions(
            drag_view.regions(self.desk, estimate), self.tr("CdA [m²]"), self.tr("Crr")
        )
        self._show_limits(estimate, baseline.id)
        self._show_diagnostics(estimate)
        for card in (
            self._answer,
            self._runs_card,
            self._region_card,
            self._limits_card,
            self._trend_card,
            self._yaw_card,
        ):
            card.refresh_table()

    def _show_limits(self, estimate: Estimate, baseline: str) -> None:
        badges = self.desk.badges()
        pairs = against_baseline(estimate, baseline)
        picked = difference_of(estimate, self.desk.selection.setup, baseline)
        pair = picked or (pairs[0] if pairs else None)
        self._limits_chart.show_shares(drag_view.shares(pair))
        title = self.tr("What limits it")
        if pair is not None and pair.setup in badges and pair.against in badges:
            title = self.tr("What limits {} against {}").format(
                badges[pair.setup].letter, badges[pair.against].letter
            )
        self._limits_card.set_title(title)
        steps = [
            s
            for s in estimate.next_steps
            if pair is not None and s.setup == pair.setup and s.against == pair.against
        ]
        self._step.show_step(next(iter(steps or estimate.next_steps), None))

    def _show_diagnostics(self, estimate: Estimate) -> None:
        columns, rows = drag_view.influence(self.desk, estimate)
        self._influence.set_columns(columns)
        self._influence.set_rows(rows)
        self._influence_table.show_keys(self.desk.selection.runs)
        drag_view.show_speed_trend(self.desk, estimate, self._trends)
        drag_view.show_wind_trend(self.desk, estimate, self._yaw)


class _NextStep(QWidget):
    """The cheapest next step in words."""

    def __init__(self, page: DragPage) -> None:
        super().__init__()
        self._theme = page.theme
        self._head, self._words = QLabel(self.tr("Cheapest next step")), QLabel()
        self._head.setProperty("quiet", True)
        self._words.setWordWrap(True)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(self._theme.px(2))
        layout.addWidget(self._head)
        layout.addWidget(self._words)
        layout.addStretch(1)

    def show_step(self, step: NextStep | None) -> None:
        """Show a step, or say that there is none."""
        self._head.setFont(self._theme.font(Type.AXIS, strong=True))
        self._words.setFont(self._theme.font())
        nothing = self.tr("Nothing cheap would tighten this: the interval is set by the day.")
        self._words.setText(step.text if step else nothing)
