"""One invented day through the product's solver: what it answered, warned of and took."""

from __future__ import annotations

import time
from dataclasses import dataclass

from oracle import Answer

from ridercda.drag.estimate import Estimate, Figure
from ridercda.drag.prepare import prepare_day
from ridercda.drag.solve import solve
from ridercda.drag.verdict import Verdict
from ridercda.errors import SolveError
from ridercda.rides.repair import repair
from ridercda.synthetic.day import SyntheticDay


@dataclass(frozen=True, slots=True, eq=False)
class SolvedDay:
    """The solver's answers, in the oracle's form; what it did not answer is not there."""

    absolutes: dict[str, Answer]
    differences: dict[tuple[str, str], Answer]
    crr: dict[str, Answer]
    lower: tuple[tuple[str, str], ...]  # pairs (setup, against) called lower, either way round
    warnings: tuple[str, ...]  # codes
    refusal: str  # why nothing was answered; "" if something was
    prepare_seconds: float
    solve_seconds: float


def solve_day(day: SyntheticDay) -> SolvedDay:
    """Repair, prepare and solve a day, as the program does."""
    begin = time.perf_counter()
    middle = begin
    try:
        rides = {name: repair(ride) for name, ride in day.rides.items()}
        prepared = prepare_day(day.session, rides)
        middle = time.perf_counter()
        estimate = solve(prepared)
    except SolveError as error:
        end = time.perf_counter()
        return SolvedDay({}, {}, {}, (), (), type(error).__name__, middle - begin, end - middle)
    return _told(estimate, middle - begin, time.perf_counter() - middle)


def _told(estimate: Estimate, prepare_seconds: float, solve_seconds: float) -> SolvedDay:
    order = [s.id for s in estimate.setups]
    differences: dict[tuple[str, str], Answer] = {}
    lower: list[tuple[str, str]] = []
    for pair in estimate.differences:
        if pair.verdict in (Verdict.LOWER, Verdict.HIGHER):
            ends = (pair.setup, pair.against)
            lower.append(ends if pair.verdict is Verdict.LOWER else ends[::-1])
        if pair.cda is None:
            continue
        answer = _answer(pair.cda)
        if order.index(pair.setup) > order.index(pair.against):
            differences[pair.setup, pair.against] = answer
        else:
            differences[pair.against, pair.setup] = Answer(
                -answer.value, answer.standard_error, -answer.high, -answer.low
            )
    return SolvedDay(
        absolutes={s.id: _answer(s.cda) for s in estimate.setups if s.cda is not None},
        differences=differences,
        crr={t.id: _answer(t.crr) for t in estimate.tyres if t.crr is not None},
        lower=tuple(lower),
        warnings=tuple(sorted({w.code for w in estimate.warnings})),
        refusal="" if estimate.answers else "nothing answered",
        prepare_seconds=prepare_seconds,
        solve_seconds=solve_seconds,
    )


def _answer(figure: Figure) -> Answer:
    return Answer(figure.value, figure.standard_error, *figure.interval)
