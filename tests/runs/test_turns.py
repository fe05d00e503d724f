from __future__ import annotations

import numpy as np
from numpy.testing import assert_allclose

from ridercda.runs.turns import turn_zones, turns_by_speed, u_turns


def _there_and_back(legs: int, length: float = 800.0, lanes: float = 8.0) -> tuple[np.ndarray, ...]:
    """A straight road ridden to and fro with half circles between lanes; returns path and true turns."""
    arc = np.pi * lanes / 2
    way = np.arange(0.0, legs * (length + arc), 5.0)
    east, north, turns = [], [], [k * (length + arc) + length + arc / 2 for k in range(legs - 1)]
    for s in way:
        leg, on = divmod(s, length + arc)
        if on < length:
            north.append(on if leg % 2 == 0 else length - on)
            east.append(0.0 if leg % 2 == 0 else lanes)
        else:
            angle = (on - length) / (lanes / 2)
            side = 1 if leg % 2 == 0 else -1
            east.append(lanes / 2 - side * lanes / 2 * np.cos(angle))
            north.append((length if leg % 2 == 0 else 0.0) + side * lanes / 2 * np.sin(angle))
    return way, np.array(east), np.array(north), np.array(turns)


def test_turns_are_found_to_the_metre_through_noise() -> None:
    way, east, north, true = _there_and_back(6)
    rng = np.random.default_rng(1)
    found = u_turns(way, east + rng.normal(0, 1.0, way.size), north + rng.normal(0, 1.0, way.size))
    assert found.size == true.size
    assert_allclose(found, true, atol=2.0)


def test_turns_between_lanes_sixteen_metres_apart() -> None:
    way, east, north, true = _there_and_back(4, lanes=16.0)
    assert_allclose(u_turns(way, east, north), true, atol=2.0)


def test_bends_of_a_loop_are_no_turns() -> None:
    way = np.arange(0.0, 4000.0, 5.0)
    angle = way / 50.0  # a loop with a radius of 50 m, all bend
    assert u_turns(way, 50 * np.cos(angle), 50 * np.sin(angle)).size == 0


def test_a_ride_without_fixes_has_no_turns_by_position() -> None:
    way = np.arange(0.0, 500.0, 5.0)
    assert u_turns(way, np.full(way.size, np.nan), np.full(way.size, np.nan)).size == 0


def test_the_zone_reaches_back_to_where_braking_or_coasting_began() -> None:
    way = np.arange(0.0, 1000.0, 10.0)
    speed = np.full(way.size, 10.0)
    speed[(way > 460) & (way < 520)] = 4.0
    power = np.full(way.size, 200.0)
    power[(way > 430) & (way < 500)] = 0.0
    spoilt = turn_zones(np.array([500.0]), way, speed, power)
    assert spoilt[(way > 430) & (way < 515)].all()
    assert not spoilt[way < 400].any()
    assert not spoilt[way > 560].any()


def test_a_stop_on_the_way_is_no_turn_when_the_leg_is_known() -> None:
    way = np.concatenate(([0.0], np.cumsum(np.full(1200, 5.0))))
    speed = np.full(way.size, 10.0)
    for turn in (1000.0, 2000.0, 3000.0, 4000.0, 5000.0):
        speed[np.abs(way - turn) < 20] = 4.0
    speed[np.abs(way - 2600.0) < 10] = 0.0
    assert_allclose(turns_by_speed(way, speed, 1000.0), [1000, 2000, 3000, 4000, 5000], atol=25.0)
