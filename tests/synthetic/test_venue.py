"""Venues: closed lines, mirrored heights, geometry of the track."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from ridercda.physics.geodesy import inverse
from ridercda.session.document import VenueKind
from ridercda.synthetic.line import Line
from ridercda.synthetic.recording import to_geographic
from ridercda.synthetic.venue import LoopVenue, OutAndBackVenue, RoadVenue, TrackVenue, lay_out


def turned(line: Line) -> float:
    bearing = np.unwrap(np.arctan2(line.sin_heading, line.cos_heading))
    return abs(float(bearing[-1] - bearing[0])) + float(line.curvature[-1] * line.step)


@given(seed=st.integers(0, 10_000), length=st.floats(900.0, 6000.0))
@settings(max_examples=20, deadline=None)
def test_loop_is_closed_smooth_and_as_long_as_asked(seed: int, length: float) -> None:
    line = lay_out(LoopVenue(length=length), np.random.default_rng(seed)).line
    assert line.length == pytest.approx(length, rel=1e-4)
    gap = math.hypot(line.east[0] - line.east[-1], line.north[0] - line.north[-1])
    assert gap == pytest.approx(line.step, rel=1e-3)
    steps = np.hypot(np.diff(line.east), np.diff(line.north))
    assert steps == pytest.approx(line.step, rel=1e-3)
    assert turned(line) == pytest.approx(2 * math.pi, rel=5e-3)
    rise = line.grade_sine.sum() * line.step
    assert abs(rise) < 1e-6


def test_heading_points_along_the_line() -> None:
    for spec in (LoopVenue(), OutAndBackVenue(), TrackVenue(), RoadVenue(runs=2)):
        line = lay_out(spec, np.random.default_rng(3)).line
        assert np.diff(line.east) == pytest.approx(line.step * line.sin_heading[:-1], abs=0.1 * line.step)
        assert np.diff(line.north) == pytest.approx(line.step * line.cos_heading[:-1], abs=0.1 * line.step)
        assert np.diff(line.height) == pytest.approx(line.step * line.grade_sine[:-1], abs=2e-3 * line.step)


def test_out_and_back_has_the_same_heights_both_ways_and_braked_turns() -> None:
    spec = OutAndBackVenue(length=1500.0, turn_radius=4.0)
    place = lay_out(spec, np.random.default_rng(1))
    line = place.line
    # Where the turns leave the lanes they are rounded a little.
    assert place.lap == pytest.approx(3000 + 2 * math.pi * 4, abs=4.0)
    out = np.arange(50.0, 1450.0, 50.0)
    back = place.lap - math.pi * 4.0 - out
    assert line.at(line.height, back) == pytest.approx(line.at(line.height, out), abs=0.15)
    assert 1 / line.curvature.max() == pytest.approx(4.0, rel=0.15)
    assert line.speed_limit.min() < 4.0
    assert np.median(line.speed_limit) > 20.0
    assert place.venue.kind is VenueKind.OUT_AND_BACK


def test_speed_limit_can_be_reached_by_braking() -> None:
    line = lay_out(OutAndBackVenue(), np.random.default_rng(1)).line
    ahead = np.roll(line.speed_limit, -1)
    assert np.all(line.speed_limit**2 - ahead**2 <= 2 * 1.8 * line.step + 1e-9)


def test_track_has_straights_bends_and_closes() -> None:
    place = lay_out(TrackVenue(), np.random.default_rng(0))
    line = place.line
    assert line.curvature.max() == pytest.approx(1 / 23.0)
    assert line.curvature.sum() * line.step == pytest.approx(2 * math.pi, rel=1e-9)
    # What is left of 125 m after a bend of pi*23 m less one transition, and two transitions.
    straight = 125.0 - 40.0 - (math.pi * 23.0 - 20.0)
    assert np.count_nonzero(line.curvature == 0) * line.step == pytest.approx(2 * straight, abs=1.1)
    assert math.hypot(line.east[-1], line.north[-1]) == pytest.approx(line.step, abs=0.02)
    assert np.ptp(line.height) == 0


def test_shape_seed_pins_the_place_whatever_the_day() -> None:
    spec = LoopVenue(shape_seed=7)
    one, two = (lay_out(spec, np.random.default_rng(s)).line for s in (1, 2))
    assert np.array_equal(one.east, two.east)
    free = lay_out(LoopVenue(), np.random.default_rng(1)).line
    assert not np.array_equal(one.east, free.east)


def test_positions_are_wgs84() -> None:
    rng = np.random.default_rng(2)
    east, north = rng.uniform(-3000, 3000, (2, 20))
    latitude, longitude = to_geographic(east, north)
    for j in range(19):
        found = inverse(latitude[j], longitude[j], latitude[j + 1], longitude[j + 1])
        flat = math.hypot(east[j + 1] - east[j], north[j + 1] - north[j])
        assert float(found.distance) == pytest.approx(flat, rel=5e-6, abs=2e-3)
