"""Rolling resistance of tyres and the drag of wheel bearings."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]

CRR_REFERENCE_TEMPERATURE = 293.15  # [K] Crr is quoted at 20 °C


def rolling_force(crr: npt.ArrayLike, load: npt.ArrayLike) -> FloatArray:
    """Return the rolling resistance. [N]

    Parameters
    ----------
    crr : array_like, shape (...)
        Coefficient of rolling resistance. [1]
    load : array_like, shape (...)
        Force normal to the surface: m·g·cos(slope) on a road, m·g/cos(lean) in a bend. [N]

    Notes
    -----
    Coulomb's form, independent of speed, as in J. C. Martin et al., "Validation of a mathematical model for
    road cycling power," J. Appl. Biomech. 14, 276-291, 1998, doi:10.1123/jab.14.3.276 (form from memory).
    """
    return np.asarray(np.asarray(crr, float) * np.asarray(load, float))


def crr_at_temperature(
    crr20: npt.ArrayLike, temperature: npt.ArrayLike, coefficient: npt.ArrayLike
) -> FloatArray:
    """Return Crr at a tyre temperature from its value at 20 °C.

    Parameters
    ----------
    crr20 : array_like, shape (...)
        Crr at 20 °C. [1]
    temperature : array_like, shape (...)
        Temperature, of the air as a stand-in for the tyre. [K]
    coefficient : array_like, shape (...)
        Relative change per kelvin, negative for rubber: about -0.01, common practice. [K⁻¹]

    Returns
    -------
    ndarray, shape (...)
        crr20·(1 + coefficient·(T - 293.15 K)); NaN where any input is NaN. [1]

    Raises
    ------
    ValueError
        If the factor would not be positive: the temperature is too far from 20 °C for a straight line.
    """
    factor = crr_temperature_factor(temperature, coefficient)
    return np.asarray(np.asarray(crr20, float) * factor)


def crr_temperature_factor(temperature: npt.ArrayLike, coefficient: npt.ArrayLike) -> FloatArray:
    """Return Crr at a temperature over Crr at 20 °C; see `crr_at_temperature`. [1]

    Parameters
    ----------
    temperature : array_like, shape (...)
        Temperature. [K]
    coefficient : array_like, shape (...)
        Relative change per kelvin. [K⁻¹]

    Raises
    ------
    ValueError
        If the factor would not be positive.
    """
    rise = np.asarray(temperature, float) - CRR_REFERENCE_TEMPERATURE
    factor = 1.0 + np.asarray(coefficient, float) * rise
    if np.any(factor <= 0.0):
        raise ValueError(
            f"a temperature coefficient of {np.ravel(coefficient)[0]:g} per K leaves no rolling resistance "
            f"{np.nanmax(np.abs(rise)):g} K from 20 °C"
        )
    return np.asarray(factor)


def bearing_power(speed: npt.ArrayLike) -> FloatArray:
    """Return the power lost in the bearings of both wheels: (91 + 8.7 v)·v·10⁻³. [W]

    Parameters
    ----------
    speed : array_like, shape (...)
        Wheel speed (that of the road under the wheel). [m s⁻¹]

    Notes
    -----
    J. C. Martin et al. 1998, doi:10.1123/jab.14.3.276, after measurements by K. Dahn et al., "The
    aerodynamics and rolling resistance of cycling: bearings," Cycling Science 3, 1991 (both from memory).
    """
    v = np.asarray(speed, float)
    return np.asarray((91.0 + 8.7 * v) * v * 1e-3)


def bearing_force(speed: npt.ArrayLike) -> FloatArray:
    """Return the bearing drag as a force at the road, (91 + 8.7 v)·10⁻³; see `bearing_power`. [N]

    Parameters
    ----------
    speed : array_like, shape (...)
        Wheel speed. [m s⁻¹]
    """
    return np.asarray((91.0 + 8.7 * np.asarray(speed, float)) * 1e-3)
