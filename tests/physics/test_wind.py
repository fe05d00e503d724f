from __future__ import annotations

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from ridercda.physics.wind import (
    air_force,
    apparent_wind,
    axial_area,
    axial_table,
    log_profile,
    plain_axial_area,
)

YAW = np.radians([0.0, 5.0, 10.0, 15.0])
CXA = np.array([0.240, 0.236, 0.228, 0.231])
angles = st.floats(-10.0, 10.0)


@given(st.floats(0.0, 25.0), angles, st.floats(0.0, 15.0), angles)
def test_apparent_wind_is_the_vector_sum(speed: float, heading: float, wind: float, source: float) -> None:
    met = apparent_wind(speed, heading, wind, source)
    # East and north of the air's motion relative to the rider, turned to the rider's right and front.
    east = -wind * np.sin(source) - speed * np.sin(heading)
    north = -wind * np.cos(source) - speed * np.cos(heading)
    ahead = east * np.sin(heading) + north * np.cos(heading)
    right = east * np.cos(heading) - north * np.sin(heading)
    assert float(met.along) == pytest.approx(-ahead, abs=1e-9)
    assert float(met.across) == pytest.approx(-right, abs=1e-9)
    assert float(met.speed) == pytest.approx(np.hypot(east, north), abs=1e-9)


def test_wind_from_the_right_is_positive_yaw_whichever_way_one_rides() -> None:
    heading = np.radians([0.0, 90.0, 180.0, 270.0, 359.0])
    met = apparent_wind(10.0, heading, 3.0, heading + np.pi / 2)
    np.testing.assert_allclose(met.across, 3.0)
    assert np.all(met.yaw > 0)
    assert np.all(apparent_wind(10.0, heading, 3.0, heading - np.pi / 2).yaw < 0)


def test_apparent_wind_broadcasts_and_keeps_dropouts() -> None:
    met = apparent_wind(np.array([[10.0], [np.nan]]), np.array([0.0, 1.0, 2.0]), 2.0, 0.5)
    for values in met:
        assert values.shape == (2, 3)
        assert np.all(np.isfinite(values[0]))
        assert np.all(np.isnan(values[1]))


@given(st.floats(0.5, 30.0), st.floats(1e-4, 0.4))
def test_wind_grows_with_height(height: float, roughness: float) -> None:
    assert float(log_profile(height, 10.0, roughness)) < float(log_profile(height * 1.1, 10.0, roughness))
    assert float(log_profile(10.0, 10.0, roughness)) == 1.0


def test_rougher_ground_shelters_the_rider() -> None:
    assert np.all(np.diff(log_profile(1.2, 10.0, np.array([0.0002, 0.005, 0.03, 0.1, 0.25, 0.5]))) < 0)


@pytest.mark.parametrize("roughness", [0.0, -0.1])
def test_roughness_must_be_positive(roughness: float) -> None:
    with pytest.raises(ValueError, match=r"roughness must be positive \(m\)"):
        log_profile(1.2, 10.0, roughness)


@pytest.mark.parametrize("heights", [(0.02, 10.0), (1.2, 0.03)])
def test_heights_must_be_above_the_roughness(heights: tuple[float, float]) -> None:
    with pytest.raises(ValueError, match="heights must be above the roughness length"):
        log_profile(*heights, 0.03)


def test_table_is_hit_at_its_angles_and_straight_between() -> None:
    np.testing.assert_allclose(axial_area(YAW, YAW, CXA), CXA)
    assert float(axial_area(np.radians(7.5), YAW, CXA)) == pytest.approx(0.232)


@given(st.floats(-np.pi, np.pi))
def test_table_is_mirrored(yaw: float) -> None:
    assert float(axial_area(yaw, YAW, CXA)) == float(axial_area(-yaw, YAW, CXA))


def test_table_is_held_flat_beyond_its_last_angle() -> None:
    beyond = np.radians([15.0, 20.0, 45.0, 79.9, -30.0])
    np.testing.assert_allclose(axial_area(beyond, YAW, CXA), 0.231)


def test_table_is_held_flat_below_its_first_angle() -> None:
    assert float(axial_area(0.0, np.radians([5.0, 10.0]), [0.23, 0.22])) == pytest.approx(0.23)


def test_air_that_overtakes_the_rider_pushes() -> None:
    behind = axial_area(np.radians([100.0, 135.0, 180.0]), YAW, CXA)
    np.testing.assert_allclose(behind, -0.231)
    assert float(axial_area(np.pi / 2, YAW, CXA)) == pytest.approx(0.0, abs=1e-12)


def test_area_has_no_jump_anywhere() -> None:
    around = np.linspace(-np.pi, np.pi, 20001)
    assert np.max(np.abs(np.diff(axial_area(around, YAW, CXA)))) < 1e-3


def test_table_that_reaches_past_broadside_is_left_alone() -> None:
    full, areas = np.radians([0.0, 90.0, 180.0]), np.array([0.24, 0.05, -0.2])
    np.testing.assert_array_equal(axial_table(full, areas)[1], areas)


def test_one_angle_is_a_table() -> None:
    assert float(axial_area(np.radians(20.0), [0.0], [0.25])) == pytest.approx(0.25)


def test_area_at_a_dropout_is_a_dropout() -> None:
    assert np.isnan(axial_area(np.nan, YAW, CXA))


@pytest.mark.parametrize(
    ("yaw", "cxa", "message"),
    [
        ([0.0, 0.1], [0.2], "as many areas as angles"),
        ([0.1, 0.0], [0.2, 0.2], "increasing angles from 0 to 180"),
        ([-0.1, 0.1], [0.2, 0.2], "increasing angles from 0 to 180"),
        ([0.0, 10.0], [0.2, 0.2], "increasing angles from 0 to 180"),
        ([0.0, np.nan], [0.2, 0.2], "increasing angles from 0 to 180"),
        ([0.0, 0.1], [0.2, np.inf], "finite areas"),
    ],
)
def test_what_is_no_table_is_refused(yaw: list[float], cxa: list[float], message: str) -> None:
    with pytest.raises(ValueError, match=message):
        axial_area(0.1, yaw, cxa)


@given(st.floats(1.0, 20.0), st.floats(-8.0, 8.0), st.floats(-8.0, 8.0))
def test_plain_drag_area_gives_air_speed_times_its_along_track_part(
    speed: float, headwind: float, crosswind: float
) -> None:
    along, air = speed + headwind, np.hypot(speed + headwind, crosswind)
    assume(air > 1e-3)
    yaw = np.arctan2(crosswind, along)
    force = float(air_force(1.2, plain_axial_area(yaw, 0.3), air))
    assert force == pytest.approx(0.5 * 1.2 * 0.3 * air * along, rel=1e-9, abs=1e-9)
