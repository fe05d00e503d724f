from __future__ import annotations

import pytest
from invented import opened
from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtTest import QTest
from pytestqt.qtbot import QtBot

from ridercda.app.desk import Desk
from ridercda.app.run_edits import RunEdits
from ridercda.app.strip.day_strip import DayStrip
from ridercda.app.strip.picture import FAULT_SHAPES
from ridercda.app.strip.view import TARGET, Grip, StripView, block_extent

LEFT = Qt.MouseButton.LeftButton
NONE = Qt.KeyboardModifier.NoModifier
SHIFT, CONTROL = Qt.KeyboardModifier.ShiftModifier, Qt.KeyboardModifier.ControlModifier


def shown(day: Desk, qtbot: QtBot, width: int = 1200) -> DayStrip:
    strip = DayStrip(day, RunEdits(day))
    strip._on_shelf_changed()
    strip.resize(width, 130)
    qtbot.addWidget(strip)
    strip.show()
    return strip


def at(strip: DayStrip, run_id: str, share: float) -> QPoint:
    """Return a point in a run's block, at a share of its width."""
    run = strip.picture.run(run_id)
    assert run is not None
    left, right = block_extent(strip.view(), run)
    return QPoint(round(left + share * (right - left)), 60)


def moved(strip: DayStrip, start: QPoint, end: QPoint, steps: int = 6) -> None:
    """Drag the mouse in steps, as a hand does."""
    QTest.mousePress(strip, LEFT, NONE, start)
    for k in range(1, steps + 1):
        QTest.mouseMove(strip, start + (end - start) * k / steps)
    QTest.mouseRelease(strip, LEFT, NONE, end)


def test_a_click_picks_a_run_and_control_another(day: Desk, qtbot: QtBot) -> None:
    strip = shown(day, qtbot)
    QTest.mouseClick(strip, LEFT, NONE, at(strip, "4", 0.5))
    assert day.selection.runs == ("4",)
    QTest.mouseClick(strip, LEFT, CONTROL, at(strip, "6", 0.5))
    assert day.selection.runs == ("4", "6")
    QTest.mouseClick(strip, LEFT, SHIFT, at(strip, "9", 0.5))
    assert set(day.selection.runs) == {"6", "7", "8", "9"}


def test_dragging_an_edge_trims_in_one_step(day: Desk, qtbot: QtBot) -> None:
    strip = shown(day, qtbot)
    before = day.session.run("2")
    moved(strip, at(strip, "2", 1.0), at(strip, "2", 0.75))
    after = day.session.run("2")
    assert after.start == before.start
    assert before.end is not None
    assert after.end is not None
    length = before.end - before.start
    assert after.end - after.start == pytest.approx(0.75 * length, abs=2 * length / 60)
    assert after.end == round(after.end)
    assert day.document.undo_stack.count() == 1
    day.document.undo_stack.undo()
    assert day.session.run("2") == before


def test_an_edge_stops_at_its_neighbour(day: Desk, qtbot: QtBot) -> None:
    strip = shown(day, qtbot)
    moved(strip, at(strip, "2", 1.0), at(strip, "3", 0.5))
    assert day.session.run("2").end == day.session.run("3").start


def test_dragging_over_free_time_makes_a_run(day: Desk, qtbot: QtBot) -> None:
    strip = shown(day, qtbot)
    gap_start, gap_end = at(strip, "3", 1.0) + QPoint(9, 0), at(strip, "4", 0.0) - QPoint(9, 0)
    moved(strip, gap_start, gap_end)
    assert len(day.session.runs) == 13
    made = day.session.run(day.selection.run)
    three, four = day.session.run("3"), day.session.run("4")
    assert three.end is not None
    assert three.end < made.start
    assert made.end is not None
    assert made.end < four.start
    assert day.document.undo_stack.undoText() == "New run"


def test_keys_pick_nudge_and_let_go(day: Desk, qtbot: QtBot) -> None:
    strip = shown(day, qtbot)
    strip.list.setFocus()
    day.selection.pick_run("4")
    QTest.keyClick(strip.list, Qt.Key.Key_Right)
    assert day.selection.run == "5"
    start = day.session.run("5").start
    QTest.keyClicks(strip.list, "[")
    assert strip.held is Grip.START
    QTest.keyClick(strip.list, Qt.Key.Key_Right)
    assert day.session.run("5").start == start + 1
    QTest.keyClick(strip.list, Qt.Key.Key_Left, SHIFT)
    assert day.session.run("5").start == start - 9
    QTest.keyClick(strip.list, Qt.Key.Key_Return)
    assert strip.held is None
    QTest.keyClick(strip.list, Qt.Key.Key_Left)
    assert day.selection.run == "4"


