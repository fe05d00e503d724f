from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from ridercda.physics.geodesy import gravity, inverse

latitudes = st.floats(-1.5, 1.5)
longitudes = st.floats(-np.pi, np.pi)


@settings(max_examples=60)
@given(latitudes, longitudes, latitudes, longitudes)
def test_way_back_is_as_long(lat1: float, lon1: float, lat2: float, lon2: float) -> None:
    there, back = inverse(lat1, lon1, lat2, lon2), inverse(lat2, lon2, lat1, lon1)
    assert float(there.distance) == pytest.approx(float(back.distance), abs=1e-6)
    assert 0.0 <= float(there.azimuth) < 2 * np.pi
    assert 0.0 <= float(there.distance) < 20_003_932.0  # half a meridian


def test_same_point_is_no_way_and_has_no_direction_to_complain_of() -> None:
    found = inverse(0.8, 0.1, 0.8, 0.1)
    assert float(found.distance) == 0.0
    assert float(found.azimuth) == 0.0


def test_date_line_is_no_border() -> None:
    across = inverse(0.7, np.pi - 1e-5, 0.7, -np.pi + 1e-5)
    inland = inverse(0.7, 0.0, 0.7, 2e-5)
    assert float(across.distance) == pytest.approx(float(inland.distance), abs=1e-8)


@pytest.mark.parametrize(
    ("turn", "azimuth"), [((1e-6, 0), 0.0), ((0, 1e-6), 90.0), ((-1e-6, 0), 180.0), ((0, -1e-6), 270.0)]
)
def test_directions_run_clockwise_from_north(turn: tuple[float, float], azimuth: float) -> None:
    found = inverse(0.8, 0.3, 0.8 + turn[0], 0.3 + turn[1])
    assert np.degrees(float(found.azimuth)) == pytest.approx(azimuth, abs=1e-4)


def test_opposite_points_meet_over_a_pole() -> None:
    quarter = 10_001_965.729  # the WGS84 meridian from equator to pole [m], published constant (from memory)
    for latitude in (0.0, 0.4, np.pi / 2):
        assert float(inverse(latitude, 0.0, -latitude, np.pi).distance) == pytest.approx(
            2 * quarter, abs=2e-3
        )


def test_shapes_broadcast_and_dropouts_stay() -> None:
    found = inverse(np.array([[0.8], [np.nan]]), 0.1, 0.81, np.array([0.1, 0.2, 3.2]))
    assert found.distance.shape == found.azimuth.shape == (2, 3)
    assert np.all(np.isfinite(found.distance[0]))
    assert np.all(np.isnan(found.distance[1]))
    assert np.all(np.isnan(found.azimuth[1]))


def test_degrees_are_noticed() -> None:
    with pytest.raises(ValueError, match="radians, not degrees"):
        inverse(45.0, 6.0, 45.1, 6.0)


def test_gravity_falls_with_altitude_and_grows_towards_the_poles() -> None:
    assert np.all(np.diff(gravity(np.radians(np.arange(0, 91, 15)))) > 0)
    assert np.all(np.diff(gravity(0.8, np.array([0.0, 500.0, 2000.0]))) < 0)
    assert float(gravity(-0.7)) == float(gravity(0.7))
    # Newton's 2g/R per metre, within a percent.
    assert float(gravity(0.8, 0.0) - gravity(0.8, 1.0)) == pytest.approx(2 * 9.81 / 6.371e6, rel=0.01)
