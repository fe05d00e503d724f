"""A ride's positions in metres on a plane, for judging its channels against each other."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ridercda.physics.local_plane import LocalPlane
from ridercda.rides.ride import FloatArray, Ride

_NEAR_POLE = 1.55  # where a plane will not do [rad]


@dataclass(frozen=True, slots=True, eq=False)
class GroundTrack:
    """Positions east and north of their median; NaN where there is no fix. [m], shape (n,)"""

    east: FloatArray
    north: FloatArray


def ground_track(ride: Ride) -> GroundTrack | None:
    """Return the ride's track on a plane about its median position; None without positions."""
    if not ride.has("latitude", "longitude"):
        return None
    latitude, longitude = ride.channels["latitude"], ride.channels["longitude"]
    middle = float(np.nanmedian(latitude)), float(np.nanmedian(longitude))
    if abs(middle[0]) > _NEAR_POLE:
        return None
    with np.errstate(all="ignore"):
        east, north = LocalPlane(*middle).project(latitude, longitude)
    known = np.isfinite(east) & np.isfinite(north)
    return GroundTrack(np.where(known, east, np.nan), np.where(known, north, np.nan))
