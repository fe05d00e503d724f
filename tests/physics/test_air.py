from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from ridercda.physics.air import (
    air_density,
    pressure_at_altitude,
    pressure_from_sea_level,
    saturation_vapour_pressure,
    standard_atmosphere,
    temperature_at_altitude,
)

temperatures = st.floats(253.15, 318.15)
pressures = st.floats(60e3, 108e3)
humidities = st.floats(0.0, 1.0)


@given(temperatures, pressures, humidities)
def test_warmer_thinner_and_damper_air_is_lighter(
    temperature: float, pressure: float, humidity: float
) -> None:
    base = float(air_density(temperature, pressure, humidity))
    assert float(air_density(temperature + 1.0, pressure, humidity)) < base
    assert float(air_density(temperature, pressure + 100.0, humidity)) > base
    if humidity < 0.99:
        assert float(air_density(temperature, pressure, humidity + 0.01)) < base


@given(temperatures, pressures)
def test_dry_air_is_an_ideal_gas_within_a_tenth_of_a_percent(temperature: float, pressure: float) -> None:
    ideal = pressure / (287.05 * temperature)
    assert float(air_density(temperature, pressure, 0.0)) == pytest.approx(ideal, rel=1.2e-3)


def test_density_broadcasts_and_keeps_a_dropout_where_it_is() -> None:
    density = air_density(np.array([[290.0], [np.nan]]), np.array([100e3, 101e3, 102e3]), 0.4)
    assert density.shape == (2, 3)
    assert np.all(np.isfinite(density[0]))
    assert np.all(np.isnan(density[1]))


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        ((20.0, 101325.0, 0.5), r"temperature must be 233.15 to 333.15 \(K, not °C\)"),
        ((293.15, 1013.25, 0.5), r"pressure must be 30000 to 115000 \(Pa, not hPa\)"),
        ((293.15, 101325.0, 55.0), r"humidity must be 0 to 1 \(a fraction, not %\)"),
    ],
)
def test_density_refuses_the_usual_unit_slips(arguments: tuple[float, ...], message: str) -> None:
    with pytest.raises(ValueError, match=message):
        air_density(*arguments)


def test_refusal_counts_the_bad_values_and_names_the_first() -> None:
    with pytest.raises(ValueError, match="2 of 4 values are not, first 12 at index 1"):
        air_density([290.0, 12.0, 291.0, 14.0], 101325.0, 0.5)


def test_water_boils_at_the_pressure_of_saturation() -> None:
    # 6.1 hPa at 0 °C is the triple point's 611.657 Pa within 0.1 %, at 0.01 °C.
    assert float(saturation_vapour_pressure(273.16)) == pytest.approx(611.657, rel=1e-3)


@given(st.floats(90e3, 105e3), st.floats(-100.0, 2500.0), st.floats(-100.0, 2500.0), st.floats(263.0, 308.0))
def test_pressure_goes_there_and_back(pressure: float, low: float, high: float, temperature: float) -> None:
    there = float(pressure_at_altitude(pressure, low, high, temperature))
    t_there = float(temperature_at_altitude(temperature, low, high))
    assert float(pressure_at_altitude(there, high, low, t_there)) == pytest.approx(pressure, rel=1e-12)
    if high > low + 1.0:
        assert there < pressure


@given(st.floats(98e3, 104e3), st.floats(0.0, 2500.0), st.floats(263.0, 308.0))
def test_reducing_to_sea_level_undoes_itself(sea_level: float, altitude: float, temperature: float) -> None:
    here = float(pressure_from_sea_level(sea_level, altitude, temperature))
    assert float(pressure_at_altitude(here, altitude, 0.0, temperature)) == pytest.approx(
        sea_level, rel=1e-12
    )


def test_pressure_gradient_near_the_ground_is_that_of_the_weight_of_the_air() -> None:
    below, above = pressure_at_altitude(101325.0, 0.0, np.array([-0.5, 0.5]), 293.15)
    weight = float(air_density(293.15, 101325.0, 0.0)) * 9.80665
    assert below - above == pytest.approx(weight, rel=1e-3)


def test_altitude_beyond_the_lapse_rate_is_refused() -> None:
    with pytest.raises(ValueError, match=r"too high for a lapse rate of 6.5 K per km"):
        pressure_at_altitude(101325.0, 0.0, 60e3, 288.15)


@pytest.mark.parametrize("altitude", [-501.0, 11001.0])
def test_standard_atmosphere_is_the_lowest_layer_only(altitude: float) -> None:
    with pytest.raises(ValueError, match="altitude must be -500 to 11000"):
        standard_atmosphere(altitude)


def test_standard_air_is_dry_air_of_its_temperature_and_pressure() -> None:
    air = standard_atmosphere(np.array([0.0, 500.0, 1500.0]))
    # CIPM air has a compressibility, the standard's is ideal: 4e-4 apart.
    np.testing.assert_allclose(air.density, air_density(air.temperature, air.pressure, 0.0), rtol=6e-4)
