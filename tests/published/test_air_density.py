"""Moist air against its published formula and an independent equation of state.

Sources: A. Picard, R. S. Davis, M. Gläser, K. Fujii, "Revised formula for the density of moist air
(CIPM-2007)," Metrologia 45, 149-155, 2008, doi:10.1088/0026-1394/45/2/004 (constants read in three
independent public source files that cite the paper and agree; the paper's own table not read). The table was
computed from those constants outside this package. CoolProp's humid air: a virial equation of state after
Herrmann et al., computed here.
"""

from __future__ import annotations

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI
from CoolProp.HumidAirProp import HAPropsSI

from ridercda.physics.air import air_density, saturation_vapour_pressure

# temperature [degC], pressure [Pa], humidity, CIPM-2007 [kg/m^3], CoolProp 8.0.0 [kg/m^3]
TABLE = (
    (0, 101325, 0.0, 1.293049, 1.293096),
    (0, 101325, 1.0, 1.290109, 1.290156),
    (5, 85000, 0.9, 1.061354, 1.061390),
    (10, 100000, 0.5, 1.228063, 1.228108),
    (15, 101325, 0.0, 1.225521, 1.225567),
    (20, 101325, 0.5, 1.199314, 1.199359),
    (20, 101325, 1.0, 1.194087, 1.194133),
    (20, 90000, 0.5, 1.064638, 1.064676),
    (25, 95000, 0.6, 1.101972, 1.102013),
    (30, 101325, 0.8, 1.150012, 1.150056),
    (30, 70000, 0.3, 0.799045, 0.799070),
    (40, 101325, 1.0, 1.096554, 1.096606),
    (40, 103000, 0.2, 1.139868, 1.139911),
)


@pytest.mark.parametrize(("celsius", "pressure", "humidity", "cipm", "coolprop"), TABLE)
def test_density_of_the_table(
    celsius: float, pressure: float, humidity: float, cipm: float, coolprop: float
) -> None:
    density = float(air_density(celsius + 273.15, pressure, humidity))
    assert density == pytest.approx(cipm, abs=5.1e-7)  # half the last digit
    assert density == pytest.approx(coolprop, rel=1e-4)


def test_density_over_the_whole_range_of_riding_weather() -> None:
    # The formula lies 3.1e-5 to 4.8e-5 below CoolProp on this range. The constants of the older CIPM-81/91
    # would put it another 6.4e-5 lower, so the band tells the two apart.
    differences = []
    for celsius in np.linspace(0.0, 40.0, 9):
        for pressure in np.linspace(70e3, 103e3, 5):
            for humidity in np.linspace(0.0, 1.0, 5):
                independent = 1.0 / HAPropsSI("Vha", "T", celsius + 273.15, "P", pressure, "R", humidity)
                density = float(air_density(celsius + 273.15, pressure, humidity))
                differences.append(density / independent - 1.0)
    assert min(differences) > -5.0e-5
    assert max(differences) < -3.0e-5


@pytest.mark.parametrize("celsius", [-10.0, -5.0])
def test_dry_density_in_frost(celsius: float) -> None:
    independent = 1.0 / HAPropsSI("Vha", "T", celsius + 273.15, "P", 101325.0, "R", 0.0)
    assert float(air_density(celsius + 273.15, 101325.0, 0.0)) == pytest.approx(independent, rel=1e-4)


@pytest.mark.parametrize(("celsius", "cipm"), [(20.0, 2339.163), (30.0, 4246.799)])
def test_saturation_pressure(celsius: float, cipm: float) -> None:
    # CIPM values computed from the constants outside this package; CoolProp's water is IAPWS-95.
    pressure = float(saturation_vapour_pressure(celsius + 273.15))
    assert pressure == pytest.approx(cipm, abs=5.1e-4)
    assert pressure == pytest.approx(PropsSI("P", "T", celsius + 273.15, "Q", 0, "Water"), rel=1e-4)


@pytest.mark.parametrize(
    ("change", "effect", "half_digit"),
    [
        ((0.0, 100.0, 0.0), 9.9e-4, 0.05e-4),
        ((1.0, 0.0, 0.0), -3.69e-3, 0.005e-3),
        ((0.0, 0.0, 0.1), -8.7e-4, 0.05e-4),
    ],
)
def test_sensitivities_at_20_degrees(
    change: tuple[float, float, float], effect: float, half_digit: float
) -> None:
    # Computed from the paper's constants outside this package, at 20 degC, 101325 Pa, 50 %.
    base = np.array([293.15, 101325.0, 0.5])
    moved = float(air_density(*(base + change))) / float(air_density(*base)) - 1.0
    assert moved == pytest.approx(effect, abs=half_digit)
