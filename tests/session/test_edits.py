from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from ridercda.errors import SessionError
from ridercda.session import edits
from ridercda.session.document import (
    Air,
    CourseEntry,
    CourseSegment,
    Exclusion,
    RepairChoice,
    RideEntry,
    Run,
    Session,
    Setup,
    Tyres,
)
from ridercda.session.validate import validate

DAY = Session(
    name="Loop",
    rides=(RideEntry("am", "rides/am.csv"), RideEntry("pm", "rides/pm.csv")),
    setups=(Setup("base", baseline=True), Setup("low", fallback="base", held=0.9), Setup("spare")),
    runs=(
        Run("1", "am", "base", 100.0, 500.0, laps=(100.0, 300.0, 500.0)),
        Run("2", "am", "low", 500.0, 900.0, exclusions=(Exclusion(600.0, 650.0, "a car passed"),)),
        Run("3", "am", "low", 1000.0, None),
        Run("4", "pm", "base", 0.0, 400.0),
    ),
)


def test_runs_go_in_order_of_their_ride_and_start() -> None:
    day = edits.add_runs(DAY, [Run("5", "am", "base", 920.0, 980.0), Run("6", "pm", "low", 400.0, 500.0)])
    assert [run.id for run in day.runs] == ["1", "2", "5", "3", "4", "6"]


def test_trimming_takes_laps_and_exclusions_beyond_the_edges_away() -> None:
    day = edits.trim_run(DAY, "1", 150.0, 450.0)
    assert day.run("1").laps == (300.0,)
    day = edits.trim_run(DAY, "2", 620.0, 900.0)
    assert day.run("2").exclusions == (Exclusion(620.0, 650.0, "a car passed"),)
    assert edits.trim_run(DAY, "2", 700.0, 900.0).run("2").exclusions == ()


def test_a_run_may_touch_its_neighbour_but_not_lie_over_it() -> None:
    assert edits.trim_run(DAY, "3", 900.0, None).run("3").start == 900.0
    with pytest.raises(
        SessionError, match=r"run\[3\]\.start: 899 s lies within run '2', from 500 s to 900 s"
    ):
        edits.trim_run(DAY, "3", 899.0, None)
    with pytest.raises(SessionError, match="to the end of the ride; runs of one ride may touch"):
        edits.add_runs(DAY, [Run("5", "am", "base", 2000.0, 2100.0)])


def test_splitting_and_merging_give_the_run_back() -> None:
    split = edits.split_run(DAY, "1", 300.0)
    assert [run.id for run in split.runs] == ["1", "1-2", "2", "3", "4"]
    assert split.run("1").laps == (100.0, 300.0)
    assert split.run("1-2").laps == (300.0, 500.0)
    assert edits.merge_runs(split, ["1-2", "1"]) == DAY


def test_an_open_run_splits_too() -> None:
    split = edits.split_run(DAY, "3", 2000.0, "3b")
    assert (split.run("3").end, split.run("3b").end) == (2000.0, None)


@pytest.mark.parametrize("time", [100.0, 500.0, 50.0, float("nan")])
def test_a_run_is_split_between_its_edges(time: float) -> None:
    with pytest.raises(SessionError, match="split it between its edges"):
        edits.split_run(DAY, "1", time)


def test_runs_of_different_setups_do_not_merge() -> None:
    with pytest.raises(SessionError, match="they differ in setup"):
        edits.merge_runs(DAY, ["1", "2"])
    with pytest.raises(SessionError, match="two runs or more"):
        edits.merge_runs(DAY, ["1"])


def test_merging_across_another_run_is_an_overlap() -> None:
    day = edits.assign_runs(DAY, ["3"], "base")
    with pytest.raises(SessionError, match="may touch but not overlap"):
        edits.merge_runs(day, ["1", "3"])


def test_what_refers_to_a_setup_follows_its_new_id() -> None:
    day = edits.change_setup(DAY, "base", replace(DAY.setup("base"), id="drops"))
    assert day.setup("low").fallback == "drops"
    assert day.run("1").setup == "drops"
    assert day.baseline is not None
    assert day.baseline.id == "drops"


def test_runs_follow_the_new_id_of_a_ride() -> None:
    day = edits.change_ride(DAY, "am", replace(DAY.ride("am"), id="morning"))
    assert {run.ride for run in day.runs} == {"morning", "pm"}


def test_a_setup_in_use_is_not_removed() -> None:
    with pytest.raises(SessionError, match=r"setup\[base\]: is still used by run 1, run 4, setup low"):
        edits.remove_setup(DAY, "base")
    assert [setup.id for setup in edits.remove_setup(DAY, "spare").setups] == ["base", "low"]


def test_there_is_one_baseline() -> None:
    day = edits.set_baseline(DAY, "low")
    assert [setup.baseline for setup in day.setups] == [False, True, False]
    with pytest.raises(SessionError, match=r"there are 2 baselines \(base, extra\)"):
        edits.add_setup(DAY, Setup("extra", baseline=True))


