from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from ridercda.physics.power_balance import effective_mass, martin_air_power, road_power, steady_speed

BASE = {"mass": 80.0, "cda": 0.30, "crr": 0.004, "density": 1.2}
speeds = st.floats(0.5, 25.0)


@given(speeds, st.floats(-0.1, 0.15), st.floats(-1.0, 1.0), st.floats(-6.0, 6.0), st.floats(-6.0, 6.0))
def test_terms_add_up_to_the_power_at_the_wheel(
    speed: float, grade: float, acceleration: float, headwind: float, crosswind: float
) -> None:
    terms = road_power(
        speed,
        grade=grade,
        acceleration=acceleration,
        headwind=headwind,
        crosswind=crosswind,
        efficiency=0.97,
        **BASE,
    )
    assert float(terms.wheel) == pytest.approx(sum(float(t) for t in terms[:5]), abs=1e-9)
    assert float(terms.meter) == float(terms.wheel) / (0.97 if terms.wheel > 0 else 1.0)


@given(speeds, st.floats(-0.2, 0.2))
def test_potential_power_is_weight_times_rise(speed: float, grade: float) -> None:
    terms = road_power(speed, grade=grade, **BASE)
    rise = speed * np.sin(np.arctan(grade))
    assert float(terms.potential) == pytest.approx(80.0 * 9.80665 * rise, abs=1e-9)
    assert float(terms.rolling) == pytest.approx(0.004 * 80.0 * 9.80665 * speed * np.cos(np.arctan(grade)))


def test_each_term_moves_with_what_it_stands_for_and_no_other() -> None:
    base = road_power(10.0, grade=0.01, acceleration=0.1, **BASE)
    for change, moved in (
        ({"cda": 0.31}, {"aero"}),
        ({"crr": 0.005}, {"rolling"}),
        ({"density": 1.3}, {"aero"}),
        ({"headwind": 1.0}, {"aero"}),
        ({"crosswind": 3.0}, {"aero"}),
        ({"acceleration": 0.2}, {"kinetic"}),
        ({"moving_mass": 82.0}, {"kinetic"}),
        ({"grade": 0.02}, {"potential", "rolling"}),
    ):
        terms = road_power(10.0, **{"grade": 0.01, "acceleration": 0.1, **BASE, **change})
        differing = {name for name in terms._fields[:5] if getattr(terms, name) != getattr(base, name)}
        assert differing == moved, change


def test_wind_from_behind_faster_than_the_rider_pushes() -> None:
    assert float(road_power(3.0, headwind=-5.0, **BASE).aero) < 0.0


def test_crosswind_costs_power() -> None:
    calm, windy = road_power(10.0, crosswind=np.array([0.0, 4.0]), **BASE).aero
    assert windy / calm == pytest.approx(np.hypot(10.0, 4.0) / 10.0)


def test_braking_power_is_no_matter_of_the_chain() -> None:
    terms = road_power(15.0, grade=-0.10, efficiency=0.97, **BASE)
    assert float(terms.wheel) < 0.0
    assert float(terms.meter) == float(terms.wheel)


def test_terms_broadcast_together() -> None:
    terms = road_power(np.array([[8.0], [np.nan]]), headwind=np.array([0.0, 1.0, 2.0]), **BASE)
    for values in terms:
        assert values.shape == (2, 3)
    assert np.all(np.isnan(terms.meter[1]))
    assert np.all(np.isfinite(terms.meter[0]))


@pytest.mark.parametrize("efficiency", [0.0, -0.5, 97.7])
def test_efficiency_is_a_fraction(efficiency: float) -> None:
    with pytest.raises(ValueError, match="drivetrain efficiency must be over 0 and at most 1"):
        road_power(10.0, efficiency=efficiency, **BASE)


@given(speeds, st.floats(-5.0, 5.0), st.floats(-5.0, 5.0))
def test_martins_form_is_the_same_force_with_its_area_converted(
    speed: float, headwind: float, crosswind: float
) -> None:
    along = speed + headwind
    yaw = np.arctan2(crosswind, along)
    plain = road_power(speed, headwind=headwind, crosswind=crosswind, **{**BASE, "cda": 0.26 * np.cos(yaw)})
    theirs = float(martin_air_power(speed, along, 0.26, 1.2)) * np.sign(along)
    # Theirs squares the along-track speed, so its sign is lost where the wind overtakes the rider.
    assert float(plain.aero) * np.sign(np.cos(yaw)) == pytest.approx(theirs, rel=1e-9, abs=1e-9)


def test_wheels_add_their_inertia_over_the_square_of_the_radius() -> None:
    radius = 2.105 / (2 * np.pi)
    energy = 0.5 * 84.0 * 10.0**2 + 0.5 * 0.14 * (10.0 / radius) ** 2
    assert 0.5 * float(effective_mass(84.0, 0.14, 2.105)) * 10.0**2 == pytest.approx(energy, rel=1e-12)


