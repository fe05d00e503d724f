"""Whole days, invented by a simulator that shares no code with the estimator."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from ridercda.drag.estimate import Estimate
from ridercda.drag.prepare import prepare_day
from ridercda.drag.regression import regress
from ridercda.drag.solve import solve
from ridercda.drag.verdict import Verdict
from ridercda.drag.warnings import WARNING_CODES
from ridercda.errors import Cancelled
from ridercda.session.document import VenueKind
from ridercda.synthetic.day import SyntheticDay, simulate_day
from ridercda.synthetic.spec import REFERENCE_DAY, TRACK_DAY, noise_free
from ridercda.synthetic.venue import OutAndBackVenue


def solved(day: SyntheticDay) -> Estimate:
    return solve(prepare_day(day.session, day.rides))


@pytest.fixture(scope="module")
def reference() -> tuple[SyntheticDay, Estimate]:
    day = simulate_day(REFERENCE_DAY, 7)
    return day, solved(day)


@pytest.mark.parametrize(
    ("spec", "seed"),
    [(REFERENCE_DAY, 1), (REFERENCE_DAY, 2), (replace(REFERENCE_DAY, venue=OutAndBackVenue()), 2)],
    ids=["loop-1", "loop-2", "out-and-back"],
)
def test_the_regression_gives_a_noise_free_day_back(spec: object, seed: int) -> None:
    day = simulate_day(noise_free(spec), seed)  # type: ignore[arg-type]
    found = regress(prepare_day(day.session, day.rides))
    assert found is not None
    for setup, cda in found.cda.items():
        assert cda == pytest.approx(day.truth.cda[setup], rel=1e-3)
    for tyres, crr in found.crr.items():
        assert crr == pytest.approx(day.truth.crr[tyres], rel=5e-3)


@pytest.mark.parametrize("seed", [1, 2, 3])
def test_the_full_model_gives_a_noise_free_loop_back(seed: int) -> None:
    day = simulate_day(noise_free(REFERENCE_DAY), seed)
    estimate = solved(day)
    for setup in estimate.setups:
        assert setup.cda is not None
        assert setup.cda.value == pytest.approx(day.truth.cda[setup.id], rel=1e-3)
    for tyres in estimate.tyres:
        assert tyres.crr is not None
        assert tyres.crr.value == pytest.approx(day.truth.crr[tyres.id], rel=5e-3)


def test_a_noise_free_track_comes_back_within_a_percent() -> None:
    """Air dragged round the track and a meter's zero are never told from drag; their priors pull by up to 1 %."""
    day = simulate_day(noise_free(TRACK_DAY), 1)
    estimate = solved(day)
    for setup in estimate.setups:
        assert setup.cda is not None
        assert setup.cda.value == pytest.approx(day.truth.cda[setup.id], rel=1e-2)
    for difference in estimate.differences:
        true = day.truth.cda[difference.setup] - day.truth.cda[difference.against]
        assert difference.cda is not None
        assert difference.cda.value == pytest.approx(true, abs=3e-4)


def test_an_ordinary_day_is_answered_within_its_intervals(reference: tuple[SyntheticDay, Estimate]) -> None:
    day, estimate = reference
    for setup in estimate.setups:
        assert setup.cda is not None
        assert abs(setup.cda.value - day.truth.cda[setup.id]) < 4 * setup.cda.standard_error
    for difference in estimate.differences:
        assert difference.cda is not None
        true = day.truth.cda[difference.setup] - day.truth.cda[difference.against]
        assert abs(difference.cda.value - true) < 4 * difference.cda.standard_error


def test_figures_hang_together(reference: tuple[SyntheticDay, Estimate]) -> None:
    _, estimate = reference
    size = len(estimate.parameters)
    assert estimate.covariance.shape == (size, size)
    assert np.linalg.eigvalsh(estimate.covariance).min() > -1e-15
    place = {name: i for i, name in enumerate(estimate.parameters)}
    for setup in estimate.setups:
        assert setup.cda is not None
        i = place[f"cda:{setup.id}"]
        assert estimate.values[i] == setup.cda.value
        assert np.sqrt(estimate.covariance[i, i]) == pytest.approx(setup.cda.standard_error)
    for d in estimate.differences:
        assert d.cda is not None
        assert d.joint_interval is not None
        a, b = place[f"cda:{d.setup}"], place[f"cda:{d.against}"]
        spread = estimate.covariance[a, a] + estimate.covariance[b, b] - 2 * estimate.covariance[a, b]
        assert np.sqrt(spread) == pytest.approx(d.cda.standard_error, rel=1e-9)
        assert d.joint_interval[0] <= d.cda.interval[0] <= d.cda.interval[1] <= d.joint_interval[1]
        assert sum(d.variance_shares.values()) == pytest.approx(1.0, abs=0.03)
        assert (d.detectable or 0.0) > d.cda.standard_error


