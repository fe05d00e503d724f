"""The jobs that run in the other processes; heavy layers are imported there, never by the window."""

from __future__ import annotations

from functools import cache
from pathlib import Path
from typing import TYPE_CHECKING

from ridercda.drag.estimate import Estimate
from ridercda.rides.ride import Ride
from ridercda.session.document import RideEntry, Run, Session, Venue, VenueKind
from ridercda.watch import Watch

if TYPE_CHECKING:
    from ridercda.app.lap_traces import Laps
    from ridercda.app.proposals import Proposed
    from ridercda.workspace.workspace import Workspace


class _Bench:
    """What one process remembers between jobs: the memo, the rides it was sent and what it solved last."""

    def __init__(self, workspace: Workspace) -> None:
        self.workspace = workspace
        self.rides: dict[str, Ride] = {}
        self.solved: tuple[Session, tuple[str, ...]] | None = None

    def some(self, wanted: tuple[str, ...]) -> dict[str, Ride]:
        return {ride: self.rides[ride] for ride in wanted}


@cache
def _bench() -> _Bench:
    from ridercda.workspace.workspace import Workspace, user_cache

    return _Bench(Workspace(user_cache()))


def read_ride(watch: Watch, folder: Path | None, entry: RideEntry) -> Ride:
    """Return a ride of the session, read and repaired as the session says."""
    return _bench().workspace.ride(folder or Path(), entry, watch)


def solve(watch: Watch, session: Session, fresh: dict[str, Ride], wanted: tuple[str, ...]) -> Estimate:
    """Return the estimate of a session; `fresh` are rides this process has not seen, `wanted` those to be used."""
    bench = _bench()
    bench.rides.update(fresh)
    estimate = bench.workspace.estimate(session, bench.some(wanted), watch)
    bench.solved = (session, wanted)
    return estimate


def lap_traces(watch: Watch) -> Laps | None:
    """Return the laps of the day last solved."""
    from ridercda.app.lap_work import laps_of

    bench = _bench()
    if bench.solved is None:
        return None
    session, wanted = bench.solved
    rides = bench.some(wanted)
    return laps_of(
        bench.workspace.day(session, rides, watch), bench.workspace.estimate(session, rides, watch)
    )


def propose_runs(watch: Watch, ride_id: str, ride: Ride, venue: Venue | None) -> Proposed:
    """Return the runs proposed for a ride; without a venue, as if it were the first kind that repeats there."""
    from ridercda.app.proposals import Proposed
    from ridercda.runs.propose import propose_runs as propose

    guesses = [venue] if venue is not None else [Venue(VenueKind.LOOP), Venue(VenueKind.OUT_AND_BACK)]
    found = Proposed()
    for guess in guesses:
        proposal = propose(ride, guess, watch=watch)
        runs = tuple(Run("", ride_id, "", run.start, run.end, laps=run.laps) for run in proposal.runs)
        found = Proposed(runs, guess.kind if venue is None else None, proposal.notes)
        if any(run.lap_count for run in proposal.runs):
            break
    return found


def warm_up(watch: Watch) -> None:
    """Import and compile what the first job of this process would wait for."""
    import ridercda.drag.prepare
    import ridercda.drag.solve  # noqa: F401
