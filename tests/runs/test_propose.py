"""Proposals against the runs of invented days, and the invariants that hold for any ride."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from ridercda.rides.ride import LapMark, LapTrigger, Ride
from ridercda.runs.proposal import Proposal
from ridercda.runs.propose import SETTLE, propose_runs
from ridercda.runs.spells import riding_spells
from ridercda.runs.traced import trace_ride
from ridercda.session.document import Run, Venue, VenueKind
from ridercda.synthetic.day import SyntheticDay
from ridercda.synthetic.spec import REFERENCE_DAY, TRACK_DAY, DaySpec
from ridercda.synthetic.venue import OutAndBackVenue, RoadVenue

Day = Callable[[DaySpec, int], SyntheticDay]
OUT_AND_BACK = replace(REFERENCE_DAY, venue=OutAndBackVenue())


def _holds_the_runs(proposal: Proposal, day: SyntheticDay, within: float) -> None:
    truths = day.truth.runs
    assert len(proposal.runs) == len(truths)
    for run, truth in zip(proposal.runs, truths, strict=True):
        assert abs(run.start - truth.start) < within
        # The last run may end a moment after the last record.
        assert abs(run.end - min(truth.end, float(day.rides["day"].time[-1]))) < within
        assert run.lap_count == len(truth.lap_times) - 1


@pytest.mark.parametrize("spec", [REFERENCE_DAY, OUT_AND_BACK, TRACK_DAY], ids=["loop", "road", "track"])
@pytest.mark.parametrize("seed", [1, 2])
def test_presses_at_the_line(day: Day, spec: DaySpec, seed: int) -> None:
    made = day(spec, seed)
    proposal = propose_runs(made.rides["day"], made.session.venue)
    _holds_the_runs(proposal, made, 1.0)
    assert all(run.confidence >= 0.8 for run in proposal.runs)


@pytest.mark.parametrize("spec", [REFERENCE_DAY, OUT_AND_BACK], ids=["loop", "road"])
@pytest.mark.parametrize("known", [True, False])
def test_no_lap_button_at_all(day: Day, altered: Callable, spec: DaySpec, known: bool) -> None:
    made = day(spec, 3)
    venue = made.session.venue if known else replace(made.session.venue, lap_length=None)
    proposal = propose_runs(altered(made.rides["day"], laps=()), venue)
    # The gate may lie elsewhere on the stretch that every run covers whole.
    _holds_the_runs(proposal, made, 15.0)
    lap_times = [np.diff(run.laps) for run in proposal.runs]
    true_times = [np.diff(truth.lap_times) for truth in made.truth.runs]
    assert np.abs(np.array(lap_times) - np.array(true_times)).max() < 6.0


def test_a_loop_without_positions_or_button(day: Day, altered: Callable) -> None:
    made = day(REFERENCE_DAY, 4)
    ride = altered(made.rides["day"], laps=(), latitude=None, longitude=None)
    _holds_the_runs(propose_runs(ride, made.session.venue), made, 20.0)


def test_late_presses_are_moved_to_the_gate(day: Day, altered: Callable, lap_marks: Callable) -> None:
    made = day(REFERENCE_DAY, 1)
    presses = [time for truth in made.truth.runs for time in truth.lap_times]
    late = [time + (9.0 if k % 7 == 3 else 0.3) for k, time in enumerate(presses)]
    proposal = propose_runs(altered(made.rides["day"], laps=lap_marks(late)), made.session.venue)
    _holds_the_runs(proposal, made, 1.5)
    told = [note for note in proposal.notes if "late at" in note]
    assert len(told) == sum(k % 7 == 3 for k in range(len(presses)))
    assert "pressed 9 s late" in told[0]


def test_double_presses_are_one(day: Day, altered: Callable, lap_marks: Callable) -> None:
    made = day(REFERENCE_DAY, 1)
    presses = [time for truth in made.truth.runs for time in truth.lap_times]
    twice = sorted([*presses, presses[4] + 1.5, presses[9] + 2.0])
    proposal = propose_runs(altered(made.rides["day"], laps=lap_marks(twice)), made.session.venue)
    _holds_the_runs(proposal, made, 1.0)
    assert sum("pressed twice" in note for note in proposal.notes) == 2


def test_a_forgotten_press_is_bridged(day: Day, altered: Callable, lap_marks: Callable) -> None:
    made = day(TRACK_DAY, 1)
    presses = [time for truth in made.truth.runs for time in truth.lap_times]
    del presses[5]
    proposal = propose_runs(altered(made.rides["day"], laps=lap_marks(presses)), made.session.venue)
    _holds_the_runs(proposal, made, 1.5)
    assert any("press of the lap button is missing" in note for note in proposal.notes)


@pytest.mark.parametrize("trigger", [LapTrigger.DISTANCE, LapTrigger.UNKNOWN])
def test_laps_by_distance_say_nothing_of_setups(
    day: Day, altered: Callable, lap_marks: Callable, trigger: LapTrigger
) -> None:
    made = day(REFERENCE_DAY, 3)
    ride = made.rides["day"]
    travelled = ride.channels["distance"]
    every = [float(np.interp(d, travelled, ride.time)) for d in np.arange(1000.0, travelled[-1], 1000.0)]
    ride = altered(ride, laps=lap_marks(every, trigger))
    # Without a lap length every thousand metres is no lap of anything.
    proposal = propose_runs(ride, Venue(VenueKind.LOOP))
    _holds_the_runs(proposal, made, 15.0)
    assert any("head unit made them" in note for note in proposal.notes)


def test_setups_changed_on_the_move_are_told_by_presses_and_settle(
    day: Day, altered: Callable, lap_marks: Callable
) -> None:
    made = day(replace(REFERENCE_DAY, order="A", laps=9, targets=(220.0,)), 5)
    (truth,) = made.truth.runs
    presses = [truth.lap_times[k] for k in (0, 3, 6, 9)]
    proposal = propose_runs(altered(made.rides["day"], laps=lap_marks(presses)), made.session.venue)
    assert len(proposal.runs) == 3
    for k, run in enumerate(proposal.runs):
        begin = truth.lap_times[3 * k]
        assert abs(run.start - begin - (SETTLE if k else 0.0)) < 1.5
        assert abs(run.end - truth.lap_times[3 * k + 3]) < 1.5


def test_a_track_day_with_lap_times_alone(day: Day, altered: Callable, lap_marks: Callable) -> None:
    made = day(TRACK_DAY, 1)
    presses = [time for truth in made.truth.runs for time in truth.lap_times]
    ride = altered(made.rides["day"], laps=lap_marks(presses), speed=None, distance=None)
    proposal = propose_runs(ride, made.session.venue)
    _holds_the_runs(proposal, made, 0.1)
    assert all("by lap times alone" in run.reason for run in proposal.runs)


def test_a_track_day_whose_presses_are_too_far_apart_asks_for_lap_times(day: Day, altered: Callable) -> None:
    made = day(TRACK_DAY, 1)
    ride = altered(made.rides["day"], speed=None, distance=None)
    proposal = propose_runs(ride, made.session.venue)
    assert any("give each run its lap times" in note for note in proposal.notes)
    assert all(run.laps == () for run in proposal.runs)


def test_a_road_goes_by_presses_and_stops(day: Day) -> None:
    made = day(replace(REFERENCE_DAY, venue=RoadVenue(), order="ABC", laps=1), 1)
    proposal = propose_runs(made.rides["day"], made.session.venue)
    for truth in made.truth.runs:
        assert any(
            abs(run.start - truth.start) < SETTLE + 1 and abs(run.end - truth.end) < 1
            for run in proposal.runs
        )


def test_the_way_to_the_venue_is_no_run(day: Day, altered: Callable) -> None:
    made = day(REFERENCE_DAY, 1)
    ride = made.rides["day"]
    lead = 600  # ten minutes of straight road before the day
    time = np.concatenate((np.arange(lead, dtype=float), lead + ride.time))
    channels = {}
    for name in ("speed", "power", "distance", "latitude", "longitude"):
        values = ride.channels[name]
        before = np.full(lead, float(values[0]))
        if name == "speed":
            before[:] = 9.0
        elif name == "power":
            before[:] = 200.0
        elif name == "distance":
            before = 9.0 * np.arange(lead)
            values = values + 9.0 * lead
        elif name == "latitude":
            before += 9.0 * (lead - np.arange(lead)) / 6.37e6
        channels[name] = np.concatenate((before, values))
    proposal = propose_runs(Ride(time, channels), Venue(VenueKind.LOOP))
    assert len(proposal.runs) == 12
    assert proposal.runs[0].start > lead


def test_runs_that_stand_win(day: Day) -> None:
    made = day(REFERENCE_DAY, 1)
    taken = made.session.runs[2:5]
    proposal = propose_runs(made.rides["day"], made.session.venue, taken=taken)
    assert len(proposal.runs) == 9
    for run in proposal.runs:
        assert all(run.end <= old.start or run.start >= (old.end or np.inf) for old in taken)


def test_nothing_is_proposed_where_all_is_taken(day: Day) -> None:
    made = day(REFERENCE_DAY, 1)
    whole = Run("1", "day", "a", 0.0)
    proposal = propose_runs(made.rides["day"], made.session.venue, taken=(whole,))
    assert proposal.runs == ()
    assert "Nothing is left to propose" in proposal.notes[-1]


@pytest.mark.parametrize("settle", [-1.0, float("nan"), float("inf")])
def test_a_settle_time_makes_sense(settle: float) -> None:
    with pytest.raises(ValueError, match="settle is a time of 0 s or more"):
        propose_runs(Ride(np.arange(3.0), {}), None, settle)


@pytest.mark.parametrize(
    ("ride", "kind", "why"),
    [
        (Ride(np.array([0.0]), {}), VenueKind.LOOP, "no two records"),
        (Ride(np.arange(99.0), {"power": np.full(99, 200.0)}), VenueKind.LOOP, "neither position, distance"),
        (Ride(np.arange(99.0), {"speed": np.zeros(99)}), VenueKind.LOOP, "No whole lap"),
        (Ride(np.arange(99.0), {"speed": np.zeros(99)}), VenueKind.ROAD, "No spell of steady riding"),
    ],
)
def test_why_nothing_was_found_is_told(ride: Ride, kind: VenueKind, why: str) -> None:
    proposal = propose_runs(ride, Venue(kind))
    assert proposal.runs == ()
    assert why in proposal.notes[-1]


def _wandering(seed: int, stops: list[int], presses: list[float], fixes: bool, length: float) -> Ride:
    """A rider going round an ellipse, stopping where told and pressing whenever."""
    rng = np.random.default_rng(seed)
    time = np.cumsum(rng.choice([1.0, 1.0, 1.0, 2.0], 1500))
    time -= time[0]
    speed = 9.0 + 1.5 * np.sin(time / 40.0) + rng.normal(0, 0.1, time.size)
    for stop in stops:
        speed[stop : stop + 20] = 0.0
    way = np.cumsum(speed * np.diff(time, prepend=0.0))
    channels = {"speed": speed, "distance": way, "power": 180.0 + 20.0 * rng.normal(size=time.size)}
    if fixes:
        angle = 2 * np.pi * way / length
        scale = length / (2 * np.pi) / 6.37e6
        channels["latitude"] = 0.8 + scale * np.sin(angle)
        channels["longitude"] = 0.2 + scale * np.cos(angle) / np.cos(0.8)
    edges = [0.0, *sorted(p * float(time[-1]) for p in presses)]
    laps = tuple(LapMark(a, b, LapTrigger.MANUAL) for a, b in pairwise(edges) if b > a)
    return Ride(time, channels, laps=laps)


@settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.too_slow])
@given(
    seed=st.integers(0, 1000),
    stops=st.lists(st.integers(50, 1450), max_size=5),
    presses=st.lists(st.floats(0.02, 0.98), max_size=12),
    kind=st.sampled_from(list(VenueKind)),
    fixes=st.booleans(),
    known=st.booleans(),
    settle=st.sampled_from([0.0, 15.0, 40.0]),
    taken=st.lists(st.tuples(st.floats(0.0, 1500.0), st.floats(1.0, 400.0)), max_size=2),
)
def test_proposals_keep_apart_stay_inside_and_settle(
    seed: int,
    stops: list[int],
    presses: list[float],
    kind: VenueKind,
    fixes: bool,
    known: bool,
    settle: float,
    taken: list[tuple[float, float]],
) -> None:
    ride = _wandering(seed, stops, presses, fixes, 1500.0)
    venue = Venue(kind, lap_length=1500.0 if known or kind is VenueKind.TRACK else None)
    old = [Run(str(k), "r", "a", start, start + span) for k, (start, span) in enumerate(taken)]
    proposal = propose_runs(ride, venue, settle, old)
    trace = trace_ride(ride, None)
    begins = np.array([ride.time[spell.start] for spell in riding_spells(trace)])
    reached = 0.0
    for run in proposal.runs:
        assert reached <= run.start < run.end <= ride.time[-1]
        assert all(run.end <= one.start + 1e-6 or run.start >= one.end - 1e-6 for one in old)
        assert all(run.start - 1e-6 <= lap <= run.end + 1e-6 for lap in run.laps)
        assert list(run.laps) == sorted(set(run.laps))
        assert 0 <= run.confidence <= 1
        # No run begins sooner after setting off than the settle time, whatever was pressed.
        since = run.start - begins[begins <= run.start + 1e-6].max()
        cut_by_old = any(abs(run.start - one.end) < 1e-6 for one in old)
        assert since >= settle - 1e-6 or cut_by_old
        reached = run.end
