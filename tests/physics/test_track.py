from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import cumulative_trapezoid
from scipy.optimize import brentq

from ridercda.physics.track import TrackShape, lean, mass_drop


@settings(max_examples=200)
@given(st.floats(0.0, 30.0), st.floats(3.0, 500.0), st.floats(0.0, 1.5))
def test_lean_meets_its_three_conditions(speed: float, radius: float, height: float) -> None:
    rider = lean(speed, radius, height)
    assert float(rider.path_radius) == pytest.approx(radius - height * np.sin(rider.angle), rel=1e-12)
    assert float(rider.mass_speed) == pytest.approx(speed * float(rider.path_radius) / radius, rel=1e-12)
    pull = float(rider.mass_speed) ** 2 / (9.80665 * float(rider.path_radius))
    assert np.tan(rider.angle) == pytest.approx(pull, rel=1e-10, abs=1e-12)
    assert float(rider.load_factor) == pytest.approx(1.0 / np.cos(rider.angle), rel=1e-12)


def test_lean_agrees_with_a_bracketing_search() -> None:
    for speed, radius, height in ((5.0, 8.0, 1.1), (18.0, 20.0, 1.2), (25.0, 15.0, 1.0)):

        def imbalance(angle: float, v: float = speed, r: float = radius, h: float = height) -> float:
            path = r - h * np.sin(angle)
            return float(np.tan(angle) - (v * path / r) ** 2 / (9.80665 * path))

        assert float(lean(speed, radius, height).angle) == pytest.approx(
            brentq(imbalance, 0, 1.57), abs=1e-10
        )


def test_straight_and_standstill_are_upright() -> None:
    for rider in (lean(15.0, np.inf, 1.1), lean(0.0, 23.0, 1.1)):
        assert float(rider.angle) == 0.0
        assert float(rider.load_factor) == 1.0
    assert float(lean(15.0, np.inf, 1.1).mass_speed) == 15.0
    assert float(lean(15.0, np.inf, 1.1).path_radius) == np.inf


def test_faster_tighter_and_lower_lean_more() -> None:
    assert np.all(np.diff(lean(np.linspace(1, 20, 20), 23.0, 1.1).angle) > 0)
    assert np.all(np.diff(lean(15.0, np.linspace(15, 60, 20), 1.1).angle) < 0)
    assert np.all(np.diff(lean(15.0, 23.0, np.linspace(0.0, 1.5, 20)).angle) < 0)


def test_lean_broadcasts_and_keeps_dropouts() -> None:
    rider = lean(np.array([[14.0], [np.nan]]), np.array([20.0, 23.0, np.inf]), 1.1)
    for values in rider:
        assert values.shape == (2, 3)
        assert np.all(np.isnan(values[1, :2]))
        assert np.all(np.isfinite(values[0, :2]))


@pytest.mark.parametrize(
    ("radius", "height", "message"),
    [
        (0.0, 1.1, "a bend radius must be positive"),
        (-23.0, 1.1, "a bend radius must be positive"),
        (23.0, -1.0, "the height of the mass must be 0 m or more"),
    ],
)
def test_lean_refuses(radius: float, height: float, message: str) -> None:
    with pytest.raises(ValueError, match=message):
        lean(12.0, radius, height)


def test_mass_comes_down_by_its_height_less_its_cosine() -> None:
    assert float(mass_drop(np.radians(60.0), 1.1)) == pytest.approx(0.55)
    assert float(mass_drop(1e-6, 1.0)) == pytest.approx(
        5e-13, rel=1e-9
    )  # keeps its digits when nearly upright


shapes = st.builds(
    lambda radius, share, straight: TrackShape(
        2 * (np.pi * radius + share * np.pi * radius + straight), radius, share * np.pi * radius
    ),
    st.floats(10.0, 50.0),
    st.one_of(st.just(0.0), st.floats(0.01, 0.999)),
    st.floats(0.5, 120.0),
)


@settings(max_examples=50)
@given(shapes)
def test_lap_closes(track: TrackShape) -> None:
    s = np.linspace(0.0, track.lap_length, 40001)
    heading = track.heading(s)
    east = cumulative_trapezoid(np.sin(heading), s)[-1]
    north = cumulative_trapezoid(np.cos(heading), s)[-1]
    assert np.hypot(east, north) < 1e-4 * track.lap_length


@settings(max_examples=50)
@given(shapes)
def test_heading_turns_left_by_the_curvature(track: TrackShape) -> None:
    s = np.linspace(-0.3 * track.lap_length, 2.2 * track.lap_length, 5001)
    h = 1e-5
    turned = (track.heading(s - h) - track.heading(s + h) + np.pi) % (2 * np.pi) - np.pi
    edges = (
        np.abs(np.diff(track.curvature(np.stack([s - h, s + h])), axis=0)[0]) > 1e-6
    )  # steps without transition
    np.testing.assert_allclose((turned / (2 * h))[~edges], track.curvature(s)[~edges], atol=1e-6)


@settings(max_examples=50)
@given(shapes)
def test_a_lap_turns_once_and_its_parts_add_up(track: TrackShape) -> None:
    parts = 2 * track.straight_length + 2 * track.arc_length + 4 * track.transition_length
    assert parts == pytest.approx(track.lap_length, rel=1e-12)
    s = (np.arange(200_000) + 0.5) * track.lap_length / 200_000
    assert np.mean(track.curvature(s)) * track.lap_length == pytest.approx(2 * np.pi, rel=1e-4)
    assert np.max(track.curvature(s)) == pytest.approx(1.0 / track.bend_radius, rel=1e-3)


def test_positions_of_a_track_with_transitions() -> None:
    track = TrackShape(250.0, 22.0, 15.0)
    straight, quarter = track.straight_length, 62.5
    assert float(track.curvature(0.0)) == 0.0
    assert float(track.curvature(0.5 * straight)) == pytest.approx(0.0, abs=1e-12)
    assert float(track.curvature(0.5 * straight + 7.5)) == pytest.approx(0.5 / 22.0)  # half-way through
    assert float(track.curvature(quarter)) == pytest.approx(1 / 22.0)
    assert float(track.heading(0.0)) == 0.0
    assert float(track.heading(quarter)) == pytest.approx(1.5 * np.pi)  # a left turn from north is west
    assert float(track.heading(125.0)) == pytest.approx(np.pi)
    assert np.isnan(track.curvature(np.nan))
    assert np.isnan(TrackShape(250.0, 22.0).curvature(np.nan))


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        ((0.0, 22.0, 0.0), "a track needs a positive lap length"),
        ((250.0, np.nan, 0.0), "a track needs a positive lap length"),
        ((250.0, 22.0, -1.0), "no negative transition"),
        ((400.0, 22.0, 70.0), "transitions of 70 m are too long for bends of radius 22 m"),
        ((250.0, 45.0, 0.0), "do not fit into a lap of 250 m"),
    ],
)
def test_parts_that_do_not_fit_are_refused(arguments: tuple[float, ...], message: str) -> None:
    with pytest.raises(ValueError, match=message):
        TrackShape(*arguments)
