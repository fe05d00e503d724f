"""Runs proposed for rides that have none yet; found in the other process, taken in one step."""

from __future__ import annotations

from PySide6.QtCore import QObject, Signal

from ridercda.app import tasks
from ridercda.app.document import SessionDocument
from ridercda.app.shelf import RideShelf
from ridercda.app.worker import Job, Worker
from ridercda.rides.ride import Ride
from ridercda.session.document import Run


class Proposals(QObject):
    """Follows document and shelf."""

    changed = Signal()

    def __init__(
        self, document: SessionDocument, shelf: RideShelf, worker: Worker, parent: QObject | None = None
    ) -> None:
        super().__init__(parent)
        self._document, self._shelf, self._worker = document, shelf, worker
        self._found: dict[str, tuple[Ride, tuple[Run, ...]]] = {}
        self._jobs: dict[str, Job] = {}
        document.session_opened.connect(self._on_session_opened)
        document.session_changed.connect(self._on_change)
        shelf.changed.connect(self._on_change)

    @property
    def runs(self) -> tuple[Run, ...]:
        """The runs proposed now: of rides that are here and have no run."""
        used = {run.ride for run in self._document.session.runs}
        return tuple(
            run
            for ride, (array, runs) in self._found.items()
            if ride not in used and self._shelf.ride(ride) is array
            for run in runs
        )

    @property
    def is_busy(self) -> bool:
        """Whether proposals are being looked for."""
        return bool(self._jobs)

    def _on_session_opened(self) -> None:
        for job in self._jobs.values():
            job.cancel()
        self._jobs.clear()
        self._found.clear()

    def _on_change(self) -> None:
        session = self._document.session
        used = {run.ride for run in session.runs}
        for ride_id, ride in self._shelf.rides().items():
            found = self._found.get(ride_id)
            if ride_id in used or ride_id in self._jobs or (found and found[0] is ride):
                continue
            job = self._worker.request(tasks.propose_runs, ride_id, ride, session)
            self._jobs[ride_id] = job
            job.finished.connect(
                lambda runs, key=ride_id, array=ride: self._on_job_finished(key, array, runs)
            )
            job.failed.connect(lambda _, key=ride_id, array=ride: self._on_job_finished(key, array, ()))
            job.faulted.connect(lambda _, key=ride_id, array=ride: self._on_job_finished(key, array, ()))
        self.changed.emit()

    def _on_job_finished(self, ride_id: str, ride: Ride, runs: tuple[Run, ...]) -> None:
        self._jobs.pop(ride_id, None)
        self._found[ride_id] = (ride, tuple(runs))
        self.changed.emit()
