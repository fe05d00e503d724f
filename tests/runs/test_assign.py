from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from ridercda.errors import SessionError
from ridercda.runs.assign import assign_laps, assign_order, parse_order
from ridercda.runs.proposal import ProposedRun
from ridercda.session.document import Run, Setup

SETUPS = (
    Setup("base", letter="A", name="Drops"),
    Setup("low", letter="B"),
    Setup("narrow", letter="C"),
    Setup("disc"),
)


def _proposed(count: int) -> tuple[ProposedRun, ...]:
    return tuple(
        ProposedRun(100.0 * k, 100.0 * k + 80, (100.0 * k, 100.0 * k + 40, 100.0 * k + 80), "", 0.9)
        for k in range(count)
    )


@pytest.mark.parametrize(
    "text",
    [
        "A B C C B A",
        "ABCCBA",
        "A,B,C,C,B,A",
        "a b c c b a",
        "A, B; C\tC  B,A",
        "base low narrow C B A",
        "AB CC BA",
    ],
)
def test_ways_to_write_one_order(text: str) -> None:
    ids = [setup.id if setup else None for setup in parse_order(text, SETUPS)]
    assert ids == ["base", "low", "narrow", "narrow", "low", "base"]


def test_a_setup_without_a_letter_goes_by_its_id() -> None:
    assert [s.id for s in parse_order("A disc A", SETUPS) if s] == ["base", "disc", "base"]


def test_where_only_case_tells_setups_apart_case_counts() -> None:
    setups = (Setup("x", letter="a"), Setup("y", letter="A"))
    assert [s.id for s in parse_order("aAa", setups) if s] == ["x", "y", "x"]


def test_an_order_makes_runs_with_fresh_ids_and_laps() -> None:
    taken = (Run("1", "pm", "base", 0.0, 10.0), Run("3", "pm", "base", 20.0, 30.0))
    runs = assign_order("ABBA", _proposed(4), "am", SETUPS, taken)
    assert [run.id for run in runs] == ["2", "4", "5", "6"]
    assert [run.setup for run in runs] == ["base", "low", "low", "base"]
    assert runs[1] == Run("4", "am", "low", 100.0, 180.0, laps=(100.0, 140.0, 180.0))


def test_a_dash_leaves_a_run_out() -> None:
    runs = assign_order("A-B", _proposed(3), "am", SETUPS)
    assert [(run.setup, run.start) for run in runs] == [("base", 0.0), ("low", 200.0)]


@pytest.mark.parametrize(("text", "count"), [("A B C", 6), ("ABCCBAA", 6), ("A", 0)])
def test_a_wrong_count_says_both_numbers(text: str, count: int) -> None:
    letters = len(text.replace(" ", ""))
    verb = "was" if count == 1 else "were"
    with pytest.raises(SessionError, match=f"{count} runs {verb} found, but the order names {letters}"):
        assign_order(text, _proposed(count), "am", SETUPS)


def test_one_run_is_one_run() -> None:
    with pytest.raises(SessionError, match="1 run was found, but the order names 2"):
        assign_order("AB", _proposed(1), "am", SETUPS)


@pytest.mark.parametrize(("text", "named"), [("A X B", "X"), ("ABXA", "X"), ("A zzz", "zzz")])
def test_an_unknown_setup_is_named_with_those_there_are(text: str, named: str) -> None:
    with pytest.raises(SessionError, match=rf"no setup is called '{named}'; the setups are A \(base\), B"):
        parse_order(text, SETUPS)


@pytest.mark.parametrize("text", ["", "  ", " , "])
def test_an_empty_order_says_what_to_type(text: str) -> None:
    with pytest.raises(SessionError, match="the order is empty; type one letter for each run"):
        parse_order(text, SETUPS)


def test_without_setups_there_is_nothing_to_assign() -> None:
    with pytest.raises(SessionError, match="the setups are none yet: make one first"):
        parse_order("A", ())


LAPS = (10.0, 110.0, 210.0, 310.0, 410.0, 510.0)


def test_a_run_list_joins_neighbouring_laps() -> None:
    runs = assign_laps({1: "A", 2: "A", 4: "b", 5: "disc"}, LAPS, "am", SETUPS, settle=15.0)
    assert [(run.setup, run.start, run.end) for run in runs] == [
        ("base", 10.0, 210.0),
        ("low", 310.0, 410.0),
        ("disc", 425.0, 510.0),
    ]
    assert runs[0].laps == (10.0, 110.0, 210.0)
    assert runs[2].laps == ()


@pytest.mark.parametrize("lap", [0, 6])
def test_a_lap_that_is_not_there(lap: int) -> None:
    with pytest.raises(SessionError, match=f"there is no lap {lap}: 5 laps were found"):
        assign_laps({lap: "A"}, LAPS, "am", SETUPS)


def test_a_lap_in_an_unknown_setup() -> None:
    with pytest.raises(SessionError, match="lap 2: no setup is called 'Q'"):
        assign_laps({2: "Q"}, LAPS, "am", SETUPS)


@given(order=st.lists(st.sampled_from(["A", "B", "C", "-"]), min_size=1, max_size=20), together=st.booleans())
def test_every_order_of_the_right_length_assigns_each_run_once(order: list[str], together: bool) -> None:
    text = ("" if together else " ").join(order)
    proposed = _proposed(len(order))
    runs = assign_order(text, proposed, "am", SETUPS)
    wanted = [(p.start, name) for p, name in zip(proposed, order, strict=True) if name != "-"]
    letters = {setup.id: setup.letter for setup in SETUPS}
    assert [(run.start, letters[run.setup]) for run in runs] == wanted
    assert len({run.id for run in runs}) == len(runs)
