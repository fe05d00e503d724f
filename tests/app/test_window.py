from __future__ import annotations

import inspect
import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest
from invented import invented_estimate, invented_ride, invented_session, opened
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QLabel, QPushButton, QWidget
from pytestqt.qtbot import QtBot

from ridercda.app import window as window_module
from ridercda.app.actions import Action, all_actions
from ridercda.app.autosave import unsaved_work
from ridercda.app.desk import Desk
from ridercda.app.pages import PAGES
from ridercda.app.solving import State
from ridercda.app.theme import ZOOMS, Mode
from ridercda.app.window import MainWindow
from ridercda.session import edits
from ridercda.session.store import create_session, load_session


@pytest.fixture
def window(desk: Desk, tmp_path: Path, qtbot: QtBot) -> MainWindow:
    made = MainWindow(desk, tmp_path / "unsaved")
    qtbot.addWidget(made, before_close_func=lambda each: each.desk.document.undo_stack.setClean())
    made.resize(1280, 800)
    made.show()
    return made


@pytest.fixture
def full(window: MainWindow) -> MainWindow:
    opened(window.desk)
    window._on_files_opened()
    return window


def test_the_window_stays_small() -> None:
    assert len(inspect.getsource(window_module).splitlines()) < 300


def test_no_two_actions_share_an_id_or_a_shortcut() -> None:
    pages = tuple((spec.id, spec.title()) for spec in PAGES)
    assert len(all_actions(pages)) > 30
    with pytest.raises(ValueError, match=r"two actions have the same id: page\.rides"):
        all_actions((*pages, ("rides", "Again")))


def test_every_action_can_be_asked_whether_it_can_be_done(full: MainWindow) -> None:
    for action in full.menus.actions_table:
        assert isinstance(action, Action)
        assert action.can(full) in (True, False)
        if action.is_on is not None:
            assert action.is_on(full) in (True, False)


def test_undo_is_named_in_the_menu(full: MainWindow) -> None:
    full.desk.document.edit("Set rider mass", lambda s: edits.set_rider_mass(s, 80.0))
    assert full.menus.made("edit.undo").text() == "Undo: Set rider mass"
    full.menus.made("edit.undo").trigger()
    assert full.menus.made("edit.redo").text() == "Redo: Set rider mass"
    assert full.desk.session.rider.mass == 75.5


def test_a_refused_edit_is_told_without_a_dialog(full: MainWindow) -> None:
    full.desk.document.edit("Remove", lambda s: edits.remove_setup(s, "s1"))
    assert full.notice.isVisible()
    assert "run" in full.notice.accessibleName()


def test_what_cannot_be_done_does_nothing(full: MainWindow) -> None:
    before = full.desk.session
    full.desk.selection.pick_runs(())
    for action_id in ("run.remove", "run.merge", "run.split", "run.count"):
        full.menus.made(action_id).trigger()
    assert full.desk.session is before


def test_leaving_out_is_two_clicks_visible_and_undoable(full: MainWindow) -> None:
    full.desk.selection.pick_run("4")
    full.show_page("runs")
    page = full.workbench.pages["runs"]
    page.refresh_now()
    menu = page._leave_out.menu()  # type: ignore[attr-defined]
    menu.actions()[0].trigger()
    assert full.desk.session.run("4").excluded == "A vehicle passed"
    block = full.strip.picture.run("4")
    assert block is not None
    assert block.excluded == "A vehicle passed"
    full.desk.document.undo_stack.undo()
    assert full.desk.session.run("4").excluded == ""


def test_the_estimate_looks_out_of_date_after_an_edit(full: MainWindow) -> None:
    page = full.workbench.pages["drag"]
    full.desk.solving.put(invented_estimate(full.desk.session))
    page.refresh_now()
    assert page._sentence.text().startswith("C is lower than A by 0.01")  # type: ignore[attr-defined]
    assert not page._sentence.property("quiet")  # type: ignore[attr-defined]
    full.desk.solving.state = State.BUSY
    full.desk.solving.changed.emit()
    page.refresh_now()
    assert page._sentence.property("quiet")  # type: ignore[attr-defined]
    assert full.header._state.text() == "Working it out…"


