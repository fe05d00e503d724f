from __future__ import annotations

from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st

from ridercda.errors import SessionError
from ridercda.runs.cut import clear_of, fresh_ids, split_at, trimmed_to_laps
from ridercda.runs.proposal import ProposedRun
from ridercda.session.document import RideEntry, Run, Session, Setup, Venue, VenueKind


def _proposed(start: float, end: float, laps: tuple[float, ...] = ()) -> ProposedRun:
    return ProposedRun(start, end, laps, "", 0.5)


def test_what_a_standing_run_covers_is_taken_out() -> None:
    found = clear_of([_proposed(0, 1000, (0, 500, 1000))], [Run("1", "r", "a", 400.0, 600.0)], 2000.0, 60.0)
    assert [(run.start, run.end) for run in found] == [(0, 400), (600, 1000)]
    assert found[0].laps == ()


def test_rests_too_short_are_dropped() -> None:
    assert clear_of([_proposed(0, 100)], [Run("1", "r", "a", 50.0, 200.0)], 500.0, 60.0) == ()


def test_an_untouched_proposal_stays_however_short() -> None:
    short = _proposed(300, 330)
    assert clear_of([short], [Run("1", "r", "a", 0.0, 300.0)], 500.0, 60.0) == (short,)


def test_a_run_without_end_takes_the_rest_of_the_ride() -> None:
    found = clear_of([_proposed(0, 100), _proposed(200, 400)], [Run("1", "r", "a", 150.0)], 500.0, 30.0)
    assert [(run.start, run.end) for run in found] == [(0, 100)]


spans = st.lists(st.tuples(st.floats(0, 900), st.floats(1, 300)), max_size=6)


@given(proposed=spans, taken=spans)
def test_nothing_overlaps(proposed: list[tuple[float, float]], taken: list[tuple[float, float]]) -> None:
    old = [Run(str(k), "r", "a", s, s + d) for k, (s, d) in enumerate(taken)]
    found = clear_of([_proposed(s, s + d) for s, d in proposed], old, 1000.0, 20.0)
    assert all(before.end <= after.start for before, after in pairwise(found))
    for run in found:
        assert 0 <= run.start < run.end <= 1000.0
        assert all(run.end <= one.start or run.start >= (one.end or 0) for one in old)


SESSION = Session(
    "x",
    Venue(VenueKind.LOOP, lap_length=2400.0),
    rides=(RideEntry("r", "r.csv"),),
    setups=(Setup("a"),),
    runs=(Run("1", "r", "a", 100.0, 700.0, laps=(100.0, 300.0, 500.0, 700.0)),),
)


def test_a_run_split_at_its_gates() -> None:
    runs = split_at(SESSION, "1", (300.0, 500.0)).runs
    assert [(run.start, run.end, run.laps) for run in runs] == [
        (100.0, 300.0, (100.0, 300.0)),
        (300.0, 500.0, (300.0, 500.0)),
        (500.0, 700.0, (500.0, 700.0)),
    ]
    assert runs[0].id == "1"
    assert len({run.id for run in runs}) == 3


def test_a_moment_outside_the_run_cannot_split_it() -> None:
    with pytest.raises(SessionError, match="800 s is not within the run"):
        split_at(SESSION, "1", (800.0,))


def test_a_run_trimmed_to_whole_laps() -> None:
    trimmed = trimmed_to_laps(Run("1", "r", "a", 90.0, 650.0), (60.0, 300.0, 500.0, 700.0, 100.0))
    assert (trimmed.start, trimmed.end, trimmed.laps) == (100.0, 500.0, (100.0, 300.0, 500.0))


def test_a_run_without_a_whole_lap_cannot_be_trimmed() -> None:
    with pytest.raises(SessionError, match="holds no whole lap: 1 passes of the gate"):
        trimmed_to_laps(Run("1", "r", "a", 90.0, 250.0), (100.0, 300.0))


def test_ids_are_fresh() -> None:
    assert fresh_ids(["1", "3", "x"], 3) == ("2", "4", "5")
