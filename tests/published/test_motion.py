"""Steady speeds and motions with closed solutions, reached through the power balance.

Steady speeds were found outside this package by bracketing, by Cardano's formula and by a long integration,
which agree. Coasting on a slope and on the level have the textbook solutions in tanh and tan (the latter as
used by G. D. Thompson, US EPA, "The vehicle road load problem," read). Here the package's own forces are
integrated and must reach them. 80 kg, Crr 0.004, CdA 0.30, density 1.2, no bearings, unless said otherwise.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from ridercda.physics.power_balance import road_power, steady_speed


@pytest.mark.parametrize(
    ("arguments", "expected"),
    [
        ((250.0, 80.0, 0.0, 0.004, 0.30, 1.2, 0.0, 1.0), 10.636751763),
        ((250.0, 80.0, 0.0, 0.004, 0.30, 1.2, 0.0, 0.976), 10.542552137),
        ((250.0, 80.0, 0.05, 0.004, 0.30, 1.2, 0.0, 1.0), 5.281702754),
        ((300.0, 75.0, 0.10, 0.005, 0.40, 1.1, 0.0, 0.97), 3.647910275),
        ((100.0, 80.0, -0.03, 0.004, 0.30, 1.2, 0.0, 1.0), 12.551229686),
        ((50.0, 80.0, -0.06, 0.004, 0.30, 1.2, 0.0, 1.0), 16.150474424),
        ((250.0, 80.0, 0.0, 0.004, 0.30, 1.2, 3.0, 1.0), 8.827808723),
        ((250.0, 80.0, 0.0, 0.004, 0.30, 1.2, -3.0, 1.0), 12.622723125),
    ],
)
def test_steady_speed(arguments: tuple[float, ...], expected: float) -> None:
    assert float(steady_speed(*arguments)) == pytest.approx(expected, abs=1e-9)


def test_course_times() -> None:
    out, back, still = steady_speed(250.0, 80.0, 0.0, 0.004, 0.30, 1.2, np.array([3.0, -3.0, 0.0]))
    assert 10e3 / out + 10e3 / back == pytest.approx(1925.006029, abs=1e-6)
    assert 20e3 / still == pytest.approx(1880.273268, abs=1e-6)
    up, down = steady_speed(250.0, 80.0, np.array([0.03, -0.03]), 0.004, 0.30, 1.2)
    assert up == pytest.approx(7.030530090, abs=1e-9)
    assert down == pytest.approx(14.466442561, abs=1e-9)
    assert 5e3 / up + 5e3 / down == pytest.approx(1056.811401, abs=1e-6)


def test_time_saved_by_a_hundredth_of_drag_area() -> None:
    # 40 km at 250 W, CdA 0.30 to 0.29; at fixed power dlnT/dlnCdA = Fa/(3 Fa + Fr) = 0.317048.
    before, after = 40e3 / steady_speed(250.0, 80.0, 0.0, 0.004, np.array([0.30, 0.29]), 1.2)
    assert before == pytest.approx(3760.546536, abs=1e-6)
    assert after == pytest.approx(3720.355164, abs=1e-6)
    assert before - after == pytest.approx(40.191372, abs=1e-6)
    low, high = steady_speed(250.0, 80.0, 0.0, 0.004, 0.30 * np.array([1 - 1e-4, 1 + 1e-4]), 1.2)
    assert float(np.log(low / high) / np.log((1 + 1e-4) / (1 - 1e-4))) == pytest.approx(0.317048, abs=1e-6)
    one_percent = steady_speed(250.0, 80.0, 0.0, 0.004, 0.30 * np.array([1.0, 1.01]), 1.2)
    assert float(one_percent[0] / one_percent[1] - 1.0) / 0.01 == pytest.approx(0.316, abs=5e-6)


def coast(grade: float) -> Callable[[float, np.ndarray], list[float]]:
    """Return the motion of a rider who does not pedal, from the package's own terms without bearings."""

    def motion(_: float, state: np.ndarray) -> list[float]:
        v = max(float(state[0]), 1e-12)
        terms = road_power(v, mass=80.0, cda=0.30, crr=0.004, density=1.2, grade=grade)
        return [-float(terms.aero + terms.rolling + terms.potential) / (80.0 * v), v, v**2 * v]

    return motion