def test_pages_without_anything_say_what_to_do(window: MainWindow) -> None:
    window.files.new()
    for page_id in ("rides", "runs", "drag"):
        window.show_page(page_id)
        page = window.workbench.pages[page_id]
        page.refresh_now()
        blank = page.blank()
        assert blank is not None
        assert blank.action == "ride.add"
        assert page._empty.isVisible()


@pytest.mark.parametrize("mode", [Mode.LIGHT, Mode.DARK])
@pytest.mark.parametrize("size", [(1024, 700), (1280, 800), (1920, 1080)])
def test_sixty_runs_and_twelve_setups_have_room(
    window: MainWindow, qtbot: QtBot, mode: Mode, size: tuple[int, int]
) -> None:
    opened(window.desk, setups=12, runs=60)
    window._on_files_opened()
    window.desk.theme.set_mode(mode)
    window.resize(*size)
    for page_id in ("rides", "runs", "drag"):
        window.show_page(page_id)
        window.workbench.pages[page_id].refresh_now()
        qtbot.wait(20)
        assert (window.width(), window.height()) == size  # nothing asks for more than the window
        assert window.workbench.pages[page_id].width() <= size[0]
        for button in window.findChildren(QPushButton):
            if button.isVisible() and button.text():
                words = button.fontMetrics().horizontalAdvance(button.text().replace("&", ""))
                assert button.width() >= words, (page_id, button.text())
    narrow = size[0] < 1100
    assert window.workbench._drawer_button.isVisible() == narrow
    if narrow:
        assert not window.side_is_shown
        QTest.mouseClick(window.workbench._drawer_button, Qt.MouseButton.LeftButton)
    assert window.side_is_shown
    assert window.workbench.side.setups.model().rowCount() == 12


@pytest.mark.parametrize("zoom", ZOOMS)
def test_one_line_labels_are_not_cut_at_any_size(full: MainWindow, qtbot: QtBot, zoom: float) -> None:
    full.resize(1920, 1080)
    full.desk.theme.set_zoom(zoom)
    full.desk.selection.pick_run("4")
    full.show_page("drag")
    full.workbench.pages["drag"].refresh_now()
    qtbot.wait(20)
    for label in full.workbench.side.facts.findChildren(QLabel):
        if label.isVisible() and label.text() and not label.wordWrap():
            words = label.fontMetrics().horizontalAdvance(label.text())
            assert label.width() >= words - 1, label.text()


def test_a_thousand_frames_of_sixty_runs_are_painted(window: MainWindow) -> None:
    opened(window.desk, setups=12, runs=60)
    window._on_files_opened()
    window.show_page("drag")
    window.workbench.pages["drag"].refresh_now()
    run = window.desk.session.runs[30]
    assert run.end is not None
    painted = 0
    for frame in range(1000):
        window.desk.selection.point_at("am", float(frame))
        if frame % 10 == 0:
            window.runs.trim(run.id, run.start, run.end - frame / 20, "end")
        if frame % 25 == 0:
            window.strip.zoom(1.5 if frame % 50 else 1 / 1.5)
        window.strip.repaint()
        painted += 1
    window.grab()
    assert painted == 1000
    assert window.desk.document.undo_stack.count() == 1


def test_the_palette_does_what_was_typed(full: MainWindow, qtbot: QtBot) -> None:
    full.show_palette()
    palette = next(child for child in full.findChildren(QWidget) if type(child).__name__ == "Palette")
    QTest.keyClicks(palette.field, "colours dark")  # type: ignore[attr-defined]
    QTest.keyClick(palette.field, Qt.Key.Key_Return)  # type: ignore[attr-defined]
    assert full.desk.theme.mode is Mode.DARK


def test_settings_are_kept(window: MainWindow, desk: Desk) -> None:
    desk.theme.set_mode(Mode.DARK)
    desk.theme.set_zoom(1.25)
    desk.settings.keep_theme(desk.theme)
    desk.theme.set_mode(Mode.LIGHT)
    desk.theme.set_zoom(1.0)
    desk.settings.restore_theme(desk.theme)
    assert (desk.theme.mode, desk.theme.zoom) == (Mode.DARK, 1.25)