def test_a_letter_says_which_setup_was_ridden(day: Desk, qtbot: QtBot) -> None:
    strip = shown(day, qtbot)
    day.selection.pick_runs(("1", "2"))
    QTest.keyClicks(strip.list, "c")
    assert {day.session.run(run).setup for run in ("1", "2")} == {"s2"}
    QTest.keyClicks(strip.list, "d")  # the next free letter makes the setup
    assert len(day.session.setups) == 4
    assert day.session.run("1").setup == day.session.setups[-1].id
    assert day.document.undo_stack.undoText() == "Assign 2 runs to new setup D"
    QTest.keyClicks(strip.list, "q")  # no setup has it, and it is not the next
    assert len(day.session.setups) == 4


def test_insert_and_delete_make_and_remove_runs(day: Desk, qtbot: QtBot) -> None:
    strip = shown(day, qtbot)
    day.selection.pick_run("3")
    QTest.keyClick(strip.list, Qt.Key.Key_Insert)
    assert len(day.session.runs) == 13
    made = day.session.run(day.selection.run)
    assert made.start == day.session.run("3").end
    QTest.keyClick(strip.list, Qt.Key.Key_Delete)
    assert len(day.session.runs) == 12


def test_zoom_keeps_the_place_under_the_pointer(day: Desk, qtbot: QtBot) -> None:
    strip = shown(day, qtbot)
    view = strip.view()
    closer = view.zoomed(3.0, 500.0, strip.picture.axis.length)
    assert closer.along(500.0) == pytest.approx(view.along(500.0))
    assert (closer.high - closer.low) == pytest.approx((view.high - view.low) / 3.0)
    strip.zoom(4.0)
    assert strip.view().high - strip.view().low < 0.3 * strip.picture.axis.length
    strip.zoom_to_day()
    assert strip.view().high == pytest.approx(strip.picture.axis.length)
    wide = StripView(0.0, 100.0, 0.0, 500.0).zoomed(0.01, 250.0, 100.0)
    assert (wide.low, wide.high) == (0.0, 100.0)


def test_narrow_blocks_can_still_be_hit(desk: Desk, qtbot: QtBot) -> None:
    strip = shown(opened(desk, setups=12, runs=60), qtbot, width=640)
    for run in strip.picture.runs:
        left, right = block_extent(strip.view(), run)
        assert right - left < TARGET
        found = strip.hit(QPointF((left + right) / 2, 60.0))
        assert found.run is not None
        assert found.run.id == run.id
    alone = strip.picture.runs[0]
    left, _ = block_extent(strip.view(), alone)
    assert strip.hit(QPointF(left - 5.0, 60.0)).run is alone


def test_fault_ticks_tell_their_message_and_differ_in_shape(day: Desk, qtbot: QtBot) -> None:
    strip = shown(day, qtbot)
    view, bands = strip.view(), strip.bands()
    shapes = set()
    for fault in strip.picture.faults:
        found = strip.hit(QPointF(view.x(fault.along), bands.faults.center().y()))
        assert found.fault is not None
        assert found.fault.message == fault.message
        shapes.add(fault.shape)
    assert len(shapes) == 2
    assert len(set(FAULT_SHAPES.values())) == 3


def test_the_list_behind_reads_out_every_run(day: Desk, qtbot: QtBot) -> None:
    strip = shown(day, qtbot)
    assert strip.list.count() == 12
    assert strip.list.item(3).text() == "Run 4, setup C, 8:34 to 8:41 (7\u00a0min)"
    day.selection.pick_run("4")
    assert strip.list.currentRow() == 3


def test_what_is_proposed_is_outlined_until_taken(day: Desk, qtbot: QtBot) -> None:
    strip = shown(day, qtbot)
    edits = RunEdits(day)
    runs = day.session.runs
    edits.remove(tuple(run.id for run in runs))
    assert not day.session.runs
    edits.accept(runs)
    assert len(day.session.runs) == 12
    assert day.document.undo_stack.undoText() == "Accept 12 runs"
    assert strip.list.count() == 12
