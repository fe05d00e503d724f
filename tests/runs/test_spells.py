from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.testing import assert_allclose

from ridercda.rides.ride import Ride
from ridercda.runs.spells import riding_spells, running_mean
from ridercda.runs.traced import RideTrace, trace_ride

TIME = np.arange(0.0, 901.0)


def _trace(speed: np.ndarray, power: np.ndarray | None = None, time: np.ndarray = TIME) -> RideTrace:
    channels = {"speed": speed}
    if power is not None:
        channels["power"] = power
    return trace_ride(Ride(time, channels), None)


def _spans(trace: RideTrace) -> list[tuple[float, float]]:
    return [(float(trace.time[s.start]), float(trace.time[s.stop - 1])) for s in riding_spells(trace)]


def test_stops_divide_a_ride() -> None:
    speed = np.full(TIME.size, 10.0)
    speed[(TIME > 300) & (TIME <= 330)] = 0.0
    assert _spans(_trace(speed)) == [(0.0, 300.0), (331.0, 900.0)]


def test_a_moment_of_standing_does_not() -> None:
    speed = np.full(TIME.size, 10.0)
    speed[301:303] = 0.0
    assert _spans(_trace(speed)) == [(0.0, 900.0)]


def test_a_silence_of_the_recording_divides() -> None:
    time = np.concatenate((np.arange(0.0, 300.0), np.arange(360.0, 700.0)))
    assert _spans(_trace(np.full(time.size, 10.0), time=time)) == [(0.0, 299.0), (360.0, 699.0)]


def test_easy_riding_divides_but_a_descent_does_not() -> None:
    speed, power = np.full(TIME.size, 10.0), np.full(TIME.size, 250.0)
    easy = (TIME > 300) & (TIME <= 360)
    descent = (TIME > 600) & (TIME <= 640)
    power[easy] = power[descent] = 60.0
    speed[easy], speed[descent] = 6.0, 15.0
    spans = _spans(_trace(speed, power))
    assert len(spans) == 2
    assert abs(spans[0][1] - 300) < 8
    assert abs(spans[1][0] - 360) < 8


def test_a_foot_put_down_in_a_u_turn_does_not_divide() -> None:
    speed = np.full(TIME.size, 10.0)
    speed[(TIME > 300) & (TIME <= 306)] = 0.0
    trace = _trace(speed)
    assert len(riding_spells(trace)) == 2
    turned = replace(trace, turns=np.array([3000.0]))
    assert len(riding_spells(turned)) == 1


def test_a_spell_lasts_half_a_minute() -> None:
    speed = np.zeros(TIME.size)
    speed[100:120] = 10.0
    assert _spans(_trace(speed)) == []


def test_the_running_mean_goes_by_time() -> None:
    time = np.array([0.0, 1.0, 2.0, 6.0, 7.0, 8.0])
    assert_allclose(running_mean(time, np.full(6, 3.0), 4.0), 3.0)
    values = np.array([0.0, 0.0, 0.0, 8.0, 0.0, 0.0])  # 8 over (2, 6]
    assert_allclose(running_mean(time, values, 2.0)[2], 4.0)
