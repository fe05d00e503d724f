"""Distances, directions and gravity on the WGS84 ellipsoid; radians everywhere."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]

EQUATORIAL_RADIUS = 6378137.0  # [m] WGS84
FLATTENING = 1.0 / 298.257223563  # WGS84
POLAR_RADIUS = EQUATORIAL_RADIUS * (1.0 - FLATTENING)  # [m]
ECCENTRICITY_SQUARED = FLATTENING * (2.0 - FLATTENING)
SECOND_ECCENTRICITY_SQUARED = ECCENTRICITY_SQUARED / (1.0 - FLATTENING) ** 2

# Normal gravity: Somigliana's formula with the WGS84 constants (from memory).
EQUATORIAL_GRAVITY = 9.7803253359  # [m s⁻²]
SOMIGLIANA = 1.931852652458e-3
GRAVITY_RATIO = 3.449786506841e-3  # centrifugal to gravitational at the equator, "m"

# Sixteen nodes integrate the geodesic's smooth integrands to rounding over half the globe.
_NODES, _WEIGHTS = np.polynomial.legendre.leggauss(16)


class Geodesic(NamedTuple):
    """The shortest way between two points."""

    distance: FloatArray  # [m]
    azimuth: FloatArray  # at the first point, clockwise from true north, 0 to 2π [rad]


def inverse(lat1: npt.ArrayLike, lon1: npt.ArrayLike, lat2: npt.ArrayLike, lon2: npt.ArrayLike) -> Geodesic:
    """Return distance and starting direction from one point to another on the ellipsoid.

    Parameters
    ----------
    lat1, lon1, lat2, lon2 : array_like, shape (...)
        Geodetic latitude (-π/2 to π/2) and longitude (any turn). [rad]

    Returns
    -------
    Geodesic
        Distance and azimuth, each of the broadcast shape; NaN where any input is NaN. The azimuth between
        two equal points is 0.

    Raises
    ------
    ValueError
        If a latitude is beyond a pole.

    Notes
    -----
    The longitude on the auxiliary sphere is found by fixed-point iteration as in [1]_, with the two integrals
    of [2]_ (equations 7 and 8) by Gauss-Legendre quadrature in place of a series. Near-antipodal pairs, where
    that does not settle, are solved by a bracketing search for the starting direction. Micrometres for every
    pair in the tests, 1 m to 19,960 km apart.

    References
    ----------
    .. [1] T. Vincenty, "Direct and inverse solutions of geodesics on the ellipsoid with application of nested
       equations," Survey Review 23 (176), 88-93, 1975, doi:10.1179/sre.1975.23.176.88.
    .. [2] C. F. F. Karney, "Algorithms for geodesics," J. Geodesy 87, 43-55, 2013,
       doi:10.1007/s00190-012-0578-z.
    """
    phi1, phi2, l1, l2 = np.broadcast_arrays(*(np.asarray(a, float) for a in (lat1, lat2, lon1, lon2)))
    if np.any(np.abs(phi1) > np.pi / 2) or np.any(np.abs(phi2) > np.pi / 2):
        raise ValueError("a latitude must be -π/2 to π/2 (radians, not degrees)")
    difference = np.remainder(l2 - l1 + np.pi, 2.0 * np.pi) - np.pi
    beta1, beta2 = np.arctan((1.0 - FLATTENING) * np.tan(phi1)), np.arctan((1.0 - FLATTENING) * np.tan(phi2))
    spherical = difference
    settled = np.zeros(difference.shape, bool)
    for _ in range(40):
        arc = _arc(beta1, beta2, spherical)
        following = difference + FLATTENING * arc.sin_alpha0 * _longitude_integral(arc)
        settled = np.abs(following - spherical) <= 1e-15 * np.maximum(1.0, np.abs(spherical)) + 1e-16
        spherical = following
        if np.all(settled | np.isnan(spherical)):
            break
    arc = _arc(beta1, beta2, spherical)
    distance = POLAR_RADIUS * _distance_integral(arc)
    azimuth = np.remainder(arc.alpha1, 2.0 * np.pi)
    stubborn = (~settled | (np.abs(spherical) > np.pi)) & ~np.isnan(spherical)
    if np.any(stubborn):
        distance, azimuth = np.array(distance), np.array(azimuth)
        for index in np.argwhere(stubborn):
            at = tuple(index)
            distance[at], azimuth[at] = _near_antipodal(
                float(beta1[at]), float(beta2[at]), float(difference[at])
            )
    azimuth = np.where(azimuth >= 2.0 * np.pi, 0.0, azimuth)  # rounding can give 2π itself
    same = (phi1 == phi2) & (difference == 0.0)
    return Geodesic(np.asarray(np.where(same, 0.0, distance)), np.asarray(np.where(same, 0.0, azimuth)))


def gravity(latitude: npt.ArrayLike, altitude: npt.ArrayLike = 0.0) -> FloatArray:
    """Return normal gravity. [m s⁻²]

    Parameters
    ----------
    latitude : array_like, shape (...)
        Geodetic latitude. [rad]
    altitude : array_like, shape (...)
        Above the ellipsoid; sea level will do. [m]

    Returns
    -------
    ndarray, shape (...)
        Gravity; NaN where any input is NaN. The true one differs by up to about 1e-4 of it. [m s⁻²]

    Notes
    -----
    Somigliana's closed formula on WGS84 with the second-order correction for altitude: NIMA TR8350.2,
    "Department of Defense World Geodetic System 1984," equations 4-1 and 4-3 (from memory).
    """
    sine2 = np.sin(np.asarray(latitude, float)) ** 2
    relative = np.asarray(altitude, float) / EQUATORIAL_RADIUS
    surface = EQUATORIAL_GRAVITY * (1.0 + SOMIGLIANA * sine2) / np.sqrt(1.0 - ECCENTRICITY_SQUARED * sine2)
    free_air = 1.0 - 2.0 * (1.0 + FLATTENING + GRAVITY_RATIO - 2.0 * FLATTENING * sine2) * relative
    return np.asarray(surface * (free_air + 3.0 * relative**2))


class _Arc(NamedTuple):
    """A great circle's arc on the auxiliary sphere, from the node where it crosses the equator northward."""

    alpha1: FloatArray
    sin_alpha0: FloatArray
    k_squared: FloatArray
    sigma1: FloatArray
    sigma12: FloatArray


