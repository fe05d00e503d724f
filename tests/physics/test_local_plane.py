from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from ridercda.physics.geodesy import inverse
from ridercda.physics.local_plane import LocalPlane

origins = st.tuples(st.floats(-1.4, 1.4), st.floats(-np.pi, np.pi))


@settings(max_examples=60)
@given(origins, st.floats(-20e3, 20e3), st.floats(-20e3, 20e3))
def test_map_and_back(origin: tuple[float, float], east: float, north: float) -> None:
    plane = LocalPlane(*origin)
    x, y = plane.project(*plane.locate(east, north))
    # The series ends at the fourth power of n = 0.00168; the fifth, times the Earth's radius, is 0.09 µm per
    # unit of its coefficients, which are below 2.
    assert float(x) == pytest.approx(east, abs=2e-7)
    assert float(y) == pytest.approx(north, abs=2e-7)


@settings(max_examples=60)
@given(
    origins,
    st.floats(-700.0, 700.0),
    st.floats(-700.0, 700.0),
    st.floats(-700.0, 700.0),
    st.floats(-700.0, 700.0),
)
def test_lengths_are_those_of_the_ellipsoid_within_a_kilometre(
    origin: tuple[float, float], x1: float, y1: float, x2: float, y2: float
) -> None:
    plane = LocalPlane(*origin)
    (lat1, lon1), (lat2, lon2) = plane.locate(x1, y1), plane.locate(x2, y2)
    true = float(inverse(lat1, lon1, lat2, lon2).distance)
    assert np.hypot(x2 - x1, y2 - y1) == pytest.approx(true, rel=1.3e-8, abs=1e-7)


@settings(max_examples=60)
@given(origins, st.floats(0.0, 2 * np.pi))
def test_directions_from_the_origin_are_true(origin: tuple[float, float], azimuth: float) -> None:
    plane = LocalPlane(*origin)
    lat, lon = plane.locate(1000.0 * np.sin(azimuth), 1000.0 * np.cos(azimuth))
    found = float(inverse(*origin, lat, lon).azimuth)
    assert abs((found - azimuth + np.pi) % (2 * np.pi) - np.pi) < 1e-6


def test_meridian_of_the_origin_keeps_its_length() -> None:
    plane = LocalPlane(0.8, 0.1)
    north = np.array([-50e3, 10e3, 300e3])
    lat, lon = plane.locate(np.zeros(3), north)
    np.testing.assert_allclose(lon, 0.1, atol=1e-12)
    np.testing.assert_allclose(inverse(0.8, 0.1, lat, lon).distance, np.abs(north), atol=1e-5)


def test_ten_kilometres_beside_the_meridian_lengths_grow_by_a_millionth() -> None:
    plane = LocalPlane(np.radians(50.0), 0.0)
    lat, lon = plane.locate(np.array([10e3, 10e3]), np.array([0.0, 100.0]))
    ratio = 100.0 / float(inverse(lat[0], lon[0], lat[1], lon[1]).distance)
    assert ratio - 1.0 == pytest.approx(10e3**2 / (2 * 6.38e6**2), rel=0.02)


def test_date_line_is_no_border() -> None:
    east, _ = LocalPlane(-0.3, np.pi - 1e-5).project(-0.3, -np.pi + 1e-5)
    assert 0.0 < float(east) < 200.0


def test_dropouts_stay() -> None:
    east, north = LocalPlane(0.8, 0.1).project(np.array([0.8, np.nan]), 0.1)
    assert float(east[0]) == pytest.approx(0.0, abs=1e-9)
    assert float(north[0]) == pytest.approx(0.0, abs=1e-9)
    assert np.isnan(north[1])


@pytest.mark.parametrize("origin", [(45.0, 6.0), (np.nan, 0.0), (np.pi / 2, 0.0), (0.8, np.inf)])
def test_impossible_origin_is_refused(origin: tuple[float, float]) -> None:
    with pytest.raises(ValueError, match="a local plane needs an origin in radians away from the poles"):
        LocalPlane(*origin)
