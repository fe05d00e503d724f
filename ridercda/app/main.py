"""Opens the window."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import QTimer

from ridercda.app import tasks
from ridercda.app.application import Dress, application
from ridercda.app.desk import build_desk
from ridercda.app.settings import Settings
from ridercda.app.window import MainWindow


def run(path: Path | None) -> int:
    """Open the window, with a session where one is named, and return when it is closed."""
    app = application()
    desk = build_desk(Settings())
    window = MainWindow(desk)
    Dress(
        app, desk.theme, window
    )  # once it is built: dressing every part as it is put in place takes twice as long
    window.show()
    QTimer.singleShot(0, desk.reader.start)
    QTimer.singleShot(0, lambda: desk.solver.request(tasks.warm_up))
    if path is not None:
        QTimer.singleShot(0, lambda: window.open_session(path))
    else:
        QTimer.singleShot(0, window.offer_recovery)
    return app.exec()
