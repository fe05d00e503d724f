"""Whole laps of a track as single records.

In and out of a bend a rider leans, sinks and rises within a second or two, and the wheel runs faster than the mass:
exchanges of a hundred watts that records of a second cannot resolve. Over a whole lap they cancel, and indoors there
are no gusts to be told from second to second, so nothing is lost.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt

from ridercda.drag.day import RunRecords

FloatArray = npt.NDArray[np.float64]


def whole_laps(records: RunRecords, gates: Sequence[float]) -> RunRecords:
    """Return one record a lap, from gate to gate.

    Load and path ratio are the values that give the lap's rolling work and air work at its mean speed. A lap with
    a record that is not usable is not usable.
    """
    edges = np.asarray(gates, float)
    count = max(edges.size - 1, 0)
    begin = records.time - records.interval
    known = np.isfinite(records.power) & np.isfinite(records.speed)
    power = np.where(known, records.power, 0.0)
    speed = np.where(known, records.speed, 0.0)

    def over_laps(values: FloatArray) -> FloatArray:
        """Return the integral of a record mean over each lap."""
        if not count or not records.size:
            return np.zeros(count)
        ends = np.concatenate([begin[:1], records.time])
        total = np.concatenate([[0.0], np.cumsum(values * records.interval)])
        at_edges = np.interp(edges, ends, total)
        # A gate lies between records: the nearest record's mean serves for the part of one outside.
        at_edges += values[0] * np.minimum(edges - ends[0], 0.0) + values[-1] * np.maximum(
            edges - ends[-1], 0.0
        )
        return np.diff(at_edges)

    time = np.diff(edges) if count else np.zeros(0)
    safe = np.maximum(time, 1e-9)
    mean_speed = over_laps(speed) / safe
    slow = np.maximum(mean_speed, 1e-3)
    load = over_laps(records.load * speed) / safe / slow
    air = over_laps((records.path_ratio * speed) ** 3) / safe / slow**3
    lost = over_laps(np.where(records.usable, 0.0, 1.0))
    covered = np.zeros(count, bool)
    if count and records.size:
        covered = (edges[:-1] >= begin[0] - 1.0) & (edges[1:] <= records.time[-1] + 1.0)
    along = records.air_speed
    with_air = np.isfinite(along)
    seconds = over_laps(np.where(with_air, 1.0, 0.0))
    air_speed = np.where(
        seconds > 0.5 * time, over_laps(np.where(with_air, along, 0.0)) / np.maximum(seconds, 1e-9), np.nan
    )

    at_gates = np.zeros(count + 1)
    if count and records.size:
        ends = np.concatenate([begin[:1], records.time])
        at_gates = np.interp(edges, ends, np.concatenate([records.start_speed[:1], records.end_speed]))

    def mean(values: FloatArray) -> FloatArray:
        return over_laps(np.where(np.isfinite(values), values, 0.0)) / safe

    return RunRecords(
        time=edges[1:].copy() if count else np.zeros(0),
        interval=time,
        power=mean(power),
        speed=mean_speed,
        start_speed=at_gates[:-1].copy(),
        end_speed=at_gates[1:].copy(),
        air_speed=air_speed,
        position=np.zeros(count),
        direction=np.ones(count),
        heading=np.zeros(count),
        density=mean(records.density),
        load=load,
        path_ratio=np.cbrt(np.maximum(air, 0.0)),
        lean_power=np.zeros(count),
        tyre_temperature=mean(records.tyre_temperature),
        warm_up=mean(records.warm_up),
        altitude=np.full(count, np.nan),
        lap=np.arange(count, dtype=np.int64),
        usable=covered & (lost < 0.5) & (time > 1.0),
    )
