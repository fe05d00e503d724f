"""Each lap's virtual elevation against the shared profile of the venue, and what is left below it."""

from __future__ import annotations

import math

import numpy as np
from PySide6.QtWidgets import QVBoxLayout, QWidget

from ridercda.app.desk import Desk
from ridercda.app.lap_traces import Laps
from ridercda.app.widgets.card import ChartCard
from ridercda.app.widgets.card_row import CardRow
from ridercda.app.widgets.line_chart import Curve, LineChart
from ridercda.units import Kind


class LapOverlay(QWidget):
    """Two pictures over one axis, linked with the strip and the map."""

    def __init__(self, desk: Desk) -> None:
        super().__init__()
        self._desk = desk
        self._charts = (LineChart(desk.theme), LineChart(desk.theme))
        titles = (
            self.tr("Every lap's virtual elevation, and the profile they share"),
            self.tr("What is left of each lap"),
        )
        self._row = CardRow(desk.theme)
        self._cards = tuple(
            ChartCard(desk.theme, title, chart) for title, chart in zip(titles, self._charts, strict=True)
        )
        for card, title, stretch in zip(
            self._cards, (self.tr("Virtual elevation"), self.tr("Residual")), (3, 2), strict=True
        ):
            self._row.add(card, title, stretch)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addWidget(self._row)
        for chart in self._charts:
            chart.hovered.connect(self._on_chart_hovered)
        desk.selection.moment_changed.connect(self._on_moment_changed)
        self._laps: Laps | None = None

    def refresh(self) -> None:
        """Show the laps that belong to the estimate."""
        laps = self._desk.laps.laps
        self._laps = laps
        units = self._desk.units
        along = units.scale(Kind.HEIGHT)
        across = self.tr("Along the venue [{}]").format(units.symbol(Kind.HEIGHT))
        height = self.tr("Elevation [{}]").format(units.symbol(Kind.HEIGHT))
        if laps is None:
            busy = self._desk.laps.is_busy or self._desk.solving.estimate is None
            words = self.tr("Laps follow with the estimate") if busy else self.tr("No laps to compare here")
            for chart in self._charts:
                chart.set_empty_text(words)
                chart.show_curves((), across, height)
            return
        badges = self._desk.badges()
        setups = {run.id: run.setup for run in self._desk.session.runs}
        picked = self._desk.selection.runs
        upper, lower = [], []
        for trace in laps.traces:
            badge = badges.get(setups.get(trace.run, ""))
            if badge is None:
                continue
            colour = self._desk.theme.chip(badge.index).fill
            width = 2.2 if trace.run in picked else 1.0
            key = f"{trace.run}:{trace.lap}"
            upper.append(Curve(key, trace.position * along, trace.elevation * along, colour, width))
            lower.append(Curve(key, trace.position * along, trace.residual * along, colour, width))
        upper.sort(key=lambda curve: curve.width)
        lower.sort(key=lambda curve: curve.width)
        ink = self._desk.theme.roles.ink
        shared = Curve(
            "profile", laps.position * along, laps.profile * along, ink, 2.4, self.tr("shared profile")
        )
        self._charts[0].show_curves((*upper, shared), across, height)
        self._charts[1].show_curves(
            tuple(lower),
            across,
            self.tr("Lap less profile [{}]").format(units.symbol(Kind.HEIGHT)),
            with_zero=True,
        )
        for card in self._cards:
            card.refresh_table()

    def _on_chart_hovered(self, x: float) -> None:
        if self._laps is None or not math.isfinite(x):
            self._desk.selection.point_away()
            return
        position = x / self._desk.units.scale(Kind.HEIGHT)
        run_id = self._desk.selection.run
        trace = next(
            (t for t in self._laps.traces if t.run == run_id),
            self._laps.traces[0] if self._laps.traces else None,
        )
        if trace is None or not trace.position.size:
            return
        index = int(np.nanargmin(np.abs(trace.position - position)))
        run = self._desk.session.run(trace.run)
        self._desk.selection.point_at(run.ride, float(trace.time[index]))

    def _on_moment_changed(self) -> None:
        moment, laps = self._desk.selection.moment, self._laps
        position = None
        if moment is not None and laps is not None:
            rides = {run.id: run.ride for run in self._desk.session.runs}
            for trace in laps.traces:
                if (
                    rides.get(trace.run) == moment[0]
                    and trace.time.size
                    and trace.time[0] <= moment[1] <= trace.time[-1]
                ):
                    place = float(np.interp(moment[1], trace.time, trace.position))
                    position = place * self._desk.units.scale(Kind.HEIGHT)
                    break
        for chart in self._charts:
            chart.point_at(position)
