"""The day strip: runs are made, trimmed, split and reassigned on it, by mouse here and by keyboard in `keys`."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import QEvent, QPointF, Qt, Signal
from PySide6.QtGui import QContextMenuEvent, QMouseEvent
from PySide6.QtWidgets import QMenu, QWidget

from ridercda.app.desk import Desk
from ridercda.app.run_edits import RunEdits
from ridercda.app.strip.canvas import StripCanvas
from ridercda.app.strip.keys import StripKeys
from ridercda.app.strip.view import Grip, Hit, StripView
from ridercda.app.widgets.card import chip_pixmap


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


class DayStrip(StripCanvas):
    """The whole day on one axis."""

    exclude_requested = Signal(object)  # run ids: a reason is asked for elsewhere

    def __init__(self, desk: Desk, edits: RunEdits, parent: QWidget | None = None) -> None:
        super().__init__(desk, parent)
        self._edits = edits
        self._drag: _Drag | None = None
        self._keys = StripKeys(self, desk, edits)
        self.list.key_pressed.connect(self._keys.press)

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Pick a run, take hold of an edge, begin a new run, or pan on clock and map."""
        if event.button() is not Qt.MouseButton.LeftButton or not self._picture.traces:
            return
        self.list.setFocus(Qt.FocusReason.MouseFocusReason)
        where, bands, view = event.position(), self.bands(), self.view()
        if bands.map.height() and where.y() >= bands.map.top() - 4:
            self._drag = _Drag("map", where.x())
            self._pan_by_map(where.x())
            return
        if where.y() >= bands.clock.top():
            self._drag = _Drag("pan", where.x(), low=view.low)
            self.setCursor(Qt.CursorShape.ClosedHandCursor)
            return
        found = self.hit(where)
        if found.run is not None:
            self._press_run(found, event)
        elif found.fault is None:
            along = view.along(where.x())
            if ride := self.ride_at(along):
                self._drag = _Drag("new", where.x(), ride=ride, along=self._picture.axis.moment(along, ride))
            if not event.modifiers():
                self._desk.selection.pick_runs(())

    def _press_run(self, found: Hit, event: QMouseEvent) -> None:
        run = found.run
        assert run is not None
        modifiers = event.modifiers()
        if modifiers & Qt.KeyboardModifier.ControlModifier:
            self._desk.selection.toggle_run(run.id)
        elif modifiers & Qt.KeyboardModifier.ShiftModifier and self._desk.selection.runs:
            self._desk.selection.pick_runs(self._range_to(run.id))
        elif run.id not in self._desk.selection.runs or found.grip is not Grip.BODY:
            self._desk.selection.pick_run(run.id)
        if found.grip is not Grip.BODY:
            self.held = found.grip
            self._drag = _Drag("edge", event.position().x(), run=run.id, grip=found.grip)
        else:
            self.held = None
        self.update()

    def _range_to(self, run_id: str) -> tuple[str, ...]:
        order = [run.id for run in self._picture.runs]
        first, last = sorted((order.index(self._desk.selection.run), order.index(run_id)))
        inside = order[first : last + 1]
        return (*(each for each in inside if each != run_id), run_id)

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        """Drag what is held; without, tell the moment under the pointer."""
        where, view = event.position(), self.view()
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
            self.new_span = (drag.ride, max(0.0, round(start)), min(float(ride.time[-1]), round(end)))
            self.update()
        elif drag.kind == "pan":
            step = (where.x() - drag.x) * (view.high - view.low) / (view.right - view.left)
            self.set_view(view.moved_to(drag.low - step, view.high - view.low, self._picture.axis.length))
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
        self.set_view(view.moved_to(middle - span / 2, span, length))

    def _hover(self, where: QPointF, view: StripView) -> None:
        found = self.hit(where)
        shapes = {Grip.START: Qt.CursorShape.SizeHorCursor, Grip.END: Qt.CursorShape.SizeHorCursor}
        over = found.run is not None
        shape = (
            shapes.get(found.grip, Qt.CursorShape.PointingHandCursor) if over else Qt.CursorShape.ArrowCursor
        )
        self.setCursor(shape)
        if view.left <= where.x() <= view.right:
            along = view.along(where.x())
            if ride := self.ride_at(along):
                self._desk.selection.point_at(ride, self._picture.axis.moment(along, ride))
                return
        self._desk.selection.point_away()

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        """Let go: a drawn span becomes a run; the moves of an edge are one step."""
        drag, self._drag = self._drag, None
        span, self.new_span = self.new_span, None
        self._desk.document.end_gesture()
        if drag and drag.kind == "new" and drag.moved and span:
            self._edits.create(*span)
        self.setCursor(Qt.CursorShape.ArrowCursor)
        self.update()

    def mouseDoubleClickEvent(self, event: QMouseEvent) -> None:
        """Zoom to a run; beside the runs, back to the whole day."""
        if self.hit(event.position()).run is not None:
            self.zoom_to_picked()
        else:
            self.zoom_to_day()

    def leaveEvent(self, event: QEvent) -> None:
        """Tell that the pointer has left."""
        self._desk.selection.point_away()

    def contextMenuEvent(self, event: QContextMenuEvent) -> None:
        """Offer what can be done with the runs picked."""
        found = self.hit(QPointF(event.pos()))
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
