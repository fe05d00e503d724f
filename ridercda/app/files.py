"""Sessions and ride files: opened, saved, added, found again."""

from __future__ import annotations

import shutil
from collections.abc import Iterable
from dataclasses import replace
from pathlib import Path

from PySide6.QtCore import QObject, Signal

from ridercda.app.autosave import Autosave, Kept
from ridercda.app.desk import Desk
from ridercda.app.samples import Sample, copy_sample
from ridercda.errors import SessionError
from ridercda.session import edits
from ridercda.session.document import RideEntry, Session
from ridercda.session.ride_files import file_hash, locate, relative_name
from ridercda.session.store import FILE_NAME, StoredSession, create_session, load_session, save_session

RIDE_SUFFIXES = (".fit", ".tcx", ".gpx", ".csv", ".txt", ".tsv", ".gz")


class SessionFiles(QObject):
    """What connects the document with the disk."""

    failed = Signal(str)
    opened = Signal()
    saved = Signal()

    def __init__(self, desk: Desk, autosave: Autosave, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self._autosave = autosave
        self._stored: StoredSession | None = None

    @property
    def has_place(self) -> bool:
        """Whether the session has a file to be saved to."""
        return self._stored is not None

    def new(self) -> None:
        """Begin an empty session."""
        self._stored = None
        self._desk.document.open(Session(name=self.tr("Untitled session")), None)
        self.opened.emit()

    def open(self, path: Path) -> bool:
        """Open a session folder or file."""
        try:
            stored = load_session(path)
        except SessionError as error:
            self.failed.emit(str(error))
            return False
        self._stored = stored
        self._desk.settings.add_recent(stored.folder)
        self._desk.document.open(stored.session, stored.folder)
        self.opened.emit()
        return True

    def open_sample(self, sample: Sample) -> bool:
        """Copy a sample to the user's folder and open the copy."""
        try:
            folder = copy_sample(sample)
        except OSError as error:
            self.failed.emit(self.tr("The sample could not be copied: {}").format(error))
            return False
        return self.open(folder)

    def recover(self, kept: Kept) -> None:
        """Go on with what an earlier start left unsaved."""
        self._stored = None
        session = kept.session
        if kept.folder is not None and (kept.folder / FILE_NAME).exists():
            try:
                self._stored = load_session(kept.folder)
            except SessionError as error:
                self.failed.emit(str(error))
        before = self._stored.session if self._stored else Session(name=session.name)
        self._desk.document.open(before, kept.folder)
        self._autosave.adopt(kept)
        self._desk.document.edit(self.tr("Recover unsaved changes"), lambda _: session)
        self.opened.emit()

    def save(self) -> bool:
        """Save to where the session came from."""
        if self._stored is None:
            return False
        document = self._desk.document
        try:
            self._stored = save_session(self._stored, document.session)
        except SessionError as error:
            self.failed.emit(str(error))
            return False
        document.undo_stack.setClean()
        self._autosave.forget()
        self.saved.emit()
        return True

    def save_as(self, folder: Path) -> bool:
        """Save as a session folder of its own, with copies of its rides and courses."""
        document = self._desk.document
        try:
            session = self._with_copies(document.session, folder)
            self._stored = create_session(folder, session)
        except (SessionError, OSError) as error:
            self.failed.emit(str(error))
            return False
        document.move_to(folder)
        document.edit(self.tr("Save as {}").format(folder.name), lambda _: session)
        document.undo_stack.setClean()
        self._autosave.forget()
        self._desk.settings.add_recent(folder)
        self.saved.emit()
        return True

    def _with_copies(self, session: Session, folder: Path) -> Session:
        """Copy the session's files into a folder and return the session that names the copies."""
        if (folder / FILE_NAME).exists():
            raise SessionError(
                self.tr("is there already; choose another folder or open it"), path=folder / FILE_NAME
            )
        base = self._desk.document.folder or Path()
        rides = tuple(
            replace(ride, file=_copied(base / ride.file, folder, "rides")) for ride in session.rides
        )
        courses = tuple(
            replace(course, file=_copied(base / course.file, folder, "courses")) if course.file else course
            for course in session.courses
        )
        return replace(session, rides=rides, courses=courses)

    def add_rides(self, paths: Iterable[Path]) -> None:
        """Add ride files, all in one step; a session is begun where none is open."""
        paths = tuple(path for path in paths if path.is_file())
        if not paths:
            return
        if not self._desk.document.is_open:
            self.new()
        folder = self._desk.document.folder
        taken = [ride.id for ride in self._desk.session.rides]
        entries = []
        for path in paths:
            ride_id = edits.fresh_id(taken, path.name.split(".")[0].lower().replace(" ", "-") or "ride")
            taken.append(ride_id)
            name = relative_name(folder, path) if folder else path.resolve().as_posix()
            entries.append(RideEntry(ride_id, name, file_hash(path)))
        text = self.tr("Add %n ride(s)", "", len(entries))
        self._desk.document.edit(text, lambda session: edits.add_rides(session, entries))

    def relocate(self, ride_id: str, path: Path) -> None:
        """Say where a ride's file is now; other missing files beside it are found with it."""
        folder = self._desk.document.folder
        missing = [
            ride
            for ride in self._desk.session.rides
            if ride.id != ride_id and not ((folder / ride.file) if folder else Path(ride.file)).is_file()
        ]
        places = {ride_id: path}
        for ride in missing:
            if (found := locate(ride, path.parent)) is not None:
                places[ride.id] = found

        def change(session: Session) -> Session:
            for key, place in places.items():
                name = relative_name(folder, place) if folder else place.resolve().as_posix()
                session = edits.relocate_ride(session, key, name, file_hash(place))
            return session

        self._desk.document.edit(self.tr("Find %n ride file(s) again", "", len(places)), change)


def _copied(source: Path, folder: Path, below: str) -> str:
    target = folder / below / source.name
    number = 1
    while target.exists() and file_hash(target) != file_hash(source):
        number += 1
        target = folder / below / f"{source.stem}-{number}{source.suffix}"
    if source.is_file() and not target.exists():
        target.parent.mkdir(parents=True, exist_ok=True)
        shutil.copyfile(source, target)
    return f"{below}/{target.name}"
