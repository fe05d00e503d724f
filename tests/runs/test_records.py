from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from ridercda.runs.records import counted, points_in, records_in, run_records
from ridercda.session.document import Exclusion, Run

TIME = np.arange(0.0, 11.0)


def test_an_interval_lies_inside_only_with_both_ends() -> None:
    assert records_in(TIME, 2.0, 5.0) == slice(3, 6)  # (2, 3], (3, 4], (4, 5]
    assert records_in(TIME, 2.5, 5.5) == slice(4, 6)  # (3, 4], (4, 5]


def test_the_first_record_ends_no_interval() -> None:
    assert records_in(TIME, 0.0, 3.0) == slice(1, 4)


def test_without_an_end_a_run_goes_to_the_last_record() -> None:
    assert records_in(TIME, 8.0, None) == slice(9, 11)


@pytest.mark.parametrize(("start", "end"), [(20.0, 30.0), (-5.0, -1.0), (4.2, 4.8), (4.0, 4.0)])
def test_a_span_without_a_whole_interval_is_empty(start: float, end: float) -> None:
    span = records_in(TIME, start, end)
    assert TIME[span].size == 0


def test_a_time_typed_to_the_millisecond_meets_its_record() -> None:
    time = np.array([0.0, 1.0004, 2.0004])
    assert points_in(time, 1.0, 2.0) == slice(1, 3)


@given(
    gaps=st.lists(st.floats(0.2, 5.0), min_size=2, max_size=40),
    share=st.floats(0.0, 1.0),
)
def test_neighbours_that_share_an_edge_share_no_interval_and_lose_none(
    gaps: list[float], share: float
) -> None:
    time = np.concatenate(([0.0], np.cumsum(gaps)))
    edge = float(time[round(share * (time.size - 1))])
    before, after = records_in(time, 0.0, edge), records_in(time, edge, None)
    covered = [*range(*before.indices(time.size)), *range(*after.indices(time.size))]
    assert covered == list(range(1, time.size))


def test_an_exclusion_takes_every_interval_it_touches() -> None:
    records = records_in(TIME, 0.0, 10.0)
    kept = counted(TIME, records, (Exclusion(3.2, 4.8, "car"),))
    assert TIME[records][~kept].tolist() == [4.0, 5.0]


def test_an_exclusion_from_record_to_record_takes_only_what_lies_between() -> None:
    run = Run("1", "am", "a", 0.0, 10.0, exclusions=(Exclusion(3.0, 5.0, "car"),))
    records, kept = run_records(TIME, run)
    assert TIME[records][~kept].tolist() == [4.0, 5.0]
