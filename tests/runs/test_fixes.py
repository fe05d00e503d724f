from __future__ import annotations

import numpy as np
from numpy.testing import assert_allclose

from ridercda.rides.ride import Ride
from ridercda.runs.fixes import plane_of, track_on

TIME = np.arange(0.0, 60.0)


def _ride(latitude: float, longitude: np.ndarray) -> Ride:
    return Ride(TIME, {"latitude": np.full(TIME.size, latitude), "longitude": longitude})


def test_a_venue_on_the_date_line_is_in_one_piece() -> None:
    longitude = np.pi - 1e-5 + 1e-6 * TIME / 2  # passes 180 degrees
    longitude = np.where(longitude > np.pi, longitude - 2 * np.pi, longitude)
    ride = _ride(0.7, longitude)
    plane = plane_of([ride])
    assert plane is not None
    east, _ = track_on(plane, ride)
    assert np.ptp(east) < 200.0


def test_single_wild_fixes_are_left_out() -> None:
    longitude = 0.2 + 2e-6 * TIME  # some 10 m/s
    longitude[20] += 1e-4
    longitude[40] += 1e-4
    ride = _ride(0.7, longitude)
    plane = plane_of([ride])
    assert plane is not None
    east, north = track_on(plane, ride)
    assert np.flatnonzero(np.isnan(east)).tolist() == [20, 40]
    assert np.flatnonzero(np.isnan(north)).tolist() == [20, 40]


def test_a_ride_without_positions_has_none() -> None:
    ride = Ride(TIME, {"speed": np.full(TIME.size, 10.0)})
    assert plane_of([ride]) is None
    other = _ride(0.7, np.full(TIME.size, 0.2))
    plane = plane_of([ride, other])
    assert plane is not None
    assert np.isnan(track_on(plane, ride)[0]).all()
    assert_allclose(track_on(plane, other)[0], 0.0, atol=1e-6)