def test_a_ride_with_runs_is_removed_only_with_them() -> None:
    with pytest.raises(SessionError, match=r"ride\[pm\]: has runs \(4\); remove them first"):
        edits.remove_ride(DAY, "pm")
    day = edits.remove_ride_with_runs(DAY, "pm")
    assert [ride.id for ride in day.rides] == ["am"]
    assert [run.id for run in day.runs] == ["1", "2", "3"]


def test_a_later_choice_of_repair_takes_the_place_of_an_earlier_one() -> None:
    day = edits.choose_repair(DAY, "am", RepairChoice("power-lag", "shift", value=1.0))
    day = edits.choose_repair(day, "am", RepairChoice("power-lag", "leave"))
    assert day.ride("am").repairs == (RepairChoice("power-lag", "leave"),)
    assert edits.clear_repair(day, "am", "power-lag") == DAY
    with pytest.raises(SessionError, match="no fault 'power-leg': did you mean 'power-lag'"):
        edits.choose_repair(DAY, "am", RepairChoice("power-leg", "leave"))


def test_a_run_is_left_out_for_a_reason_and_counted_again() -> None:
    day = edits.exclude_runs(DAY, ["1", "2"], " traffic ")
    assert [run.excluded for run in day.runs] == ["traffic", "traffic", "", ""]
    assert edits.include_runs(day, ["1", "2"]) == DAY
    with pytest.raises(SessionError, match="say why the run is left out"):
        edits.exclude_runs(DAY, ["1"], " ")


def test_spans_are_left_out_and_counted_again() -> None:
    span = Exclusion(520.0, 540.0, "braked")
    day = edits.add_exclusion(DAY, "2", span)
    assert day.run("2").exclusions[0] == span
    assert edits.remove_exclusion(day, "2", span) == DAY
    with pytest.raises(SessionError, match="lies outside the run"):
        edits.add_exclusion(DAY, "2", Exclusion(10.0, 20.0, "x"))


def test_tyres_are_set_and_forgotten() -> None:
    day = edits.set_tyres(DAY, Tyres("25 mm", crr=0.004))
    day = edits.set_tyres(day, Tyres("25 mm", crr=0.005))
    assert [tyres.crr for tyres in day.tyres] == [0.005]
    assert edits.remove_tyres(day, "25 mm") == DAY


def test_courses_come_and_go() -> None:
    course = CourseEntry("tt", segments=(CourseSegment(1000.0),))
    day = edits.add_course(DAY, course)
    day = edits.change_course(day, "tt", replace(course, power=280.0))
    assert day.course("tt").power == 280.0
    assert edits.remove_course(day, "tt") == DAY
    with pytest.raises(SessionError, match="comes from one of file"):
        edits.add_course(DAY, CourseEntry("bare"))


@pytest.mark.parametrize(
    ("edit", "message"),
    [
        (
            lambda: edits.set_rider_mass(DAY, 755.0),
            r"rider\.mass: 755 kg cannot be: it must lie between 20 and",
        ),
        (lambda: edits.set_rider_mass(DAY, float("nan")), r"rider\.mass: nan is not a finite number"),
        (lambda: edits.set_air(DAY, Air(temperature=18.0)), r"air\.temperature: -255\.15 degC cannot be"),
        (lambda: edits.remove_runs(DAY, ["11"]), "there is no run '11'"),
        (lambda: edits.assign_runs(DAY, ["1"], "bese"), "did you mean 'base'"),
        (lambda: edits.change_run(DAY, "1", replace(DAY.run("1"), id="2")), "the id '2' is used twice"),
        (lambda: edits.set_name(DAY, ""), "name the session"),
    ],
)
def test_a_refused_edit_says_what_to_do(edit: Callable[[], Session], message: str) -> None:
    with pytest.raises(SessionError, match=message):
        edit()


_times = st.floats(0.0, 1200.0)


@given(st.data())
@settings(max_examples=100, deadline=None)
def test_no_chain_of_edits_breaks_what_must_hold(data: st.DataObject) -> None:
    day = DAY
    for _ in range(data.draw(st.integers(1, 8))):
        ids = [run.id for run in day.runs]
        run_id = data.draw(st.sampled_from(ids))
        start, end = data.draw(_times), data.draw(_times | st.none())
        some = data.draw(st.lists(st.sampled_from(ids), unique=True, min_size=1))
        changes: list[Callable[[], Session]] = [
            lambda day=day, run_id=run_id, start=start, end=end: edits.trim_run(day, run_id, start, end),
            lambda day=day, run_id=run_id, start=start: edits.split_run(day, run_id, start),
            lambda day=day, some=some: edits.merge_runs(day, some),
            lambda day=day, some=some: edits.assign_runs(day, some, "spare"),
        ]
        try:
            day = data.draw(st.sampled_from(changes))()
        except SessionError:
            continue
        validate(day)
        assert all(run.end is None or run.start < run.end for run in day.runs)
        for run in day.runs:
            inside = float("inf") if run.end is None else run.end
            others = [o for o in day.runs if o.ride == run.ride and o.id != run.id]
            assert not any(run.start < other.start < inside for other in others)
