"""What must hold in a session, whether it was read from a file or edited."""

from __future__ import annotations

import dataclasses
import difflib
import itertools
import math
from collections.abc import Iterable, Iterator, Sequence
from pathlib import Path
from typing import TypeVar

from ridercda.errors import SessionError
from ridercda.rides.ride import CHANNELS, FaultKind
from ridercda.session.bounds import BOUNDS, Bound
from ridercda.session.document import (
    Air,
    CourseEntry,
    PlanKind,
    RideEntry,
    Run,
    Session,
    Setup,
    Tyres,
    VenueKind,
)

Part = TypeVar("Part", RideEntry, Setup, Tyres, Run, CourseEntry)
TEXT_ONLY_COLUMNS = ("time", "lap")


def validate(session: Session, path: Path | None = None) -> None:
    """Check everything that must hold in a session.

    Parameters
    ----------
    session : Session
        Read from a file or edited.
    path : Path, optional
        The file it was read from, for the message.

    Raises
    ------
    SessionError
        For the first thing that does not hold, with key, value and what to do.
    """
    for key, message in _troubles(session):
        raise SessionError(message, path=path, key=key)


def key_of(table: str, item_id: str, index: int) -> str:
    """Return how an item of an array of tables is named in a message: by its id, else by its place from 1."""
    return f"{table}[{item_id}]" if item_id else f"{table}[#{index + 1}]"


def suggestion(word: str, known: Iterable[str]) -> str:
    """Return a hint at the known word that was probably meant, else the list of them."""
    words = list(known)
    close = difflib.get_close_matches(word, words, n=1, cutoff=0.6)
    if close:
        return f"did you mean {close[0]!r}?"
    return f"known: {', '.join(map(repr, words))}" if words else "there are none yet"


def _troubles(session: Session) -> Iterator[tuple[str, str]]:
    """Go through all rules; yields dotted key and message."""
    yield from _ids("ride", session.rides)
    yield from _ids("setup", session.setups)
    yield from _ids("tyres", session.tyres)
    yield from _ids("run", session.runs)
    yield from _ids("course", session.courses)
    yield from _figures("", session)
    yield from _day(session)
    yield from _rides(session)
    yield from _setups(session)
    yield from _tyres(session)
    yield from _runs(session)
    yield from _courses(session)


def _ids(table: str, items: Sequence[Part]) -> Iterator[tuple[str, str]]:
    seen: set[str] = set()
    for i, item in enumerate(items):
        key = key_of(table, item.id, i)
        if not item.id:
            yield f"{key}.id", "has no id; give it one of its own"
        if item.id in seen:
            yield f"{key}.id", f"the id {item.id!r} is used twice; give each {table} an id of its own"
        seen.add(item.id)


# -- figures ---------------------------------------------------------------------------------------------

_TABLE_NAMES = {"rides": "ride", "setups": "setup", "runs": "run", "courses": "course", "segments": "segment"}
_TABLE_NAMES |= {"readings": "reading", "exclusions": "exclude", "repairs": "repair"}


def _figures(key: str, part: object) -> Iterator[tuple[str, str]]:
    """Check every figure of a part of the document, and of the parts below it, against its bound."""
    bounds = BOUNDS.get(type(part).__name__, {})
    for field in dataclasses.fields(part):  # type: ignore[arg-type]
        value = getattr(part, field.name)
        here = f"{key}.{field.name}" if key else field.name
        bound = bounds.get(field.name)
        if bound is not None and value is not None:
            yield from _within(here, value, bound)
        elif dataclasses.is_dataclass(value):
            yield from _figures(here, value)
        elif isinstance(value, tuple):
            name = _TABLE_NAMES.get(field.name, field.name)
            for i, item in enumerate(value):
                if dataclasses.is_dataclass(item):
                    inside = key_of(name, getattr(item, "id", ""), i)
                    yield from _figures(f"{key}.{inside}" if key else inside, item)


def _within(key: str, value: float | tuple[float, ...], bound: Bound) -> Iterator[tuple[str, str]]:
    for figure in value if isinstance(value, tuple) else (value,):
        trouble = bound.trouble(figure)
        if trouble:
            yield key, trouble


# -- the day ---------------------------------------------------------------------------------------------


def _day(session: Session) -> Iterator[tuple[str, str]]:
    if not session.name:
        yield "name", "has no text; name the session"
    if session.utc_offset is not None and session.utc_offset % 60:
        yield "timezone", f'{session.utc_offset:g} s is not a whole number of minutes; write e.g. "+02:00"'
    worthwhile = session.smallest_worthwhile
    if worthwhile.cda is not None and worthwhile.power is not None:
        yield "smallest_worthwhile", "is given both as a drag area and as a power; keep one"
    yield from _air("air", session.air, session.air)
    times = [reading.time for reading in session.air.readings]
    if any(b <= a for a, b in itertools.pairwise(times)):
        yield "air.reading", "the times of the readings do not increase; put them in order, each time once"
    venue = session.venue
    if venue is not None and venue.kind is VenueKind.TRACK:
        if venue.lap_length is None:
            yield (
                "venue.lap_length",
                'is missing; a track needs the length of its lap, e.g. lap_length = "250 m"',
            )
        elif venue.bend_radius is not None:
            bends = 2 * math.pi * venue.bend_radius
            if bends >= venue.lap_length:
                yield (
                    "venue.bend_radius",
                    f"two half circles of {venue.bend_radius:g} m radius are {bends:.1f} m long, which does "
                    f"not fit in a lap of {venue.lap_length:g} m; check both",
                )


