from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from ridercda.physics.critical_power import (
    fit_critical_power,
    power_for_duration,
    time_to_exhaustion,
    w_balance,
)

pieces = st.lists(st.tuples(st.floats(0.0, 900.0), st.floats(0.0, 600.0)), min_size=1, max_size=12)


@settings(max_examples=60)
@given(pieces, st.floats(0.1, 0.9))
def test_cutting_a_piece_in_two_changes_nothing(ride: list[tuple[float, float]], share: float) -> None:
    power, duration = (np.array(column) for column in zip(*ride, strict=True))
    whole = w_balance(power, duration, 250.0, 20e3)
    halves = np.stack([duration * share, duration * (1 - share)], axis=1).ravel()
    cut = w_balance(np.repeat(power, 2), halves, 250.0, 20e3)
    np.testing.assert_allclose(cut[1::2], whole, rtol=1e-9, atol=1e-6)


@settings(max_examples=60)
@given(pieces)
def test_balance_never_exceeds_w_prime_and_falls_only_above_critical_power(
    ride: list[tuple[float, float]],
) -> None:
    power, duration = (np.array(column) for column in zip(*ride, strict=True))
    balance = np.concatenate([[20e3], w_balance(power, duration, 250.0, 20e3)])
    assert np.all(balance <= 20e3)
    above = power > 250.0
    assert np.all(np.diff(balance)[above] <= 0.0)
    assert np.all(np.diff(balance)[~above] >= 0.0)


def test_exhaustion_comes_when_the_hyperbola_says() -> None:
    held = float(time_to_exhaustion(400.0, 250.0, 20e3))
    assert w_balance([400.0], [held], 250.0, 20e3)[0] == pytest.approx(0.0, abs=1e-9)
    assert float(power_for_duration(held, 250.0, 20e3)) == pytest.approx(400.0)


def test_overspending_shows_as_a_negative_balance() -> None:
    assert w_balance([450.0], [120.0], 250.0, 20e3)[0] == pytest.approx(-4000.0)


def test_starting_tired_is_continuing() -> None:
    whole = w_balance([400.0, 150.0, 350.0], [60.0, 90.0, 30.0], 250.0, 20e3)
    rest = w_balance([150.0, 350.0], [90.0, 30.0], 250.0, 20e3, start=float(whole[0]))
    np.testing.assert_allclose(rest, whole[1:], rtol=1e-12)


def test_at_critical_power_nothing_moves_and_exhaustion_never_comes() -> None:
    assert w_balance([250.0], [3600.0], 250.0, 20e3, start=5e3)[0] == pytest.approx(5e3)
    np.testing.assert_array_equal(time_to_exhaustion([200.0, 250.0], 250.0, 20e3), [np.inf, np.inf])
    assert np.isnan(time_to_exhaustion(np.nan, 250.0, 20e3))


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (([300.0], [60.0], 250.0, 0.0), "W' must be positive"),
        (([300.0], [60.0], 250.0, np.nan), "W' must be positive"),
        (([300.0], [-1.0], 250.0, 20e3), "no duration negative"),
        (([np.nan], [1.0], 250.0, 20e3), "must be finite"),
        (([[300.0]], [60.0], 250.0, 20e3), "one row of pieces"),
    ],
)
def test_balance_refuses(arguments: tuple[list[float], list[float], float, float], message: str) -> None:
    with pytest.raises(ValueError, match=message):
        w_balance(*arguments)


def test_no_time_has_no_power() -> None:
    with pytest.raises(ValueError, match=r"a duration must be positive \(s\), not 0"):
        power_for_duration(0.0, 250.0, 20e3)


def test_line_through_scattered_efforts_is_that_of_least_squares() -> None:
    durations, powers = np.array([150.0, 260.0, 410.0, 900.0]), np.array([385.0, 330.0, 300.0, 275.0])
    fitted = fit_critical_power(durations, powers)
    slope, intercept = np.polynomial.Polynomial.fit(durations, durations * powers, 1).convert().coef[::-1]
    assert fitted.critical_power == pytest.approx(slope, rel=1e-10)
    assert fitted.w_prime == pytest.approx(intercept, rel=1e-10)


@pytest.mark.parametrize(
    ("durations", "powers", "message"),
    [
        ([300.0], [320.0], "two efforts of different length"),
        ([300.0, 300.0], [320.0, 310.0], "two efforts of different length"),
        ([300.0, 0.0], [320.0, 310.0], "finite and positive"),
        ([300.0, 600.0], [320.0, np.nan], "finite and positive"),
        ([300.0, 600.0], [320.0], "each effort needs a duration and a power"),
    ],
)
def test_efforts_that_make_no_line_are_refused(
    durations: list[float], powers: list[float], message: str
) -> None:
    with pytest.raises(ValueError, match=message):
        fit_critical_power(durations, powers)
