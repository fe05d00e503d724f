from __future__ import annotations

from invented import invented_session
from pytestqt.qtbot import QtBot

from ridercda.app.document import SessionDocument
from ridercda.app.selection import Selection
from ridercda.session import edits


def document_of_a_day(qapp: object) -> SessionDocument:
    document = SessionDocument()
    document.open(invented_session(), None)
    return document


def test_undo_restores_the_very_session(qapp: object, qtbot: QtBot) -> None:
    document = document_of_a_day(qapp)
    before = document.session
    with qtbot.waitSignal(document.session_changed):
        assert document.edit("Set rider mass", lambda s: edits.set_rider_mass(s, 82.5))
    assert document.session.rider.mass == 82.5
    assert document.undo_stack.undoText() == "Set rider mass"
    document.undo_stack.undo()
    assert document.session is before
    assert document.undo_stack.isClean()
    document.undo_stack.redo()
    assert document.session.rider.mass == 82.5


def test_the_moves_of_one_gesture_are_one_step(qapp: object) -> None:
    document = document_of_a_day(qapp)
    before = document.session
    for end in (700.0, 690.0, 680.0):
        document.edit("Trim", lambda s, e=end: edits.trim_run(s, "1", 300.0, e), merge="trim:1:end")
    assert document.undo_stack.count() == 1
    document.end_gesture()
    document.edit("Trim", lambda s: edits.trim_run(s, "1", 300.0, 670.0), merge="trim:1:end")
    assert document.undo_stack.count() == 2
    document.undo_stack.undo()
    assert document.session.run("1").end == 680.0
    document.undo_stack.undo()
    assert document.session is before


def test_a_gesture_that_comes_back_leaves_no_step(qapp: object) -> None:
    document = document_of_a_day(qapp)
    end = document.session.run("1").end
    document.edit("Trim", lambda s: edits.trim_run(s, "1", 300.0, 680.0), merge="trim")
    document.edit("Trim", lambda s: edits.trim_run(s, "1", 300.0, end), merge="trim")
    assert document.undo_stack.count() == 0


def test_a_refused_edit_changes_nothing_and_says_why(qapp: object, qtbot: QtBot) -> None:
    document = document_of_a_day(qapp)
    before = document.session
    with qtbot.waitSignal(document.edit_refused) as refused:
        assert not document.edit("Merge", lambda s: edits.remove_setup(s, "s1"))
    assert "run" in refused.args[0]
    assert document.session is before
    assert document.undo_stack.count() == 0


def test_an_edit_that_changes_nothing_is_no_step(qapp: object) -> None:
    document = document_of_a_day(qapp)
    assert not document.edit("Rename", lambda s: edits.set_name(s, s.name))
    assert document.undo_stack.count() == 0


def test_nothing_picked_is_ever_gone(qapp: object) -> None:
    document = document_of_a_day(qapp)
    selection = Selection(document)
    selection.pick_run("4")
    assert (selection.setup, selection.ride) == ("s2", "am")
    selection.toggle_run("5")
    assert selection.runs == ("4", "5")
    assert selection.setup == "s1"
    document.edit("Remove", lambda s: edits.remove_runs(s, ["5"]))
    assert selection.runs == ("4",)
    assert selection.setup == "s2"
    selection.pick_setup("s0")
    assert selection.runs == ()
    document.open(invented_session(setups=1, runs=1), None)
    assert selection.setup in ("", "s0")
    assert selection.run == ""