def _air(key: str, air: Air, together: Air) -> Iterator[tuple[str, str]]:
    """Check one layer of air; `together` is what it makes with the layers below it."""
    if air.pressure is not None and air.sea_level_pressure is not None:
        yield f"{key}.pressure", "stands beside sea_level_pressure; keep the one that was measured"
    if air.readings and air is not together:
        yield f"{key}.reading", "readings through the day belong in [[air.reading]]"


# -- rides -----------------------------------------------------------------------------------------------


def _rides(session: Session) -> Iterator[tuple[str, str]]:
    channels = (*CHANNELS, *TEXT_ONLY_COLUMNS)
    for i, ride in enumerate(session.rides):
        key = key_of("ride", ride.id, i)
        if not ride.file:
            yield f"{key}.file", "is missing; name the ride file, relative to the session folder"
        for channel in ride.columns:
            if channel not in channels:
                yield f"{key}.columns", f"there is no channel {channel!r}: {suggestion(channel, channels)}"
        for j, repair in enumerate(ride.repairs):
            where = f"{key}.repair[#{j + 1}]"
            kinds = [kind.value for kind in FaultKind]
            if repair.kind not in kinds:
                yield f"{where}.kind", f"there is no fault {repair.kind!r}: {suggestion(repair.kind, kinds)}"
            if not repair.choice:
                yield f"{where}.choice", 'is missing; say which repair to take, or "leave"'
            if repair.start is not None and repair.end is not None and repair.end <= repair.start:
                yield f"{where}.end", _backwards(repair.start, repair.end)


def _backwards(start: float, end: float) -> str:
    return f"{end:g} s is not after the start, {start:g} s; put the end after the start"


# -- setups and tyres ------------------------------------------------------------------------------------


def _setups(session: Session) -> Iterator[tuple[str, str]]:
    ids = [setup.id for setup in session.setups]
    baselines = [setup.id for setup in session.setups if setup.baseline]
    if len(baselines) > 1:
        yield (
            f"setup[{baselines[1]}].baseline",
            f"there are {len(baselines)} baselines ({', '.join(baselines)}); keep baseline = true in one",
        )
    for i, setup in enumerate(session.setups):
        key = key_of("setup", setup.id, i)
        for name in ("fallback", "difference_from"):
            other = getattr(setup, name)
            if other and other not in ids:
                yield f"{key}.{name}", f"there is no setup {other!r}: {suggestion(other, ids)}"
            if other == setup.id:
                yield f"{key}.{name}", "names the setup itself; name another one"
        yield from _setup_alone(key, setup)
    for name in ("fallback", "difference_from"):
        for setup in session.setups:
            yield from _circle(session, setup, name)


def _circle(session: Session, setup: Setup, name: str) -> Iterator[tuple[str, str]]:
    """Check that following a reference from setup to setup comes to an end."""
    following = {each.id: getattr(each, name) for each in session.setups}
    passed = [setup.id]
    while following.get(passed[-1]):
        passed.append(following[passed[-1]])
        if passed[-1] == setup.id:
            yield f"setup[{setup.id}].{name}", f"goes round in a circle ({' -> '.join(passed)}); break it"
            return
        if len(passed) > len(following):
            return  # a circle this setup only leads into is told at its members


def _setup_alone(key: str, setup: Setup) -> Iterator[tuple[str, str]]:
    known = {"cda": setup.cda is not None, "cda_difference": setup.cda_difference is not None}
    known["cxa"] = bool(setup.yaw or setup.cxa)
    given = [name for name, is_given in known.items() if is_given]
    if len(given) > 1:
        yield f"{key}.{given[1]}", f"stands beside {given[0]}; keep one of {', '.join(given)}"
    if known["cda_difference"] != bool(setup.difference_from):
        missing = "difference_from" if known["cda_difference"] else "cda_difference"
        yield f"{key}.{missing}", "is missing; cda_difference and difference_from go together"
    for name in ("cda", "cda_difference"):
        if getattr(setup, f"{name}_sd") is not None and not known[name]:
            yield f"{key}.{name}_sd", f"is given without {name}; give both or neither"
    if known["cda_difference"] and setup.cda_difference_sd is None:
        yield f"{key}.cda_difference_sd", "is missing; say how sure the difference is (0 for exact)"
    if known["cda"] and setup.cda_sd is None:
        yield f"{key}.cda_sd", "is missing; say how sure the drag area is (0 for exact)"
    if len(setup.yaw) != len(setup.cxa):
        yield (
            f"{key}.cxa",
            f"has {len(setup.cxa)} values for {len(setup.yaw)} angles in yaw_deg; give one for each",
        )
    if any(b <= a for a, b in itertools.pairwise(setup.yaw)):
        yield f"{key}.yaw_deg", "the angles do not increase; put them in order from 0 up"
    if setup.power_cost is not None and setup.power_cost_share is not None:
        yield f"{key}.power_cost", "is given both in watts and as a share; keep one"
    if setup.power_cost_sd is not None and setup.power_cost is None and setup.power_cost_share is None:
        yield f"{key}.power_cost_sd", "is given without power_cost; give both or neither"
    if setup.held is not None and setup.held < 1 and not setup.fallback:
        yield (
            f"{key}.fallback",
            f"is missing; held is {setup.held:g}, so name the setup of the rest of the race",
        )


