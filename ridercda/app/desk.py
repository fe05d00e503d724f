"""What every part of the window works with."""

from __future__ import annotations

from dataclasses import dataclass

from ridercda.app.document import SessionDocument
from ridercda.app.laps import LapTraces
from ridercda.app.letters import Badge, badges
from ridercda.app.proposals import Proposals
from ridercda.app.quantities import UnitChoice
from ridercda.app.selection import Selection
from ridercda.app.settings import Settings
from ridercda.app.shelf import RideShelf
from ridercda.app.solving import Solving
from ridercda.app.theme import Theme
from ridercda.app.worker import Worker
from ridercda.session.document import Session


@dataclass(frozen=True, slots=True, eq=False)
class Desk:
    """The document and what follows it; views read from here and push edits to the document, nothing else."""

    theme: Theme
    units: UnitChoice
    settings: Settings
    document: SessionDocument
    selection: Selection
    shelf: RideShelf
    solving: Solving
    proposals: Proposals
    laps: LapTraces
    reader: Worker
    solver: Worker

    @property
    def session(self) -> Session:
        """The session as it stands."""
        return self.document.session

    def badges(self) -> dict[str, Badge]:
        """Return letter and colour of each setup."""
        return badges(self.document.session)

    def close(self) -> None:
        """End the processes."""
        self.reader.stop()
        self.solver.stop()


def build_desk(settings: Settings, reader: Worker | None = None, solver: Worker | None = None) -> Desk:
    """Return a desk with nothing open."""
    theme, units = Theme(), UnitChoice()
    settings.restore_theme(theme)
    settings.restore_units(units)
    document = SessionDocument()
    selection = Selection(document)
    reader, solver = reader or Worker("ridercda-reader"), solver or Worker("ridercda-solver")
    shelf = RideShelf(document, reader)
    solving = Solving(document, shelf, solver)
    proposals = Proposals(document, shelf, reader)
    laps = LapTraces(solving, solver)
    return Desk(theme, units, settings, document, selection, shelf, solving, proposals, laps, reader, solver)
