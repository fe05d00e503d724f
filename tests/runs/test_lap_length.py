from __future__ import annotations

import numpy as np
import pytest

from ridercda.runs.lap_length import comes_back, lap_from_fixes


def _loop(length: float, laps: float, noise: float = 2.0) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """An ellipse-like loop, by distance ridden."""
    rng = np.random.default_rng(3)
    angle = np.linspace(0, 2 * np.pi, 2001)
    x, y = 1.6 * np.cos(angle), np.sin(angle)
    arc = np.concatenate(([0.0], np.cumsum(np.hypot(np.diff(x), np.diff(y)))))
    scale = length / arc[-1]
    way = np.arange(0.0, laps * length, 9.0)
    at = way % length / scale
    return (
        way,
        scale * np.interp(at, arc, x) + rng.normal(0, noise, way.size),
        scale * np.interp(at, arc, y) + rng.normal(0, noise, way.size),
    )


@pytest.mark.parametrize("length", [400.0, 2400.0, 9000.0])
@pytest.mark.parametrize("given", [False, True])
def test_the_first_return_is_the_lap(length: float, given: bool) -> None:
    found = lap_from_fixes([_loop(length, 3.3)], 1.02 * length if given else None)
    assert found is not None
    assert abs(found - length) < 6.0


def test_a_straight_road_never_comes_back() -> None:
    way = np.arange(0.0, 9000.0, 9.0)
    assert lap_from_fixes([(way, way, np.zeros(way.size))], None) is None


def test_less_than_a_lap_tells_nothing() -> None:
    assert lap_from_fixes([_loop(2400.0, 0.8)], None) is None


def test_the_way_to_the_venue_is_told_from_the_laps() -> None:
    way, x, y = _loop(1000.0, 4.0)
    there = np.arange(0.0, 3000.0, 9.0)
    whole = np.concatenate((there, there[-1] + 9.0 + way))
    east = np.concatenate((x[0] + 3000.0 - there, x))
    north = np.concatenate((np.full(there.size, y[0]), y))
    found = lap_from_fixes([(whole, east, north)], None)
    assert found is not None
    assert abs(found - 1000.0) < 6.0
    back = comes_back(whole, east, north, found)
    assert not back[: there.size - 20].any()
    assert back[there.size + 5 :].mean() > 0.95