@pytest.mark.parametrize(
    ("start", "time", "speed", "distance"),
    [
        (0.0, 10.0, 5.267075019, 26.863739),
        (0.0, 20.0, 9.457288674, 101.654871),
        (0.0, 60.0, 15.154211160, 634.991226),
        (5.0, 10.0, 9.265543649, 72.481357),
        (20.0, 10.0, 17.640071060, None),
    ],
)
def test_coasting_down_six_percent(start: float, time: float, speed: float, distance: float | None) -> None:
    run = solve_ivp(coast(-0.06), (0.0, time), [start, 0.0, 0.0], method="DOP853", rtol=1e-12, atol=1e-12)
    assert run.y[0, -1] == pytest.approx(speed, abs=1e-8)
    if distance is not None:
        assert run.y[1, -1] == pytest.approx(distance, abs=1e-6)


def test_terminal_speed_down_six_percent() -> None:
    assert float(steady_speed(0.0, 80.0, -0.06, 0.004, 0.30, 1.2)) == pytest.approx(15.608922672, abs=1e-9)


@pytest.mark.parametrize(
    ("time", "speed", "distance"),
    [(10.0, 9.133303328, 104.544393), (30.0, 5.889808476, 251.216292), (60.0, 3.323426872, 385.538288)],
)
def test_coasting_to_a_stop_on_the_level(time: float, speed: float, distance: float) -> None:
    run = solve_ivp(coast(0.0), (0.0, time), [12.0, 0.0, 0.0], method="DOP853", rtol=1e-12, atol=1e-12)
    assert run.y[0, -1] == pytest.approx(speed, abs=1e-8)
    assert run.y[1, -1] == pytest.approx(distance, abs=1e-6)


def test_stop_of_a_coast_down() -> None:
    def stopped(_: float, state: np.ndarray) -> float:
        return float(state[0]) - 1e-9

    stopped.terminal = True  # type: ignore[attr-defined]
    run = solve_ivp(
        coast(0.0), (0.0, 200.0), [12.0, 0.0, 0.0], method="DOP853", rtol=1e-12, atol=1e-12, events=stopped
    )
    assert run.t[-1] == pytest.approx(131.558433577, abs=1e-6)
    assert run.y[1, -1] == pytest.approx(494.593731963, abs=1e-6)
    assert run.y[2, -1] == pytest.approx(23377.230895, abs=1e-3)  # ∫v² dx [m³/s²]


def test_constant_power_against_drag_alone() -> None:
    # v³(x) = P/k + (v0³ - P/k)·exp(-3kx/m): P 300 W, k 0.18, v0 3 m/s.
    def motion(_: float, state: np.ndarray) -> list[float]:
        v = float(state[0])
        aero = float(road_power(v, mass=80.0, cda=0.30, crr=0.0, density=1.2).aero)
        return [(300.0 - aero) / (80.0 * v * v)]  # dv/dx

    run = solve_ivp(
        motion, (0.0, 1000.0), [3.0], method="DOP853", rtol=1e-12, atol=1e-12, t_eval=[50.0, 200.0, 1000.0]
    )
    np.testing.assert_allclose(run.y[0], [7.919395162, 10.747986795, 11.851756793], atol=1e-8)


def test_rolling_start_over_one_kilometre() -> None:
    # 2 m/s, 400 W at 0.976, 80 kg + 1.447462 kg of wheel inertia, level: 88.091112 s, 12.491354 m/s
    # (solve_ivp 1e-12).
    def motion(_: float, state: np.ndarray) -> list[float]:
        v = float(state[0])
        terms = road_power(v, mass=80.0, cda=0.30, crr=0.004, density=1.2)
        return [(0.976 * 400.0 - float(terms.aero + terms.rolling)) / (81.447462 * v * v), 1.0 / v]

    run = solve_ivp(motion, (0.0, 1000.0), [2.0, 0.0], method="DOP853", rtol=1e-12, atol=1e-12)
    assert run.y[0, -1] == pytest.approx(12.491354, abs=1e-6)
    assert run.y[1, -1] == pytest.approx(88.091112, abs=1e-6)


def test_two_speeds_give_drag_area_and_rolling_back() -> None:
    # The force model of J. B. Snyder, T. Schmidt 2004, Human Power eJournal 1, 5, equations 1-5 (read).
    speeds = np.array([7.0, 12.0])
    terms = road_power(speeds, mass=80.0, cda=0.30, crr=0.004, density=1.2)
    power = terms.aero + terms.rolling
    np.testing.assert_allclose(power, [83.706896, 348.697536], atol=5.1e-7)
    f1, f2 = power / speeds
    spread = speeds[1] ** 2 - speeds[0] ** 2
    assert 2.0 * (f2 - f1) / (1.2 * spread) == pytest.approx(0.30, rel=1e-12)
    assert (f1 * speeds[1] ** 2 - f2 * speeds[0] ** 2) / (spread * 80.0 * 9.80665) == pytest.approx(
        0.004, rel=1e-12
    )
