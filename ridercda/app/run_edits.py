"""Edits of runs as the window makes them: named steps over the pure edits, with edges kept clear of neighbours."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import replace

from PySide6.QtCore import QObject

from ridercda.app.desk import Desk
from ridercda.app.letters import badges, next_letter
from ridercda.errors import SessionError
from ridercda.runs.assign import parse_order
from ridercda.session import edits
from ridercda.session.document import Run, Session, Setup, Venue, VenueKind

LEAST_RUN = 5.0  # s


class RunEdits(QObject):
    """The steps that strip, table and menu share."""

    def __init__(self, desk: Desk, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._desk = desk

    def create(self, ride: str, start: float, end: float) -> None:
        """Make a run of a span, in the picked setup or the baseline; the first run brings the first setup."""
        session = self._desk.session
        start, end = clear_span(session, ride, round(start), round(end))
        if end - start < LEAST_RUN:
            return
        setup = self._desk.selection.setup or (session.baseline.id if session.baseline else "")
        run_id = edits.fresh_id(
            [run.id for run in session.runs], next_run_id([run.id for run in session.runs])
        )

        def change(before: Session) -> Session:
            with_setup = before if setup else with_new_setup(before)
            return edits.add_runs(
                with_setup, [Run(run_id, ride, setup or with_setup.setups[0].id, start, end)]
            )

        if self._desk.document.edit(self.tr("New run"), change):
            self._desk.selection.pick_run(run_id)

    def accept(self, runs: tuple[Run, ...], kind: VenueKind | None = None) -> None:
        """Take proposed runs, all in one step; the first bring the first setup and say what the venue is."""

        def change(before: Session) -> Session:
            session = before if before.setups else with_new_setup(before)
            if kind is not None and session.venue is None:
                session = edits.set_venue(session, Venue(kind))
            known = {setup.id for setup in session.setups}
            setup = session.baseline.id if session.baseline else session.setups[0].id
            taken = [run.id for run in session.runs]
            added = []
            for run in runs:
                run_id = run.id if run.id and run.id not in taken else next_run_id(taken)
                taken.append(run_id)
                added.append(replace(run, id=run_id, setup=run.setup if run.setup in known else setup))
            return edits.add_runs(session, added)

        self._desk.document.edit(self.tr("Accept %n run(s)", "", len(runs)), change)

    def trim(self, run_id: str, start: float, end: float, edge: str) -> None:
        """Move the edges of a run, kept clear of its neighbours; moves of one drag count as one step."""
        session = self._desk.session
        run = session.run(run_id)
        low, high = free_span(session, run.ride, run_id, self._length(run.ride))
        start = max(low, min(start, end - LEAST_RUN))
        end = min(high, max(end, start + LEAST_RUN))
        self._desk.document.edit(
            self.tr("Trim run {}").format(run_id),
            lambda s: edits.trim_run(s, run_id, start, end),
            merge=f"trim:{run_id}:{edge}",
        )

    def assign(self, run_ids: tuple[str, ...], setup_id: str) -> None:
        """Say in which setup runs were ridden."""
        if run_ids:
            letter = badges(self._desk.session)[setup_id].letter
            text = self.tr("Assign %n run(s) to {}", "", len(run_ids)).format(letter)
            self._desk.document.edit(text, lambda s: edits.assign_runs(s, run_ids, setup_id))

    def assign_letter(self, run_ids: tuple[str, ...], letter: str) -> None:
        """Assign runs by a setup's letter; the next free letter makes the setup."""
        session = self._desk.session
        found = next((key for key, badge in badges(session).items() if badge.letter == letter), None)
        if found is not None:
            self.assign(run_ids, found)
        elif run_ids and letter == next_letter(session):

            def change(before: Session) -> Session:
                after = with_new_setup(before)
                return edits.assign_runs(after, run_ids, after.setups[-1].id)

            text = self.tr("Assign %n run(s) to new setup {}", "", len(run_ids)).format(letter)
            self._desk.document.edit(text, change)

    def assign_in_order(self, text: str) -> None:
        """Say in one line in which order the setups were ridden; letters that are next make their setups."""

        def change(session: Session) -> Session:
            while (letter := next_letter(session)) and letter in text.upper():
                session = with_new_setup(session)
            order = parse_order(text, session.setups)
            runs = sorted(session.runs, key=lambda run: (ride_place[run.ride], run.start))
            if len(order) > len(runs):
                words = self.tr("the order names {} runs, but there are {}")
                raise SessionError(words.format(len(order), len(runs)), key="run.setup")
            for run, setup in zip(runs, order, strict=False):
                if setup is None:
                    session = edits.exclude_runs(session, (run.id,), self.tr("not part of the test"))
                else:
                    session = edits.assign_runs(session, (run.id,), setup.id)
            return session

        ride_place = {ride.id: place for place, ride in enumerate(self._desk.session.rides)}
        self._desk.document.edit(self.tr("Assign runs in order"), change)

    def split(self, run_id: str, time: float) -> None:
        """Split a run in two."""
        self._desk.document.edit(
            self.tr("Split run {}").format(run_id), lambda s: edits.split_run(s, run_id, round(time))
        )

    def merge(self, run_ids: tuple[str, ...]) -> None:
        """Make one run of several."""
        if len(run_ids) > 1:
            self._desk.document.edit(
                self.tr("Merge %n run(s)", "", len(run_ids)), lambda s: edits.merge_runs(s, run_ids)
            )

    def exclude(self, run_ids: tuple[str, ...], reason: str) -> None:
        """Leave runs out for a reason."""
        self._desk.document.edit(
            self.tr("Leave out %n run(s)", "", len(run_ids)), lambda s: edits.exclude_runs(s, run_ids, reason)
        )

    def include(self, run_ids: tuple[str, ...]) -> None:
        """Count runs again."""
        self._desk.document.edit(
            self.tr("Count %n run(s) again", "", len(run_ids)), lambda s: edits.include_runs(s, run_ids)
        )

    def remove(self, run_ids: tuple[str, ...]) -> None:
        """Remove runs."""
        if run_ids:
            self._desk.document.edit(
                self.tr("Remove %n run(s)", "", len(run_ids)), lambda s: edits.remove_runs(s, run_ids)
            )

    def add_setup(self) -> None:
        """Add a setup with the next letter."""
        if self._desk.document.edit(self.tr("New setup"), with_new_setup):
            self._desk.selection.pick_setup(self._desk.session.setups[-1].id)

    def _length(self, ride_id: str) -> float:
        ride = self._desk.shelf.ride(ride_id)
        return float(ride.time[-1]) if ride is not None and ride.time.size else float("inf")


