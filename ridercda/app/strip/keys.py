"""The day strip by keyboard: arrows pick runs, brackets take an edge, letters say which setup was ridden."""

from __future__ import annotations

from PySide6.QtCore import QObject, Qt
from PySide6.QtGui import QKeyEvent

from ridercda.app.desk import Desk
from ridercda.app.run_edits import RunEdits
from ridercda.app.strip.canvas import StripCanvas
from ridercda.app.strip.view import Grip

NEW_RUN = 300.0  # s; as long as a run made by keyboard at first is


class StripKeys(QObject):
    """Turns keys into picks and edits."""

    def __init__(self, strip: StripCanvas, desk: Desk, edits: RunEdits) -> None:
        super().__init__(strip)
        self._strip, self._desk, self._edits = strip, desk, edits

    def press(self, event: QKeyEvent) -> None:
        """Drive the strip: arrows pick runs, [ and ] take an edge, letters assign; see the Help menu."""
        key, text, modifiers = event.key(), event.text(), event.modifiers()
        picked = self._desk.selection.runs
        step = {Qt.Key.Key_Left: -1, Qt.Key.Key_Right: 1}.get(Qt.Key(key))
        plain = not modifiers & (Qt.KeyboardModifier.ControlModifier | Qt.KeyboardModifier.AltModifier)
        if step and self._strip.held and self._desk.selection.run:
            self._nudge(step * (10 if modifiers & Qt.KeyboardModifier.ShiftModifier else 1))
        elif step:
            self._step_run(step, extend=bool(modifiers & Qt.KeyboardModifier.ShiftModifier))
        elif text in ("[", "]") and picked:
            self._strip.held = Grip.START if text == "[" else Grip.END
        elif key in (Qt.Key.Key_Escape, Qt.Key.Key_Return, Qt.Key.Key_Enter) and self._strip.held:
            self._strip.held = None
            self._desk.document.end_gesture()
        elif key == Qt.Key.Key_Escape:
            self._desk.selection.pick_runs(())
        elif key == Qt.Key.Key_Insert:
            self._create_by_key()
        elif key == Qt.Key.Key_Delete and picked:
            self._edits.remove(picked)
        elif text in ("+", "="):
            self._strip.zoom(1.5)
        elif text in ("-", "_"):
            self._strip.zoom(1 / 1.5)
        elif text == "0":
            self._strip.zoom_to_day()
        elif plain and len(text) == 1 and text.isalpha() and picked:
            self._edits.assign_letter(picked, text.upper())
        else:
            event.ignore()
            return
        self._strip.update()

    def _step_run(self, step: int, *, extend: bool) -> None:
        order = [run.id for run in self._strip.picture.runs]
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
        run = self._strip.picture.run(self._desk.selection.run)
        if run is not None and self._strip.held is Grip.START:
            self._edits.trim(run.id, run.start + step, run.end, "start")
        elif run is not None:
            self._edits.trim(run.id, run.start, run.end + step, "end")

    def _create_by_key(self) -> None:
        """Make a run of up to five minutes after the picked one, else at the beginning of what is seen."""
        run = self._strip.picture.run(self._desk.selection.run)
        along = run.right if run else self._strip.view().low
        ride = run.ride if run else self._strip.ride_at(along)
        if ride:
            start = run.end if run else max(0.0, self._strip.picture.axis.moment(along, ride))
            end = min(start + NEW_RUN, float(self._strip.picture.rides[ride].time[-1]))
            self._edits.create(ride, start, end)
