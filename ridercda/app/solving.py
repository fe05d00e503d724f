"""The estimate that belongs to the session: asked for anew after every edit, superseded work dropped."""

from __future__ import annotations

import time
from enum import Enum

from PySide6.QtCore import QObject, QTimer, Signal

from ridercda.app import tasks
from ridercda.app.document import SessionDocument
from ridercda.app.fault_log import noted
from ridercda.app.shelf import RideShelf, Shelved
from ridercda.app.worker import Job, Worker
from ridercda.drag.estimate import Estimate
from ridercda.workspace.workspace import solve_key


class State(Enum):
    """How the estimate stands to the session."""

    NOTHING = "nothing"  # nothing to solve yet
    WAITING = "waiting"  # for rides to be read
    BUSY = "busy"
    CURRENT = "current"
    FAILED = "failed"


class Solving(QObject):
    """Follows document and shelf; holds the last estimate, which may be out of date."""

    changed = Signal()

    def __init__(
        self, document: SessionDocument, shelf: RideShelf, worker: Worker, parent: QObject | None = None
    ) -> None:
        super().__init__(parent)
        self._document, self._shelf, self._worker = document, shelf, worker
        self._job: Job | None = None
        self._solved: object = None
        self._asked: object = None
        self._sent: dict[str, object] = {}
        self._began = 0.0
        self.state = State.NOTHING
        self.estimate: Estimate | None = None
        self.message = ""
        self.seconds = 0.0
        self.progress = 0.0
        self._soon = QTimer(self, singleShot=True, interval=0)
        self._soon.timeout.connect(self._start)
        document.session_opened.connect(self._on_session_opened)
        document.session_changed.connect(self._soon.start)
        shelf.changed.connect(self._soon.start)
        worker.stopped_by_itself.connect(self._on_worker_stopped)

    @property
    def is_stale(self) -> bool:
        """Whether the estimate shown belongs to an earlier state of the session."""
        return self.estimate is not None and self.state is not State.CURRENT

    def stop(self) -> None:
        """Stop the solve under way; the earlier figures stay, marked out of date."""
        if self._job is not None:
            self._job.cancel()
            self._job = None
            self._asked = None
            self._tell(State.FAILED, self.tr("Stopped. The next change starts it again."))

    def solve_again(self) -> None:
        """Start once more, e.g. after a stop."""
        self._solved = self._asked = None
        self._soon.start()

    def _on_session_opened(self) -> None:
        if self._job is not None:
            self._job.cancel()
        self._job, self._solved, self._asked = None, None, None
        self.estimate = None
        self._tell(State.NOTHING)

    def _on_worker_stopped(self) -> None:
        self._sent.clear()

    def _start(self) -> None:
        session = self._document.session
        key = solve_key(session)
        if not session.runs or not session.setups:
            self._drop_job()
            self.estimate, self._solved = None, None
            self._tell(State.NOTHING)
            return
        needed = dict.fromkeys(run.ride for run in session.runs)
        items = [self._shelf.item(ride) for ride in needed]
        if any(item is not None and item.state is Shelved.READING for item in items):
            self._drop_job()
            self._tell(State.WAITING)
            return
        rides = {ride: item.ride for ride, item in zip(needed, items, strict=True) if item and item.ride}
        full_key = (key, tuple(sorted((ride, id(array)) for ride, array in rides.items())))
        if full_key == self._solved:
            self._drop_job()
            self._tell(State.CURRENT)
            return
        if full_key == self._asked:
            return
        self._drop_job()
        self._asked = full_key
        self._began = time.perf_counter()
        fresh = {ride: array for ride, array in rides.items() if self._sent.get(ride) is not array}
        self._sent.update(fresh)
        self.progress = 0.0
        self._job = self._worker.request(tasks.solve, session, fresh, tuple(rides))
        self._job.progressed.connect(self._on_job_progressed)
        self._job.finished.connect(lambda estimate: self._on_job_finished(full_key, estimate))
        self._job.failed.connect(lambda message: self._on_job_failed(full_key, message))
        self._job.faulted.connect(self._on_job_faulted)
        self._tell(State.BUSY)

    def _drop_job(self) -> None:
        if self._job is not None:
            self._job.cancel()
        self._job = self._asked = None

    def _on_job_progressed(self, done: int, total: int) -> None:
        self.progress = done / max(total, 1)

    def _on_job_finished(self, key: object, estimate: Estimate) -> None:
        if key != self._asked:
            return
        self._job, self._asked = None, None
        self._solved = key
        self.seconds = time.perf_counter() - self._began
        self.put(estimate)

    def put(self, estimate: Estimate) -> None:
        """Take the estimate of the session as it stands."""
        self.estimate = estimate
        self._tell(State.CURRENT)

    def _on_job_failed(self, key: object, message: str) -> None:
        if key == self._asked:
            self._job, self._asked, self._solved = None, None, None
            self._tell(State.FAILED, message)

    def _on_job_faulted(self, trace: str) -> None:
        self._job, self._asked, self._solved = None, None, None
        words = self.tr("This is a fault of the program, not of your data. It is written down in {}")
        self._tell(State.FAILED, words.format(noted(trace)))

    def _tell(self, state: State, message: str = "") -> None:
        self.state, self.message = state, message
        self.changed.emit()
