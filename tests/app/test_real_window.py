"""A real window on a virtual display, driven by mouse events; skipped where there is no such display to be had."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

_DRIVEN = """
import sys
from pathlib import Path
from PySide6.QtCore import QPoint, QSettings, Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtTest import QTest
from ridercda.app.application import Dress, application
from ridercda.app.desk import build_desk
from ridercda.app.settings import Settings
from ridercda.app.solving import State
from ridercda.app.strip.view import block_extent
from ridercda.app.window import MainWindow

def wait_for(is_done, milliseconds):
    for _ in range(milliseconds // 10):
        if is_done():
            return True
        QTest.qWait(10)
    return False


scratch = Path(sys.argv[1])
app = application()
assert QGuiApplication.platformName() == "xcb", QGuiApplication.platformName()
desk = build_desk(Settings(QSettings(str(scratch / "s.ini"), QSettings.Format.IniFormat)))
window = MainWindow(desk, scratch / "unsaved")
Dress(app, desk.theme, window)
window.resize(1280, 800)
window.show()
assert QTest.qWaitForWindowExposed(window)

# One click on a sample opens it, as far as its figures.
row = next(row for row in window.start._rows if row.accessibleName() == "Indoor track, evening")
QTest.mouseClick(row, Qt.MouseButton.LeftButton)
assert wait_for(lambda: desk.solving.state is State.CURRENT, 120_000), desk.solving.message
before = desk.solving.estimate

# The edge of a run is dragged; the strip follows and new figures come.
strip = window.strip
run = strip.picture.runs[3]
left, right = block_extent(strip.view(), run)
QTest.mousePress(strip, Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier, QPoint(round(right), 60))
for step in range(1, 11):
    QTest.mouseMove(strip, QPoint(round(right - step), 60))
    QTest.qWait(15)
QTest.mouseRelease(strip, Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier, QPoint(round(right - 10), 60))
assert desk.document.undo_stack.count() == 1
assert desk.session.run(run.id).end < run.end
assert wait_for(lambda: desk.solving.state is State.CURRENT and desk.solving.estimate is not before, 60_000)

# A page is opened by its name, and undo brings the run back.
QTest.mouseClick(window.workbench._names.button(1), Qt.MouseButton.LeftButton)
assert window.workbench.page == "runs"
window.menus.made("edit.undo").trigger()
assert desk.session.run(run.id).end == run.end
assert window.grab().save(str(scratch / "window.png"))
desk.document.undo_stack.setClean()
window.close()
print("driven")
"""


@pytest.mark.skipif(shutil.which("xvfb-run") is None, reason="there is no virtual display (xvfb-run) here")
def test_a_real_window_is_driven_by_mouse(tmp_path: Path) -> None:
    environment = {**os.environ, "QT_QPA_PLATFORM": "xcb"}
    told = subprocess.run(
        ["xvfb-run", "-a", "-s", "-screen 0 1600x1000x24", sys.executable, "-c", _DRIVEN, str(tmp_path)],
        capture_output=True,
        text=True,
        env=environment,
        timeout=240,
    )
    if (
        "could not connect to display" in told.stderr
        or "no Qt platform plugin could be initialized" in told.stderr
    ):
        pytest.skip("the display libraries for a real window are not installed")
    assert told.returncode == 0, told.stderr[-2000:]
    assert "driven" in told.stdout
    assert (tmp_path / "window.png").stat().st_size > 20_000
