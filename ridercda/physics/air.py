"""Moist-air density, pressure with altitude and the standard atmosphere: pure functions on SI arrays."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]

ZERO_CELSIUS = 273.15  # [K]

# CIPM-2007, the equation recommended for the density of moist air [1 of air_density].
MOLAR_GAS_CONSTANT = 8.314472  # [J mol⁻¹ K⁻¹] the value the equation was fitted with, not today's exact one
MOLAR_MASS_DRY_AIR = 28.96546e-3  # [kg mol⁻¹] at a carbon dioxide fraction of 400 ppm
MOLAR_MASS_WATER = 18.01528e-3  # [kg mol⁻¹]

# Standard atmosphere [1 of standard_atmosphere].
STANDARD_GRAVITY = 9.80665  # [m s⁻²]
STANDARD_TEMPERATURE = 288.15  # at sea level [K]
STANDARD_PRESSURE = 101325.0  # at sea level [Pa]
LAPSE_RATE = 6.5e-3  # [K m⁻¹]
GAS_CONSTANT_DRY_AIR = 287.05287  # [J kg⁻¹ K⁻¹]
STANDARD_EARTH_RADIUS = 6356766.0  # [m] of the standard's geopotential
BAROMETRIC_EXPONENT = STANDARD_GRAVITY / (GAS_CONSTANT_DRY_AIR * LAPSE_RATE)  # [1]


class StandardAir(NamedTuple):
    """Air of the standard atmosphere."""

    temperature: FloatArray  # [K]
    pressure: FloatArray  # [Pa]
    density: FloatArray  # [kg m⁻³]


def air_density(temperature: npt.ArrayLike, pressure: npt.ArrayLike, humidity: npt.ArrayLike) -> FloatArray:
    r"""Return the density of moist air by the CIPM-2007 equation.

    Parameters
    ----------
    temperature : array_like, shape (...)
        Air temperature, 233.15 to 333.15. [K]
    pressure : array_like, shape (...)
        Pressure at the place (not reduced to sea level), 30e3 to 115e3. [Pa]
    humidity : array_like, shape (...)
        Relative humidity over liquid water, 0 to 1. [1]

    Returns
    -------
    ndarray, shape (...)
        Density of the broadcast inputs; NaN where any input is NaN. [kg m⁻³]

    Raises
    ------
    ValueError
        If a value is outside its range or the shapes do not broadcast.

    Notes
    -----
    :math:`\rho = \frac{p M_a}{Z R T}\left(1 - x_v (1 - M_v/M_a)\right)` with the mole fraction of water
    :math:`x_v = h f p_{sv}/p`, the enhancement factor f and the compressibility Z of [1]_, at 400 ppm of
    carbon dioxide. The paper gives it for 288 to 300 K and 60e3 to 110e3 Pa; from 273 to 313 K and 70e3 to
    103e3 Pa it stays within 5e-5 of an independent virial equation of state, which the tests show.

    References
    ----------
    .. [1] A. Picard, R. S. Davis, M. Gläser, K. Fujii, "Revised formula for the density of moist air
       (CIPM-2007)," Metrologia 45, 149-155, 2008, doi:10.1088/0026-1394/45/2/004.
    """
    t, p, h = np.broadcast_arrays(*(np.asarray(a, float) for a in (temperature, pressure, humidity)))
    for name, values, low, high, hint in (
        ("temperature", t, 233.15, 333.15, "K, not °C"),
        ("pressure", p, 30e3, 115e3, "Pa, not hPa"),
        ("humidity", h, 0.0, 1.0, "a fraction, not %"),
    ):
        _require_range(name, values, low, high, hint)
    celsius = t - ZERO_CELSIUS
    enhancement = 1.00062 + 3.14e-8 * p + 5.6e-7 * celsius**2
    vapour = h * enhancement * saturation_vapour_pressure(t) / p  # mole fraction of water
    compressibility = (
        1.0
        - p
        / t
        * (
            1.58123e-6
            - 2.9331e-8 * celsius
            + 1.1043e-10 * celsius**2
            + (5.707e-6 - 2.051e-8 * celsius) * vapour
            + (1.9898e-4 - 2.376e-6 * celsius) * vapour**2
        )
        + (p / t) ** 2 * (1.83e-11 - 0.765e-8 * vapour**2)
    )
    dry = p * MOLAR_MASS_DRY_AIR / (compressibility * MOLAR_GAS_CONSTANT * t)
    return np.asarray(dry * (1.0 - vapour * (1.0 - MOLAR_MASS_WATER / MOLAR_MASS_DRY_AIR)))


def saturation_vapour_pressure(temperature: npt.ArrayLike) -> FloatArray:
    """Return the saturation vapour pressure over liquid water.

    Parameters
    ----------
    temperature : array_like, shape (...)
        Air temperature, 233.15 to 333.15. [K]

    Returns
    -------
    ndarray, shape (...)
        Pressure; NaN where the temperature is NaN. [Pa]

    Notes
    -----
    The exponential of CIPM-2007, appendix of Picard et al. 2008, doi:10.1088/0026-1394/45/2/004.
    """
    t = np.asarray(temperature, float)
    return np.asarray(np.exp(1.2378847e-5 * t**2 - 1.9121316e-2 * t + 33.93711047 - 6.3431645e3 / t))


def pressure_at_altitude(
    pressure: npt.ArrayLike,
    altitude_from: npt.ArrayLike,
    altitude_to: npt.ArrayLike,
    temperature: npt.ArrayLike,
) -> FloatArray:
    r"""Return the pressure at another altitude of the same air mass.

    Parameters
    ----------
    pressure : array_like, shape (...)
        Pressure at `altitude_from`. [Pa]
    altitude_from, altitude_to : array_like, shape (...)
        Altitudes above sea level. [m]
    temperature : array_like, shape (...)
        Air temperature at `altitude_from`. [K]

    Returns
    -------
    ndarray, shape (...)
        Pressure at `altitude_to`; NaN where any input is NaN. [Pa]

    Raises
    ------
    ValueError
        If the lapse rate would bring the air to 0 K or below.

    Notes
    -----
    Hypsometric equation with the standard lapse rate of 6.5 K per km:
    :math:`p_2 = p_1 (T_2/T_1)^{g/(R L)}`, :math:`T_2 = T_1 - L (z_2 - z_1)`. Altitudes count as geopotential,
    which is 0.04 m at 500 m, and the air as dry: over 500 m at 20 °C and half saturated that leaves the
    pressure 0.03 % too low, at 30 °C and saturated 0.1 %.
    """
    p, low, high, t = (np.asarray(a, float) for a in (pressure, altitude_from, altitude_to, temperature))
    t_there = temperature_at_altitude(t, low, high)
    if np.any(t_there <= 0.0):
        raise ValueError("the altitude is too high for a lapse rate of 6.5 K per km: the air would be at 0 K")
    return np.asarray(p * (t_there / t) ** BAROMETRIC_EXPONENT)


def temperature_at_altitude(
    temperature: npt.ArrayLike, altitude_from: npt.ArrayLike, altitude_to: npt.ArrayLike
) -> FloatArray:
    """Return the air temperature at another altitude, by the standard lapse rate of 6.5 K per km. [K]

    Parameters
    ----------
    temperature : array_like, shape (...)
        Air temperature at `altitude_from`. [K]
    altitude_from, altitude_to : array_like, shape (...)
        Altitudes above sea level. [m]
    """
    return np.asarray(
        np.asarray(temperature, float)
        - LAPSE_RATE * (np.asarray(altitude_to, float) - np.asarray(altitude_from, float))
    )


def pressure_from_sea_level(
    sea_level_pressure: npt.ArrayLike, altitude: npt.ArrayLike, temperature: npt.ArrayLike
) -> FloatArray:
    """Return the pressure at a place from the pressure a weather report gives, reduced to sea level.

    Parameters
    ----------
    sea_level_pressure : array_like, shape (...)
        Pressure reduced to sea level. [Pa]
    altitude : array_like, shape (...)
        Altitude of the place above sea level. [m]
    temperature : array_like, shape (...)
        Air temperature at the place (not at sea level). [K]

    Returns
    -------
    ndarray, shape (...)
        Pressure at the place; NaN where any input is NaN. [Pa]

    Notes
    -----
    The inverse of `pressure_at_altitude` from the place down to sea level. Services differ in how they reduce
    (with the temperature of the day, of the standard, or a 12-hour mean); at 300 m that is worth about
    0.1 % of pressure per 10 K between their temperature and the one given here.
    """
    p0, z, t = (np.asarray(a, float) for a in (sea_level_pressure, altitude, temperature))
    return pressure_at_altitude(p0, 0.0, z, temperature_at_altitude(t, z, 0.0))


def geopotential_altitude(altitude: npt.ArrayLike) -> FloatArray:
    """Return the geopotential altitude of a geometric one, by the standard atmosphere's Earth radius. [m]

    Parameters
    ----------
    altitude : array_like, shape (...)
        Geometric altitude above sea level. [m]
    """
    z = np.asarray(altitude, float)
    return np.asarray(STANDARD_EARTH_RADIUS * z / (STANDARD_EARTH_RADIUS + z))


def standard_atmosphere(altitude: npt.ArrayLike) -> StandardAir:
    """Return the air of the standard atmosphere at a geometric altitude.

    Parameters
    ----------
    altitude : array_like, shape (...)
        Geometric altitude above sea level, as maps and receivers give it; -500 to 11000. [m]

    Returns
    -------
    StandardAir
        Temperature, pressure and density, each of shape (...); NaN where the altitude is NaN.

    Raises
    ------
    ValueError
        If an altitude is outside the lowest layer.

    Notes
    -----
    The altitude is turned into a geopotential one first (0.5 m less at 2000 m). Dry air, lowest layer only.

    References
    ----------
    ISO 2533:1975, "Standard atmosphere"; U.S. Standard Atmosphere, 1976.
    """
    z = np.asarray(altitude, float)
    _require_range("altitude", z, -500.0, 11000.0, "geometric metres, lowest layer")
    temperature = STANDARD_TEMPERATURE - LAPSE_RATE * geopotential_altitude(z)
    pressure = STANDARD_PRESSURE * (temperature / STANDARD_TEMPERATURE) ** BAROMETRIC_EXPONENT
    density = pressure / (GAS_CONSTANT_DRY_AIR * temperature)
    return StandardAir(np.asarray(temperature), np.asarray(pressure), np.asarray(density))


def _require_range(name: str, values: FloatArray, low: float, high: float, hint: str) -> None:
    """Raise ValueError naming the first value out of range; NaN passes, it marks a sensor dropout."""
    bad = np.flatnonzero((values < low) | (values > high))
    if bad.size:
        raise ValueError(
            f"{name} must be {low:g} to {high:g} ({hint}); {bad.size} of {values.size} values are not, "
            f"first {values.flat[bad[0]]:g} at index {bad[0]}"
        )
