"""Pictures of every page, light and dark, at two sizes, from the sample sessions.

``python -m ridercda.app.screens [FOLDER]`` writes them into FOLDER, ``assets`` by default. It needs no display: where
there is none it draws off screen.
"""

from __future__ import annotations

import os
import shutil
import sys
import tempfile
import time
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path

SIZES = ((1280, 800), (1920, 1080))
PATIENCE = 180.0  # s for reading and solving a sample
SAMPLE = "quarry-loop"


@dataclass(frozen=True, slots=True)
class Shot:
    """One picture: which sample, which page, what is picked first."""

    name: str
    sample: str
    page: str
    diagnostics: bool = False


SHOTS = (
    Shot("start", "", ""),
    Shot("rides", SAMPLE, "rides"),
    Shot("runs", SAMPLE, "runs"),
    Shot("drag", SAMPLE, "drag"),
    Shot("diagnostics", SAMPLE, "drag", diagnostics=True),
    Shot("track", "indoor-track", "drag"),
)


def pictures(folder: Path) -> Iterator[Path]:
    """Write every picture and tell of each."""
    from PySide6.QtCore import QSettings
    from PySide6.QtGui import QImage, QImageWriter

    from ridercda.app.application import Dress, application
    from ridercda.app.desk import build_desk
    from ridercda.app.pages.drag import DragPage
    from ridercda.app.samples import samples_root
    from ridercda.app.settings import Settings
    from ridercda.app.solving import State
    from ridercda.app.theme import Mode
    from ridercda.app.window import MainWindow

    app = application()
    root = samples_root()
    if root is None:
        raise FileNotFoundError("the sample sessions are not there; run this from the source tree")
    folder.mkdir(parents=True, exist_ok=True)
    with tempfile.TemporaryDirectory() as scratch:
        store = QSettings(str(Path(scratch) / "settings.ini"), QSettings.Format.IniFormat)
        desk = build_desk(Settings(store))
        window = MainWindow(desk, Path(scratch) / "unsaved")
        Dress(app, desk.theme, window)
        window.show()
        opened = ""
        try:
            for shot in SHOTS:
                if shot.sample and shot.sample != opened:
                    copy = Path(scratch) / shot.sample
                    shutil.copytree(root / shot.sample, copy)
                    window.open_session(copy)
                    _wait(app.processEvents, lambda: desk.solving.state in (State.CURRENT, State.FAILED))
                    _wait(app.processEvents, lambda: not desk.laps.is_busy)
                    runs = desk.session.runs
                    desk.selection.pick_run(runs[min(3, len(runs) - 1)].id)
                    opened = shot.sample
                if shot.page:
                    window.show_page(shot.page)
                    page = window.workbench.pages[shot.page]
                    if isinstance(page, DragPage):
                        page.show_diagnostics(on=shot.diagnostics)
                for mode in (Mode.LIGHT, Mode.DARK):
                    desk.theme.set_mode(mode)
                    for width, height in SIZES:
                        window.resize(width, height)
                        for _ in range(6):
                            app.processEvents()
                        path = folder / f"{shot.name}-{mode.value}-{width}x{height}.png"
                        writer = QImageWriter(str(path), b"png")
                        writer.setCompression(100)
                        writer.write(window.grab().toImage().convertToFormat(QImage.Format.Format_RGB888))
                        yield path
        finally:
            desk.document.undo_stack.setClean()
            window.close()


def _wait(step: Callable[[], object], is_done: Callable[[], bool]) -> None:
    end = time.monotonic() + PATIENCE
    while not is_done():
        if time.monotonic() > end:
            raise TimeoutError("a sample was not solved in time")
        step()
        time.sleep(0.01)


def main() -> int:
    """Write the pictures into the folder named on the command line."""
    if sys.platform.startswith("linux") and not (
        os.environ.get("DISPLAY") or os.environ.get("WAYLAND_DISPLAY")
    ):
        os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
    folder = Path(sys.argv[1]) if len(sys.argv) > 1 else Path("assets")
    for path in pictures(folder):
        sys.stdout.write(f"{path}\n")
    return 0


if __name__ == "__main__":
    sys.exit(main())
