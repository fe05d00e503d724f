"""Edits of a session: pure functions from Session to Session, shared by the command line and the app.

Every edit leaves a session that `validate` accepts, or raises SessionError and changes nothing. To change
fields of a part, replace the part: ``change_setup(session, "low", replace(low, name="Low"))``.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable, Collection, Iterable, Mapping
from dataclasses import replace
from types import MappingProxyType
from typing import TypeVar

from ridercda.errors import SessionError
from ridercda.session.document import (
    Air,
    Bike,
    CourseEntry,
    Exclusion,
    PowerMeter,
    RepairChoice,
    RideEntry,
    Rider,
    Run,
    Session,
    Setup,
    Tyres,
    Venue,
    Worthwhile,
)
from ridercda.session.validate import suggestion, validate

Part = TypeVar("Part", RideEntry, Setup, Tyres, CourseEntry)


def _valid(session: Session) -> Session:
    validate(session)
    return session


def fresh_id(taken: Collection[str], wish: str) -> str:
    """Return `wish`, or `wish-2`, `wish-3` ... where it is taken."""
    number, result = 1, wish
    while result in taken:
        number += 1
        result = f"{wish}-{number}"
    return result


def _require(table: str, item_id: str, items: Iterable[Part | Run]) -> None:
    ids = [item.id for item in items]
    if item_id not in ids:
        raise SessionError(f"there is no {table} {item_id!r}: {suggestion(item_id, ids)}", key=table)


def _swapped(items: tuple[Part, ...], item_id: str, new: Part) -> tuple[Part, ...]:
    return tuple(new if item.id == item_id else item for item in items)


def _without(items: tuple[Part, ...], item_id: str) -> tuple[Part, ...]:
    return tuple(item for item in items if item.id != item_id)


# -- the day ---------------------------------------------------------------------------------------------


def set_name(session: Session, name: str) -> Session:
    """Name the session."""
    return _valid(replace(session, name=name))


def set_date(session: Session, date: dt.date | None, utc_offset: float | None = None) -> Session:
    """Set the day and its offset from UTC [s]."""
    return _valid(replace(session, date=date, utc_offset=utc_offset))


def set_smallest_worthwhile(session: Session, worthwhile: Worthwhile) -> Session:
    """Set the smallest difference worth having."""
    return _valid(replace(session, smallest_worthwhile=worthwhile))


def set_reference_speed(session: Session, speed: float | None) -> Session:
    """Set the speed that CdA is reported at [m/s]."""
    return _valid(replace(session, reference_speed=speed))


def set_rider(session: Session, rider: Rider) -> Session:
    """Replace the rider."""
    return _valid(replace(session, rider=rider))


def set_rider_mass(session: Session, mass: float) -> Session:
    """Set the rider's mass all-up [kg]."""
    return set_rider(session, replace(session.rider, mass=mass))


def set_bike(session: Session, bike: Bike) -> Session:
    """Replace the bike."""
    return _valid(replace(session, bike=bike))


def set_power_meter(session: Session, power_meter: PowerMeter) -> Session:
    """Replace the power meter."""
    return _valid(replace(session, power_meter=power_meter))


def set_air(session: Session, air: Air) -> Session:
    """Replace the air of the day."""
    return _valid(replace(session, air=air))


def set_venue(session: Session, venue: Venue | None) -> Session:
    """Replace the venue."""
    return _valid(replace(session, venue=venue))


# -- rides -----------------------------------------------------------------------------------------------


def add_rides(session: Session, rides: Iterable[RideEntry]) -> Session:
    """Add rides after those there are."""
    return _valid(replace(session, rides=(*session.rides, *rides)))


def change_ride(session: Session, ride_id: str, ride: RideEntry) -> Session:
    """Replace a ride; its runs follow a new id."""
    _require("ride", ride_id, session.rides)
    runs = tuple(replace(run, ride=ride.id) if run.ride == ride_id else run for run in session.runs)
    return _valid(replace(session, rides=_swapped(session.rides, ride_id, ride), runs=runs))


def remove_ride(session: Session, ride_id: str) -> Session:
    """Remove a ride that has no runs."""
    _require("ride", ride_id, session.rides)
    runs = [run.id for run in session.runs if run.ride == ride_id]
    if runs:
        raise SessionError(f"has runs ({', '.join(runs)}); remove them first", key=f"ride[{ride_id}]")
    return _valid(replace(session, rides=_without(session.rides, ride_id)))


def remove_ride_with_runs(session: Session, ride_id: str) -> Session:
    """Remove a ride and its runs."""
    runs = tuple(run for run in session.runs if run.ride != ride_id)
    return remove_ride(replace(session, runs=runs), ride_id)


def set_ride_columns(session: Session, ride_id: str, columns: Mapping[str, str]) -> Session:
    """Say which column of a text ride holds which channel."""
    _require("ride", ride_id, session.rides)
    ride = replace(session.ride(ride_id), columns=MappingProxyType(dict(columns)))
    return change_ride(session, ride_id, ride)


