"""Linear scales and round ticks: pure arithmetic for charts."""

from __future__ import annotations

import math
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Scale:
    """Maps values from `low` to `high` onto pixels from `first` to `last`; `first` > `last` turns it round."""

    low: float
    high: float
    first: float
    last: float

    def __call__(self, value: float) -> float:
        """Return the pixel of a value."""
        span = self.high - self.low
        return self.first + (value - self.low) / (span if span else 1.0) * (self.last - self.first)

    def back(self, pixel: float) -> float:
        """Return the value at a pixel."""
        span = self.last - self.first
        return self.low + (pixel - self.first) / (span if span else 1.0) * (self.high - self.low)


def step_for(span: float, count: int) -> float:
    """Return a round step, 1, 2 or 5 times a power of ten, that cuts `span` into at most about `count` parts."""
    if not (math.isfinite(span) and span > 0):
        return 1.0
    raw = span / max(count, 1)
    power = 10.0 ** math.floor(math.log10(raw))
    for factor in (1.0, 2.0, 5.0):
        if raw <= factor * power * (1 + 1e-9):
            return factor * power
    return 10.0 * power


def ticks(low: float, high: float, count: int = 5) -> tuple[float, ...]:
    """Return round values within [low, high], at most about `count` + 1 of them."""
    step = tick_step(low, high, count)
    return tuple(i * step for i in _multiples(low, high, step))


def tick_step(low: float, high: float, count: int = 5) -> float:
    """Return the step of `ticks`: about `count` parts, but always so that two ticks or more are seen."""
    step = step_for(high - low, count)
    while len(_multiples(low, high, step)) < 2:
        step = step_for(0.99 * step, 3)  # the next smaller of 1, 2, 5
    return step


def _multiples(low: float, high: float, step: float) -> range:
    return range(math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9) + 1)


def decimals_of(step: float) -> int:
    """Return how many decimals labels need whose values are multiples of a round step."""
    return max(0, -math.floor(math.log10(step) + 1e-9)) if step > 0 else 0


def padded(low: float, high: float, share: float = 0.08) -> tuple[float, float]:
    """Return a range a little wider than [low, high], never empty."""
    span = high - low
    if not span > 0:
        span = abs(low) * 0.1 or 1.0
    return low - span * share, high + span * share


TIME_STEPS = (1, 2, 5, 10, 15, 30, 60, 120, 300, 600, 900, 1800, 3600, 7200, 10800, 21600, 43200)


def time_step(span: float, count: int) -> float:
    """Return a step people read clocks by [s] that cuts `span` into at most `count` parts."""
    return float(next((step for step in TIME_STEPS if span / step <= max(count, 1)), 86400))
