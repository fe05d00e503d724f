"""Positions against the truth of invented days, and the traps that real days hold."""

from __future__ import annotations

import time as clock
from collections.abc import Callable
from dataclasses import replace
from itertools import pairwise

import numpy as np
import numpy.typing as npt
import pytest
from numpy.testing import assert_allclose

from ridercda.errors import Cancelled
from ridercda.rides.ride import Ride
from ridercda.runs.position import VenuePath, locate
from ridercda.session.document import Exclusion, Run, Session, Setup, Venue, VenueKind
from ridercda.synthetic.day import SyntheticDay
from ridercda.synthetic.spec import REFERENCE_DAY, TRACK_DAY, DaySpec, gps_speed, noise_free
from ridercda.synthetic.venue import OutAndBackVenue, RoadVenue

FloatArray = npt.NDArray[np.float64]
Day = Callable[[DaySpec, int], SyntheticDay]

OUT_AND_BACK = replace(REFERENCE_DAY, venue=OutAndBackVenue())
ROAD = replace(REFERENCE_DAY, venue=RoadVenue(), order="ABCABC")
NO_FIXES = replace(REFERENCE_DAY, sensors=replace(REFERENCE_DAY.sensors, position=None))


def _factor(day: SyntheticDay, path: VenuePath) -> tuple[float, float]:
    """Return the relative error of the circumference found, and its standard error."""
    (scale,) = path.circumference.values()
    return scale.factor * day.truth.circumference_factor - 1, scale.standard_error


def _heading_error(day: SyntheticDay, path: VenuePath, places: FloatArray) -> FloatArray:
    errors = []
    for run in path.runs.values():
        north, east = day.truth.heading(places[run.points])
        errors.append(np.angle(np.exp(1j * (np.arctan2(east, north) - run.heading)))[run.valid])
    return np.abs(np.concatenate(errors))


# Loop with positions


@pytest.mark.parametrize("seed", [1, 2, 3])
def test_a_loop_by_position(day: Day, misses: Callable, place_at: Callable, seed: int) -> None:
    made = day(REFERENCE_DAY, seed)
    path = locate(made.session, made.rides)
    miss = misses(made, path)
    assert miss.within < 0.8
    assert miss.between < 1.5  # fixes wander by 3 m; a run is a few of their half minutes
    assert np.percentile(_heading_error(made, path, place_at(made, made.rides["day"].time)), 95) < 0.05
    error, standard_error = _factor(made, path)
    assert abs(error) < 3 * standard_error < 0.004
    assert all(run.valid.all() for run in path.runs.values())
    assert all(run.laps == 2 for run in path.runs.values())
    assert not path.notes


def test_exact_instruments_give_exact_positions(day: Day, misses: Callable) -> None:
    made = day(noise_free(REFERENCE_DAY), 1)
    path = locate(made.session, made.rides)
    assert misses(made, path).rms < 0.05
    assert abs(_factor(made, path)[0]) < 1e-4
    assert_allclose(path.length, made.truth.lap_length, rtol=1e-4)


def test_laps_found_agree_with_the_true_crossings(day: Day) -> None:
    made = day(REFERENCE_DAY, 1)
    bare = replace(made.session, runs=tuple(replace(run, laps=()) for run in made.session.runs))
    path = locate(bare, made.rides)
    for truth in made.truth.runs:
        run = path.runs[truth.id]
        assert_allclose(run.gates, truth.lap_times, atol=1.2)
        time = made.rides["day"].time[run.points]
        assert (run.lap[(time > truth.lap_times[1] + 2)] >= 1).sum() > 100
        assert set(run.lap.tolist()) <= {-1, 0, 1}


def test_a_lap_length_that_is_not_given_is_found(day: Day, misses: Callable) -> None:
    made = day(REFERENCE_DAY, 2)
    session = replace(made.session, venue=Venue(VenueKind.LOOP))
    path = locate(session, made.rides)
    assert abs(path.length / made.truth.lap_length - 1) < 4e-3
    assert misses(made, path).within < 3.0
    error, standard_error = _factor(made, path)
    assert abs(error) < 3 * standard_error


@pytest.mark.parametrize("wrong", [0.99, 1.01])
def test_a_wheel_set_wrong_by_a_hundredth(
    day: Day, misses: Callable, altered: Callable, wrong: float
) -> None:
    made = day(REFERENCE_DAY, 1)
    ride = made.rides["day"]
    channels = {name: ride.channels[name] / wrong for name in ("distance", "speed") if name in ride.channels}
    path = locate(made.session, {"day": altered(ride, **channels)})
    scale = path.circumference_factor("day", "race")
    assert abs(scale.factor * made.truth.circumference_factor / wrong - 1) < 3 * scale.standard_error
    assert misses(made, path).within < 0.8


