from __future__ import annotations

import numpy as np
from numpy.testing import assert_allclose

from ridercda.runs.reference_line import draw_line

RADIUS = 100.0
ROUND = 2 * np.pi * RADIUS


def _circle(station: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Clockwise, going north from the westernmost point."""
    angle = station / RADIUS
    return -RADIUS * np.cos(angle), RADIUS * np.sin(angle)


def test_a_circle_has_its_heading_curvature_and_length() -> None:
    station = np.arange(0.0, 5 * ROUND, 9.7)
    line = draw_line(station, *_circle(station), np.ones(station.size), start=0.0, length=ROUND, closed=True)
    at = np.linspace(0, ROUND, 50)
    turn = np.angle(np.exp(1j * (line.heading(at) - at / RADIUS)))
    assert_allclose(turn, 0.0, atol=2e-3)
    assert_allclose(line.curvature(at), 1 / RADIUS, rtol=2e-2)  # clockwise is to the right
    assert abs(line.pace(station) - 1) < 1e-4


def test_the_line_closes() -> None:
    station = np.arange(0.0, 4 * ROUND, 7.3)
    line = draw_line(station, *_circle(station), np.ones(station.size), start=0.0, length=ROUND, closed=True)
    before, after = line.point(np.array([ROUND - 1e-6, ROUND + 1e-6]))[0]
    assert abs(before - after) < 1e-3
    assert_allclose(line.point(np.array([ROUND + 30.0])), line.point(np.array([30.0])), atol=1e-9)


def test_wild_fixes_hardly_move_it() -> None:
    rng = np.random.default_rng(5)
    station = np.arange(0.0, 12 * ROUND, 9.7)
    x, y = _circle(station)
    x = x + rng.normal(0, 1.0, station.size)
    y = y + rng.normal(0, 1.0, station.size)
    wild = rng.random(station.size) < 0.03
    x[wild] += 25.0
    line = draw_line(station, x, y, np.ones(station.size), start=0.0, length=ROUND, closed=True)
    at = np.linspace(0, ROUND, 200)
    off = np.hypot(*line.point(at)) - RADIUS
    assert np.abs(off).max() < 1.0


def test_an_open_line_ends_where_it_was_ridden() -> None:
    station = np.arange(0.0, 1001.0, 10.0)
    line = draw_line(
        station, 0.6 * station, 0.8 * station, np.ones(station.size), start=0.0, length=1000.0, closed=False
    )
    assert_allclose(line.point(np.array([0.0, 500.0, 1000.0])), [[0, 300, 600], [0, 400, 800]], atol=0.05)
    assert_allclose(line.heading(np.array([400.0])), np.arctan2(0.6, 0.8), atol=1e-6)
