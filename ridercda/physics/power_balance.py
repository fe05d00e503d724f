"""The power balance on a road, its terms, and the steady speed it gives.

After J. C. Martin, D. L. Milliken, J. E. Cobb, K. L. McFadden, A. R. Coggan, "Validation of a mathematical
model for road cycling power," J. Appl. Biomech. 14, 276-291, 1998, doi:10.1123/jab.14.3.276 (terms from
memory; the worked example of its appendix is a test). The air term differs in convention: see
`ridercda.physics.wind`.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
import numpy.typing as npt

from ridercda.physics.air import STANDARD_GRAVITY
from ridercda.physics.rolling import bearing_power, rolling_force

FloatArray = npt.NDArray[np.float64]


class RoadPower(NamedTuple):
    """Terms of the power balance, each positive where it costs the rider. [W]"""

    aero: FloatArray
    rolling: FloatArray
    bearings: FloatArray
    potential: FloatArray
    kinetic: FloatArray
    wheel: FloatArray  # the sum of the five: power to be delivered at the wheel
    meter: FloatArray  # what a meter before the chain shows


def road_power(
    speed: npt.ArrayLike,
    *,
    mass: npt.ArrayLike,
    cda: npt.ArrayLike,
    crr: npt.ArrayLike,
    density: npt.ArrayLike,
    grade: npt.ArrayLike = 0.0,
    acceleration: npt.ArrayLike = 0.0,
    headwind: npt.ArrayLike = 0.0,
    crosswind: npt.ArrayLike = 0.0,
    moving_mass: npt.ArrayLike | None = None,
    efficiency: npt.ArrayLike = 1.0,
    gravity: npt.ArrayLike = STANDARD_GRAVITY,
) -> RoadPower:
    """Return the power a rider needs, term by term.

    Parameters
    ----------
    speed : array_like, shape (...)
        Ground speed, 0 or more. [m s⁻¹]
    mass : array_like, shape (...)
        Rider and bike. [kg]
    cda : array_like, shape (...)
        Plain drag area, wheel rotation included: the force is ½ρ·CdA·V·u. [m²]
    crr : array_like, shape (...)
        Coefficient of rolling resistance. [1]
    density : array_like, shape (...)
        Air density. [kg m⁻³]
    grade : array_like, shape (...)
        Rise over horizontal run. [1]
    acceleration : array_like, shape (...)
        Along the road. [m s⁻²]
    headwind, crosswind : array_like, shape (...)
        Wind at the rider's height, along the road (positive against the rider) and across it. [m s⁻¹]
    moving_mass : array_like, shape (...), optional
        Mass that resists acceleration, `effective_mass`; by default `mass`. [kg]
    efficiency : array_like, shape (...)
        Of the drivetrain, over 0 to 1; applies where the wheel needs positive power. [1]
    gravity : array_like, shape (...)
        Local gravity. [m s⁻²]

    Returns
    -------
    RoadPower
        Arrays of the broadcast shape; NaN where any input is NaN. Negative power at the wheel is what brakes
        would have to take, and stands unchanged as the power at the meter.

    Raises
    ------
    ValueError
        If an efficiency is not over 0 and at most 1.
    """
    v, slope, eta = (np.asarray(a, float) for a in (speed, grade, efficiency))
    if np.any((eta <= 0.0) | (eta > 1.0)):
        raise ValueError(f"drivetrain efficiency must be over 0 and at most 1, not {np.ravel(eta)[0]:g}")
    cosine = 1.0 / np.sqrt(1.0 + slope**2)
    weight = np.asarray(mass, float) * np.asarray(gravity, float)
    along = v + np.asarray(headwind, float)
    air_speed = np.hypot(along, np.asarray(crosswind, float))
    inertia = np.asarray(mass if moving_mass is None else moving_mass, float)
    aero = 0.5 * np.asarray(density, float) * np.asarray(cda, float) * air_speed * along * v
    rolling = rolling_force(crr, weight * cosine) * v
    bearings = bearing_power(v)
    potential = weight * slope * cosine * v
    kinetic = inertia * np.asarray(acceleration, float) * v
    wheel = aero + rolling + bearings + potential + kinetic
    meter = np.where(wheel > 0.0, wheel / eta, wheel)
    return RoadPower(*np.broadcast_arrays(aero, rolling, bearings, potential, kinetic, wheel, meter))


def martin_air_power(
    speed: npt.ArrayLike, along: npt.ArrayLike, cda_at_yaw: npt.ArrayLike, density: npt.ArrayLike
) -> FloatArray:
    """Return the air term in the form of Martin et al. 1998: ½ρ·CdA(yaw)·u²·v. [W]

    Kept apart because its CdA(yaw) goes with the *square of the along-track* air speed. The same force in
    the convention of this package has CxA = CdA(yaw)·cos²(yaw), or a plain CdA of CdA(yaw)·cos(yaw).

    Parameters
    ----------
    speed : array_like, shape (...)
        Ground speed. [m s⁻¹]
    along : array_like, shape (...)
        Along-track air speed. [m s⁻¹]
    cda_at_yaw : array_like, shape (...)
        Drag area at the yaw of the moment with wheel rotation added, in the paper's convention. [m²]
    density : array_like, shape (...)
        Air density. [kg m⁻³]
    """
    v, u, area, rho = (np.asarray(a, float) for a in (speed, along, cda_at_yaw, density))
    return np.asarray(0.5 * rho * area * u**2 * v)


def effective_mass(
    mass: npt.ArrayLike, wheel_inertia: npt.ArrayLike, wheel_circumference: npt.ArrayLike
) -> FloatArray:
    """Return the mass that resists acceleration: the wheels' spin counts as I/r². [kg]

    Parameters
    ----------
    mass : array_like, shape (...)
        Rider and bike. [kg]
    wheel_inertia : array_like, shape (...)
        Moment of inertia of both wheels together. [kg m²]
    wheel_circumference : array_like, shape (...)
        Roll-out. [m]
    """
    m, inertia, circumference = (np.asarray(a, float) for a in (mass, wheel_inertia, wheel_circumference))
    return np.asarray(m + inertia * (2.0 * np.pi / circumference) ** 2)


def steady_speed(
    power: npt.ArrayLike,
    mass: npt.ArrayLike,
    grade: npt.ArrayLike,
    crr: npt.ArrayLike,
    cda: npt.ArrayLike,
    density: npt.ArrayLike,
    headwind: npt.ArrayLike = 0.0,
    efficiency: npt.ArrayLike = 1.0,
    gravity: npt.ArrayLike = STANDARD_GRAVITY,
) -> FloatArray:
    r"""Return the speed at which constant power is in balance; bearings are left out.

    Parameters
    ----------
    power : array_like, shape (...)
        At the meter, 0 or more. [W]
    mass : array_like, shape (...)
        Rider and bike. [kg]
    grade : array_like, shape (...)
        Rise over horizontal run. [1]
    crr : array_like, shape (...)
        Coefficient of rolling resistance. [1]
    cda : array_like, shape (...)
        Drag area, positive. [m²]
    density : array_like, shape (...)
        Air density, positive. [kg m⁻³]
    headwind : array_like, shape (...)
        Wind along the road at the rider's height, positive against the rider. [m s⁻¹]
    efficiency : array_like, shape (...)
        Of the drivetrain. [1]
    gravity : array_like, shape (...)
        Local gravity. [m s⁻²]

    Returns
    -------
    ndarray, shape (...)
        The one speed at which the power is in balance; 0 where there is no power and no slope or wind strong
        enough to move the rider; NaN where any input is NaN. [m s⁻¹]

    Raises
    ------
    ValueError
        If power is negative, or drag area or density is not positive.

    Notes
    -----
    Solves :math:`\eta P = v [F_0 + k (v+w)|v+w|]`, :math:`F_0 = m g (\sin\theta + C_{rr}\cos\theta)`,
    :math:`k = \rho C_dA/2`. In still air by the closed solution of the cubic in its hyperbolic and
    trigonometric forms, which do not cancel; with wind by Newton's method inside a bracket. To the right of
    the speed where the bracketed force is zero the right side grows without bound and never falls, so the
    root is one; since :math:`(x+d)|x+d| - x|x| \ge d^2/2`, it lies within :math:`(2\eta P/k)^{1/3}` of that
    speed.
    """
    p, m, slope, rolling, area, rho, wind, eta, g = np.broadcast_arrays(
        *(
            np.asarray(a, float)
            for a in (power, mass, grade, crr, cda, density, headwind, efficiency, gravity)
        )
    )
    if np.any(p < 0.0):
        raise ValueError(f"power must be 0 W or more, not {np.nanmin(p):g}")
    if np.any(area <= 0.0) or np.any(rho <= 0.0):
        raise ValueError("drag area and air density must be positive")
    k = 0.5 * rho * area
    force = m * g * (slope + rolling) / np.sqrt(1.0 + slope**2)
    supplied = eta * p
    still = _still_air_speed(force / k, supplied / k)
    if not np.any(wind != 0.0):
        return np.asarray(still)
    return np.asarray(np.where(wind == 0.0, still, _windy_speed(supplied / k, force / k, wind)))


def _still_air_speed(p: FloatArray, q: FloatArray) -> FloatArray:
    """Return the largest root of v³ + p·v = q for q >= 0."""
    scale = 2.0 * np.sqrt(np.abs(p) / 3.0)
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        ratio = 4.0 * q / scale**3
        falling = np.where(
            ratio <= 1.0,
            scale * np.cos(np.arccos(np.minimum(ratio, 1.0)) / 3.0),
            scale * np.cosh(np.arccosh(np.maximum(ratio, 1.0)) / 3.0),
        )
        climbing = scale * np.sinh(np.arcsinh(ratio) / 3.0)
        root = np.where(p > 0.0, climbing, falling)
    # Where p is so small that the ratio overflows, the linear term no longer shows in v.
    return np.asarray(np.where(np.isfinite(ratio) | np.isnan(p) | np.isnan(q), root, np.cbrt(q)))


def _windy_speed(q: FloatArray, p: FloatArray, wind: FloatArray) -> FloatArray:
    """Return the root of v·(p + (v+w)|v+w|) = q to the right of the zero of the bracket, for q >= 0."""
    low = np.maximum(0.0, -wind - np.sign(p) * np.sqrt(np.abs(p)))
    high = low + np.cbrt(2.0 * q)
    v = high.copy()
    for _ in range(200):
        air = v + wind
        excess = v * (p + air * np.abs(air)) - q
        above = excess > 0.0
        high = np.where(above, v, high)
        low = np.where(above, low, v)
        slope = p + air * np.abs(air) + 2.0 * v * np.abs(air)
        with np.errstate(divide="ignore", invalid="ignore"):
            newton = v - excess / slope
        inside = (newton >= low) & (newton <= high)
        following = np.where(inside, newton, 0.5 * (low + high))
        settled = np.abs(following - v) <= 4.0 * np.finfo(float).eps * np.abs(following)
        v = following
        if np.all(settled | np.isnan(v)):
            break
    return np.where(np.isnan(q) | np.isnan(p) | np.isnan(wind), np.nan, v)
