"""The window onto the day's axis: which part is seen, and what lies under a point (no painting)."""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum

from ridercda.app.strip.picture import StripFault, StripPicture, StripRun

LEAST_SPAN = 20.0  # s; no closer than this
TARGET = 24.0  # px; the least width of what can be hit
EDGE = 6.0  # px about an edge that takes hold of it
EDGES_FROM = 30.0  # px; blocks narrower than this are taken whole


class Grip(Enum):
    """What part of a run lies under a point."""

    BODY = "body"
    START = "start"
    END = "end"


@dataclass(frozen=True, slots=True)
class Hit:
    """What lies under a point."""

    run: StripRun | None = None
    grip: Grip = Grip.BODY
    fault: StripFault | None = None


@dataclass(frozen=True, slots=True)
class StripView:
    """Part of the axis, `low` to `high`, on pixels `left` to `right`."""

    low: float
    high: float
    left: float
    right: float

    def x(self, along: float) -> float:
        """Return the pixel of a place along the axis."""
        return self.left + (along - self.low) / (self.high - self.low) * (self.right - self.left)

    def along(self, x: float) -> float:
        """Return the place along the axis at a pixel."""
        return self.low + (x - self.left) / (self.right - self.left) * (self.high - self.low)

    def zoomed(self, factor: float, x: float, length: float) -> StripView:
        """Return the view closer (`factor` > 1) or wider about a pixel, within an axis of some length."""
        span = min(length, max(LEAST_SPAN, (self.high - self.low) / factor))
        share = (x - self.left) / (self.right - self.left)
        return self.moved_to(self.along(x) - share * span, span, length)

    def moved_to(self, low: float, span: float, length: float) -> StripView:
        """Return the view that begins at `low`, kept within the axis."""
        low = max(0.0, min(low, length - span))
        return StripView(low, low + span, self.left, self.right)

    def showing(self, start: float, end: float, length: float) -> StripView:
        """Return the nearest view of the same span in which [start, end] is seen."""
        span = self.high - self.low
        if end - start > span:
            return self.moved_to(start - 0.05 * (end - start), min(length, 1.1 * (end - start)), length)
        margin = min(0.04 * span, 0.5 * (span - (end - start)))
        if start < self.low + margin:
            return self.moved_to(start - margin, span, length)
        if end > self.high - margin:
            return self.moved_to(end + margin - span, span, length)
        return self


def block_extent(view: StripView, run: StripRun) -> tuple[float, float]:
    """Return the pixels of a run's block."""
    return view.x(run.left), max(view.x(run.right), view.x(run.left) + 2.0)


def hit(view: StripView, picture: StripPicture, x: float, y: float, fault_zone: tuple[float, float]) -> Hit:
    """Return what lies under a point; the zone of fault ticks comes first, then edges, then blocks."""
    if fault_zone[0] <= y <= fault_zone[1]:
        near = min(picture.faults, key=lambda fault: abs(view.x(fault.along) - x), default=None)
        if near is not None and abs(view.x(near.along) - x) <= TARGET / 3:
            return Hit(fault=near)
    best: tuple[float, Hit] | None = None
    for run in picture.runs:
        left, right = block_extent(view, run)
        if right - left >= EDGES_FROM:
            for grip, edge in ((Grip.START, left), (Grip.END, right)):
                away = abs(x - edge)
                if away <= EDGE and (best is None or away < best[0]):
                    best = (away, Hit(run, grip))
    if best is not None:
        return best[1]
    for run in picture.runs:
        left, right = block_extent(view, run)
        if left <= x <= right:
            return Hit(run)
        spare = max(0.0, TARGET - (right - left)) / 2
        away = max(left - x, x - right)
        if away <= spare and (best is None or away < best[0]):
            best = (away, Hit(run))
    return best[1] if best else Hit()
