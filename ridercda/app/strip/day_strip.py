"""The day strip as a widget: seen, pointed at, dragged and driven by keyboard."""

from __future__ import annotations

import math
from dataclasses import dataclass

from PySide6.QtCore import QEvent, QPointF, QRectF, QSize, Qt, Signal
from PySide6.QtGui import (
    QContextMenuEvent,
    QHelpEvent,
    QKeyEvent,
    QMouseEvent,
    QPainter,
    QPaintEvent,
    QPen,
    QPixmap,
    QResizeEvent,
    QWheelEvent,
)
from PySide6.QtWidgets import QMenu, QToolTip, QWidget

from ridercda.app.desk import Desk
from ridercda.app.figures import clock, duration, elapsed
from ridercda.app.run_edits import RunEdits
from ridercda.app.strip import painting
from ridercda.app.strip.day_axis import day_axis
from ridercda.app.strip.picture import (
    StripPicture,
    StripRun,
    axis_of,
    faults_of,
    runs_of,
    traces_of,
)
from ridercda.app.strip.run_list import RunList
from ridercda.app.strip.view import Grip, Hit, StripView, hit
from ridercda.app.widgets import drawing
from ridercda.app.widgets.card import chip_pixmap
from ridercda.drag.estimate import Estimate
from ridercda.units import Kind

EMPTY_AXIS = day_axis(())


@dataclass(slots=True)
class _Drag:
    """What the pressed button holds."""

    kind: str  # "edge", "new", "pan", "map"
    x: float
    run: str = ""
    grip: Grip = Grip.BODY
    ride: str = ""
    along: float = 0.0
    low: float = 0.0
    moved: bool = False


