"""Setups assigned to proposed runs, from one typed order or a run list."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence

from ridercda.errors import SessionError
from ridercda.runs.cut import fresh_ids
from ridercda.runs.proposal import ProposedRun
from ridercda.session.document import Run, Setup

_BETWEEN = re.compile(r"[\s,;]+")
SKIPPED = frozenset({"-", "."})  # stands for a proposed run that is not taken


def parse_order(text: str, setups: Sequence[Setup]) -> tuple[Setup | None, ...]:
    """Return the setups that a typed order names.

    Parameters
    ----------
    text : str
        Letters or ids between blanks, commas or semicolons (``A B C``, ``base, low``), or letters run together
        (``ABCCBA``). Case does not matter where it does not have to. ``-`` leaves a run out.
    setups : sequence of Setup

    Returns
    -------
    tuple of Setup or None
        None where a run is left out.

    Raises
    ------
    SessionError
        If the order is empty or names a setup that is not there.
    """
    names = _names(setups)
    words = [word for word in _BETWEEN.split(text.strip()) if word]
    if not words:
        raise SessionError("the order is empty; type one letter for each run, e.g. A B C C B A", key="order")
    found: list[Setup | None] = []
    for word in words:
        whole = _lookup(word, names)
        if whole is not None or word in SKIPPED:
            found.append(whole)
            continue
        letters = [_lookup(letter, names) for letter in word]
        unknown = [
            letter
            for letter, setup in zip(word, letters, strict=True)
            if setup is None and letter not in SKIPPED
        ]
        if unknown:
            named = word if len(unknown) == len(word) else unknown[0]
            raise SessionError(f"no setup is called {named!r}; the setups are {_listed(setups)}", key="order")
        found += letters
    return tuple(found)


def assign_order(
    text: str,
    proposed: Sequence[ProposedRun],
    ride: str,
    setups: Sequence[Setup],
    taken: Sequence[Run] = (),
) -> tuple[Run, ...]:
    """Return the document's runs for proposed runs and one typed order.

    Parameters
    ----------
    text : str
        See `parse_order`.
    proposed : sequence of ProposedRun
        In order.
    ride : str
        Id of the ride.
    setups : sequence of Setup
    taken : sequence of Run
        All runs of the session; their ids are not given again.

    Returns
    -------
    tuple of Run
        One for each proposed run that is not left out, with a fresh id.

    Raises
    ------
    SessionError
        If the order names another number of runs than were proposed, or a setup that is not there.
    """
    order = parse_order(text, setups)
    if len(order) != len(proposed):
        raise SessionError(
            f"{_count(len(proposed), 'run was', 'runs were')} found, but the order names {len(order)}; "
            "type one letter for each run, - for a run to leave out",
            key="order",
        )
    pairs = [(run, setup) for run, setup in zip(proposed, order, strict=True) if setup is not None]
    ids = fresh_ids([run.id for run in taken], len(pairs))
    return tuple(
        Run(new_id, ride, setup.id, run.start, run.end, laps=run.laps)
        for new_id, (run, setup) in zip(ids, pairs, strict=True)
    )


def as_runs(
    proposed: Sequence[ProposedRun], ride: str, setup: str = "", taken: Sequence[Run] = ()
) -> tuple[Run, ...]:
    """Return the document's runs for proposed runs that are all in one setup, or in none yet."""
    ids = fresh_ids([run.id for run in taken], len(proposed))
    return tuple(
        Run(new_id, ride, setup, run.start, run.end, laps=run.laps)
        for new_id, run in zip(ids, proposed, strict=True)
    )


def assign_laps(
    setup_of_lap: Mapping[int, str],
    laps: Sequence[float],
    ride: str,
    setups: Sequence[Setup],
    taken: Sequence[Run] = (),
    settle: float = 0.0,
) -> tuple[Run, ...]:
    """Return the document's runs for a run list: which lap was ridden in which setup.

    Parameters
    ----------
    setup_of_lap : mapping of int to str
        Lap, counted from 1, to a setup's letter or id; laps that are missing are not counted.
    laps : sequence of float
        When laps begin and end, one more than there are laps, increasing. [s]
    ride : str
    setups : sequence of Setup
    taken : sequence of Run
        All runs of the session.
    settle : float
        Left out where a setup follows another on the move. [s]

    Returns
    -------
    tuple of Run
        Neighbouring laps in one setup make one run.

    Raises
    ------
    SessionError
        If a lap is not there or a setup is not.
    """
    names = _names(setups)
    count = len(laps) - 1
    chosen: list[tuple[int, Setup]] = []
    for lap in sorted(setup_of_lap):
        if not 1 <= lap <= count:
            raise SessionError(
                f"there is no lap {lap}: {_count(max(count, 0), 'lap was', 'laps were')} found", key="laps"
            )
        setup = _lookup(setup_of_lap[lap], names)
        if setup is None:
            raise SessionError(
                f"lap {lap}: no setup is called {setup_of_lap[lap]!r}; the setups are {_listed(setups)}",
                key="laps",
            )
        chosen.append((lap, setup))
    groups: list[list[tuple[int, Setup]]] = []
    for lap, setup in chosen:
        if groups and groups[-1][-1][0] == lap - 1 and groups[-1][-1][1].id == setup.id:
            groups[-1].append((lap, setup))
        else:
            groups.append([(lap, setup)])
    ids = fresh_ids([run.id for run in taken], len(groups))
    runs: list[Run] = []
    for new_id, group in zip(ids, groups, strict=True):
        first, last = group[0][0], group[-1][0]
        follows = bool(runs) and runs[-1].end == laps[first - 1]
        start = laps[first - 1] + (min(settle, 0.5 * (laps[first] - laps[first - 1])) if follows else 0.0)
        times = tuple(t for t in laps[first - 1 : last + 1] if t >= start)
        runs.append(
            Run(new_id, ride, group[0][1].id, start, laps[last], laps=times if len(times) > 1 else ())
        )
    return tuple(runs)


def _names(setups: Sequence[Setup]) -> dict[str, Setup]:
    """Return what a setup may be called: its letter, else its id, in any case where that is clear."""
    ids = {setup.id: setup for setup in setups}
    letters = {setup.letter: setup for setup in setups if setup.letter}
    return {**_folded(ids), **_folded(letters), **ids, **letters}


def _folded(exact: Mapping[str, Setup]) -> dict[str, Setup]:
    """Return names without case, leaving out those that are then ambiguous."""
    folded: dict[str, list[Setup]] = {}
    for name, setup in exact.items():
        folded.setdefault(name.casefold(), []).append(setup)
    return {name: same[0] for name, same in folded.items() if len(same) == 1}


def _lookup(word: str, names: Mapping[str, Setup]) -> Setup | None:
    return names.get(word) or names.get(word.casefold())


def _listed(setups: Sequence[Setup]) -> str:
    if not setups:
        return "none yet: make one first"
    return ", ".join(f"{setup.letter} ({setup.id})" if setup.letter else setup.id for setup in setups)


def _count(number: int, one: str, many: str) -> str:
    return f"{number} {one if number == 1 else many}"