def test_each_pair_stands_once_with_the_baseline_against(reference: tuple[SyntheticDay, Estimate]) -> None:
    _, estimate = reference
    pairs = [(d.setup, d.against) for d in estimate.differences]
    assert len({frozenset(pair) for pair in pairs}) == len(pairs) == 3
    assert all(setup != "a" for setup, _ in pairs)


def test_every_warning_has_a_listed_code(reference: tuple[SyntheticDay, Estimate]) -> None:
    _, estimate = reference
    assert {warning.code for warning in estimate.warnings} <= set(WARNING_CODES)


def test_one_speed_gives_differences_but_no_absolute_values() -> None:
    day = simulate_day(
        replace(REFERENCE_DAY, targets=(220.0,), order="ABBAABBA", setups=REFERENCE_DAY.setups[:2]), 3
    )
    estimate = solved(day)
    assert "rolling-not-separated" in {w.code for w in estimate.warnings}
    assert all(setup.cda is None and "apart" in setup.reason for setup in estimate.setups)
    assert all(tyres.crr is None for tyres in estimate.tyres)
    (difference,) = estimate.differences
    assert difference.cda is not None
    assert estimate.answers


def test_a_road_that_repeats_nothing_answers_nothing(reference: tuple[SyntheticDay, Estimate]) -> None:
    day, _ = reference
    prepared = replace(prepare_day(day.session, day.rides), venue=VenueKind.ROAD)
    estimate = solve(prepared)
    assert not estimate.answers
    assert "no-profile" in {w.code for w in estimate.warnings}
    assert all(setup.reason for setup in estimate.setups)


def test_nothing_to_solve_says_so() -> None:
    day = simulate_day(replace(REFERENCE_DAY, order="AB", laps=1), 5)
    estimate = solve(prepare_day(day.session, {}))
    assert not estimate.answers
    assert "run-left-out" in {w.code for w in estimate.warnings}


def test_power_out_of_step_is_found_and_shifted(reference: tuple[SyntheticDay, Estimate]) -> None:
    _day, plain = reference
    spec = replace(
        REFERENCE_DAY,
        sensors=replace(REFERENCE_DAY.sensors, power=replace(REFERENCE_DAY.sensors.power, lag=2.0)),
    )
    estimate = solved(simulate_day(spec, 7))
    assert "power-lag" in {w.code for w in estimate.warnings}
    assert "power-lag" not in {w.code for w in plain.warnings}
    for late, early in zip(estimate.differences, plain.differences, strict=True):
        assert late.cda is not None
        assert early.cda is not None
        assert abs(late.cda.value - early.cda.value) < 1.5 * early.cda.standard_error


def test_the_order_of_all_a_before_all_b_is_called_confounded() -> None:
    day = simulate_day(replace(REFERENCE_DAY, order="AAAABBBB", setups=REFERENCE_DAY.setups[:2]), 6)
    blocked = solved(day)
    mixed = solved(simulate_day(replace(REFERENCE_DAY, order="ABBAABBA", setups=REFERENCE_DAY.setups[:2]), 6))
    share = blocked.differences[0].variance_shares.get("drift", 0.0)
    assert share > 3 * mixed.differences[0].variance_shares.get("drift", 0.0)
    assert share > 0.02


def test_a_known_crr_is_taken_at_its_word(reference: tuple[SyntheticDay, Estimate]) -> None:
    day, free = reference
    prepared = prepare_day(day.session, day.rides)
    exact = replace(prepared, tyres=(replace(prepared.tyres[0], crr=0.0040, crr_sd=0.0),))
    estimate = solve(exact)
    assert estimate.tyres[0].crr is not None
    assert estimate.tyres[0].crr.value == 0.0040
    assert estimate.tyres[0].crr.standard_error == 0.0
    before, after = free.setups[0].cda, estimate.setups[0].cda
    assert before is not None
    assert after is not None
    assert after.standard_error < before.standard_error


def test_solving_stops_when_asked() -> None:
    class Stop:
        def step(self, done: int, total: int) -> None:
            raise Cancelled("enough")

    day = simulate_day(replace(REFERENCE_DAY, order="AB", laps=1), 5)
    with pytest.raises(Cancelled, match="enough"):
        solve(prepare_day(day.session, day.rides), Stop())


def test_verdicts_are_those_of_the_joint_interval(reference: tuple[SyntheticDay, Estimate]) -> None:
    _, estimate = reference
    for d in estimate.differences:
        assert d.joint_interval is not None
        claims = d.verdict in (Verdict.LOWER, Verdict.HIGHER)
        assert claims == (d.joint_interval[0] > 0 or d.joint_interval[1] < 0)
