"""A long-lived process beside the window: what would hold up the event loop runs there, one job at a time.

Jobs are module-level functions ``f(watch, *arguments)``. Progress and results come back as Qt signals on the
thread of the `Worker`; a job can be cancelled while it waits or runs, and nothing of it is heard afterwards.
"""

from __future__ import annotations

import contextlib
import itertools
import multiprocessing
import queue
import threading
from multiprocessing.connection import Connection
from typing import Any

from PySide6.QtCore import QObject, QTimer, Signal

from ridercda.app.serving import Task, serve


class Job(QObject):
    """One piece of work under way."""

    progressed = Signal(int, int)
    finished = Signal(object)
    failed = Signal(str)  # one sentence for the user
    faulted = Signal(str)  # our own fault: a traceback for the log

    def __init__(self, number: int, worker: Worker) -> None:
        super().__init__()  # no parent: whoever waits for it keeps it
        self.number = number
        self._worker = worker

    def cancel(self) -> None:
        """Drop the work; none of the signals follows."""
        self._worker.cancel(self)


class Worker(QObject):
    """The other process, seen from here."""

    stopped_by_itself = Signal()
    EVERY = 4  # ms between looks into the inbox while work is under way

    def __init__(self, name: str, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._name = name
        self._numbers = itertools.count(1)
        self._jobs: dict[int, Job] = {}
        self._process: multiprocessing.process.BaseProcess | None = None
        self._outbox: queue.SimpleQueue[Any] = queue.SimpleQueue()
        self._stops: Connection | None = None
        self._threads: list[threading.Thread] = []
        self._home: Connection | None = None
        # The listening thread touches no Qt object: it fills the inbox, and this timer empties it.
        self._inbox: queue.SimpleQueue[Any] = queue.SimpleQueue()
        self._timer = QTimer(self, interval=self.EVERY)
        self._timer.timeout.connect(self._on_timer)

    @property
    def is_idle(self) -> bool:
        """Whether no job waits or runs."""
        return not self._jobs

    def start(self) -> None:
        """Start the process, if it is not there."""
        if self._process is not None:
            return
        context = multiprocessing.get_context("spawn")
        self._home, far_home = context.Pipe()
        far_stops, self._stops = context.Pipe(duplex=False)
        self._process = context.Process(
            target=serve, args=(far_home, far_stops), name=self._name, daemon=True
        )
        self._process.start()
        far_home.close()
        far_stops.close()
        self._outbox, self._inbox = queue.SimpleQueue(), queue.SimpleQueue()
        inbox, outbox, home = self._inbox, self._outbox, self._home
        self._threads = [
            threading.Thread(target=_listen, args=(inbox, home), daemon=True, name=f"{self._name}-in"),
            threading.Thread(target=_post, args=(outbox, home), daemon=True, name=f"{self._name}-out"),
        ]
        for thread in self._threads:
            thread.start()

    def request(self, task: Task, *arguments: object) -> Job:
        """Have a module-level function done in the other process."""
        self.start()
        job = Job(next(self._numbers), self)
        self._jobs[job.number] = job
        self._timer.start()
        self._outbox.put((job.number, task, arguments))
        return job

    def cancel(self, job: Job) -> None:
        """Drop a job; see `Job.cancel`."""
        if self._jobs.pop(job.number, None) is None:
            return
        if self._stops is not None:
            with contextlib.suppress(OSError, ValueError):
                self._stops.send(job.number)

    def stop(self) -> None:
        """End the process and the threads that talk to it."""
        if self._process is None:
            return
        process, self._process = self._process, None
        self._timer.stop()
        self._outbox.put(None)
        process.terminate()
        process.join(5.0)
        for thread in self._threads:
            thread.join(5.0)
        if self._home is not None:
            self._home.close()
        if self._stops is not None:
            self._stops.close()
        self._jobs.clear()

    def _on_timer(self) -> None:
        with contextlib.suppress(queue.Empty):
            while True:
                message = self._inbox.get_nowait()
                if message is None:
                    self._on_death()
                    return
                self._on_arrived(*message)
        if not self._jobs:
            self._timer.stop()

    def _on_arrived(self, number: int, what: str, content: Any) -> None:
        job = self._jobs.get(number)
        if job is None:
            return
        if what == "progress":
            job.progressed.emit(*content)
            return
        del self._jobs[number]
        if what == "done":
            job.finished.emit(content)
        elif what == "failed":
            job.failed.emit(content)
        elif what == "fault":
            job.faulted.emit(content)

    def _on_death(self) -> None:
        jobs = tuple(self._jobs.values())
        self.stop_quietly()
        for job in jobs:
            job.failed.emit(
                self.tr("The background work stopped unexpectedly; it starts again with the next change.")
            )
        self.stopped_by_itself.emit()

    def stop_quietly(self) -> None:
        """Clear away a process that has gone."""
        self._jobs.clear()
        self.stop()


def _post(outbox: queue.SimpleQueue[Any], home: Connection) -> None:
    """Send what is put into the outbox, so that a full pipe never holds up the window."""
    with contextlib.suppress(OSError, ValueError):
        while (message := outbox.get()) is not None:
            home.send(message)


def _listen(inbox: queue.SimpleQueue[Any], home: Connection) -> None:
    """Put what arrives into the inbox; None once the other end is gone."""
    with contextlib.suppress(EOFError, OSError):
        while True:
            inbox.put(home.recv())
    inbox.put(None)
