"""The laps that belong to the estimate, asked for when the estimate is current and somebody looks."""

from __future__ import annotations

from PySide6.QtCore import QObject, Signal

from ridercda.app import tasks
from ridercda.app.lap_traces import Laps
from ridercda.app.solving import Solving, State
from ridercda.app.worker import Job, Worker
from ridercda.drag.estimate import Estimate


class LapTraces(QObject):
    """Follows the estimate."""

    changed = Signal()

    def __init__(self, solving: Solving, worker: Worker, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._solving, self._worker = solving, worker
        self._of: Estimate | None = None
        self._job: Job | None = None
        self.laps: Laps | None = None
        solving.changed.connect(self._on_solving_changed)

    def _on_solving_changed(self) -> None:
        estimate = self._solving.estimate
        if estimate is None:
            self._drop()
            if self.laps is not None:
                self.laps = None
                self.changed.emit()
            return
        if self._solving.state is not State.CURRENT or estimate is self._of:
            return
        self._drop()
        self._of = estimate
        self._job = self._worker.request(tasks.lap_traces)
        self._job.finished.connect(self._on_job_finished)

    @property
    def is_busy(self) -> bool:
        """Whether the laps are being worked out."""
        return self._job is not None

    def _drop(self) -> None:
        if self._job is not None:
            self._job.cancel()
            self._job = None
        self._of = None

    def _on_job_finished(self, laps: Laps | None) -> None:
        self._job = None
        self.laps = laps
        self.changed.emit()
