"""A flat map of a test place: metres east and north of a point, and back."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
import numpy.typing as npt

from ridercda.physics.geodesy import ECCENTRICITY_SQUARED, EQUATORIAL_RADIUS, FLATTENING

FloatArray = npt.NDArray[np.float64]

_N = FLATTENING / (2.0 - FLATTENING)  # third flattening
_RECTIFYING_RADIUS = EQUATORIAL_RADIUS / (1.0 + _N) * (1.0 + _N**2 / 4.0 + _N**4 / 64.0)  # [m]
_FORWARD = (
    _N / 2.0 - 2.0 * _N**2 / 3.0 + 5.0 * _N**3 / 16.0 + 41.0 * _N**4 / 180.0,
    13.0 * _N**2 / 48.0 - 3.0 * _N**3 / 5.0 + 557.0 * _N**4 / 1440.0,
    61.0 * _N**3 / 240.0 - 103.0 * _N**4 / 140.0,
    49561.0 * _N**4 / 161280.0,
)
_BACKWARD = (
    _N / 2.0 - 2.0 * _N**2 / 3.0 + 37.0 * _N**3 / 96.0 - _N**4 / 360.0,
    _N**2 / 48.0 + _N**3 / 15.0 - 437.0 * _N**4 / 1440.0,
    17.0 * _N**3 / 480.0 - 37.0 * _N**4 / 840.0,
    4397.0 * _N**4 / 161280.0,
)
_ECCENTRICITY = float(np.sqrt(ECCENTRICITY_SQUARED))


@dataclass(frozen=True, slots=True)
class LocalPlane:
    """A transverse Mercator map with scale 1 on the meridian of its origin.

    Angles are true everywhere, lengths within 1.3e-8 at 1 km and 1.3e-6 at 10 km east or west of the origin.
    North on the map is true north on the meridian of the origin; 10 km beside it they differ by about 0.1° at
    50° latitude.

    Parameters
    ----------
    latitude, longitude : float
        Origin, WGS84, away from the poles. [rad]

    Raises
    ------
    ValueError
        If the origin is not finite or lies at a pole.

    References
    ----------
    L. Krüger, "Konforme Abbildung des Erdellipsoids in der Ebene," 1912, series to the fourth order (it
    leaves 0.2 µm), as in C. F. F. Karney, "Transverse Mercator with an accuracy of a few nanometers," J.
    Geodesy 85, 475-485, 2011, doi:10.1007/s00190-011-0445-3 (coefficients from memory, shown by the tests).
    """

    latitude: float
    longitude: float
    _origin_north: float = field(init=False, repr=False, compare=False)

    def __post_init__(self) -> None:
        """Find the origin's distance from the equator."""
        if not (abs(self.latitude) < 1.56 and np.isfinite(self.longitude)):
            raise ValueError(
                f"a local plane needs an origin in radians away from the poles, not "
                f"({self.latitude:g}, {self.longitude:g})"
            )
        _, north = _transverse_mercator(np.asarray(self.latitude), np.asarray(0.0))
        object.__setattr__(self, "_origin_north", float(north))

    def project(self, latitude: npt.ArrayLike, longitude: npt.ArrayLike) -> tuple[FloatArray, FloatArray]:
        """Return metres east and north of the origin.

        Parameters
        ----------
        latitude, longitude : array_like, shape (...)
            WGS84, within some 1000 km of the origin. [rad]

        Returns
        -------
        east, north : ndarray, shape (...)
            NaN where an input is NaN. [m]
        """
        phi, lam = np.broadcast_arrays(np.asarray(latitude, float), np.asarray(longitude, float))
        turn = np.remainder(lam - self.longitude + np.pi, 2.0 * np.pi) - np.pi
        east, north = _transverse_mercator(phi, turn)
        return np.asarray(east), np.asarray(north - self._origin_north)

    def locate(self, east: npt.ArrayLike, north: npt.ArrayLike) -> tuple[FloatArray, FloatArray]:
        """Return latitude and longitude of a point on the map; the inverse of `project`.

        Parameters
        ----------
        east, north : array_like, shape (...)
            From the origin. [m]

        Returns
        -------
        latitude, longitude : ndarray, shape (...)
            Longitude -π to π; NaN where an input is NaN. [rad]
        """
        x, y = np.broadcast_arrays(np.asarray(east, float), np.asarray(north, float))
        xi = (y + self._origin_north) / _RECTIFYING_RADIUS
        eta = x / _RECTIFYING_RADIUS
        xi0, eta0 = xi.copy(), eta.copy()
        for j, beta in enumerate(_BACKWARD, start=1):
            xi0 = xi0 - beta * np.sin(2 * j * xi) * np.cosh(2 * j * eta)
            eta0 = eta0 - beta * np.cos(2 * j * xi) * np.sinh(2 * j * eta)
        sinh_eta, cos_xi = np.sinh(eta0), np.cos(xi0)
        conformal = np.sin(xi0) / np.hypot(sinh_eta, cos_xi)
        phi = np.arctan(_geodetic_tangent(conformal))
        turn = np.arctan2(sinh_eta, cos_xi)
        longitude = np.remainder(turn + self.longitude + np.pi, 2.0 * np.pi) - np.pi
        return np.asarray(phi), np.asarray(longitude)


def _transverse_mercator(latitude: FloatArray, turn: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return east of the meridian and north of the equator. [m]"""
    tangent = _conformal_tangent(np.tan(latitude))
    xi0 = np.arctan2(tangent, np.cos(turn))
    eta0 = np.arcsinh(np.sin(turn) / np.hypot(tangent, np.cos(turn)))
    xi, eta = xi0, eta0
    for j, alpha in enumerate(_FORWARD, start=1):
        xi = xi + alpha * np.sin(2 * j * xi0) * np.cosh(2 * j * eta0)
        eta = eta + alpha * np.cos(2 * j * xi0) * np.sinh(2 * j * eta0)
    return _RECTIFYING_RADIUS * eta, _RECTIFYING_RADIUS * xi


def _conformal_tangent(tangent: FloatArray) -> FloatArray:
    """Return the tangent of the conformal latitude from that of the geodetic one."""
    secant = np.sqrt(1.0 + tangent**2)
    sigma = np.sinh(_ECCENTRICITY * np.arctanh(_ECCENTRICITY * tangent / secant))
    return np.asarray(tangent * np.sqrt(1.0 + sigma**2) - sigma * secant)


def _geodetic_tangent(conformal: FloatArray) -> FloatArray:
    """Return the tangent of the geodetic latitude from that of the conformal one, by Newton's method."""
    tangent = conformal / (1.0 - ECCENTRICITY_SQUARED)
    for _ in range(5):  # three settle to rounding below 85 degrees of latitude
        found = _conformal_tangent(tangent)
        derivative = (
            (1.0 - ECCENTRICITY_SQUARED)
            * np.sqrt(1.0 + found**2)
            * np.sqrt(1.0 + tangent**2)
            / (1.0 + (1.0 - ECCENTRICITY_SQUARED) * tangent**2)
        )
        tangent = tangent + (conformal - found) / derivative
    return tangent
