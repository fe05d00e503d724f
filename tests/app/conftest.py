"""What the tests of the window share: no display, no settings of the user's, no work left behind."""

from __future__ import annotations

import importlib.util
import os
import sys
import threading
from collections.abc import Iterator
from pathlib import Path

import pytest

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")

pytest.importorskip("PySide6", reason="the app extra is not installed")

from PySide6.QtCore import QSettings
from PySide6.QtWidgets import QApplication

from ridercda.app.application import application
from ridercda.app.desk import Desk, build_desk
from ridercda.app.settings import Settings
from ridercda.app.worker import Job, Worker

_HERE = Path(__file__).parent


def _beside(name: str) -> None:
    """Make a module of this folder importable by its plain name: collection by importlib leaves no path."""
    if name not in sys.modules:
        spec = importlib.util.spec_from_file_location(name, _HERE / f"{name}.py")
        assert spec is not None
        assert spec.loader is not None
        module = importlib.util.module_from_spec(spec)
        sys.modules[name] = module
        spec.loader.exec_module(module)


_beside("invented")

from invented import opened  # noqa: E402


class StillWorker(Worker):
    """Takes work and never does it: what a test needs it gives to shelf and estimate itself."""

    def start(self) -> None:
        """Start nothing."""

    def request(self, task: object, *arguments: object) -> Job:
        """Take a job that stays open."""
        return Job(0, self)


@pytest.fixture(scope="session")
def qapp() -> QApplication:
    """Return the application with its fonts, in the style it ships with."""
    return application()


@pytest.fixture
def settings(tmp_path: Path) -> Settings:
    """Return settings of the test's own."""
    return Settings(QSettings(str(tmp_path / "settings.ini"), QSettings.Format.IniFormat))


@pytest.fixture
def desk(qapp: QApplication, settings: Settings) -> Iterator[Desk]:
    """Return an empty desk whose processes stand still."""
    made = build_desk(settings, StillWorker("reader"), StillWorker("solver"))
    yield made
    made.close()


@pytest.fixture
def day(desk: Desk) -> Desk:
    """Return a desk with an invented day open: three setups, twelve runs, figures."""
    return opened(desk)


@pytest.fixture(autouse=True)
def _nothing_left_open(qapp: QApplication) -> Iterator[None]:
    """Fail a test that leaves a window open, or a thread that talks to another process."""
    yield
    windows = [widget for widget in qapp.topLevelWidgets() if widget.isVisible()]
    threads = [thread.name for thread in threading.enumerate() if thread.name.startswith("ridercda-")]
    for widget in windows:
        widget.close()
    assert not windows
    assert not threads


@pytest.fixture(autouse=True)
def _own_folders(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Keep documents, state and cache of the user out of the tests."""
    for name in (
        "XDG_STATE_HOME",
        "XDG_CONFIG_HOME",
        "XDG_CACHE_HOME",
        "XDG_DOCUMENTS_DIR",
        "RIDERCDA_CACHE",
    ):
        monkeypatch.setenv(name, str(tmp_path / name.lower()))