def relocate_ride(session: Session, ride_id: str, file: str, sha256: str) -> Session:
    """Say where a ride's file is now, and what it holds."""
    _require("ride", ride_id, session.rides)
    return change_ride(session, ride_id, replace(session.ride(ride_id), file=file, sha256=sha256))


def choose_repair(session: Session, ride_id: str, choice: RepairChoice) -> Session:
    """Choose a repair for a kind of fault, on a span or the whole ride; an earlier choice for it goes."""
    cleared = clear_repair(session, ride_id, choice.kind, choice.start, choice.end)
    ride = cleared.ride(ride_id)
    return change_ride(cleared, ride_id, replace(ride, repairs=(*ride.repairs, choice)))


def clear_repair(
    session: Session, ride_id: str, kind: str, start: float | None = None, end: float | None = None
) -> Session:
    """Take back the choice for a kind of fault on a span or the whole ride."""
    _require("ride", ride_id, session.rides)
    ride = session.ride(ride_id)
    repairs = tuple(each for each in ride.repairs if (each.kind, each.start, each.end) != (kind, start, end))
    return change_ride(session, ride_id, replace(ride, repairs=repairs))


# -- setups and tyres ------------------------------------------------------------------------------------


def add_setup(session: Session, setup: Setup) -> Session:
    """Add a setup after those there are."""
    return _valid(replace(session, setups=(*session.setups, setup)))


def change_setup(session: Session, setup_id: str, setup: Setup) -> Session:
    """Replace a setup; what refers to it follows a new id."""
    _require("setup", setup_id, session.setups)

    def followed(reference: str) -> str:
        return setup.id if reference == setup_id else reference

    setups = tuple(
        replace(each, fallback=followed(each.fallback), difference_from=followed(each.difference_from))
        for each in _swapped(session.setups, setup_id, setup)
    )
    runs = tuple(replace(run, setup=followed(run.setup)) for run in session.runs)
    return _valid(replace(session, setups=setups, runs=runs))


def rename_setup(session: Session, setup_id: str, name: str) -> Session:
    """Give a setup another name."""
    _require("setup", setup_id, session.setups)
    return change_setup(session, setup_id, replace(session.setup(setup_id), name=name))


def set_baseline(session: Session, setup_id: str) -> Session:
    """Make a setup the one the others are compared with."""
    _require("setup", setup_id, session.setups)
    setups = tuple(replace(setup, baseline=setup.id == setup_id) for setup in session.setups)
    return _valid(replace(session, setups=setups))


def remove_setup(session: Session, setup_id: str) -> Session:
    """Remove a setup that nothing refers to."""
    _require("setup", setup_id, session.setups)
    users = [f"run {run.id}" for run in session.runs if run.setup == setup_id]
    users += [
        f"setup {setup.id}"
        for setup in session.setups
        if setup.id != setup_id and setup_id in (setup.fallback, setup.difference_from)
    ]
    if users:
        raise SessionError(
            f"is still used by {', '.join(users)}; assign them to another setup first",
            key=f"setup[{setup_id}]",
        )
    return _valid(replace(session, setups=_without(session.setups, setup_id)))


def set_tyres(session: Session, tyres: Tyres) -> Session:
    """Set what is known of a tyre set, new or not."""
    known = tyres.id in [each.id for each in session.tyres]
    all_tyres = _swapped(session.tyres, tyres.id, tyres) if known else (*session.tyres, tyres)
    return _valid(replace(session, tyres=all_tyres))


def remove_tyres(session: Session, tyres_id: str) -> Session:
    """Forget what is known of a tyre set; setups may go on naming it."""
    _require("tyres", tyres_id, session.tyres)
    return _valid(replace(session, tyres=_without(session.tyres, tyres_id)))


# -- runs ------------------------------------------------------------------------------------------------


def add_runs(session: Session, runs: Iterable[Run]) -> Session:
    """Add runs, each before the first later one of its ride."""
    result = list(session.runs)
    for run in runs:
        later = (i for i, other in enumerate(result) if other.ride == run.ride and other.start >= run.start)
        same_ride = [i for i, other in enumerate(result) if other.ride == run.ride]
        result.insert(next(later, same_ride[-1] + 1 if same_ride else len(result)), run)
    return _valid(replace(session, runs=tuple(result)))


def change_run(session: Session, run_id: str, run: Run) -> Session:
    """Replace a run."""
    _require("run", run_id, session.runs)
    return _valid(replace(session, runs=tuple(run if each.id == run_id else each for each in session.runs)))


def remove_runs(session: Session, run_ids: Collection[str]) -> Session:
    """Remove runs."""
    for run_id in run_ids:
        _require("run", run_id, session.runs)
    return _valid(replace(session, runs=tuple(run for run in session.runs if run.id not in run_ids)))