def test_tyre_sets_have_circumferences_of_their_own(day: Day, altered: Callable) -> None:
    made = day(REFERENCE_DAY, 1)
    ride = made.rides["day"]
    setups = (*made.session.setups[:2], replace(made.session.setups[2], tyres="wide"))
    session = replace(made.session, setups=setups)
    steps = np.diff(ride.channels["distance"], prepend=0.0)
    for run in session.runs:
        if run.setup == setups[2].id:
            inside = (ride.time > run.start - 30) & (ride.time <= (run.end or np.inf) + 30)
            steps[inside] /= 1.008
    path = locate(session, {"day": altered(ride, distance=np.cumsum(steps), speed=None)})
    race, wide = path.circumference_factor("day", "race"), path.circumference_factor("day", "wide")
    assert_allclose(wide.factor / race.factor, 1.008, atol=1e-3)


def test_dropouts_and_spikes_are_ridden_through(day: Day, misses: Callable, altered: Callable) -> None:
    made = day(REFERENCE_DAY, 1)
    ride = made.rides["day"]
    rng = np.random.default_rng(7)
    latitude, longitude = np.array(ride.channels["latitude"]), np.array(ride.channels["longitude"])
    for start in rng.integers(300, ride.time.size - 300, 12):  # a minute each
        latitude[start : start + 60] = longitude[start : start + 60] = np.nan
    wild = rng.integers(0, ride.time.size, 60)
    latitude[wild] += rng.choice([-1, 1], 60) * 1e-5  # 64 m
    burst = slice(3000, 3006)
    longitude[burst] += 3e-5
    path = locate(made.session, {"day": altered(ride, latitude=latitude, longitude=longitude)})
    miss = misses(made, path)
    assert miss.within < 1.0
    assert max(np.abs(run - run.mean()).max() for run in miss.runs) < 5.0
    assert np.mean([run.valid.mean() for run in path.runs.values()]) > 0.995


def test_a_detour_is_left_out(day: Day, altered: Callable) -> None:
    made = day(REFERENCE_DAY, 1)
    ride = made.rides["day"]
    run = made.session.runs[3]
    away = (ride.time > run.start + 60) & (ride.time < run.start + 90)
    moved = {}
    for name in ("latitude", "longitude"):  # a fifth farther out from the middle of the loop: some 70 m
        values = ride.channels[name]
        middle = 0.5 * (values.min() + values.max())
        moved[name] = np.where(away, values + 0.2 * (values - middle), values)
    path = locate(made.session, {"day": altered(ride, **moved)})
    found = path.runs[run.id]
    time = ride.time[found.points]
    inner = (time > run.start + 62) & (time < run.start + 88)
    assert found.valid[inner].sum() == 0
    assert found.valid[time > run.start + 95].all()


def test_a_ride_without_distance(day: Day, misses: Callable, altered: Callable) -> None:
    made = day(REFERENCE_DAY, 3)
    path = locate(made.session, {"day": altered(made.rides["day"], distance=None)})
    assert misses(made, path).within < 0.8


def test_position_alone(day: Day, misses: Callable, altered: Callable) -> None:
    made = day(REFERENCE_DAY, 3)
    path = locate(made.session, {"day": altered(made.rides["day"], distance=None, speed=None)})
    assert misses(made, path).within < 4.0


def test_speed_from_gps(day: Day, misses: Callable) -> None:
    made = day(replace(REFERENCE_DAY, sensors=gps_speed(REFERENCE_DAY.sensors)), 1)
    assert misses(made, locate(made.session, made.rides)).within < 2.5


def test_uneven_recording(day: Day, misses: Callable) -> None:
    made = day(REFERENCE_DAY, 1)
    ride = made.rides["day"]
    kept = np.cumsum(np.random.default_rng(2).integers(1, 6, ride.time.size))
    keep = np.isin(np.arange(ride.time.size), kept)
    sparse = Ride(ride.time[keep], {name: values[keep] for name, values in ride.channels.items()})
    path = locate(made.session, {"day": sparse})
    assert misses(made, path, {"day": sparse}).within < 1.5


