"""Where runs lie along a venue, before it is told as positions."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from ridercda.runs.reference_line import ReferenceLine
from ridercda.runs.traced import Group
from ridercda.session.document import VenueKind

FloatArray = npt.NDArray[np.float64]
BoolArray = npt.NDArray[np.bool_]


@dataclass(frozen=True, slots=True, eq=False)
class Placed:
    """One run on the venue; arrays of shape (n,).

    Parameters
    ----------
    station : ndarray
        Along the venue, unwrapped: growing beyond the lap on a loop. [m]
    direction : ndarray
        +1 with growing station, -1 against it.
    standard_error : ndarray
        Of the station. [m]
    off_venue : ndarray of bool
        Away from the line, or spoilt by a U-turn.
    """

    station: FloatArray
    direction: FloatArray
    standard_error: FloatArray
    off_venue: BoolArray

    def part(self, inner: slice) -> Placed:
        """Return some records of the run."""
        return Placed(
            self.station[inner], self.direction[inner], self.standard_error[inner], self.off_venue[inner]
        )


@dataclass(frozen=True, slots=True)
class Scale:
    """What a recorded distance is multiplied with, for one ride and tyre set.

    Parameters
    ----------
    factor : float
        True over recorded. [1]
    standard_error : float
        Of the factor, with what all groups share. [1]
    basis : str
        What it was found from: "lap length", "position", "both", or "" when it is only assumed.
    """

    factor: float
    standard_error: float
    basis: str


@dataclass(frozen=True, slots=True, eq=False)
class Placement:
    """All runs that could be placed, on one coordinate.

    Parameters
    ----------
    line : ReferenceLine or None
        None where no position was recorded.
    length : float
        Of the venue: once round, or the road one way. [m]
    length_error : float
        Standard error of the length. [m]
    runs : mapping of run id to Placed
    scales : mapping of Group to Scale
    notes : tuple of str
    """

    line: ReferenceLine | None
    length: float
    length_error: float
    runs: Mapping[str, Placed]
    scales: Mapping[Group, Scale]
    notes: tuple[str, ...] = ()


def lap_coordinate(kind: VenueKind, placed: Placed, length: float) -> tuple[FloatArray, float]:
    """Return a coordinate that grows as a run goes on, and the length of a lap in it.

    Parameters
    ----------
    kind : VenueKind
    placed : Placed
    length : float
        Of the venue: once round, or the road one way. [m]

    Returns
    -------
    coordinate : ndarray, shape (n,)
        Never falling. [m]
    lap : float
        Once round, or there and back; inf on a road, where nothing repeats. [m]
    """
    if kind in (VenueKind.LOOP, VenueKind.TRACK):
        coordinate, lap = placed.station * placed.direction[0], length
    elif kind is VenueKind.OUT_AND_BACK:
        position = np.clip(placed.station, 0.0, length)
        there_and_back = np.where(placed.direction > 0, position, 2 * length - position)
        coordinate, lap = np.unwrap(there_and_back, period=2 * length), 2 * length
    else:
        coordinate, lap = placed.station * placed.direction[0], np.inf
    return np.asarray(np.maximum.accumulate(coordinate)), lap


def passing_times(time: FloatArray, coordinate: FloatArray, goals: FloatArray) -> FloatArray:
    """Return when a coordinate that never falls reaches some values, interpolated between records. [s]"""
    moving = np.concatenate(([True], np.diff(coordinate) > 0))
    return np.interp(goals, coordinate[moving], time[moving])
