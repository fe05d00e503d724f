"""The fixes of rides on one plane, in metres east and north."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from ridercda.physics.local_plane import LocalPlane
from ridercda.rides.ride import Ride

FloatArray = npt.NDArray[np.float64]

FASTEST_MOVE = 40.0  # [m/s] a fix that needs a faster move to reach and to leave is a spike


def plane_of(rides: list[Ride]) -> LocalPlane | None:
    """Return the plane about the median position of some rides; None when none has a position."""
    latitudes, longitudes = [], []
    for ride in rides:
        if ride.has("latitude", "longitude"):
            good = np.isfinite(ride.channels["latitude"]) & np.isfinite(ride.channels["longitude"])
            latitudes.append(ride.channels["latitude"][good])
            longitudes.append(ride.channels["longitude"][good])
    if not latitudes:
        return None
    latitude, longitude = np.concatenate(latitudes), np.concatenate(longitudes)
    # Median on the circle: a venue on the date line has longitudes near both +180 and -180 degrees.
    centre = float(np.angle(np.exp(1j * longitude).mean()))
    turn = np.remainder(longitude - centre + np.pi, 2 * np.pi) - np.pi
    return LocalPlane(float(np.median(latitude)), centre + float(np.median(turn)))


def track_on(plane: LocalPlane, ride: Ride) -> tuple[FloatArray, FloatArray]:
    """Return a ride's positions on the plane, single wild fixes removed. [m]

    Returns
    -------
    east, north : ndarray, shape (n,)
        NaN where there is no fix or it was a spike.
    """
    if not ride.has("latitude", "longitude"):
        empty = np.full(ride.time.size, np.nan)
        return empty, empty.copy()
    east, north = plane.project(ride.channels["latitude"], ride.channels["longitude"])
    for _ in range(2):
        good = np.flatnonzero(np.isfinite(east) & np.isfinite(north))
        if good.size < 3:
            break
        move = np.hypot(np.diff(east[good]), np.diff(north[good]))
        fast = move > FASTEST_MOVE * np.maximum(np.diff(ride.time[good]), 1.0)
        spike = np.zeros(good.size, bool)
        spike[1:-1] = fast[:-1] & fast[1:]
        spike[0], spike[-1] = fast[0] and not fast[1], fast[-1] and not fast[-2]
        if not spike.any():
            break
        east[good[spike]] = np.nan
        north[good[spike]] = np.nan
    bad = ~(np.isfinite(east) & np.isfinite(north))
    east[bad] = np.nan
    north[bad] = np.nan
    return east, north