def _tyres(session: Session) -> Iterator[tuple[str, str]]:
    for i, tyres in enumerate(session.tyres):
        key = key_of("tyres", tyres.id, i)
        for name in ("crr", "temperature_coefficient"):
            if getattr(tyres, f"{name}_sd") is not None and getattr(tyres, name) is None:
                yield f"{key}.{name}_sd", f"is given without {name}; give both or neither"


# -- runs ------------------------------------------------------------------------------------------------


def _runs(session: Session) -> Iterator[tuple[str, str]]:
    rides = [ride.id for ride in session.rides]
    setups = [setup.id for setup in session.setups]
    for i, run in enumerate(session.runs):
        key = key_of("run", run.id, i)
        if run.ride not in rides:
            yield f"{key}.ride", f"there is no ride {run.ride!r}: {suggestion(run.ride, rides)}"
        if run.setup not in setups:
            yield f"{key}.setup", f"there is no setup {run.setup!r}: {suggestion(run.setup, setups)}"
        if run.end is not None and run.end <= run.start:
            yield f"{key}.end", _backwards(run.start, run.end)
        yield from _run_inside(key, run)
        together = run.air.over(session.air)
        yield from _air(f"{key}.air", run.air, together)
    yield from _overlaps(session)


def _run_inside(key: str, run: Run) -> Iterator[tuple[str, str]]:
    end = math.inf if run.end is None else run.end
    if any(b <= a for a, b in itertools.pairwise(run.laps)):
        yield f"{key}.laps", "the times do not increase; put them in order, each time once"
    for time in run.laps:
        if not run.start <= time <= end:
            yield f"{key}.laps", f"{time:g} s lies outside the run; keep lap times from its start to its end"
    for j, span in enumerate(run.exclusions):
        where = f"{key}.exclude[#{j + 1}]"
        if span.end <= span.start:
            yield f"{where}.end", _backwards(span.start, span.end)
        if span.end <= run.start or span.start >= end:
            yield (
                f"{where}.start",
                f"{span.start:g} to {span.end:g} s lies outside the run; remove it or move it",
            )
        if not span.reason:
            yield f"{where}.reason", "is missing; say why the span is left out"


def _overlaps(session: Session) -> Iterator[tuple[str, str]]:
    for ride in {run.ride: None for run in session.runs}:
        runs = sorted((run for run in session.runs if run.ride == ride), key=lambda run: run.start)
        for before, after in itertools.pairwise(runs):
            end = math.inf if before.end is None else before.end
            if after.start < end:
                until = "the end of the ride" if before.end is None else f"{before.end:g} s"
                yield (
                    f"run[{after.id}].start",
                    f"{after.start:g} s lies within run {before.id!r}, from {before.start:g} s to {until}; "
                    f"runs of one ride may touch but not overlap",
                )


# -- courses ---------------------------------------------------------------------------------------------


def _courses(session: Session) -> Iterator[tuple[str, str]]:
    for i, course in enumerate(session.courses):
        key = key_of("course", course.id, i)
        ways = {"file": bool(course.file), "segment": bool(course.segments)}
        ways["track_laps"] = course.track_laps is not None
        given = [name for name, is_given in ways.items() if is_given]
        if len(given) != 1:
            have = "has none" if not given else f"has {' and '.join(given)}"
            yield key, f"{have}: a course comes from one of file, [[course.segment]] and track_laps"
        if course.track_laps is not None and (session.venue is None or session.venue.lap_length is None):
            yield f"{key}.track_laps", "needs a [venue] with lap_length"
        yield from _air(f"{key}.air", course.air, course.air.over(session.air))
        plan = course.plan
        if plan.kind is PlanKind.FILE and not plan.file:
            yield f"{key}.plan.file", 'is missing; kind = "file" needs the file with the power plan'
        if plan.min_power is not None and plan.max_power is not None and plan.max_power < plan.min_power:
            yield (
                f"{key}.plan.max_power",
                f"{plan.max_power:g} W is below min_power, {plan.min_power:g} W; swap or mend them",
            )
