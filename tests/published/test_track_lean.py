"""Lean on a track: the rigid steady turn, solved outside this package by bracketing; geometry exact."""

from __future__ import annotations

import numpy as np
import pytest

from ridercda.physics.track import TrackShape, lean


@pytest.mark.parametrize(
    ("speed", "radius", "height", "angle", "path_radius", "mass_speed", "load"),
    [
        (15.0, 23.0, 1.0, 44.050469, 22.304708, 14.546549, 1.391348),
        (16.0, 22.0, 1.1, 48.791396, 21.172452, 15.398147, 1.517906),
        (14.0, 25.0, 1.0, 37.946859, 24.385070, 13.655639, 1.268100),
    ],
)
def test_lean_table(
    speed: float,
    radius: float,
    height: float,
    angle: float,
    path_radius: float,
    mass_speed: float,
    load: float,
) -> None:
    rider = lean(speed, radius, height)
    assert np.degrees(float(rider.angle)) == pytest.approx(angle, abs=5.1e-7)
    assert float(rider.path_radius) == pytest.approx(path_radius, abs=5.1e-7)
    assert float(rider.mass_speed) == pytest.approx(mass_speed, abs=5.1e-7)
    assert float(rider.load_factor) == pytest.approx(load, abs=5.1e-7)


def test_way_of_the_mass_on_a_track_of_two_semicircles() -> None:
    # 250 m with a radius of 23 m: straights 52.743369 m, mass's way 245.631353 m, ratio 0.982525.
    track = TrackShape(lap_length=250.0, bend_radius=23.0)
    assert track.straight_length == pytest.approx(52.743369, abs=5.1e-7)
    rider = lean(15.0, 23.0, 1.0)
    way = 2.0 * track.straight_length + 2.0 * np.pi * float(rider.path_radius)
    assert way == pytest.approx(245.631353, abs=5.1e-7)
    assert way / 250.0 == pytest.approx(0.982525, abs=5.1e-7)


@pytest.mark.parametrize("transition", [0.0, 8.0, 20.0])
def test_riding_higher_adds_two_pi_times_the_height(transition: float) -> None:
    # Any closed lap turns once round, so 0.2 m further out is 2π·0.2 = 1.256637 m more, transitions or not.
    track = TrackShape(lap_length=250.0, bend_radius=23.0, transition_length=transition)
    s = (np.arange(250_000) + 0.5) * 1e-3
    added = float(np.sum(0.2 * track.curvature(s)) * 1e-3)
    assert added == pytest.approx(1.256637, abs=2e-5)


def test_sprint_speed_leans_as_much_as_reported() -> None:
    # doi:10.1038/s41598-022-15384-3, 2022: roll angles on tracks are often over 50 degrees (read).
    assert np.degrees(float(lean(20.0, 23.0, 1.1).angle)) > 50.0
