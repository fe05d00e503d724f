"""The rides of the session as arrays, read and repaired in the other process; what is on its way or missing."""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum
from pathlib import Path

from PySide6.QtCore import QObject, Signal

from ridercda.app import tasks
from ridercda.app.document import SessionDocument
from ridercda.app.fault_log import noted
from ridercda.app.worker import Job, Worker
from ridercda.rides.ride import Ride
from ridercda.session.document import RideEntry, Session


class Shelved(Enum):
    """How it stands with a ride."""

    READING = "reading"
    READY = "ready"
    MISSING = "missing"
    FAILED = "failed"


@dataclass(frozen=True, slots=True, eq=False)
class ShelfItem:
    """A ride of the session and what is known of it here."""

    entry: RideEntry
    state: Shelved
    ride: Ride | None = None  # an earlier state of it while it is read anew
    message: str = ""
    progress: float = 0.0


class RideShelf(QObject):
    """Follows the document: reads what it names, keeps what it has, drops what is gone."""

    changed = Signal()  # some ride arrived, failed or left
    progressed = Signal()

    def __init__(self, document: SessionDocument, worker: Worker, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._document = document
        self._worker = worker
        self._items: dict[str, ShelfItem] = {}
        self._jobs: dict[str, Job] = {}
        document.session_opened.connect(self._on_session_opened)
        document.session_changed.connect(self._on_session_changed)

    def item(self, ride_id: str) -> ShelfItem | None:
        """Return how it stands with a ride."""
        return self._items.get(ride_id)

    def ride(self, ride_id: str) -> Ride | None:
        """Return a ride's arrays, if they are here."""
        item = self._items.get(ride_id)
        return item.ride if item else None

    def rides(self) -> dict[str, Ride]:
        """Return all rides that are here."""
        return {key: item.ride for key, item in self._items.items() if item.ride is not None}

    @property
    def reading(self) -> tuple[ShelfItem, ...]:
        """The rides being read."""
        return tuple(item for item in self._items.values() if item.state is Shelved.READING)

    def stop_reading(self) -> None:
        """Stop what is being read; those rides count as failed until they are asked for again."""
        for ride_id, job in list(self._jobs.items()):
            job.cancel()
            item = self._items[ride_id]
            self._items[ride_id] = ShelfItem(
                item.entry, Shelved.FAILED, item.ride, self.tr("Reading was stopped.")
            )
        self._jobs.clear()
        self.changed.emit()

    def read_again(self, ride_id: str) -> None:
        """Read a ride once more, e.g. when its file has come back."""
        self._request(self._document.session.ride(ride_id))
        self.changed.emit()

    def _on_session_opened(self) -> None:
        for job in self._jobs.values():
            job.cancel()
        self._jobs.clear()
        self._items.clear()

    def _on_session_changed(self, session: Session) -> None:
        known = {entry.id: entry for entry in session.rides}
        stale = False
        for ride_id in [each for each in self._items if each not in known]:
            del self._items[ride_id]
            if job := self._jobs.pop(ride_id, None):
                job.cancel()
            stale = True
        for ride_id, entry in known.items():
            item = self._items.get(ride_id)
            if item is None or _reading_key(item.entry) != _reading_key(entry):
                self._request(entry)
                stale = True
            elif item.entry != entry:
                self._items[ride_id] = ShelfItem(entry, item.state, item.ride, item.message, item.progress)
        if stale:
            self.changed.emit()

    def _request(self, entry: RideEntry) -> None:
        if job := self._jobs.pop(entry.id, None):
            job.cancel()
        before = self._items.get(entry.id)
        kept = before.ride if before and before.entry.file == entry.file else None
        folder = self._document.folder
        path = (folder / entry.file) if folder else Path(entry.file)
        if not path.is_file():
            message = self.tr("The file is not where the session says: {}").format(entry.file)
            self._items[entry.id] = ShelfItem(entry, Shelved.MISSING, kept, message)
            return
        self._items[entry.id] = ShelfItem(entry, Shelved.READING, kept)
        job = self._worker.request(tasks.read_ride, folder, entry)
        self._jobs[entry.id] = job
        job.progressed.connect(lambda done, total: self._on_job_progressed(entry, done, total))
        job.finished.connect(lambda ride: self._on_job_finished(entry, ride))
        job.failed.connect(lambda message: self._on_job_failed(entry, message))
        job.faulted.connect(lambda trace: self._on_job_faulted(entry, trace))

    def _is_current(self, entry: RideEntry) -> bool:
        item = self._items.get(entry.id)
        return item is not None and _reading_key(item.entry) == _reading_key(entry)

    def _on_job_progressed(self, entry: RideEntry, done: int, total: int) -> None:
        if self._is_current(entry):
            item = self._items[entry.id]
            self._items[entry.id] = ShelfItem(item.entry, item.state, item.ride, "", done / max(total, 1))
            self.progressed.emit()

    def _on_job_finished(self, entry: RideEntry, ride: Ride) -> None:
        if self._is_current(entry):
            self._jobs.pop(entry.id, None)
            self.put(entry.id, ride)

    def put(self, ride_id: str, ride: Ride) -> None:
        """Take a ride's arrays."""
        self._items[ride_id] = ShelfItem(self._document.session.ride(ride_id), Shelved.READY, ride)
        self.changed.emit()

    def _on_job_faulted(self, entry: RideEntry, trace: str) -> None:
        words = self.tr("Reading this file failed by a fault of the program. It is written down in {}")
        self._on_job_failed(entry, words.format(noted(trace)))

    def _on_job_failed(self, entry: RideEntry, message: str) -> None:
        if self._is_current(entry):
            self._jobs.pop(entry.id, None)
            item = self._items[entry.id]
            self._items[entry.id] = ShelfItem(item.entry, Shelved.FAILED, item.ride, message)
            self.changed.emit()


def _reading_key(entry: RideEntry) -> tuple[object, ...]:
    """Return what a ride's arrays depend on."""
    return (
        entry.file,
        entry.start,
        tuple(sorted(entry.columns.items())),
        entry.wheel_circumference,
        entry.power_channel,
        entry.repairs,
    )
