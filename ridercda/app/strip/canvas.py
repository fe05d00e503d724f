"""The day strip's picture: what is seen of the day, zoomed and panned, with what is picked and pointed at."""

from __future__ import annotations

import math
from dataclasses import replace

from PySide6.QtCore import QEvent, QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QHelpEvent, QPainter, QPaintEvent, QPen, QPixmap, QResizeEvent, QWheelEvent
from PySide6.QtWidgets import QToolTip, QWidget

from ridercda.app.desk import Desk
from ridercda.app.figures import clock, duration, elapsed
from ridercda.app.strip import painting
from ridercda.app.strip.day_axis import day_axis
from ridercda.app.strip.picture import (
    StripPicture,
    StripRun,
    axis_of,
    faults_of,
    proposals_of,
    runs_of,
    traces_of,
)
from ridercda.app.strip.run_list import RunList
from ridercda.app.strip.view import Grip, Hit, StripView, hit
from ridercda.app.widgets import drawing
from ridercda.drag.estimate import Estimate
from ridercda.units import Kind

EMPTY_AXIS = day_axis(())


class StripCanvas(QWidget):
    """Shows the day; what is done to it is the day strip's own matter."""

    def __init__(self, desk: Desk, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._desk, self.theme = desk, desk.theme
        self._picture = StripPicture(EMPTY_AXIS)
        self._low, self._high = 0.0, 1.0
        self.new_span: tuple[str, float, float] | None = None  # a run being drawn: ride, start, end
        self.held: Grip | None = None  # the edge the keyboard holds
        self._traces: QPixmap | None = None
        self._had_wind = False
        self.setMouseTracking(True)
        self.setAccessibleName(self.tr("Day strip"))
        self.list = RunList(self)
        self.list.focus_changed.connect(self.update)
        self.setFocusProxy(self.list)
        desk.document.session_changed.connect(self._on_session_changed)
        desk.document.session_opened.connect(self._on_session_opened)
        desk.shelf.changed.connect(self._on_shelf_changed)
        desk.solving.changed.connect(self._on_solving_changed)
        desk.proposals.changed.connect(self._on_session_changed)
        desk.selection.changed.connect(self._on_selection_changed)
        desk.selection.moment_changed.connect(self.update)
        desk.theme.changed.connect(self._on_theme_changed)
        desk.units.changed.connect(self._on_theme_changed)

    # -- what is shown -----------------------------------------------------------------------------------

    @property
    def picture(self) -> StripPicture:
        """What the strip shows now."""
        return self._picture

    def view(self) -> StripView:
        """Return the part of the axis that is seen."""
        bands = self.bands()
        return StripView(self._low, self._high, bands.letters.left(), bands.letters.right())

    def bands(self) -> painting.Bands:
        """Return where the parts of the strip lie."""
        zoomed = self._high - self._low < 0.999 * self._picture.axis.length
        names = tuple(name for name, _ in self._lane_names())
        wind = self._picture.has_wind
        return painting.Bands.within(self.theme, QRectF(self.rect()), names, wind=wind, zoomed=zoomed)

    def _lane_names(self) -> tuple[tuple[str, str], ...]:
        wind = self.tr("Wind {}").format(self._desk.units.symbol(Kind.WIND_SPEED))
        return (self.tr("Power"), "power"), (self.tr("Speed"), "speed"), (wind, "quiet")

    def sizeHint(self) -> QSize:
        """Ask for letters, traces, ticks and clock."""
        return QSize(self.theme.px(600), self.theme.px(128))

    def minimumSizeHint(self) -> QSize:
        """Ask for the same height always, so that nothing below moves."""
        return QSize(self.theme.px(320), self.theme.px(128))

    def _on_session_opened(self) -> None:
        self._picture = StripPicture(EMPTY_AXIS)
        self._low, self._high, self.held = 0.0, 1.0, None
        self._traces = None

    def _on_shelf_changed(self) -> None:
        rides = self._desk.shelf.rides()
        session = self._desk.session
        was = self._picture.axis.length
        whole = self._high - self._low >= 0.999 * was
        axis = axis_of(session, rides)
        self._picture = StripPicture(
            axis,
            runs_of(session, axis, rides, self._estimate()),
            faults_of(axis, rides),
            traces_of(axis, rides),
            rides,
            proposals_of(self._desk.proposals.runs, axis, rides),
        )
        self._traces = None
        if whole or self._high > axis.length:
            self._low, self._high = 0.0, axis.length
        self._refresh()

    def _on_session_changed(self) -> None:
        picture = self._picture
        known = {entry.id for entry in self._desk.session.rides}
        rides = {key: ride for key, ride in picture.rides.items() if key in known}
        runs = runs_of(self._desk.session, picture.axis, rides, self._estimate())
        proposals = proposals_of(self._desk.proposals.runs, picture.axis, rides)
        self._picture = replace(picture, runs=runs, proposals=proposals)
        self._refresh()

    def _on_solving_changed(self) -> None:
        picture = self._picture
        runs = runs_of(self._desk.session, picture.axis, picture.rides, self._estimate())
        if runs != picture.runs:
            self._picture = replace(picture, runs=runs)
            self._refresh()

    def _estimate(self) -> Estimate | None:
        return self._desk.solving.estimate

    def _refresh(self) -> None:
        wind = self._picture.has_wind
        if wind is not self._had_wind or self.bands().map.height():  # lanes move, or the map shows the runs
            self._traces = None
        self._had_wind = wind
        self.list.show_runs(
            tuple((run.id, self.words_for(run)) for run in self._picture.runs), self._desk.selection.run
        )
        self.update()

    def _on_selection_changed(self) -> None:
        run = self._picture.run(self._desk.selection.run)
        if run is not None:
            view = self.view().showing(run.left, run.right, self._picture.axis.length)
            self.set_view(view)
        else:
            self.held = None
        self.list.show_current(self._desk.selection.run)
        self.update()

    def _on_theme_changed(self) -> None:
        self._traces = None
        self.updateGeometry()
        self.update()

    def words_for(self, run: StripRun) -> str:
        """Return what is said of a run, by tooltip and screen reader."""
        axis = self._picture.axis
        tell = clock if axis.dated else elapsed
        words = self.tr("Run {run}, setup {letter}, {start} to {end} ({length})").format(
            run=run.id,
            letter=run.badge.letter,
            start=tell(axis.day_at(run.left)),
            end=tell(axis.day_at(run.right)),
            length=duration(run.end - run.start),
        )
        return words + (self.tr(", left out: {}").format(run.excluded) if run.excluded else "")

    # -- painting ----------------------------------------------------------------------------------------

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw the blocks over the traces, which are kept as a picture, then what is picked and pointed at."""
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        if not self._picture.traces:
            self._draw_empty(painter)
            return
        if self._traces is None or self._traces.size() != self.size() * self.devicePixelRatioF():
            self._traces = self._drawn_traces()
        view, bands = self.view(), self.bands()
        seen = QRectF(view.left - 4, 0, view.right - view.left + 8, self.height())
        painter.setClipRect(seen)
        painting.draw_ground(painter, self.theme, self._picture, view, bands)
        painter.setClipping(False)
        painter.drawPixmap(0, 0, self._traces)
        painter.setClipRect(seen)
        painting.draw_proposals(painter, self.theme, self._picture, view, bands)
        painting.draw_blocks(painter, self.theme, self._picture, view, bands)
        if self._picture.has_wind:
            scale = self._desk.units.scale(Kind.WIND_SPEED)
            painting.draw_wind(painter, self.theme, self._picture, view, bands.wind, scale)
        for run_id in self._desk.selection.runs:
            if run := self._picture.run(run_id):
                held = self.held if run_id == self._desk.selection.run else None
                painting.draw_picked(painter, self.theme, view, bands, run, held, focus=self.list.hasFocus())
        if self.new_span is not None:
            self._draw_new(painter, view, bands)
        self._draw_moment(painter, view, bands)
        painter.end()

    def _drawn_traces(self) -> QPixmap:
        """Return what no edit of a run changes: traces, clock, faults, names of the lanes."""
        ratio = self.devicePixelRatioF()
        pixmap = QPixmap(self.size() * ratio)
        pixmap.setDevicePixelRatio(ratio)
        pixmap.fill(self.theme.colour("card", 0.0))
        painter = QPainter(pixmap)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        view, bands = self.view(), self.bands()
        self._draw_lane_names(painter, bands)
        painter.setClipRect(QRectF(view.left - 4, 0, view.right - view.left + 8, self.height()))
        painting.draw_traces(painter, self.theme, self._picture, view, bands.traces)
        painter.setClipping(False)
        painting.draw_clock(painter, self.theme, self._picture, view, bands.clock)
        painting.draw_faults(painter, self.theme, self._picture, view, bands.faults)
        if bands.map.height():
            painting.draw_map(painter, self.theme, self._picture, view, bands.map)
        painter.end()
        return pixmap

    def _draw_lane_names(self, painter: QPainter, bands: painting.Bands) -> None:
        x = bands.gutter - self.theme.px(10)
        rects = (*painting.lanes(bands.traces), bands.wind)
        for (name, role), rect in zip(self._lane_names(), rects, strict=True):
            if rect.height():
                drawing.label(painter, self.theme, x, rect.center().y(), name, drawing.RIGHT, role=role)

    def _draw_empty(self, painter: QPainter) -> None:
        if self._desk.shelf.reading:
            words = self.tr("Reading the rides…")
        elif self._desk.session.rides:
            words = self.tr("The ride files of this session could not be read. See Rides.")
        else:
            words = self.tr(
                "The day appears here once a ride file is added. Drop files anywhere in the window."
            )
        drawing.text(
            painter, QRectF(self.rect()), words, self.theme.font(), self.theme.colour("quiet"), drawing.CENTRE
        )

    def _draw_new(self, painter: QPainter, view: StripView, bands: painting.Bands) -> None:
        ride, start, end = self.new_span or ("", 0.0, 0.0)
        left, right = (
            view.x(self._picture.axis.place(ride, start)),
            view.x(self._picture.axis.place(ride, end)),
        )
        rect = QRectF(left, bands.letters.top(), right - left, bands.faults.top() - bands.letters.top())
        painter.fillRect(rect, self.theme.colour("accent", 0.14))
        painter.setPen(QPen(self.theme.colour("accent"), self.theme.px(1.5)))
        painter.drawRect(rect)
        words = duration(end - start)
        drawing.label(
            painter,
            self.theme,
            rect.center().x(),
            bands.letters.center().y(),
            words,
            role="accent",
            strong=True,
        )

    def _draw_moment(self, painter: QPainter, view: StripView, bands: painting.Bands) -> None:
        moment = self._desk.selection.moment
        if moment is None or moment[0] not in self._picture.axis.offsets:
            return
        x = view.x(self._picture.axis.place(*moment))
        painter.setPen(QPen(self.theme.colour("accent"), self.theme.px(1)))
        painter.drawLine(QPointF(x, bands.letters.bottom() + 2), QPointF(x, bands.clock.top()))

    # -- zoom and pan ------------------------------------------------------------------------------------

    def set_view(self, view: StripView) -> None:
        """Show another part of the axis."""
        if (view.low, view.high) != (self._low, self._high):
            self._low, self._high = view.low, view.high
            self._traces = None
            self.update()

    def zoom(self, factor: float) -> None:
        """Zoom about the picked run, else the middle."""
        view = self.view()
        run = self._picture.run(self._desk.selection.run)
        x = view.x(0.5 * (run.left + run.right)) if run else 0.5 * (view.left + view.right)
        self.set_view(view.zoomed(factor, x, self._picture.axis.length))

    def zoom_to_day(self) -> None:
        """Show the whole day."""
        view = self.view()
        self.set_view(StripView(0.0, self._picture.axis.length, view.left, view.right))

    def zoom_to_picked(self) -> None:
        """Show the picked runs at full width."""
        runs = [run for run in self._picture.runs if run.id in self._desk.selection.runs]
        if runs:
            low, high = min(run.left for run in runs), max(run.right for run in runs)
            margin = 0.15 * (high - low) + 10
            self.set_view(
                self.view().moved_to(
                    low - margin,
                    min(self._picture.axis.length, high - low + 2 * margin),
                    self._picture.axis.length,
                )
            )

    def wheelEvent(self, event: QWheelEvent) -> None:
        """Zoom about the pointer; sideways or with Shift, pan."""
        across, up = event.angleDelta().x(), event.angleDelta().y()
        view = self.view()
        if event.modifiers() & Qt.KeyboardModifier.ShiftModifier:
            across, up = across or up, 0
        if abs(across) > abs(up):
            span = view.high - view.low
            self.set_view(view.moved_to(view.low - across / 1200 * span, span, self._picture.axis.length))
        elif up:
            self.set_view(view.zoomed(1.0015**up, event.position().x(), self._picture.axis.length))
        event.accept()

    def event(self, event: QEvent) -> bool:
        """Answer tooltips: a fault's message, or what is known of the moment."""
        if isinstance(event, QHelpEvent) and event.type() is QEvent.Type.ToolTip:
            words = self._words_at(QPointF(event.pos()))
            QToolTip.showText(event.globalPos(), words, self) if words else QToolTip.hideText()
            return True
        return super().event(event)

    def _words_at(self, where: QPointF) -> str:
        found = self.hit(where)
        if found.fault is not None:
            return found.fault.message
        moment = self._desk.selection.moment
        lines = [self.words_for(found.run)] if found.run else []
        if moment and (ride := self._picture.rides.get(moment[0])) is not None and ride.time.size:
            index = min(int(ride.time.searchsorted(moment[1])), ride.time.size - 1)
            axis = self._picture.axis
            second = axis.offsets[moment[0]] + moment[1]
            parts = [clock(second, with_seconds=True) if axis.dated else elapsed(moment[1])]
            for name, kind in (("power", Kind.POWER), ("speed", Kind.SPEED)):
                if name in ride.channels and math.isfinite(value := float(ride.channels[name][index])):
                    parts.append(self._desk.units.text(value, kind))
            lines.append(" · ".join(parts))
        return "\n".join(lines)

    def hit(self, where: QPointF) -> Hit:
        """Return what lies under a point."""
        bands = self.bands()
        return hit(
            self.view(),
            self._picture,
            where.x(),
            where.y(),
            (bands.faults.top() - 3, bands.faults.bottom() + 3),
        )

    def ride_at(self, along: float) -> str:
        """Return the ride that was under way at a place along the axis; empty without."""
        axis = self._picture.axis
        second = axis.day_at(along)
        for key, ride in self._picture.rides.items():
            if axis.offsets[key] - 1 <= second <= axis.offsets[key] + ride.duration + 1:
                return key
        return ""

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Keep the list behind the picture."""
        self.list.setGeometry(self.rect().adjusted(2, 2, -2, -2))
        self._traces = None