def test_runs_may_come_from_several_rides(day: Day, misses: Callable) -> None:
    made = day(REFERENCE_DAY, 1)
    ride = made.rides["day"]
    edge = 0.5 * (made.session.runs[5].end + made.session.runs[6].start)
    late = ride.time >= edge
    rides = {
        name: Ride(
            ride.time[half] - ride.time[half][0], {key: v[half].copy() for key, v in ride.channels.items()}
        )
        for name, half in (("am", ~late), ("pm", late))
    }
    shift = float(ride.time[late][0])
    runs = tuple(
        replace(run, ride="am", laps=())
        if run.start < edge
        else replace(run, ride="pm", start=run.start - shift, end=run.end - shift, laps=())
        for run in made.session.runs
    )
    path = locate(replace(made.session, runs=runs), rides)
    assert len(path.runs) == len(runs)
    assert set(path.circumference) == {("am", "race"), ("pm", "race")}
    whole = locate(made.session, made.rides)
    for run in runs:
        apart = path.runs[run.id].position - whole.runs[run.id].position
        apart = (apart + path.length / 2) % path.length - path.length / 2
        assert np.abs(apart).max() < 3.0


def test_a_loop_ridden_the_other_way_round(day: Day, altered: Callable) -> None:
    """The fixes of one run are played backwards along the same distances."""
    made = day(noise_free(REFERENCE_DAY), 1)
    ride = made.rides["day"]
    run = made.session.runs[4]
    path = locate(made.session, made.rides)
    inside = np.arange(ride.time.size)[path.runs[run.id].points]
    way = ride.channels["distance"][inside]
    mirrored = way[0] + way[-1] - way
    channels = {}
    for name in ("latitude", "longitude"):
        values = np.array(ride.channels[name])
        values[inside] = np.interp(mirrored, way, ride.channels[name][inside])
        channels[name] = values
    back = locate(made.session, {"day": altered(ride, **channels)}).runs[run.id]
    assert (back.direction == -1).all()
    assert back.laps == 2
    forth = path.runs[run.id]
    expected = np.interp(mirrored, way, forth.unwrapped)
    apart = (back.position - expected + path.length / 2) % path.length - path.length / 2
    assert np.abs(apart).max() < 0.5
    middle = slice(5, -5)
    turned = np.angle(
        np.exp(1j * (np.interp(mirrored, way, np.unwrap(forth.heading)) + np.pi - back.heading))
    )
    assert np.abs(turned[middle]).max() < 0.02
    assert_allclose(back.curvature[middle], -np.interp(mirrored, way, forth.curvature)[middle], atol=2e-3)


def test_laps_may_begin_anywhere(day: Day, misses: Callable) -> None:
    made = day(REFERENCE_DAY, 2)
    runs = tuple(replace(run, start=run.start + 17.0 * k, laps=()) for k, run in enumerate(made.session.runs))
    path = locate(replace(made.session, runs=runs), made.rides)
    miss = misses(made, path)
    assert miss.within < 0.8
    assert miss.between < 1.5


def test_single_laps_still_make_a_loop(day: Day, misses: Callable) -> None:
    made = day(REFERENCE_DAY, 2)
    runs = tuple(
        replace(run, end=truth.lap_times[1], laps=())
        for run, truth in zip(made.session.runs, made.truth.runs, strict=True)
    )
    session = replace(made.session, runs=runs, venue=Venue(VenueKind.LOOP))
    path = locate(session, made.rides)
    assert abs(path.length / made.truth.lap_length - 1) < 6e-3
    assert misses(made, path).rms < 4.0


def test_a_given_length_that_the_fixes_contradict_is_told(day: Day) -> None:
    made = day(REFERENCE_DAY, 1)
    session = replace(made.session, venue=Venue(VenueKind.LOOP, lap_length=2460.0))
    path = locate(session, made.rides)
    assert any("differ by 2.5%" in note or "differ by 2.4%" in note for note in path.notes)
    assert path.circumference_factor("day", "race").standard_error > 0.01


# Out and back, road


@pytest.mark.parametrize("seed", [1, 2])
def test_an_out_and_back_road_by_position(day: Day, misses: Callable, place_at: Callable, seed: int) -> None:
    made = day(OUT_AND_BACK, seed)
    path = locate(made.session, made.rides)
    miss = misses(made, path)
    assert miss.within < 1.5
    assert miss.between < 1.5
    error, standard_error = _factor(made, path)
    assert abs(error) < 3 * standard_error < 0.004
    assert_allclose(path.lap_length, made.truth.lap_length, rtol=2e-3)
    assert np.percentile(_heading_error(made, path, place_at(made, made.rides["day"].time)), 95) < 0.05
    for run in path.runs.values():
        assert run.laps == 2
        assert (np.abs(np.diff(run.direction)) == 2).sum() == 4
        assert 0.85 < run.valid.mean() < 0.99
        assert run.position.min() >= 0
        assert run.position.max() <= path.length


