"""The memo from files to estimate: content hash -> ride -> prepared day -> estimate.

Used by command line and app alike. Each step is keyed by what it depends on and by nothing else: renaming a setup
solves nothing anew, moving the edge of a run reads no file anew. Nothing happens by side effect: a workspace built
afresh gives the same figures.
"""

from __future__ import annotations

import os
from collections.abc import Mapping
from dataclasses import replace
from pathlib import Path

from ridercda.drag.day import Day
from ridercda.drag.estimate import Estimate
from ridercda.rides.format import ReadOptions
from ridercda.rides.reader import read_ride
from ridercda.rides.repair import Choice, repair
from ridercda.rides.ride import Ride
from ridercda.rides.store import RideCache
from ridercda.session.document import CourseEntry, RideEntry, Session
from ridercda.session.ride_files import file_hash, file_of
from ridercda.watch import NO_WATCH, Watch

CACHE_VARIABLE = "RIDERCDA_CACHE"


def user_cache() -> Path:
    """Return the user's cache folder by platform convention, or the one RIDERCDA_CACHE names."""
    named = os.environ.get(CACHE_VARIABLE)
    if named:
        return Path(named)
    from platformdirs import user_cache_path  # lazily: not every command needs it

    return user_cache_path("ridercda", appauthor=False)


class Workspace:
    """Remembers rides, the prepared day and the estimate of the last sessions asked for.

    Parameters
    ----------
    cache : Path or None
        Folder for parsed rides, kept between starts; None keeps nothing on disk.
    """

    def __init__(self, cache: Path | None = None) -> None:
        self._store = RideCache(cache) if cache is not None else None
        self._raw: dict[tuple[str, ReadOptions], Ride] = {}
        self._rides: dict[tuple[str, ReadOptions, tuple[Choice, ...]], Ride] = {}
        self._hashes: dict[tuple[str, int, int], str] = {}
        self._day: tuple[object, Day] | None = None
        self._estimate: tuple[object, Estimate] | None = None

    def ride(self, folder: Path, entry: RideEntry, watch: Watch = NO_WATCH) -> Ride:
        """Return a ride of a session, read and repaired as the session says.

        Raises
        ------
        SessionError
            If the file is missing.
        ReaderError
            If nothing can be read from it.
        """
        path = file_of(folder, entry)
        options = options_of(entry)
        sha256 = self._hash(path)
        raw = self._raw.get((sha256, options))
        if raw is None:
            raw = self._store.get(sha256, options) if self._store else None
            if raw is None:
                raw = read_ride(path, options, watch)
                if self._store:
                    self._store.put(sha256, options, raw)
            self._raw[sha256, options] = raw
        choices = choices_of(entry)
        ride = self._rides.get((sha256, options, choices))
        if ride is None:
            ride = repair(raw, choices)
            self._rides[sha256, options, choices] = ride
        return ride

    def rides(self, folder: Path, session: Session, watch: Watch = NO_WATCH) -> Mapping[str, Ride]:
        """Return the rides that the session's runs need, by id."""
        needed = {run.ride for run in session.runs}
        entries = [entry for entry in session.rides if entry.id in needed]
        found = {}
        for done, entry in enumerate(entries):
            watch.step(done, len(entries))
            found[entry.id] = self.ride(folder, entry, watch)
        return found

    def day(self, session: Session, rides: Mapping[str, Ride], watch: Watch = NO_WATCH) -> Day:
        """Return the prepared day of a session whose rides are at hand."""
        key = (
            solve_key(session),
            tuple(sorted((name, id(ride)) for name, ride in rides.items())),
            dict(rides),
        )
        if self._day is None or self._day[0] != key:
            from ridercda.drag.prepare import prepare_day

            self._day = (key, prepare_day(session, rides, watch))
        return self._day[1]

    def estimate(self, session: Session, rides: Mapping[str, Ride], watch: Watch = NO_WATCH) -> Estimate:
        """Return the estimate of a session whose rides are at hand."""
        day = self.day(session, rides, watch)
        if self._estimate is None or self._estimate[0] is not day:
            from ridercda.drag.solve import solve

            self._estimate = (day, solve(day, watch))
        return self._estimate[1]

    def _hash(self, path: Path) -> str:
        """Return a file's hash; a file of the same name, size and time of change is taken as unchanged."""
        stat = path.stat()
        key = (str(path), stat.st_size, stat.st_mtime_ns)
        if key not in self._hashes:
            self._hashes[key] = file_hash(path)
        return self._hashes[key]


def options_of(entry: RideEntry) -> ReadOptions:
    """Return how a session says a ride is to be read."""
    return ReadOptions.with_columns(
        entry.columns,
        start=entry.start,
        power_channel=entry.power_channel,
        wheel_circumference=entry.wheel_circumference,
    )


def choices_of(entry: RideEntry) -> tuple[Choice, ...]:
    """Return the repairs a session chooses for a ride."""
    return tuple(Choice(c.kind, c.choice, c.start, c.end, c.value) for c in entry.repairs)


def solve_key(session: Session) -> Session:
    """Return the session without what no estimate depends on: names, letters, notes, costs and courses."""
    setups = tuple(
        replace(
            setup,
            name="",
            letter="",
            notes="",
            photos=(),
            measurements={},
            power_cost=None,
            power_cost_share=None,
            power_cost_sd=None,
            held=None,
            fallback="",
        )
        for setup in session.setups
    )
    runs = tuple(replace(run, note="") for run in session.runs)
    none: tuple[CourseEntry, ...] = ()
    return replace(session, name="", setups=setups, runs=runs, courses=none)