@settings(max_examples=200)
@given(
    st.floats(0.0, 1500.0),
    st.floats(40.0, 150.0),
    st.floats(-0.25, 0.25),
    st.floats(0.0, 0.02),
    st.floats(0.1, 0.8),
    st.floats(0.7, 1.4),
    st.floats(-20.0, 20.0),
    st.floats(0.8, 1.0),
)
def test_steady_speed_balances_the_power(
    power: float,
    mass: float,
    grade: float,
    crr: float,
    cda: float,
    density: float,
    headwind: float,
    efficiency: float,
) -> None:
    for wind in (0.0, headwind):
        v = float(steady_speed(power, mass, grade, crr, cda, density, wind, efficiency))
        assert v >= 0.0
        terms = road_power(v, mass=mass, cda=cda, crr=crr, density=density, grade=grade, headwind=wind)
        needed = float(terms.aero + terms.rolling + terms.potential)
        scale = abs(terms.aero) + abs(terms.rolling) + abs(terms.potential) + efficiency * power
        assert needed == pytest.approx(efficiency * power, abs=1e-9 * float(scale) + 1e-9)


@settings(max_examples=100)
@given(st.floats(20.0, 600.0), st.floats(-0.1, 0.12), st.floats(-8.0, 8.0))
def test_steady_speed_answers_in_the_right_direction(power: float, grade: float, headwind: float) -> None:
    def speed(**change: float) -> float:
        values = {
            "power": power,
            "grade": grade,
            "headwind": headwind,
            "cda": 0.3,
            "crr": 0.004,
            "mass": 80.0,
        }
        return float(steady_speed(density=1.2, **{**values, **change}))

    base = speed()
    assert speed(power=power + 10.0) > base
    assert speed(headwind=headwind + 0.5) < base
    assert speed(grade=grade + 0.005) < base
    assert speed(crr=0.005) < base
    if base + headwind > 0.1:  # a smaller rider is faster, unless the wind pushes
        assert speed(cda=0.29) > base


def test_wind_near_zero_joins_the_still_air_solution() -> None:
    still = steady_speed(250.0, 80.0, np.linspace(-0.1, 0.1, 21), 0.004, 0.3, 1.2)
    nearly = steady_speed(250.0, 80.0, np.linspace(-0.1, 0.1, 21), 0.004, 0.3, 1.2, 1e-12)
    np.testing.assert_allclose(nearly, still, rtol=1e-11)


def test_rider_without_power_stands_on_the_level_and_is_blown_along_by_a_storm() -> None:
    assert float(steady_speed(0.0, 80.0, 0.0, 0.004, 0.3, 1.2)) == 0.0
    assert float(steady_speed(0.0, 80.0, 0.0, 0.004, 0.3, 1.2, 3.0)) == 0.0
    blown = float(steady_speed(0.0, 80.0, 0.0, 0.004, 0.3, 1.2, -15.0))
    assert blown == pytest.approx(15.0 - np.sqrt(0.004 * 80.0 * 9.80665 / 0.18), rel=1e-12)


def test_no_slope_and_no_rolling_is_the_cube_root() -> None:
    assert float(steady_speed(250.0, 80.0, 0.0, 0.0, 0.3, 1.2)) == pytest.approx(
        (250.0 / 0.18) ** (1 / 3), rel=1e-14
    )
    assert float(steady_speed(250.0, 80.0, 0.0, 1e-300, 0.3, 1.2)) == pytest.approx(
        (250.0 / 0.18) ** (1 / 3), rel=1e-14
    )


def test_steep_climb_keeps_its_digits() -> None:
    # Nearly all power goes into climbing; the cube's own formula would cancel here.
    v = float(steady_speed(1e-3, 80.0, 0.20, 0.004, 0.3, 1.2))
    weight = 80.0 * 9.80665 * (0.20 + 0.004) / np.sqrt(1 + 0.20**2)
    assert v == pytest.approx(1e-3 / weight, rel=1e-12)


def test_steady_speed_keeps_dropouts_and_shapes() -> None:
    speed = steady_speed(np.array([[200.0], [np.nan]]), 80.0, 0.0, 0.004, 0.3, 1.2, np.array([0.0, 2.0]))
    assert speed.shape == (2, 2)
    assert np.all(np.isfinite(speed[0]))
    assert np.all(np.isnan(speed[1]))


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        ((-1.0, 80.0, 0.0, 0.004, 0.3, 1.2), "power must be 0 W or more, not -1"),
        ((200.0, 80.0, 0.0, 0.004, 0.0, 1.2), "drag area and air density must be positive"),
        ((200.0, 80.0, 0.0, 0.004, 0.3, -1.2), "drag area and air density must be positive"),
    ],
)
def test_steady_speed_refuses(arguments: tuple[float, ...], message: str) -> None:
    with pytest.raises(ValueError, match=message):
        steady_speed(*arguments)