def test_both_ways_lie_on_one_line(day: Day) -> None:
    """With exact instruments out and back agree, whatever the lanes do."""
    made = day(noise_free(OUT_AND_BACK), 2)
    path = locate(made.session, made.rides)
    ride = made.rides["day"]
    run = path.runs["2"]
    altitude = np.interp(
        ride.time[run.points], made.truth.records.time, made.truth.height(made.truth.records.place)
    )
    keep = run.valid
    bins = (run.position[keep] // 25).astype(int)
    out = run.direction[keep] > 0
    height = altitude[keep]
    for b in np.unique(bins):
        here = bins == b
        if (here & out).sum() > 2 and (here & ~out).sum() > 2:
            assert abs(height[here & out].mean() - height[here & ~out].mean()) < 0.25


def test_an_out_and_back_road_without_fixes(day: Day, misses: Callable, altered: Callable) -> None:
    made = day(replace(OUT_AND_BACK, sensors=NO_FIXES.sensors), 1)
    path = locate(made.session, made.rides)
    assert misses(made, path).within < 12.0
    assert not path.has_heading
    assert np.isnan(path.runs["1"].heading).all()
    assert any("U-turns were found by speed" in note for note in path.notes)


def test_a_road_on_which_every_run_is_further_on(day: Day, misses: Callable) -> None:
    made = day(ROAD, 1)
    path = locate(made.session, made.rides)
    miss = misses(made, path)
    assert len(miss.runs) == 6
    assert miss.within < 4.0
    spans = sorted((run.position.min(), run.position.max()) for run in path.runs.values())
    assert all(before[1] < after[0] for before, after in pairwise(spans))
    assert not path.closed
    assert all(run.laps in (0, 2) for run in path.runs.values())


# Without positions


@pytest.mark.parametrize("seed", [1, 4])
def test_a_loop_without_fixes(day: Day, misses: Callable, seed: int) -> None:
    made = day(NO_FIXES, seed)
    bare = replace(made.session, runs=tuple(replace(run, laps=()) for run in made.session.runs))
    path = locate(bare, made.rides)
    miss = misses(made, path)
    assert miss.within < 3.0
    assert miss.between < 6.0
    error, standard_error = _factor(made, path)
    assert abs(error) < 3 * standard_error
    assert not path.has_heading
    assert np.isnan(path.runs["1"].heading).all()


def test_some_runs_with_fixes_guide_those_without(day: Day, misses: Callable, altered: Callable) -> None:
    made = day(REFERENCE_DAY, 1)
    ride = made.rides["day"]
    latitude = np.array(ride.channels["latitude"])
    longitude = np.array(ride.channels["longitude"])
    cut = made.session.runs[6].start - 20
    latitude[ride.time > cut] = longitude[ride.time > cut] = np.nan
    bare = replace(made.session, runs=tuple(replace(run, laps=()) for run in made.session.runs))
    path = locate(bare, {"day": altered(ride, latitude=latitude, longitude=longitude)})
    miss = misses(made, path)
    assert len(miss.runs) == 12
    assert miss.between < 8.0
    assert np.isfinite(path.runs["9"].heading).all()  # the line is known from the others


def test_a_track(day: Day, misses: Callable) -> None:
    made = day(TRACK_DAY, 1)
    path = locate(made.session, made.rides)
    assert misses(made, path).within < 1.0
    error, standard_error = _factor(made, path)
    assert abs(error) < 3 * standard_error
    run = path.runs["1"]
    straight = made.truth.curvature(0.0)
    assert abs(straight) < 1e-9
    # 0 is the middle of a straight: no curvature there, the bend's radius a quarter lap on; ridden to the left.
    near = np.abs((run.position + 125) % 250 - 125) < 8
    assert_allclose(run.curvature[near], 0.0, atol=1e-9)
    quarter = np.abs(run.position - 62.5) < 8
    assert_allclose(run.curvature[quarter], -1 / 23.0, rtol=1e-9)
    assert not path.has_heading


def test_a_track_with_lap_times_alone(day: Day, altered: Callable, place_at: Callable) -> None:
    made = day(TRACK_DAY, 2)
    ride = altered(made.rides["day"], distance=None, speed=None)
    path = locate(made.session, {"day": ride})
    place = place_at(made, ride.time)
    for run in path.runs.values():
        apart = (run.position - place[run.points] + 125) % 250 - 125
        assert np.abs(apart).max() < 12.0  # speed within a lap is not known
        assert run.laps == 12


def test_a_ride_that_tells_nothing_is_named() -> None:
    ride = Ride(np.arange(0.0, 600.0), {"power": np.full(600, 200.0)})
    session = Session(
        "x", Venue(VenueKind.TRACK, lap_length=250.0), setups=(Setup("a"),), runs=(Run("9", "am", "a", 0.0),)
    )
    path = locate(session, {"am": ride})
    assert "9" not in path.runs
    assert any("Run 9: neither distance" in note for note in path.notes)


def test_no_lap_length_and_nothing_that_repeats_is_told() -> None:
    time = np.arange(0.0, 900.0)
    ride = Ride(time, {"speed": np.full(900, 10.0), "power": np.full(900, 200.0)})
    session = Session("x", Venue(VenueKind.LOOP), setups=(Setup("a"),), runs=(Run("1", "am", "a", 0.0),))
    path = locate(session, {"am": ride})
    assert not path.runs
    assert any("give venue.lap_length" in note for note in path.notes)


# The rest of the contract


def test_exclusions_of_a_run_do_not_count(day: Day) -> None:
    made = day(REFERENCE_DAY, 1)
    first = made.session.runs[0]
    span = Exclusion(first.start + 100.0, first.start + 120.0, "car")
    session = replace(made.session, runs=(replace(first, exclusions=(span,)), *made.session.runs[1:]))
    run = locate(session, made.rides).runs[first.id]
    time = made.rides["day"].time[run.points]
    out = ~run.valid
    assert (time[out] > span.start).all()
    assert (time[out] - 1.0 < span.end).all()
    assert 19 <= out.sum() <= 22


def test_records_and_points_of_neighbours(day: Day) -> None:
    made = day(REFERENCE_DAY, 1)
    run = made.session.runs[0]
    edge = float(made.rides["day"].time[round(run.start) + 100])
    halves = (replace(run, end=edge, laps=()), replace(run, id="b", start=edge, laps=()))
    path = locate(replace(made.session, runs=(*halves, *made.session.runs[1:])), made.rides)
    first, second = path.runs[run.id], path.runs["b"]
    assert first.records.stop == second.records.start
    assert first.position.size == first.points.stop - first.points.start
    assert first.position.size == first.records.stop - first.records.start + 1


def test_excluded_runs_and_rides_not_at_hand_are_passed_over(day: Day) -> None:
    made = day(REFERENCE_DAY, 1)
    runs = (replace(made.session.runs[0], excluded="wind"), *made.session.runs[1:])
    session = replace(made.session, runs=(*runs, Run("x", "other", "a", 0.0)))
    path = locate(session, made.rides)
    assert set(path.runs) == {str(k) for k in range(2, 13)}


def test_a_session_without_rides_has_an_empty_path() -> None:
    path = locate(Session("x", Venue(VenueKind.LOOP, lap_length=2400.0)), {})
    assert not path.runs
    assert path.length == 2400.0


def test_the_same_session_gives_the_same_positions(day: Day) -> None:
    made = day(REFERENCE_DAY, 1)
    one, other = locate(made.session, made.rides), locate(made.session, made.rides)
    assert all(np.array_equal(one.runs[k].position, other.runs[k].position) for k in one.runs)
    with pytest.raises(ValueError, match="read-only"):
        one.runs["1"].position[0] = 1.0


def test_it_stops_when_asked(day: Day) -> None:
    class Stop:
        def step(self, done: int, total: int) -> None:
            raise Cancelled

    made = day(REFERENCE_DAY, 1)
    with pytest.raises(Cancelled, match=r"^$"):
        locate(made.session, made.rides, Stop())


def test_the_cost_grows_with_the_records_not_with_their_square(day: Day) -> None:
    made = day(REFERENCE_DAY, 1)
    ride = made.rides["day"]
    fine = np.arange(0.0, ride.time[-1], 0.125)
    many = Ride(fine, {name: np.interp(fine, ride.time, values) for name, values in ride.channels.items()})

    def cost(rides: dict[str, Ride]) -> float:
        spent = []
        for _ in range(3):
            begin = clock.process_time()
            locate(made.session, rides)
            spent.append(clock.process_time() - begin)
        return min(spent)

    cost({"day": ride})  # compiled code is loaded
    assert cost({"day": many}) < 16 * cost({"day": ride})
