"""Geodesic distances and directions.

Sources: the table is from geographiclib 2.1 (C. F. F. Karney, doi:10.1007/s00190-012-0578-z), an independent
library, whose first row is its own documented example; Flinders Peak to Buninyong is from the GDA94 Technical
Manual (figures from memory, on the GRS80 ellipsoid, which differs from WGS84 by less than 0.1 mm in radius).
"""

from __future__ import annotations

import numpy as np
import pytest
from geographiclib.geodesic import Geodesic as Reference

from ridercda.physics.geodesy import inverse


@pytest.mark.parametrize(
    ("start", "end", "distance", "azimuth"),
    [
        ((40.6, -73.8), (51.6, -0.5), 5551759.400319, 51.198882846),
        ((-41.32, 174.81), (40.96, -5.50), 19959679.267354, 161.067669986),
        ((0.0, 0.0), (0.0, 1.0), 111319.490793, 90.0),
        ((44.5, 0.0), (45.5, 0.0), 111131.777653, 0.0),
        ((45.0, 0.0), (45.0, 1.0), 78846.334710, 89.646442107),
        ((45.0, 6.0), (45.001, 6.001), 136.260740, 35.354711564),
        ((51.5, -0.1), (51.507, -0.09), 1043.389842, 41.715019228),
        ((-33.9, 151.2), (-33.91, 151.19), 1444.206826, 219.819121363),
        ((10.0, 179.999), (10.0, -179.999), 219.278728, 89.999826352),
    ],
)
def test_table(start: tuple[float, float], end: tuple[float, float], distance: float, azimuth: float) -> None:
    found = inverse(*np.radians([*start, *end]))
    assert float(found.distance) == pytest.approx(distance, abs=1e-6)
    assert np.degrees(float(found.azimuth)) == pytest.approx(azimuth, abs=2e-9)


def test_flinders_peak_to_buninyong() -> None:
    def angle(degrees: float, minutes: float, seconds: float) -> float:
        return float(np.radians(degrees + minutes / 60.0 + seconds / 3600.0))

    flinders = (-angle(37, 57, 3.72030), angle(144, 25, 29.52440))
    buninyong = (-angle(37, 39, 10.15610), angle(143, 55, 35.38390))
    there, back = inverse(*flinders, *buninyong), inverse(*buninyong, *flinders)
    assert float(there.distance) == pytest.approx(54972.271, abs=1e-3)
    assert float(there.azimuth) == pytest.approx(angle(306, 52, 5.37), abs=np.radians(0.005 / 3600.0) * 2)
    assert float(back.azimuth) == pytest.approx(angle(127, 10, 25.07), abs=np.radians(0.005 / 3600.0) * 2)


def test_against_the_library_all_over_the_globe() -> None:
    rng = np.random.default_rng(20260509)
    lat1, lat2 = np.degrees(np.arcsin(rng.uniform(-1, 1, (2, 400))))
    lon1, lon2 = rng.uniform(-180, 180, (2, 400))
    found = inverse(*np.radians([lat1, lon1, lat2, lon2]))
    for i in range(lat1.size):
        reference = Reference.WGS84.Inverse(lat1[i], lon1[i], lat2[i], lon2[i])
        assert found.distance[i] == pytest.approx(reference["s12"], abs=1e-6)
        assert np.degrees(found.azimuth[i]) == pytest.approx(reference["azi1"] % 360.0, abs=1e-7)


def test_against_the_library_where_points_nearly_face_each_other() -> None:
    rng = np.random.default_rng(7)
    for lat1, offset_lat, offset_lon in zip(
        rng.uniform(-80, 80, 60), rng.uniform(-0.4, 0.4, 60), rng.uniform(-0.55, 0.55, 60), strict=True
    ):
        lat2, lon2 = -lat1 + offset_lat, 180.0 + offset_lon
        reference = Reference.WGS84.Inverse(lat1, 0.0, lat2, lon2)
        found = inverse(*np.radians([lat1, 0.0, lat2, lon2]))
        assert float(found.distance) == pytest.approx(reference["s12"], abs=1e-6)
        end = Reference.WGS84.Direct(lat1, 0.0, np.degrees(float(found.azimuth)), float(found.distance))
        assert end["lat2"] == pytest.approx(lat2, abs=1e-9)
        assert (end["lon2"] - lon2) % 360.0 == pytest.approx(0.0, abs=1e-9) or (
            (lon2 - end["lon2"]) % 360.0 == pytest.approx(0.0, abs=1e-9)
        )


@pytest.mark.parametrize("length", [0.5, 5.0, 1000.0])
def test_short_lines_against_the_library(length: float) -> None:
    rng = np.random.default_rng(11)
    for latitude, azimuth in zip(rng.uniform(-85, 85, 50), rng.uniform(0, 360, 50), strict=True):
        end = Reference.WGS84.Direct(latitude, 20.0, azimuth, length)
        found = inverse(*np.radians([latitude, 20.0, end["lat2"], end["lon2"]]))
        # Degrees as doubles hold 2e-9 m at longitude 20 to 180.
        assert float(found.distance) == pytest.approx(length, abs=2e-8)
        turned = (np.degrees(float(found.azimuth)) - azimuth + 180.0) % 360.0 - 180.0
        assert abs(np.radians(turned)) * length < 2e-8
