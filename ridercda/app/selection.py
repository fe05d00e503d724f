"""One selection everywhere: runs, setup, ride and fault picked, and the moment under the pointer."""

from __future__ import annotations

from collections.abc import Iterable

from PySide6.QtCore import QObject, Signal

from ridercda.app.document import SessionDocument
from ridercda.session.document import Session


class Selection(QObject):
    """What is picked; it follows the session, so that nothing picked is ever gone."""

    changed = Signal()
    moment_changed = Signal()

    def __init__(self, document: SessionDocument, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._document = document
        self.runs: tuple[str, ...] = ()
        self.setup = ""
        self.ride = ""
        self.moment: tuple[str, float] | None = None  # ride id and time on its clock [s]
        document.session_changed.connect(self._on_session_changed)
        document.session_opened.connect(self._on_session_opened)

    @property
    def run(self) -> str:
        """The one run that details are shown of: the last picked; empty without."""
        return self.runs[-1] if self.runs else ""

    def pick_run(self, run_id: str) -> None:
        """Pick one run, and with it its setup and ride."""
        self.pick_runs((run_id,) if run_id else ())

    def pick_runs(self, run_ids: Iterable[str]) -> None:
        """Pick several runs; the setup and the ride of the last follow."""
        runs = tuple(dict.fromkeys(run_ids))
        setup, ride = self.setup, self.ride
        if runs:
            last = self._document.session.run(runs[-1])
            setup, ride = last.setup, last.ride
        self._take(runs, setup, ride)

    def toggle_run(self, run_id: str) -> None:
        """Add a run to those picked, or take it out."""
        rest = tuple(each for each in self.runs if each != run_id)
        self.pick_runs(rest if run_id in self.runs else (*rest, run_id))

    def pick_setup(self, setup_id: str) -> None:
        """Pick a setup; runs of other setups are let go."""
        runs = tuple(run for run in self.runs if self._document.session.run(run).setup == setup_id)
        self._take(runs, setup_id, self.ride)

    def pick_ride(self, ride_id: str) -> None:
        """Pick a ride; runs of other rides are let go."""
        runs = tuple(run for run in self.runs if self._document.session.run(run).ride == ride_id)
        self._take(runs, self.setup, ride_id)

    def point_at(self, ride_id: str, time: float) -> None:
        """Note the moment under the pointer, on a ride's clock [s]."""
        if self.moment != (ride_id, time):
            self.moment = (ride_id, time)
            self.moment_changed.emit()

    def point_away(self) -> None:
        """Note that the pointer is at no moment."""
        if self.moment is not None:
            self.moment = None
            self.moment_changed.emit()

    def _take(self, runs: tuple[str, ...], setup: str, ride: str) -> None:
        if (runs, setup, ride) != (self.runs, self.setup, self.ride):
            self.runs, self.setup, self.ride = runs, setup, ride
            self.changed.emit()

    def _on_session_opened(self) -> None:
        self.runs, self.setup, self.ride, self.moment = (), "", "", None

    def _on_session_changed(self, session: Session) -> None:
        known = {run.id for run in session.runs}
        setups = [setup.id for setup in session.setups]
        rides = [ride.id for ride in session.rides]
        runs = tuple(run for run in self.runs if run in known)
        setup = self.setup if self.setup in setups else ""
        ride = self.ride if self.ride in rides else rides[0] if rides else ""
        if runs:
            setup, ride = session.run(runs[-1]).setup, session.run(runs[-1]).ride
        self._take(runs, setup, ride)
