"""The jobs that run in the other processes; heavy layers are imported there, never by the window."""

from __future__ import annotations

from pathlib import Path

from ridercda.drag.estimate import Estimate
from ridercda.rides.ride import Ride
from ridercda.session.document import RideEntry, Run, Session
from ridercda.watch import Watch


def read_ride(watch: Watch, path: Path, entry: RideEntry, utc_offset: float | None) -> Ride:
    """Return a ride of the session, read and repaired as the session says."""
    from ridercda.rides.format import ReadOptions
    from ridercda.rides.reader import read_ride as read

    options = ReadOptions.with_columns(
        entry.columns, start=entry.start, power_channel=entry.power_channel, wheel_circumference=entry.wheel_circumference
    )
    return read(path, options, watch)


def solve(watch: Watch, session: Session, folder: Path | None, fresh: dict[str, Ride], rides: tuple[str, ...]) -> Estimate:
    """Return the estimate of a session."""
    raise NotImplementedError


def propose_runs(watch: Watch, ride_id: str, ride: Ride, session: Session) -> tuple[Run, ...]:
    """Return the runs proposed for a ride."""
    raise NotImplementedError


def lap_traces(watch: Watch) -> object:
    """Return the laps of the day last solved."""
    raise NotImplementedError
