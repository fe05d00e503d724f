"""The whole way, with the real processes: from dropped files to figures, back to nothing and forth again."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest
from PySide6.QtCore import QMimeData, QPointF, Qt, QUrl
from PySide6.QtGui import QDropEvent
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication
from pytestqt.qtbot import QtBot

from ridercda.app.desk import build_desk
from ridercda.app.pages.rides import RidesPage
from ridercda.app.pages.runs import RunsPage
from ridercda.app.samples import samples_root
from ridercda.app.settings import Settings
from ridercda.app.solving import State
from ridercda.app.window import MainWindow

PATIENCE = 120_000  # ms: reading, compiling and solving on a busy machine
LEFT, NONE = Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier
ORDER = "abccbaabccba"  # as the sample's day was ridden


@pytest.fixture
def window(qapp: object, settings: Settings, tmp_path: Path, qtbot: QtBot) -> MainWindow:
    made = MainWindow(build_desk(settings), tmp_path / "unsaved")
    qtbot.addWidget(
        made, before_close_func=lambda each: each.desk.document.undo_stack.setClean()
    )  # asks nothing
    made.resize(1280, 800)
    made.show()
    return made


def dropped(window: MainWindow, *paths: Path) -> None:
    mime = QMimeData()
    mime.setUrls([QUrl.fromLocalFile(str(path)) for path in paths])
    event = QDropEvent(QPointF(400, 300), Qt.DropAction.CopyAction, mime, LEFT, NONE)
    window.dropEvent(event)


def typed(field: object, text: str) -> None:
    line = field.line  # type: ignore[attr-defined]
    line.setFocus()
    line.selectAll()
    QTest.keyClicks(line, text)
    QTest.keyClick(line, Qt.Key.Key_Return)


def current(window: MainWindow) -> bool:
    return window.desk.solving.state is State.CURRENT


def figures(window: MainWindow) -> list[tuple[str, float, float]]:
    estimate = window.desk.solving.estimate
    assert estimate is not None
    return [(s.id, s.cda.value, s.cda.standard_error) for s in estimate.setups if s.cda]


def test_from_files_to_figures_and_back(window: MainWindow, qtbot: QtBot, tmp_path: Path) -> None:
    desk = window.desk
    root = samples_root()
    assert root is not None
    ride = tmp_path / "morning.fit"
    shutil.copyfile(root / "quarry-loop" / "rides" / "morning.fit", ride)

    dropped(window, ride)
    assert [entry.id for entry in desk.session.rides] == ["morning"]
    qtbot.waitUntil(lambda: desk.shelf.ride("morning") is not None, timeout=PATIENCE)

    rides = window.workbench.pages["rides"]
    assert isinstance(rides, RidesPage)
    rides.refresh_now()
    typed(rides._needs._rider, "75.5 kg")
    typed(rides._needs._bike, "8.5")
    assert (desk.session.rider.mass, desk.session.bike.mass) == (75.5, 8.5)

    qtbot.waitUntil(lambda: len(desk.proposals.runs) >= 12, timeout=PATIENCE)
    window.show_page("runs")
    runs = window.workbench.pages["runs"]
    assert isinstance(runs, RunsPage)
    runs.refresh_now()
    assert "loop" in runs._offer_words.text()
    QTest.mouseClick(runs._accept, LEFT)
    accepted = len(desk.session.runs)
    assert accepted >= 12
    assert desk.session.venue is not None
    assert desk.session.venue.kind == "loop"

    window.focus_strip()
    desk.selection.pick_run(desk.session.runs[0].id)
    for letter in (ORDER + "a" * accepted)[:accepted]:
        QTest.keyClicks(window.strip.list, letter)
        QTest.keyClick(window.strip.list, Qt.Key.Key_Right)
    assert [setup.letter for setup in desk.session.setups] == ["A", "B", "C"]

    qtbot.waitUntil(lambda: current(window), timeout=PATIENCE)
    first = figures(window)
    assert len(first) == 3
    assert all(0.15 < value < 0.40 and error > 0 for _, value, error in first)  # a rider on time-trial bars
    everything = desk.session

    stack = desk.document.undo_stack
    while stack.canUndo():
        stack.undo()
    assert desk.session.rides == ()
    assert desk.session.runs == ()
    qtbot.waitUntil(lambda: desk.solving.state is State.NOTHING, timeout=PATIENCE)
    assert desk.solving.estimate is None
    while stack.canRedo():
        stack.redo()
    assert desk.session == everything
    qtbot.waitUntil(lambda: current(window), timeout=PATIENCE)
    assert figures(window) == first

    assert window.files.save_as(tmp_path / "day")
    assert (tmp_path / "day" / "rides" / "morning.fit").is_file()
    saved = desk.session
    window.files.new()
    window.open_session(tmp_path / "day")
    assert desk.session == saved
    qtbot.waitUntil(lambda: current(window), timeout=PATIENCE)
    assert figures(window) == first


def test_a_missing_file_is_said_and_found_again(window: MainWindow, qtbot: QtBot, tmp_path: Path) -> None:
    root = samples_root()
    assert root is not None
    shutil.copytree(root / "indoor-track", tmp_path / "day")
    (tmp_path / "day" / "rides" / "evening.fit").rename(tmp_path / "elsewhere.fit")
    window.open_session(tmp_path / "day")
    item = window.desk.shelf.item(window.desk.session.rides[0].id)
    assert item is not None
    assert item.state.value == "missing"
    assert "evening.fit" in item.message
    window.files.relocate(window.desk.session.rides[0].id, tmp_path / "elsewhere.fit")
    qtbot.waitUntil(lambda: current(window), timeout=PATIENCE)
    assert len(figures(window)) == 3


def test_a_file_that_is_no_ride_is_told_in_one_sentence(
    window: MainWindow, qtbot: QtBot, tmp_path: Path
) -> None:
    path = tmp_path / "notes.txt"
    path.write_text("nothing to see here\n", encoding="utf-8")
    dropped(window, path)
    ride = window.desk.session.rides[0].id

    def told() -> bool:
        item = window.desk.shelf.item(ride)
        return item is not None and item.state.value == "failed"

    qtbot.waitUntil(told, timeout=PATIENCE)
    item = window.desk.shelf.item(ride)
    assert item is not None
    assert "notes.txt" in item.message
    assert "Traceback" not in item.message


def test_the_same_by_keyboard_alone(window: MainWindow, qtbot: QtBot, tmp_path: Path) -> None:
    """Every step as it is written down for people; the file dialog itself is the system's."""
    root = samples_root()
    assert root is not None
    desk = window.desk
    control, shift = Qt.KeyboardModifier.ControlModifier, Qt.KeyboardModifier.ShiftModifier

    def press(key: Qt.Key, modifiers: Qt.KeyboardModifier = NONE) -> None:
        target = QApplication.focusWidget() or window
        QTest.keyClick(target, key, modifiers)

    def write(text: str) -> None:
        target = QApplication.focusWidget()
        assert target is not None
        QTest.keyClicks(target, text)

    window.activateWindow()
    qtbot.waitUntil(window.isActiveWindow, timeout=5_000)
    window.files.add_rides([root / "quarry-loop" / "rides" / "morning.fit"])  # Ctrl+Shift+O, the name, Enter
    qtbot.waitUntil(lambda: desk.shelf.ride("morning") is not None, timeout=PATIENCE)
    press(Qt.Key.Key_1, control)
    write("165 lb")
    press(Qt.Key.Key_Tab)
    write("8,5 kg")
    press(Qt.Key.Key_Return)
    assert desk.session.rider.mass == pytest.approx(74.84274105)
    assert desk.session.bike.mass == 8.5
    qtbot.waitUntil(lambda: len(desk.proposals.runs) >= 12, timeout=PATIENCE)
    press(Qt.Key.Key_A, control | shift)
    assert len(desk.session.runs) >= 12
    press(Qt.Key.Key_F6)
    assert QApplication.focusWidget() is window.strip.list
    for letter in ORDER:
        press(Qt.Key.Key_Right)
        write(letter)
    assert len(desk.session.setups) == 3
    press(Qt.Key.Key_3, control)
    assert window.workbench.page == "drag"
    qtbot.waitUntil(lambda: current(window), timeout=PATIENCE)
    assert len(figures(window)) == 3
    press(Qt.Key.Key_Z, control)
    assert desk.document.undo_stack.canRedo()
