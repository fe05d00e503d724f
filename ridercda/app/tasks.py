"""The jobs that run in the other processes; heavy layers are imported there, never by the window."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from ridercda.drag.estimate import Estimate
from ridercda.rides.ride import Ride
from ridercda.session.document import RideEntry, Run, Session
from ridercda.watch import Watch

if TYPE_CHECKING:
    from ridercda.app.lap_traces import Laps
    from ridercda.drag.day import Day


def read_ride(watch: Watch, path: Path, entry: RideEntry, utc_offset: float | None) -> Ride:
    """Return a ride of the session, read and repaired as the session says."""
    from ridercda.rides.format import ReadOptions
    from ridercda.rides.reader import read_ride as read

    options = ReadOptions.with_columns(
        entry.columns,
        start=entry.start,
        power_channel=entry.power_channel,
        wheel_circumference=entry.wheel_circumference,
    )
    return read(path, options, watch)


class _Bench:
    """What the solving process remembers between jobs: the rides it was sent, and the day it solved last."""

    def __init__(self) -> None:
        self.rides: dict[str, Ride] = {}
        self.day: Day | None = None
        self.estimate: Estimate | None = None


_BENCH = _Bench()


def solve(watch: Watch, session: Session, fresh: dict[str, Ride], wanted: tuple[str, ...]) -> Estimate:
    """Return the estimate of a session; `fresh` are rides this process has not seen, `wanted` those to be used."""
    from ridercda.drag.prepare import prepare_day
    from ridercda.drag.solve import solve as solve_day

    _BENCH.rides.update(fresh)
    day = prepare_day(session, {ride: _BENCH.rides[ride] for ride in wanted}, watch)
    _BENCH.estimate = solve_day(day, watch)
    _BENCH.day = day
    return _BENCH.estimate


def propose_runs(watch: Watch, ride_id: str, ride: Ride, session: Session) -> tuple[Run, ...]:
    """Return the runs proposed for a ride."""
    return ()


def lap_traces(watch: Watch) -> Laps | None:
    """Return the laps of the day last solved."""
    from ridercda.app.lap_traces import laps_of

    if _BENCH.day is None or _BENCH.estimate is None:
        return None
    return laps_of(_BENCH.day, _BENCH.estimate)
