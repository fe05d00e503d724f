"""How quick the window is, in milliseconds: ``python tests/benchmarks/bench_app.py``.

It times the start of the window, the strip's painting, and the dragging of a run's edge at 30 moves a second while a
six-hour ride is being read, with the longest time the event loop was held up. A machine that does other work at the
same time gives larger figures; the loop of `calibration` is timed beside them, so that runs can be compared.
"""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
import tempfile
import time
from itertools import pairwise
from pathlib import Path

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")

ROOT = Path(__file__).resolve().parents[2]
sys.path.insert(0, str(ROOT / "tests" / "app"))

HOURS = 6
MOVES = 60
MOVES_A_SECOND = 30
PATIENCE = 300.0


def calibration() -> float:
    """Return the milliseconds of a fixed loop, the best of five."""
    times = []
    for _ in range(5):
        began = time.perf_counter()
        total = 0
        for k in range(200_000):
            total += k * k % 7
        times.append(time.perf_counter() - began)
    return 1000 * min(times)


def start() -> float:
    """Return the milliseconds from a fresh interpreter to a window that takes clicks, the second start counted."""
    code = (
        "import time; began = time.perf_counter()\n"
        "from ridercda.app.application import Dress, application\n"
        "from ridercda.app.desk import build_desk\n"
        "from ridercda.app.settings import Settings\n"
        "from ridercda.app.window import MainWindow\n"
        "app = application(); desk = build_desk(Settings())\n"
        "window = MainWindow(desk); Dress(app, desk.theme, window); window.show(); app.processEvents()\n"
        "print(time.perf_counter() - began)\n"
    )
    times = [
        float(subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True).stdout)
        for _ in range(3)
    ]
    return 1000 * min(times[1:])


def long_ride(folder: Path) -> Path:
    """Write a six-hour ride at 1 Hz as a FIT file and return it."""
    from invented import invented_ride

    from ridercda.synthetic.fit_writer import fit_bytes

    path = folder / "long.fit"
    path.write_bytes(fit_bytes(invented_ride(round(HOURS * 3600 / 570))))
    return path


def painting(rate: float) -> tuple[float, float]:
    """Return the milliseconds of painting a six-hour strip anew, and with its ground kept."""
    from conftest import StillWorker
    from invented import opened
    from PySide6.QtCore import QSettings

    from ridercda.app.application import application
    from ridercda.app.desk import build_desk
    from ridercda.app.run_edits import RunEdits
    from ridercda.app.settings import Settings
    from ridercda.app.strip.day_strip import DayStrip

    application()
    with tempfile.TemporaryDirectory() as scratch:
        settings = Settings(QSettings(str(Path(scratch) / "s.ini"), QSettings.Format.IniFormat))
        desk = build_desk(settings, StillWorker("reader"), StillWorker("solver"))
        opened(desk, 12, 60, rate)
        strip = DayStrip(desk, RunEdits(desk))
        strip.resize(1888, 130)
        desk.shelf.changed.emit()
        strip.show()
        strip.grab()
        fresh, kept = [], []
        for _ in range(20):
            strip.zoom(1.01)
            for times in (fresh, kept):
                began = time.perf_counter()
                strip.grab()
                times.append(time.perf_counter() - began)
        strip.close()
        desk.close()
    return 1000 * min(fresh), 1000 * min(kept)


def dragging() -> dict[str, float]:
    """Return what a drag of an edge costs while a six-hour ride is read."""
    from PySide6.QtCore import QSettings, QTimer

    from ridercda.app import tasks
    from ridercda.app.application import Dress, application
    from ridercda.app.desk import build_desk
    from ridercda.app.samples import samples_root
    from ridercda.app.settings import Settings
    from ridercda.app.solving import State
    from ridercda.app.window import MainWindow

    app = application()
    root = samples_root()
    assert root is not None
    with tempfile.TemporaryDirectory() as scratch:
        os.environ["RIDERCDA_CACHE"] = str(Path(scratch) / "cache")
        settings = Settings(QSettings(str(Path(scratch) / "s.ini"), QSettings.Format.IniFormat))
        desk = build_desk(settings)
        window = MainWindow(desk, Path(scratch) / "unsaved")
        Dress(app, desk.theme, window)
        window.resize(1280, 800)
        window.show()
        desk.solver.request(tasks.warm_up)
        copy = Path(scratch) / "day"
        shutil.copytree(root / "quarry-loop", copy)
        window.open_session(copy)
        _until(app, lambda: desk.solving.state in (State.CURRENT, State.FAILED) and not desk.laps.is_busy)
        settled = 1000 * desk.solving.seconds
        beats: list[float] = []
        heart = QTimer(interval=1)
        heart.timeout.connect(lambda: beats.append(time.perf_counter()))
        window.files.add_rides([long_ride(Path(scratch))])
        _until(app, lambda: bool(desk.shelf.reading))
        heart.start()
        run = desk.session.runs[3]
        assert run.end is not None
        follow, reading = [], 0
        for k in range(MOVES):
            due = time.perf_counter() + 1 / MOVES_A_SECOND
            began = time.perf_counter()
            window.runs.trim(run.id, run.start, run.end - k / 2, "end")
            window.strip.repaint()
            follow.append(time.perf_counter() - began)
            reading += bool(desk.shelf.reading)
            while time.perf_counter() < due:
                app.processEvents()
                time.sleep(0.0005)
        read_during = reading / MOVES
        last = time.perf_counter()
        window.desk.document.end_gesture()
        _until(app, lambda: desk.solving.state in (State.CURRENT, State.FAILED))
        app.processEvents()
        figures, asked = time.perf_counter() - last, desk.solving.seconds
        heart.stop()
        _until(app, lambda: not desk.shelf.reading)
        desk.document.undo_stack.setClean()
        window.close()
    gaps = [b - a for a, b in pairwise(beats)]
    return {
        "solve, nothing else going on": settled,
        "strip follows a move, median": 1000 * sorted(follow)[len(follow) // 2],
        "strip follows a move, worst": 1000 * max(follow),
        "new figures after the last move": 1000 * figures,
        "of which from asking to having": 1000 * asked,
        "event loop held up, worst": 1000 * max(gaps),
        "event loop held up, 99 of 100": 1000 * sorted(gaps)[int(0.99 * len(gaps))],
        "share of the drag with the ride being read": 100 * read_during,
    }


def _until(app: object, is_done: object) -> None:
    end = time.monotonic() + PATIENCE
    while not is_done():  # type: ignore[operator]
        if time.monotonic() > end:
            raise TimeoutError("not done in time")
        app.processEvents()  # type: ignore[attr-defined]
        time.sleep(0.0005)


def main() -> None:
    """Print the table."""
    import importlib.util

    spec = importlib.util.spec_from_file_location("conftest", ROOT / "tests" / "app" / "conftest.py")
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    sys.modules["conftest"] = module
    spec.loader.exec_module(module)
    rows = [("calibration loop", calibration()), ("start to usable window, warm", start())]
    for rate in (1.0, 10.0):
        fresh, kept = painting(rate)
        rows += [
            (f"strip of a long day at {rate:g} Hz, painted anew", fresh),
            ("the same, nothing changed", kept),
        ]
    rows += list(dragging().items())
    for name, value in rows:
        unit = "%" if name.startswith("share") else "ms"
        sys.stdout.write(f"{name:48s} {value:9.1f} {unit}\n")


if __name__ == "__main__":
    main()