def with_new_setup(session: Session) -> Session:
    """Return the session with one more setup; the first is the baseline."""
    letter = next_letter(session)
    wish = f"setup-{letter.lower()}" if letter else "setup"
    setup_id = edits.fresh_id([setup.id for setup in session.setups], wish)
    name = f"Setup {letter}".strip()
    return edits.add_setup(session, Setup(setup_id, letter=letter, name=name, baseline=not session.setups))


def next_run_id(taken: Collection[str]) -> str:
    """Return the next number that no run has."""
    number = len(taken) + 1
    while str(number) in taken:
        number += 1
    return str(number)


def free_span(session: Session, ride: str, run_id: str, length: float) -> tuple[float, float]:
    """Return how far a run can reach: to its neighbours on the ride, or the ride's ends. [s]"""
    this = session.run(run_id)
    others = [run for run in session.runs if run.ride == ride and run.id != run_id]
    low = max((_end(run, length) for run in others if run.start < this.start), default=0.0)
    high = min((run.start for run in others if run.start > this.start), default=length)
    return low, high


def clear_span(session: Session, ride: str, start: float, end: float) -> tuple[float, float]:
    """Return the part of a span, from its start on, that no run has; start must be free or the part is empty."""
    for run in sorted((run for run in session.runs if run.ride == ride), key=lambda run: run.start):
        last = _end(run, float("inf"))
        if run.start <= start < last:
            start = last
        elif start < run.start < end:
            end = run.start
    return start, max(start, end)


def _end(run: Run, length: float) -> float:
    return run.end if run.end is not None else length