class DayStrip(QWidget):
    """The whole day on one axis; runs are made, trimmed, split and reassigned here."""

    exclude_requested = Signal(object)  # run ids: a reason is asked for elsewhere

    def __init__(self, desk: Desk, edits: RunEdits, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._desk, self._edits, self.theme = desk, edits, desk.theme
        self._picture = StripPicture(EMPTY_AXIS)
        self._low, self._high = 0.0, 1.0
        self._drag: _Drag | None = None
        self._new_span: tuple[str, float, float] | None = None
        self._held: Grip | None = None  # the edge the keyboard holds
        self._ground: QPixmap | None = None
        self._pointer: QPointF | None = None
        self.setMouseTracking(True)
        self.setAccessibleName(self.tr("Day strip"))
        self.list = RunList(self)
        self.list.key_pressed.connect(self._on_list_key_pressed)
        self.list.focus_changed.connect(self.update)
        self.setFocusProxy(self.list)
        desk.document.session_changed.connect(self._on_session_changed)
        desk.document.session_opened.connect(self._on_session_opened)
        desk.shelf.changed.connect(self._on_shelf_changed)
        desk.solving.changed.connect(self._on_solving_changed)
        desk.selection.changed.connect(self._on_selection_changed)
        desk.selection.moment_changed.connect(self.update)
        desk.theme.changed.connect(self._on_theme_changed)
        desk.units.changed.connect(self.update)

    # -- what is shown -----------------------------------------------------------------------------------

    @property
    def picture(self) -> StripPicture:
        """What the strip shows now."""
        return self._picture

    def view(self) -> StripView:
        """Return the part of the axis that is seen."""
        bands = self._bands()
        return StripView(self._low, self._high, bands.letters.left(), bands.letters.right())

    def _bands(self) -> painting.Bands:
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
        self._low, self._high, self._drag, self._held = 0.0, 1.0, None, None
        self._ground = None

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
        )
        if whole or self._high > axis.length:
            self._low, self._high = 0.0, axis.length
        self._refresh()

    def _on_session_changed(self) -> None:
        picture = self._picture
        known = {entry.id for entry in self._desk.session.rides}
        rides = {key: ride for key, ride in picture.rides.items() if key in known}
        runs = runs_of(self._desk.session, picture.axis, rides, self._estimate())
        self._picture = StripPicture(picture.axis, runs, picture.faults, picture.traces, picture.rides)
        self._refresh()

    def _on_solving_changed(self) -> None:
        picture = self._picture
        runs = runs_of(self._desk.session, picture.axis, picture.rides, self._estimate())
        if runs != picture.runs:
            self._picture = StripPicture(picture.axis, runs, picture.faults, picture.traces, picture.rides)
            self._refresh()

    def _estimate(self) -> Estimate | None:
        return self._desk.solving.estimate

    def _refresh(self) -> None:
        self._ground = None
        self.list.show_runs(tuple((run.id, self.words_for(run)) for run in self._picture.runs), self._desk.selection.run)
        self.update()

    def _on_selection_changed(self) -> None:
        run = self._picture.run(self._desk.selection.run)
        if run is not None:
            view = self.view().showing(run.left, run.right, self._picture.axis.length)
            self._set_view(view)
        else:
            self._held = None
        self.list.show_current(self._desk.selection.run)
        self.update()

    def _on_theme_changed(self) -> None:
        self._ground = None
        self.updateGeometry()
        self.update()

    def words_for(self, run: StripRun) -> str:
        """Return what is said of a run, by tooltip and screen reader."""
        axis = self._picture.axis
        tell = (lambda a: clock(axis.day_at(a))) if axis.dated else (lambda a: elapsed(axis.day_at(a)))
        words = self.tr("Run {run}, setup {letter}, {start} to {end} ({length})").format(
            run=run.id, letter=run.badge.letter, start=tell(run.left), end=tell(run.right),
            length=duration(run.end - run.start),
        )  # fmt: skip
        return words + (self.tr(", left out: {}").format(run.excluded) if run.excluded else "")

    # -- painting ----------------------------------------------------------------------------------------

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw the ground, kept as a picture while nothing changes, then what is picked and pointed at."""
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        if not self._picture.traces:
            self._draw_empty(painter)
            return
        if self._ground is None or self._ground.size() != self.size() * self.devicePixelRatioF():
            self._ground = self._drawn_ground()
        painter.drawPixmap(0, 0, self._ground)
        view, bands = self.view(), self._bands()
        painter.setClipRect(QRectF(view.left - 4, 0, view.right - view.left + 8, self.height()))
        for run_id in self._desk.selection.runs:
            if run := self._picture.run(run_id):
                held = self._held if run_id == self._desk.selection.run else None
                painting.draw_picked(painter, self.theme, view, bands, run, held, focus=self.list.hasFocus())
        if self._new_span is not None:
            self._draw_new(painter, view, bands)
        self._draw_moment(painter, view, bands)
        painter.end()

    def _drawn_ground(self) -> QPixmap:
        ratio = self.devicePixelRatioF()
        pixmap = QPixmap((self.size() * ratio))
        pixmap.setDevicePixelRatio(ratio)
        pixmap.fill(self.theme.colour("card", 0.0))
        painter = QPainter(pixmap)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        view, bands = self.view(), self._bands()
        self._draw_lane_names(painter, bands)
        painter.setClipRect(QRectF(view.left - 4, 0, view.right - view.left + 8, self.height()))
        painting.draw_ground(painter, self.theme, self._picture, view, bands)
        painting.draw_traces(painter, self.theme, self._picture, view, bands.traces)
        painting.draw_blocks(painter, self.theme, self._picture, view, bands)
        if self._picture.has_wind:
            scale = self._desk.units.scale(Kind.WIND_SPEED)
            painting.draw_wind(painter, self.theme, self._picture, view, bands.wind, scale)
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
            words = self.tr("The day appears here once a ride file is added. Drop files anywhere in the window.")
        drawing.text(painter, QRectF(self.rect()), words, self.theme.font(), self.theme.colour("quiet"), drawing.CENTRE)

    def _draw_new(self, painter: QPainter, view: StripView, bands: painting.Bands) -> None:
        ride, start, end = self._new_span or ("", 0.0, 0.0)
        left, right = view.x(self._picture.axis.place(ride, start)), view.x(self._picture.axis.place(ride, end))
        rect = QRectF(left, bands.letters.top(), right - left, bands.faults.top() - bands.letters.top())
        painter.fillRect(rect, self.theme.colour("accent", 0.14))
        painter.setPen(QPen(self.theme.colour("accent"), self.theme.px(1.5)))
        painter.drawRect(rect)
        words = duration(end - start)
        drawing.label(painter, self.theme, rect.center().x(), bands.letters.center().y(), words, role="accent", strong=True)

    def _draw_moment(self, painter: QPainter, view: StripView, bands: painting.Bands) -> None:
        moment = self._desk.selection.moment
        if moment is None or moment[0] not in self._picture.axis.offsets:
            return
        x = view.x(self._picture.axis.place(*moment))
        painter.setPen(QPen(self.theme.colour("accent"), self.theme.px(1)))
        painter.drawLine(QPointF(x, bands.letters.bottom() + 2), QPointF(x, bands.clock.top()))

    # -- zoom and pan ------------------------------------------------------------------------------------

    def _set_view(self, view: StripView) -> None:
        if (view.low, view.high) != (self._low, self._high):
            self._low, self._high = view.low, view.high
            self._ground = None
            self.update()

    def zoom(self, factor: float) -> None:
        """Zoom about the picked run, else the middle."""
        view = self.view()
        run = self._picture.run(self._desk.selection.run)
        x = view.x(0.5 * (run.left + run.right)) if run else 0.5 * (view.left + view.right)
        self._set_view(view.zoomed(factor, x, self._picture.axis.length))

    def zoom_to_day(self) -> None:
        """Show the whole day."""
        view = self.view()
        self._set_view(StripView(0.0, self._picture.axis.length, view.left, view.right))

    def zoom_to_picked(self) -> None:
        """Show the picked runs at full width."""
        runs = [run for run in self._picture.runs if run.id in self._desk.selection.runs]
        if runs:
            low, high = min(run.left for run in runs), max(run.right for run in runs)
            margin = 0.15 * (high - low) + 10
            self._set_view(self.view().moved_to(low - margin, min(self._picture.axis.length, high - low + 2 * margin), self._picture.axis.length))

    def wheelEvent(self, event: QWheelEvent) -> None:
        """Zoom about the pointer; sideways or with Shift, pan."""
        across, up = event.angleDelta().x(), event.angleDelta().y()
        view = self.view()
        if event.modifiers() & Qt.KeyboardModifier.ShiftModifier:
            across, up = across or up, 0
        if abs(across) > abs(up):
            span = view.high - view.low
            self._set_view(view.moved_to(view.low - across / 1200 * span, span, self._picture.axis.length))
        elif up:
            self._set_view(view.zoomed(1.0015**up, event.position().x(), self._picture.axis.length))
        event.accept()

    # -- mouse -------------------------------------------------------------------------------------------

    def _hit(self, where: QPointF) -> Hit:
        bands = self._bands()
        return hit(self.view(), self._picture, where.x(), where.y(), (bands.faults.top() - 3, bands.faults.bottom() + 3))

    def _ride_at(self, along: float) -> str:
        axis = self._picture.axis
        second = axis.day_at(along)
        for key, ride in self._picture.rides.items():
            if axis.offsets[key] - 1 <= second <= axis.offsets[key] + ride.duration + 1:
                return key
        return ""

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Pick a run, take hold of an edge, begin a new run, or pan on clock and map."""
        if event.button() is not Qt.MouseButton.LeftButton or not self._picture.traces:
            return
        self.list.setFocus(Qt.FocusReason.MouseFocusReason)
        where, bands, view = event.position(), self._bands(), self.view()
        if bands.map.height() and where.y() >= bands.map.top() - 4:
            self._drag = _Drag("map", where.x())
            self._pan_by_map(where.x())
            return
        if where.y() >= bands.clock.top():
            self._drag = _Drag("pan", where.x(), low=view.low)
            self.setCursor(Qt.CursorShape.ClosedHandCursor)
            return
        found = self._hit(where)
        if found.run is not None:
            self._press_run(found, event)
        elif found.fault is None:
            along = view.along(where.x())
            if ride := self._ride_at(along):
                self._drag = _Drag("new", where.x(), ride=ride, along=self._picture.axis.moment(along, ride))
            if not event.modifiers():
                self._desk.selection.pick_runs(())

    def _press_run(self, found: Hit, event: QMouseEvent) -> None:
        run = found.run
        assert run is not None  # noqa: S101 - told by the caller
        modifiers = event.modifiers()
        if modifiers & Qt.KeyboardModifier.ControlModifier:
            self._desk.selection.toggle_run(run.id)
        elif modifiers & Qt.KeyboardModifier.ShiftModifier and self._desk.selection.runs:
            self._desk.selection.pick_runs(self._range_to(run.id))
        elif run.id not in self._desk.selection.runs or found.grip is not Grip.BODY:
            self._desk.selection.pick_run(run.id)
        if found.grip is not Grip.BODY:
            self._held = found.grip
            self._drag = _Drag("edge", event.position().x(), run=run.id, grip=found.grip)
        else:
            self._held = None
        self.update()

    def _range_to(self, run_id: str) -> tuple[str, ...]:
        order = [run.id for run in self._picture.runs]
        first, last = sorted((order.index(self._desk.selection.run), order.index(run_id)))
        inside = order[first : last + 1]
        return (*(each for each in inside if each != run_id), run_id)

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        """Drag what is held; without, tell the moment under the pointer."""
        where, view = event.position(), self.view()
        self._pointer = where
        drag = self._drag
        if drag is None:
            self._hover(where, view)
            return
        drag.moved = drag.moved or abs(where.x() - drag.x) >= 3
        if not drag.moved:
            return
        if drag.kind == "edge":
            self._drag_edge(drag, view.along(where.x()))
        elif drag.kind == "new":
            end = self._picture.axis.moment(view.along(where.x()), drag.ride)
            ride = self._picture.rides[drag.ride]
            start, end = sorted((drag.along, end))
            self._new_span = (drag.ride, max(0.0, round(start)), min(float(ride.time[-1]), round(end)))
            self.update()
        elif drag.kind == "pan":
            step = (where.x() - drag.x) * (view.high - view.low) / (view.right - view.left)
            self._set_view(view.moved_to(drag.low - step, view.high - view.low, self._picture.axis.length))
        else:
            self._pan_by_map(where.x())

    def _drag_edge(self, drag: _Drag, along: float) -> None:
        run = self._picture.run(drag.run)
        if run is None:
            return
        time = float(round(self._picture.axis.moment(along, run.ride)))
        if drag.grip is Grip.START:
            self._edits.trim(run.id, time, run.end, "start")
        else:
            self._edits.trim(run.id, run.start, time, "end")

    def _pan_by_map(self, x: float) -> None:
        view, length = self.view(), self._picture.axis.length
        span = view.high - view.low
        middle = (x - view.left) / (view.right - view.left) * length
        self._set_view(view.moved_to(middle - span / 2, span, length))

    def _hover(self, where: QPointF, view: StripView) -> None:
        found = self._hit(where)
        shapes = {Grip.START: Qt.CursorShape.SizeHorCursor, Grip.END: Qt.CursorShape.SizeHorCursor}
        over = found.run is not None
        shape = shapes.get(found.grip, Qt.CursorShape.PointingHandCursor) if over else Qt.CursorShape.ArrowCursor
        self.setCursor(shape)
        if view.left <= where.x() <= view.right:
            along = view.along(where.x())
            if ride := self._ride_at(along):
                self._desk.selection.point_at(ride, self._picture.axis.moment(along, ride))
                return
        self._desk.selection.point_away()

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        """Let go: a drawn span becomes a run; the moves of an edge are one step."""
        drag, self._drag = self._drag, None
        span, self._new_span = self._new_span, None
        self._desk.document.end_gesture()
        if drag and drag.kind == "new" and drag.moved and span:
            self._edits.create(*span)
        self.setCursor(Qt.CursorShape.ArrowCursor)
        self.update()

    def mouseDoubleClickEvent(self, event: QMouseEvent) -> None:
        """Zoom to a run; beside the runs, back to the whole day."""
        if self._hit(event.position()).run is not None:
            self.zoom_to_picked()
        else:
            self.zoom_to_day()

    def leaveEvent(self, event: QEvent) -> None:
        """Tell that the pointer has left."""
        self._pointer = None
        self._desk.selection.point_away()

    def contextMenuEvent(self, event: QContextMenuEvent) -> None:
        """Offer what can be done with the runs picked."""
        found = self._hit(QPointF(event.pos()))
        if found.run is None:
            return
        if found.run.id not in self._desk.selection.runs:
            self._desk.selection.pick_run(found.run.id)
        along = self.view().along(event.pos().x())
        menu = self.run_menu(self._picture.axis.moment(along, found.run.ride))
        menu.popup(event.globalPos())

    def run_menu(self, moment: float) -> QMenu:
        """Return the menu for the picked runs; `moment` is where a split would fall. [s]"""
        picked, session = self._desk.selection.runs, self._desk.session
        menu = QMenu(self)
        menu.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        for setup_id, badge in self._desk.badges().items():
            words = self.tr("Ridden in {}").format(badge.name)
            pixmap = chip_pixmap(self.theme, badge.index, badge.letter, self.devicePixelRatioF(), 16)
            menu.addAction(pixmap, words, lambda key=setup_id: self._edits.assign(picked, key))
        menu.addSeparator()
        run = session.run(picked[-1])
        menu.addAction(self.tr("Split here"), lambda: self._edits.split(run.id, moment))
        merge = menu.addAction(self.tr("Merge"), lambda: self._edits.merge(picked))
        merge.setEnabled(len(picked) > 1)
        menu.addSeparator()
        if run.excluded:
            menu.addAction(self.tr("Count again"), lambda: self._edits.include(picked))
        else:
            menu.addAction(self.tr("Leave out…"), lambda: self.exclude_requested.emit(picked))
        menu.addAction(self.tr("Remove"), lambda: self._edits.remove(picked))
        return menu

    def event(self, event: QEvent) -> bool:
        """Answer tooltips: a fault's message, or what is known of the moment."""
        if isinstance(event, QHelpEvent) and event.type() is QEvent.Type.ToolTip:
            words = self._words_at(QPointF(event.pos()))
            QToolTip.showText(event.globalPos(), words, self) if words else QToolTip.hideText()
            return True
        return super().event(event)

    def _words_at(self, where: QPointF) -> str:
        found = self._hit(where)
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

    # -- keyboard ----------------------------------------------------------------------------------------

    def _on_list_key_pressed(self, event: QKeyEvent) -> None:
        """Drive the strip: arrows pick runs, [ and ] take an edge, letters assign; see the Help menu."""
        key, text, modifiers = event.key(), event.text(), event.modifiers()
        picked = self._desk.selection.runs
        step = {Qt.Key.Key_Left: -1, Qt.Key.Key_Right: 1}.get(Qt.Key(key))
        plain = not modifiers & (Qt.KeyboardModifier.ControlModifier | Qt.KeyboardModifier.AltModifier)
        if step and self._held and self._desk.selection.run:
            self._nudge(step * (10 if modifiers & Qt.KeyboardModifier.ShiftModifier else 1))
        elif step:
            self._step_run(step, extend=bool(modifiers & Qt.KeyboardModifier.ShiftModifier))
        elif text in ("[", "]") and picked:
            self._held = Grip.START if text == "[" else Grip.END
        elif key in (Qt.Key.Key_Escape, Qt.Key.Key_Return, Qt.Key.Key_Enter) and self._held:
            self._held = None
            self._desk.document.end_gesture()
        elif key == Qt.Key.Key_Escape:
            self._desk.selection.pick_runs(())
        elif key == Qt.Key.Key_Insert:
            self._create_by_key()
        elif key == Qt.Key.Key_Delete and picked:
            self._edits.remove(picked)
        elif text in ("+", "="):
            self.zoom(1.5)
        elif text in ("-", "_"):
            self.zoom(1 / 1.5)
        elif text == "0":
            self.zoom_to_day()
        elif plain and len(text) == 1 and text.isalpha() and picked:
            self._edits.assign_letter(picked, text.upper())
        else:
            event.ignore()
            return
        self.update()

    def _step_run(self, step: int, *, extend: bool) -> None:
        order = [run.id for run in self._picture.runs]
        if not order:
            return
        now = self._desk.selection.run
        place = order.index(now) + step if now in order else (0 if step > 0 else len(order) - 1)
        target = order[max(0, min(place, len(order) - 1))]
        if extend and now:
            kept = [each for each in self._desk.selection.runs if each != target]
            self._desk.selection.pick_runs((*kept, target))
        else:
            self._desk.selection.pick_run(target)

    def _nudge(self, step: int) -> None:
        run = self._picture.run(self._desk.selection.run)
        if run is not None and self._held is Grip.START:
            self._edits.trim(run.id, run.start + step, run.end, "start")
        elif run is not None:
            self._edits.trim(run.id, run.start, run.end + step, "end")

    def _create_by_key(self) -> None:
        """Make a run of up to five minutes after the picked one, else at the beginning of what is seen."""
        run = self._picture.run(self._desk.selection.run)
        along = run.right if run else self._low
        ride = run.ride if run else self._ride_at(along)
        if ride:
            start = run.end if run else max(0.0, self._picture.axis.moment(along, ride))
            end = min(start + 300.0, float(self._picture.rides[ride].time[-1]))
            self._edits.create(ride, start, end)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Keep the list behind the picture."""
        self.list.setGeometry(self.rect().adjusted(2, 2, -2, -2))
        self._ground = None