def _arc(beta1: FloatArray, beta2: FloatArray, longitude: FloatArray) -> _Arc:
    """Return the arc between two reduced latitudes with a spherical difference of longitude."""
    sin1, cos1, sin2, cos2 = np.sin(beta1), np.cos(beta1), np.sin(beta2), np.cos(beta2)
    east = cos2 * np.sin(longitude)
    # sin(b2 - b1) plus a small square keeps its digits for points a metre apart, where products would cancel.
    half = np.sin(0.5 * longitude)
    north = np.sin(beta2 - beta1) + 2.0 * sin1 * cos2 * half**2
    sin_sigma = np.hypot(east, north)
    cos_sigma = sin1 * sin2 + cos1 * cos2 * np.cos(longitude)
    alpha1 = np.arctan2(east, north)
    return _arc_from(alpha1, sin1, cos1, np.arctan2(sin_sigma, cos_sigma))


def _arc_from(alpha1: FloatArray, sin1: FloatArray, cos1: FloatArray, sigma12: FloatArray) -> _Arc:
    sin_alpha0 = np.sin(alpha1) * cos1
    cos_alpha0 = np.hypot(np.cos(alpha1), np.sin(alpha1) * sin1)
    sigma1 = np.arctan2(sin1, np.cos(alpha1) * cos1)
    return _Arc(alpha1, sin_alpha0, SECOND_ECCENTRICITY_SQUARED * cos_alpha0**2, sigma1, sigma12)


def _radicals(arc: _Arc) -> FloatArray:
    """Return √(1 + k² sin²σ) at the nodes, on a last axis."""
    half = 0.5 * arc.sigma12[..., None]
    sigma = arc.sigma1[..., None] + half * (1.0 + _NODES)
    return np.asarray(np.sqrt(1.0 + arc.k_squared[..., None] * np.sin(sigma) ** 2))


def _distance_integral(arc: _Arc) -> FloatArray:
    return np.asarray(0.5 * arc.sigma12 * (_radicals(arc) @ _WEIGHTS))


def _longitude_integral(arc: _Arc) -> FloatArray:
    integrand = (2.0 - FLATTENING) / (1.0 + (1.0 - FLATTENING) * _radicals(arc))
    return np.asarray(0.5 * arc.sigma12 * (integrand @ _WEIGHTS))


def _near_antipodal(beta1: float, beta2: float, difference: float) -> tuple[float, float]:
    """Return distance and azimuth by searching the starting direction that reaches the longitude."""
    from scipy.optimize import brentq

    # Canonical pair: the first point is the farther from the equator and south of it, the way leads east.
    east = difference >= 0.0
    swapped = abs(beta1) < abs(beta2)
    start, end = (beta2, beta1) if swapped else (beta1, beta2)
    mirrored = start > 0.0
    if mirrored:
        start, end = -start, -end
    wanted = abs(difference)
    # A start exactly on the equator would leave the node undefined.
    sin1, cos1 = np.asarray(min(np.sin(start), -1e-100)), np.asarray(np.cos(start))
    sin2, cos2 = np.asarray(np.sin(end)), np.asarray(np.cos(end))

    def reach(alpha1: float) -> tuple[_Arc, float, float]:
        sin_alpha0 = np.sin(alpha1) * cos1
        cos_alpha2 = np.sqrt(max(np.cos(alpha1) ** 2 * cos1**2 + (cos2**2 - cos1**2), 0.0)) / cos2
        alpha2 = float(np.arctan2(sin_alpha0 / cos2, cos_alpha2))
        sigma1 = np.arctan2(sin1, np.cos(alpha1) * cos1)
        sigma2 = np.arctan2(sin2, cos_alpha2 * cos2)
        omega1 = np.arctan2(sin_alpha0 * sin1, np.cos(alpha1) * cos1)
        omega2 = np.arctan2(sin_alpha0 * sin2, cos_alpha2 * cos2)
        arc = _arc_from(np.asarray(alpha1), sin1, cos1, np.asarray(sigma2 - sigma1))
        longitude = omega2 - omega1 - FLATTENING * sin_alpha0 * float(_longitude_integral(arc))
        return arc, float(longitude), alpha2

    def shortfall(alpha1: float) -> float:
        return reach(alpha1)[1] - wanted

    if shortfall(0.0) * shortfall(np.pi) > 0.0:  # the meridian over the pole is the shortest
        alpha1 = 0.0 if abs(shortfall(0.0)) < abs(shortfall(np.pi)) else float(np.pi)
    else:
        alpha1 = float(brentq(shortfall, 0.0, np.pi, xtol=1e-15, rtol=8.9e-16, maxiter=200))
    arc, _, alpha2 = reach(alpha1)
    # Undo the canonical order: backwards the way starts in the opposite of its end direction.
    azimuth = float(np.pi) - alpha2 if swapped else alpha1
    if mirrored:
        azimuth = float(np.pi) - azimuth
    return POLAR_RADIUS * float(_distance_integral(arc)), float(
        (azimuth if east else -azimuth) % (2.0 * np.pi)
    )
