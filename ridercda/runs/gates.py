"""The gate of a venue: where laps are counted."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from ridercda.runs.placement import passing_times

FloatArray = npt.NDArray[np.float64]

LATE_PRESS = 15.0  # [s] a press this much off the gate still means the gate; common practice
ROLLING_OUT = 2.0  # [s]
SAME_PLACE = 60.0  # [m] presses within this of one another were meant for one gate


@dataclass(frozen=True, slots=True, eq=False)
class Progress:
    """A spell's way round and round; arrays of shape (n,).

    Parameters
    ----------
    time : ndarray
        [s]
    coordinate : ndarray
        Never falling; a lap further, the rider is at the same place in the same direction. [m]
    speed : ndarray
        [m/s]
    sense : float
        -1 for a loop ridden the other way round, on which a gate lies at minus its place; else +1.
    """

    time: FloatArray
    coordinate: FloatArray
    speed: FloatArray
    sense: float = 1.0

    def at(self, time: float) -> float:
        """Return the coordinate at a moment. [m]"""
        return float(np.interp(time, self.time, self.coordinate))

    def passing(self, gate: float, lap: float) -> FloatArray:
        """Return when the spell passes a gate, interpolated between records. [s]

        A gate that lies two seconds or less beyond the end counts as passed at the end: recordings are stopped
        there.
        """
        gate *= self.sense
        first = np.ceil((self.coordinate[0] - gate) / lap - 1e-9)
        beyond = min(ROLLING_OUT * float(self.speed[-1]), 0.05 * lap)
        last = np.floor((self.coordinate[-1] + beyond - gate) / lap)
        goals = gate + lap * np.arange(first, last + 1)
        return passing_times(self.time, self.coordinate, goals)


@dataclass(frozen=True, slots=True)
class Gate:
    """Where laps are counted.

    Parameters
    ----------
    place : float
        Coordinate within a lap. [m]
    basis : str
        What it was chosen by: "lap button" or "position".
    """

    place: float
    basis: str


def gate_of_presses(spells: Sequence[Progress], presses: Sequence[float], lap: float) -> Gate | None:
    """Return the gate at which the lap button was pressed; None when most presses have no place in common.

    Parameters
    ----------
    spells : sequence of Progress
    presses : sequence of float
        [s]
    lap : float
        [m]
    """
    places = np.array(
        [s.sense * s.at(press) % lap for press in presses for s in spells if s.time[0] <= press <= s.time[-1]]
    )
    if places.size < 2:
        return None
    # The densest place: presses may be late, never early by much, and a few mean something else.
    gap = np.abs((places[:, None] - places[None, :] + lap / 2) % lap - lap / 2)
    reach = min(SAME_PLACE, 0.1 * lap)
    near = gap <= reach
    best = int(np.argmax(near.sum(axis=1)))
    if near[best].sum() < max(2, 0.5 * places.size):
        return None
    turn = np.exp(2j * np.pi * places[near[best]] / lap)
    middle = float(np.angle(turn.mean())) / (2 * np.pi) * lap
    offsets = (places[near[best]] - middle + lap / 2) % lap - lap / 2
    return Gate(float((middle + np.median(offsets)) % lap), "lap button")


def fastest_gate(spells: Sequence[Progress], lap: float, settle: float) -> Gate:
    """Return the gate that leaves the most whole laps, and of those the one passed fastest.

    Parameters
    ----------
    spells : sequence of Progress
        Not empty.
    lap : float
        [m]
    settle : float
        Left out at the start of each spell. [s]
    """
    places = np.arange(0.0, lap, max(lap / 200, 5.0))
    laps = np.zeros(places.size)
    speed_sum, passed = np.zeros(places.size), np.zeros(places.size)
    for spell in spells:
        if spell.time[-1] - spell.time[0] <= settle:
            continue
        begin = spell.at(spell.time[0] + settle)
        there = spell.sense * places
        inside = np.floor((spell.coordinate[-1] - there) / lap) - np.ceil((begin - there) / lap)
        laps += np.maximum(inside, 0.0)
        bins = ((spell.sense * spell.coordinate % lap) / lap * places.size).astype(np.int64) % places.size
        speed_sum += np.bincount(bins, weights=spell.speed, minlength=places.size)
        passed += np.bincount(bins, minlength=places.size)
    speed = np.where(passed > 0, speed_sum / np.maximum(passed, 1), 0.0)
    # A gate wants room: half a per cent of a lap to either side.
    smooth = np.convolve(np.concatenate((speed[-2:], speed, speed[:2])), np.ones(5) / 5, mode="valid")
    best = laps >= laps.max()
    return Gate(float(places[int(np.argmax(np.where(best, smooth, -1.0)))]), "position")
