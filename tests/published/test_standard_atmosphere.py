"""The standard atmosphere and normal gravity against published values.

Sources: ISO 2533:1975 and U.S. Standard Atmosphere 1976; the table's closed form was computed outside this
package and agrees with two independent libraries to 1e-6. D. R. Bassett et al., "Comparing cycling world hour
records, 1967-1996," Med. Sci. Sports Exerc. 31, 1665, 1999: density 20 % lower at 2300 m (read). Normal
gravity: WGS84 Somigliana with second-order free-air term (constants from memory, values computed outside this
package).
"""

from __future__ import annotations

import numpy as np
import pytest

from ridercda.physics.air import pressure_at_altitude, pressure_from_sea_level, standard_atmosphere
from ridercda.physics.geodesy import gravity

EARTH_RADIUS = 6356766.0  # [m] of the standard

# altitude [m], density at that geopotential and at that geometric altitude [kg/m^3], pressure at the
# geopotential [Pa]
TABLE = (
    (0.0, 1.225000, 1.225000, 101325.00),
    (500.0, 1.167269, 1.167273, 95460.84),
    (1000.0, 1.111643, 1.111660, 89874.56),
    (2000.0, 1.006490, 1.006554, 79495.20),
    (2300.0, 0.976481, 0.976563, 76578.43),
    (3000.0, 0.909122, 0.909254, 70108.53),
)


@pytest.mark.parametrize(("altitude", "at_geopotential", "at_geometric", "pressure"), TABLE)
def test_table(altitude: float, at_geopotential: float, at_geometric: float, pressure: float) -> None:
    assert float(standard_atmosphere(altitude).density) == pytest.approx(at_geometric, rel=2e-6)
    geometric = EARTH_RADIUS * altitude / (EARTH_RADIUS - altitude)
    air = standard_atmosphere(geometric)
    assert float(air.density) == pytest.approx(at_geopotential, rel=2e-6)
    assert float(air.pressure) == pytest.approx(pressure, abs=0.01)
    assert float(air.temperature) == pytest.approx(288.15 - 0.0065 * altitude, abs=1e-9)


@pytest.mark.parametrize(("altitude", "pressure"), [(row[0], row[3]) for row in TABLE])
def test_hypsometric_equation_reproduces_the_standard_pressures(altitude: float, pressure: float) -> None:
    up = float(pressure_at_altitude(101325.0, 0.0, altitude, 288.15))
    assert up == pytest.approx(pressure, abs=0.01)
    reduced = float(pressure_from_sea_level(101325.0, altitude, 288.15 - 0.0065 * altitude))
    assert reduced == pytest.approx(pressure, abs=0.01)


def test_density_at_2300_m_is_20_percent_lower() -> None:
    high, low = standard_atmosphere(np.array([2300.0, 0.0])).density
    assert 1.0 - high / low == pytest.approx(0.20, abs=0.01)


def test_speed_gain_at_altitude_from_drag_alone() -> None:
    # Speed at equal power against drag alone goes with density^(-1/3): 1.078510 at 2300 m (geopotential),
    # closed form.
    low, high = standard_atmosphere(np.array([0.0, EARTH_RADIUS * 2300.0 / (EARTH_RADIUS - 2300.0)])).density
    assert (low / high) ** (1.0 / 3.0) == pytest.approx(1.078510, abs=1e-6)


@pytest.mark.parametrize(
    ("latitude", "altitude", "expected"),
    [
        (0.0, 0.0, 9.78032534),
        (45.0, 0.0, 9.80619777),
        (51.5, 0.0, 9.81203358),
        (90.0, 0.0, 9.83218494),
        (45.0, 1000.0, 9.80311294),
        (45.5, 2000.0, 9.80048219),
    ],
)
def test_normal_gravity(latitude: float, altitude: float, expected: float) -> None:
    assert float(gravity(np.radians(latitude), altitude)) == pytest.approx(expected, abs=1e-5)
