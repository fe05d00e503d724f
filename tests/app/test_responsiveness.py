"""The window stays quick: times as ratios to a fixed loop timed in the same run, so that no machine is too slow.

``tests/benchmarks/bench_app.py`` states the milliseconds.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from itertools import pairwise

from invented import opened
from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication
from pytestqt.qtbot import QtBot

from ridercda.app.desk import Desk
from ridercda.app.window import MainWindow

# The fixed loop takes 8 ms on a quiet desktop core: a ratio of 12 is then a tenth of a second.
TENTH_OF_A_SECOND = 12.0


def seconds(work: Callable[[], object], repeats: int = 5) -> float:
    times = []
    for _ in range(repeats):
        began = time.perf_counter()
        work()
        times.append(time.perf_counter() - began)
    return min(times)


def fixed_loop() -> int:
    total = 0
    for k in range(200_000):
        total += k * k % 7
    return total


def shown(desk: Desk, tmp_path: object, qtbot: QtBot, runs: int = 60, rate: float = 1.0) -> MainWindow:
    window = MainWindow(desk, tmp_path / "unsaved")  # type: ignore[operator]
    qtbot.addWidget(window, before_close_func=lambda each: each.desk.document.undo_stack.setClean())
    window.resize(1920, 1080)
    window.show()
    opened(desk, 12, runs, rate)
    window._on_files_opened()
    window.workbench.pages["drag"].refresh_now()
    QApplication.processEvents()
    return window


def test_the_strip_follows_a_dragged_edge_at_once(desk: Desk, tmp_path: object, qtbot: QtBot) -> None:
    window = shown(desk, tmp_path, qtbot)
    run = desk.session.runs[30]
    assert run.end is not None
    ends = iter(range(1, 1000))

    def move() -> None:
        window.runs.trim(run.id, run.start, run.end - next(ends) / 10, "end")  # type: ignore[operator]
        window.strip.repaint()

    # At 30 moves a second a move has 33 ms, a third of the tenth of a second.
    assert seconds(move, 15) < TENTH_OF_A_SECOND / 3 * seconds(fixed_loop)


def test_a_six_hour_day_at_10_hz_is_painted_and_zoomed_smoothly(
    desk: Desk, tmp_path: object, qtbot: QtBot
) -> None:
    window = shown(desk, tmp_path, qtbot, rate=10.0)
    ride = desk.shelf.ride("am")
    assert ride is not None
    assert ride.time.size > 100_000

    def frame() -> None:
        window.strip.zoom(1.02)
        window.strip.repaint()

    assert seconds(frame, 10) < TENTH_OF_A_SECOND * seconds(fixed_loop)


def test_new_figures_are_on_the_screen_at_once(desk: Desk, tmp_path: object, qtbot: QtBot) -> None:
    from invented import invented_estimate

    window = shown(desk, tmp_path, qtbot)
    seeds = iter(range(100))

    def arrive() -> None:
        desk.solving.put(invented_estimate(desk.session, seed=next(seeds)))
        window.workbench.pages["drag"].refresh_now()
        window.workbench.pages["drag"].grab()

    made = seconds(lambda: invented_estimate(desk.session), 5)
    assert seconds(arrive, 8) - made < 2 * TENTH_OF_A_SECOND * seconds(fixed_loop)


def test_the_event_loop_is_not_held_up_while_an_edge_is_dragged(
    desk: Desk, tmp_path: object, qtbot: QtBot
) -> None:
    window = shown(desk, tmp_path, qtbot)
    run = desk.session.runs[30]
    assert run.end is not None
    beats: list[float] = []
    heart = QTimer(interval=1)
    heart.timeout.connect(lambda: beats.append(time.perf_counter()))
    heart.start()
    for k in range(60):
        window.runs.trim(run.id, run.start, run.end - k / 10, "end")
        QApplication.processEvents()
    heart.stop()
    gaps = sorted(after - before for before, after in pairwise(beats))
    assert gaps[int(0.95 * len(gaps))] < TENTH_OF_A_SECOND * seconds(fixed_loop)
