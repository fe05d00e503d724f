"""Runs proposed for rides that have none yet; found in the other process, taken in one step."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import QObject, Signal

from ridercda.app import tasks
from ridercda.app.document import SessionDocument
from ridercda.app.shelf import RideShelf
from ridercda.app.worker import Job, Worker
from ridercda.rides.ride import Ride
from ridercda.session.document import Run, Venue, VenueKind


@dataclass(frozen=True, slots=True)
class Proposed:
    """What was found in a ride: runs, the kind of venue they repeat on, and what the rider should know."""

    runs: tuple[Run, ...] = ()
    kind: VenueKind | None = None  # None where the session says itself what the venue is
    notes: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, eq=False)
class _Asked:
    """What a proposal depends on."""

    ride: Ride
    venue: Venue | None

    def holds_for(self, ride: Ride, venue: Venue | None) -> bool:
        return self.ride is ride and self.venue == venue


class Proposals(QObject):
    """Follows document and shelf."""

    changed = Signal()

    def __init__(
        self, document: SessionDocument, shelf: RideShelf, worker: Worker, parent: QObject | None = None
    ) -> None:
        super().__init__(parent)
        self._document, self._shelf, self._worker = document, shelf, worker
        self._asked: dict[str, _Asked] = {}
        self._found: dict[str, Proposed] = {}
        self._jobs: dict[str, Job] = {}
        document.session_opened.connect(self._on_session_opened)
        document.session_changed.connect(self._on_change)
        shelf.changed.connect(self._on_change)

    def _open(self) -> dict[str, Proposed]:
        """Return what was found for the rides that are here and have no run."""
        used = {run.ride for run in self._document.session.runs}
        return {ride: found for ride, found in self._found.items() if ride not in used}

    @property
    def runs(self) -> tuple[Run, ...]:
        """The runs proposed now."""
        return tuple(run for found in self._open().values() for run in found.runs)

    @property
    def kind(self) -> VenueKind | None:
        """The kind of venue the proposals suppose, where the session does not say."""
        kinds = [found.kind for found in self._open().values() if found.runs and found.kind]
        return kinds[0] if kinds and self._document.session.venue is None else None

    @property
    def notes(self) -> tuple[str, ...]:
        """What the rider should know of them."""
        return tuple(dict.fromkeys(note for found in self._open().values() for note in found.notes))

    @property
    def is_busy(self) -> bool:
        """Whether proposals are being looked for."""
        return bool(self._jobs)

    def _on_session_opened(self) -> None:
        for ride in list(self._jobs):
            self._drop(ride)
        self._asked.clear()
        self._found.clear()

    def _drop(self, ride: str) -> None:
        if job := self._jobs.pop(ride, None):
            job.cancel()

    def _on_change(self) -> None:
        session, rides = self._document.session, self._shelf.rides()
        used = {run.ride for run in session.runs}
        for gone in [each for each in self._asked if each not in rides]:
            self._drop(gone)
            del self._asked[gone]
            self._found.pop(gone, None)
        for ride_id, ride in rides.items():
            asked = self._asked.get(ride_id)
            if ride_id in used or (asked and asked.holds_for(ride, session.venue)):
                continue
            self._drop(ride_id)
            self._found.pop(ride_id, None)
            self._asked[ride_id] = _Asked(ride, session.venue)
            job = self._worker.request(tasks.propose_runs, ride_id, ride, session.venue)
            self._jobs[ride_id] = job
            job.finished.connect(lambda found, key=ride_id: self._on_job_finished(key, found))
            job.failed.connect(
                lambda words, key=ride_id: self._on_job_finished(key, Proposed(notes=(words,)))
            )
            job.faulted.connect(lambda _, key=ride_id: self._on_job_finished(key, Proposed()))
        self.changed.emit()

    def _on_job_finished(self, ride_id: str, found: Proposed) -> None:
        self._jobs.pop(ride_id, None)
        self._found[ride_id] = found
        self.changed.emit()
