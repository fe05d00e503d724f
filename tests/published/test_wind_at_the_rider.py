"""Wind profile and apparent wind against published tables and closed forms.

Sources: roughness classes of Davenport as in R. Stull, "Meteorology for Scientists and Engineers" (table
read), the profile as in WMO-No. 8 (from memory; form read in a reference article), FAO Irrigation and
Drainage Paper 56, equation 47 (formula from memory). Numbers marked exact are arithmetic on the closed forms.
"""

from __future__ import annotations

import numpy as np
import pytest

from ridercda.physics.wind import air_force, apparent_wind, log_profile, plain_axial_area


@pytest.mark.parametrize(
    ("height", "roughness", "expected"),
    [
        (2.0, 0.03, 0.722947),
        (1.5, 0.03, 0.673425),
        (1.0, 0.03, 0.603627),
        (2.0, 0.1, 0.650515),
        (1.0, 0.1, 0.5),
        (1.0, 0.005, 0.697064),
    ],
)
def test_log_profile(height: float, roughness: float, expected: float) -> None:
    assert float(log_profile(height, 10.0, roughness)) == pytest.approx(expected, abs=5.1e-7)  # exact


def test_log_profile_agrees_with_the_formula_for_short_grass() -> None:
    # u2 = uz·4.87/ln(67.8 z - 5.42) is the same profile with a displacement of 0.08 m and a roughness of
    # 0.01476 m.
    for height in (10.0, 3.0):
        published = 4.87 / np.log(67.8 * height - 5.42)
        assert float(log_profile(2.0 - 0.08, height - 0.08, 0.01476)) == pytest.approx(published, abs=3e-4)


@pytest.mark.parametrize(
    ("speed", "wind", "source", "heading", "air", "yaw", "along", "across", "factor"),
    [
        (10, 5, 0, 0, 15.0, 0.0, 15.0, 0.0, 2.25),
        (10, 5, 180, 0, 5.0, 0.0, 5.0, 0.0, 0.25),
        (10, 5, 90, 0, 11.180340, 26.565051, 10.0, 5.0, 1.118034),
        (10, 5, 45, 0, 13.989663, 14.638807, 13.535534, 3.535534, 1.893576),
        (12, 4, 300, 250, 14.889849, 11.875732, 14.571150, 3.064178, 1.506682),
    ],
)
def test_apparent_wind(
    speed: float,
    wind: float,
    source: float,
    heading: float,
    air: float,
    yaw: float,
    along: float,
    across: float,
    factor: float,
) -> None:
    met = apparent_wind(speed, np.radians(heading), wind, np.radians(source))
    assert float(met.along) == pytest.approx(along, abs=5.1e-7)
    assert float(met.across) == pytest.approx(across, abs=5.1e-7)
    assert float(met.speed) == pytest.approx(air, abs=5.1e-7)
    assert np.degrees(float(met.yaw)) == pytest.approx(yaw, abs=5.1e-7)
    force = float(air_force(2.0, plain_axial_area(met.yaw, 1.0), met.speed))  # V·u
    assert force / speed**2 == pytest.approx(factor, abs=5.1e-7)


@pytest.mark.parametrize(("wind", "excess"), [(1.0, 0.01), (2.0, 0.04)])
def test_out_and_back_in_a_wind_along_the_road(wind: float, excess: float) -> None:
    # Exact: at a constant ground speed the mean of (v ± w)² is v² + w².
    out, back = apparent_wind(10.0, np.array([0.0, np.pi]), wind, 0.0).along
    assert 0.5 * (out**2 + back**2) / 100.0 - 1.0 == pytest.approx(excess, abs=1e-12)
    if wind == 1.0:
        assert out**2 / 100.0 - 1.0 == pytest.approx(0.21, abs=1e-12)
        assert back**2 / 100.0 - 1.0 == pytest.approx(-0.19, abs=1e-12)


@pytest.mark.parametrize(("ratio", "factor"), [(0.1, 1.0074953), (0.3, 1.0671174), (0.5, 1.1845053)])
def test_wind_from_all_sides_costs_three_quarters_of_its_square(ratio: float, factor: float) -> None:
    # Quadrature done outside this package; the series is 1 + ¾(w/v)².
    around = np.linspace(0.0, 2.0 * np.pi, 720, endpoint=False)
    met = apparent_wind(1.0, 0.0, ratio, around)
    mean = float(np.mean(air_force(2.0, plain_axial_area(met.yaw, 1.0), met.speed)))
    assert mean == pytest.approx(factor, abs=5.1e-8)
    assert mean == pytest.approx(1.0 + 0.75 * ratio**2, abs=0.1 * ratio**2)