_KILLED = """
import sys
from pathlib import Path
from PySide6.QtCore import QSettings, QTimer
from ridercda.app.application import application
from ridercda.app.desk import build_desk
from ridercda.app.settings import Settings
from ridercda.app.window import MainWindow
from ridercda.session import edits

scratch = Path(sys.argv[1])
app = application()
desk = build_desk(Settings(QSettings(str(scratch / "s.ini"), QSettings.Format.IniFormat)))
window = MainWindow(desk, scratch / "unsaved")
window.show()
window.open_session(scratch / "day")
state = {"mass": 60.0}

def edit():
    state["mass"] += 0.01
    desk.document.edit("Mass", lambda s: edits.set_rider_mass(s, round(state["mass"], 2)))
    if sys.argv[2] == "save":
        window.questions.save()
    print(state["mass"], flush=True)

timer = QTimer(interval=5)
timer.timeout.connect(edit)
timer.start()
app.exec()
"""


@pytest.mark.skipif(sys.platform == "win32", reason="needs SIGKILL")
@pytest.mark.parametrize("what", ["edit", "save"])
def test_a_killed_process_loses_seconds_at_most_and_no_file(what: str, tmp_path: Path) -> None:
    create_session(tmp_path / "day", invented_session())
    process = subprocess.Popen(
        [sys.executable, "-c", _KILLED, str(tmp_path), what],
        stdout=subprocess.PIPE,
        text=True,
        env={**os.environ},
    )
    assert process.stdout is not None
    began, told = time.monotonic(), []
    for line in process.stdout:
        told.append((time.monotonic(), float(line)))
        if time.monotonic() - began > 60 or (len(told) > 20 and told[-1][0] - told[0][0] > 5.0):
            break
    process.send_signal(signal.SIGKILL)
    process.wait()
    process.stdout.close()
    assert len(told) > 20
    on_disk = load_session(tmp_path / "day").session.rider.mass  # whole, whatever was going on
    assert on_disk is not None
    if what == "save":
        assert on_disk >= told[-2][1] - 0.005
        return
    assert on_disk == 75.5
    (kept,) = unsaved_work(tmp_path / "unsaved")
    mass = kept.session.rider.mass
    assert mass is not None
    four_seconds_ago = max(value for at, value in told if at <= told[-1][0] - 4.0)
    assert mass >= four_seconds_ago - 0.005


def test_the_window_shows_what_the_estimate_says(full: MainWindow) -> None:
    estimate = invented_estimate(full.desk.session, seed=11)
    full.desk.shelf.put("am", invented_ride())
    full.desk.solving.put(estimate)
    lines = full.workbench.side.setups.model().lines  # type: ignore[attr-defined]
    assert lines[0].cda
    assert "9 May 2026 · 12 runs · 3 setups · air 1.201 kg/m³" in full.header._about.text().replace(
        "\u00a0", " "
    )


def test_the_window_imports_nothing_compiled_or_slow() -> None:
    code = (
        "import sys, ridercda.app.main\n"
        "print([name for name in ('numba', 'llvmlite', 'scipy', 'pint', 'rich', 'fitdecode') if name in sys.modules])"
    )
    told = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert told.stdout.strip() == "[]"


def test_setups_are_assigned_by_one_typed_order(full: MainWindow) -> None:
    full.runs.assign_in_order("ABDDBA-")
    session = full.desk.session
    letters = {key: badge.letter for key, badge in full.desk.badges().items()}
    assert [letters[run.setup] for run in session.runs[:6]] == ["A", "B", "D", "D", "B", "A"]
    assert session.runs[6].excluded
    assert len(session.setups) == 4
    assert full.desk.document.undo_stack.undoText() == "Assign runs in order"
    full.runs.assign_in_order("A" * 13)
    assert "there are 12" in full.notice.accessibleName()
    full.runs.assign_in_order("AXA")
    assert full.desk.session is session


def test_our_own_fault_is_told_in_one_sentence_and_written_down(full: MainWindow, tmp_path: Path) -> None:
    full.desk.solving._on_job_faulted('Traceback\n  File "x"\nZeroDivisionError: our own fault\n')
    assert full.desk.solving.state is State.FAILED
    assert "ZeroDivisionError" not in full.desk.solving.message
    log = Path(full.desk.solving.message.rpartition(" ")[2])
    assert "ZeroDivisionError: our own fault" in log.read_text(encoding="utf-8")
    assert tmp_path in log.parents
