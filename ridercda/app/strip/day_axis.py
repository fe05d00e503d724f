"""The day on one axis: each ride's clock laid on the time of day, with long idle spans folded (no Qt)."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterable, Mapping
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]

IDLE_LONGER_THAN = 600.0  # s; shorter pauses are shown at their length
FOLDED_TO = 150.0  # s of axis that a folded span takes
BETWEEN_UNDATED = 300.0  # s between rides whose time of day is not known
MARGIN = 60.0  # s kept about what is shown, before idle time folds


@dataclass(frozen=True, slots=True, eq=False)
class DayAxis:
    """Piecewise linear: seconds of the day onto seconds along the axis.

    `day` and `along` are the knots, both increasing, shape (k,). `offsets` tell at which second of the day each
    ride begins. `dated` is False where a ride's time of day is not known, so that clock labels are left out.
    """

    day: FloatArray
    along: FloatArray
    offsets: Mapping[str, float]
    folds: tuple[tuple[float, float], ...]  # spans of the day that are folded
    dated: bool

    @property
    def length(self) -> float:
        """Length of the axis. [s]"""
        return float(self.along[-1])

    def place(self, ride: str, time: float) -> float:
        """Return where along the axis a moment of a ride lies."""
        return self.of_day(self.offsets.get(ride, 0.0) + time)

    def places(self, ride: str, times: FloatArray) -> FloatArray:
        """Return where along the axis moments of a ride lie."""
        result: FloatArray = np.interp(self.offsets.get(ride, 0.0) + times, self.day, self.along)
        return result

    def of_day(self, second: float) -> float:
        """Return where along the axis a second of the day lies."""
        return float(np.interp(second, self.day, self.along))

    def day_at(self, along: float) -> float:
        """Return the second of the day at a place along the axis."""
        return float(np.interp(along, self.along, self.day))

    def moment(self, along: float, ride: str) -> float:
        """Return the time on a ride's clock at a place along the axis."""
        return self.day_at(along) - self.offsets.get(ride, 0.0)


@dataclass(frozen=True, slots=True)
class RideSpan:
    """What the axis needs to know of a ride."""

    id: str
    start: dt.datetime | None
    duration: float  # [s]
    busy: tuple[tuple[float, float], ...]  # spans on its clock in which something happens [s]


def day_axis(rides: Iterable[RideSpan]) -> DayAxis:
    """Lay the rides of a day on one axis and fold what is idle for long."""
    rides = tuple(rides)
    offsets = _offsets(rides)
    dated = bool(rides) and all(ride.start is not None for ride in rides)
    spans = sorted(
        (offsets[ride.id] + start, offsets[ride.id] + end)
        for ride in rides
        for start, end in ride.busy or ((0.0, ride.duration),)
    )
    if not spans:
        return DayAxis(np.array([0.0, 1.0]), np.array([0.0, 1.0]), offsets, (), dated)
    first = min(offsets[ride.id] for ride in rides)
    last = max(offsets[ride.id] + ride.duration for ride in rides)
    busy = [[max(first, spans[0][0] - MARGIN), spans[0][1] + MARGIN]]
    for start, end in spans[1:]:
        if start - MARGIN - busy[-1][1] > IDLE_LONGER_THAN:
            busy.append([start - MARGIN, end + MARGIN])
        else:
            busy[-1][1] = max(busy[-1][1], end + MARGIN)
    busy[0][0] = first if busy[0][0] - first <= IDLE_LONGER_THAN else busy[0][0]
    busy[-1][1] = last if last - busy[-1][1] <= IDLE_LONGER_THAN else min(busy[-1][1], last)
    edges = [first, *(edge for span in busy for edge in span), max(last, busy[-1][1])]
    day, along, folds = [edges[0]], [0.0], []
    for k in range(1, len(edges)):
        step = edges[k] - edges[k - 1]
        if step <= 0:
            continue
        idle = k % 2 == 1
        day.append(edges[k])
        along.append(along[-1] + (min(step, FOLDED_TO) if idle else step))
        if idle and step > FOLDED_TO:
            folds.append((edges[k - 1], edges[k]))
    return DayAxis(np.array(day), np.array(along), offsets, tuple(folds), dated)


def _offsets(rides: tuple[RideSpan, ...]) -> dict[str, float]:
    offsets: dict[str, float] = {}
    starts = [ride.start for ride in rides if ride.start is not None]
    midnight = (
        min(starts).replace(hour=0, minute=0, second=0, microsecond=0)
        if starts and _comparable(starts)
        else None
    )
    after = 0.0
    for ride in rides:
        if ride.start is not None and midnight is not None:
            offsets[ride.id] = (ride.start - midnight).total_seconds()
        else:
            offsets[ride.id] = after
        after = max(after, offsets[ride.id] + ride.duration + BETWEEN_UNDATED)
    return offsets


def _comparable(starts: list[dt.datetime]) -> bool:
    return len({start.tzinfo is None for start in starts}) == 1
