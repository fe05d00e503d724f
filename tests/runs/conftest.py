"""Invented days with their truth, for everything that finds runs and positions."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import cache
from itertools import pairwise

import numpy as np
import numpy.typing as npt
import pytest

from ridercda.rides.ride import LapMark, LapTrigger, Ride
from ridercda.runs.position import RunPosition, VenuePath
from ridercda.session.document import VenueKind
from ridercda.synthetic.day import SyntheticDay, simulate_day
from ridercda.synthetic.spec import DaySpec

FloatArray = npt.NDArray[np.float64]

simulated = cache(simulate_day)


@pytest.fixture
def day() -> Callable[[DaySpec, int], SyntheticDay]:
    """A day, made once for all tests that ask for it."""
    return simulated


@dataclass(frozen=True, slots=True, eq=False)
class Misses:
    """Position found less position true, of the records that count, run by run. [m]"""

    runs: tuple[FloatArray, ...]

    @property
    def within(self) -> float:
        """RMS about each run's mean."""
        return float(np.sqrt(np.mean([np.var(run) for run in self.runs])))

    @property
    def between(self) -> float:
        """Standard deviation of the runs' means."""
        return float(np.std([run.mean() for run in self.runs]))

    @property
    def rms(self) -> float:
        """RMS about the mean of all: where position 0 lies is nobody's error."""
        return float(np.concatenate(self.runs).std())


def missed(day: SyntheticDay, path: VenuePath, rides: dict[str, Ride] | None = None) -> Misses:
    """Compare positions with the truth, whichever end or place is called 0."""
    runs = []
    for run in day.session.runs:
        if run.id in path.runs:
            time = (rides or day.rides)[run.ride].time
            runs.append(_one(day, path, path.runs[run.id], time))
    period = _period(day, path)
    if period is not None:
        middle = float(np.angle(np.exp(2j * np.pi * np.concatenate(runs) / period).mean()))
        middle *= period / (2 * np.pi)
        runs = [(run - middle + period / 2) % period - period / 2 for run in runs]
    return Misses(tuple(runs))


def _period(day: SyntheticDay, path: VenuePath) -> float | None:
    if path.kind is VenueKind.LOOP:
        return day.truth.lap_length
    if path.kind is VenueKind.TRACK:
        return day.truth.lap_length / 2  # its two straights look alike
    return None


def true_place(day: SyntheticDay, time: FloatArray) -> FloatArray:
    """Return the true place along the lap (a road: from its start) at some moments. [m]"""
    truth = day.truth.records
    if day.session.venue is not None and day.session.venue.kind is VenueKind.ROAD:
        return np.interp(time, truth.time, truth.place)
    return np.interp(time, truth.time, np.unwrap(truth.place, period=day.truth.lap_length))


def _one(day: SyntheticDay, path: VenuePath, run: RunPosition, time: FloatArray) -> FloatArray:
    place = true_place(day, time)[run.points]
    if path.kind is VenueKind.OUT_AND_BACK:
        lap = day.truth.lap_length
        # The line is drawn from a quarter turn before the near end's U-turn is over (radius 4 m).
        along = (place + day.truth.line_start + 2 * np.pi) % lap
        road = np.where(along < lap / 2, along, lap - along)
        ways = (run.position - road, run.position - (lap / 2 - road))
        return min((way[run.valid] for way in ways), key=lambda miss: float(np.abs(miss).mean()))
    return (run.position - place)[run.valid]


@pytest.fixture
def misses() -> Callable[..., Misses]:
    """How far positions are from the truth."""
    return missed


@pytest.fixture
def place_at() -> Callable[[SyntheticDay, FloatArray], FloatArray]:
    """True places."""
    return true_place


def changed(ride: Ride, laps: tuple[LapMark, ...] | None = None, **channels: FloatArray | None) -> Ride:
    """Return a ride with other channels; None takes one away."""
    merged = {**ride.channels, **channels}
    kept = {name: np.array(values) for name, values in merged.items() if values is not None}
    return replace(ride, channels=kept, laps=ride.laps if laps is None else laps)


@pytest.fixture
def altered() -> Callable[..., Ride]:
    """A ride with some channels or lap marks replaced."""
    return changed


def pressed(times: list[float], trigger: LapTrigger = LapTrigger.MANUAL) -> tuple[LapMark, ...]:
    """Return lap marks that end at some moments."""
    edges = [0.0, *sorted(times)]
    return tuple(LapMark(a, b, trigger) for a, b in pairwise(edges))


@pytest.fixture
def lap_marks() -> Callable[..., tuple[LapMark, ...]]:
    """Lap marks from the moments at which laps end."""
    return pressed