def trim_run(session: Session, run_id: str, start: float, end: float | None) -> Session:
    """Move the edges of a run; laps and exclusions beyond them go."""
    _require("run", run_id, session.runs)
    return change_run(session, run_id, _cut(session.run(run_id), start, end))


def _cut(run: Run, start: float, end: float | None) -> Run:
    """Return a run cut to new edges, with the laps and exclusions that remain inside."""
    last = float("inf") if end is None else end
    exclusions = (
        replace(span, start=max(span.start, start), end=min(span.end, last)) for span in run.exclusions
    )
    return replace(
        run,
        start=start,
        end=end,
        laps=tuple(time for time in run.laps if start <= time <= last),
        exclusions=tuple(span for span in exclusions if span.start < span.end),
    )


def split_run(session: Session, run_id: str, time: float, new_id: str = "") -> Session:
    """Split a run in two at a time on its ride's clock; the second half has the new id."""
    _require("run", run_id, session.runs)
    run = session.run(run_id)
    end = float("inf") if run.end is None else run.end
    if not run.start < time < end:
        raise SessionError(
            f"{time:g} s is not within the run; split it between its edges", key=f"run[{run_id}]"
        )
    first = _cut(run, run.start, time)
    second = replace(_cut(run, time, run.end), id=new_id or fresh_id([r.id for r in session.runs], run_id))
    at = session.runs.index(run)
    return _valid(replace(session, runs=(*session.runs[:at], first, second, *session.runs[at + 1 :])))


def merge_runs(session: Session, run_ids: Collection[str]) -> Session:
    """Make one run of several of one ride and setup, with what lies between; the earliest keeps its id."""
    for run_id in run_ids:
        _require("run", run_id, session.runs)
    parts = sorted((run for run in session.runs if run.id in run_ids), key=lambda run: run.start)
    if len(parts) < 2:
        raise SessionError("name two runs or more to merge", key="run")
    first, last = parts[0], parts[-1]
    for part in parts[1:]:
        for name in ("ride", "setup", "kind", "excluded", "air"):
            if getattr(part, name) != getattr(first, name):
                raise SessionError(
                    f"cannot be merged with run {first.id!r}: they differ in {name}", key=f"run[{part.id}]"
                )
    merged = replace(
        first,
        end=last.end,
        laps=tuple(sorted({time for part in parts for time in part.laps})),
        exclusions=tuple(span for part in parts for span in part.exclusions),
        note="; ".join(part.note for part in parts if part.note),
    )
    rest = replace(session, runs=tuple(run for run in session.runs if run not in parts[1:]))
    return change_run(rest, first.id, merged)


def assign_runs(session: Session, run_ids: Collection[str], setup_id: str) -> Session:
    """Say in which setup runs were ridden."""
    _require("setup", setup_id, session.setups)
    return _change_each(session, run_ids, lambda run: replace(run, setup=setup_id))


def exclude_runs(session: Session, run_ids: Collection[str], reason: str) -> Session:
    """Leave runs out for a stated reason."""
    if not reason.strip():
        raise SessionError("say why the run is left out", key="run.excluded")
    return _change_each(session, run_ids, lambda run: replace(run, excluded=reason.strip()))


def include_runs(session: Session, run_ids: Collection[str]) -> Session:
    """Count runs again that were left out."""
    return _change_each(session, run_ids, lambda run: replace(run, excluded=""))


def add_exclusion(session: Session, run_id: str, span: Exclusion) -> Session:
    """Leave a span of a run out, with the reason."""
    _require("run", run_id, session.runs)
    run = session.run(run_id)
    spans = sorted((*run.exclusions, span), key=lambda each: each.start)
    return change_run(session, run_id, replace(run, exclusions=tuple(spans)))


def remove_exclusion(session: Session, run_id: str, span: Exclusion) -> Session:
    """Count a span of a run again."""
    _require("run", run_id, session.runs)
    run = session.run(run_id)
    return change_run(
        session, run_id, replace(run, exclusions=tuple(each for each in run.exclusions if each != span))
    )


def _change_each(session: Session, run_ids: Collection[str], change: Callable[[Run], Run]) -> Session:
    for run_id in run_ids:
        _require("run", run_id, session.runs)
    runs = tuple(change(run) if run.id in run_ids else run for run in session.runs)
    return _valid(replace(session, runs=runs))


# -- courses ---------------------------------------------------------------------------------------------


def add_course(session: Session, course: CourseEntry) -> Session:
    """Add a course after those there are."""
    return _valid(replace(session, courses=(*session.courses, course)))


def change_course(session: Session, course_id: str, course: CourseEntry) -> Session:
    """Replace a course."""
    _require("course", course_id, session.courses)
    return _valid(replace(session, courses=_swapped(session.courses, course_id, course)))


def remove_course(session: Session, course_id: str) -> Session:
    """Remove a course."""
    _require("course", course_id, session.courses)
    return _valid(replace(session, courses=_without(session.courses, course_id)))
