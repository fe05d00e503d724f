"""From a raw ride to one whose clock strictly increases, every fault listed with what was done about it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from types import MappingProxyType

import numpy as np

from ridercda.rides.ride import Fault, FaultKind, Ride


@dataclass(frozen=True, slots=True)
class Choice:
    """Which repair to take for a kind of fault, on the whole ride or a span of it."""

    kind: str
    choice: str
    start: float | None = None  # [s]
    end: float | None = None  # [s]
    value: float | None = None  # where the repair takes one, in SI


def repair(raw: Ride, choices: Sequence[Choice] = ()) -> Ride:
    """Return the ride with its clock put right; nothing is resampled.

    Parameters
    ----------
    raw : Ride
        As read.
    choices : sequence of Choice
        What the user prefers to the defaults.
    """
    highest = np.maximum.accumulate(raw.time) if raw.time.size else raw.time
    keep = np.ones(raw.time.size, bool)
    keep[1:] = raw.time[1:] > highest[:-1]
    if keep.all():
        return raw
    faults = list(raw.faults)
    lost = int((~keep).sum())
    first, last = (float(raw.time[np.flatnonzero(~keep)[i]]) for i in (0, -1))
    faults.append(
        Fault(
            FaultKind.CLOCK_BACKWARD,
            first,
            last,
            "",
            f"The clock stands still or runs back at {lost} records.",
            "those records are left out",
        )
    )
    channels = {name: values[keep] for name, values in raw.channels.items()}
    return replace(
        raw, time=raw.time[keep], channels=MappingProxyType(channels), faults=tuple(sorted(faults, key=lambda f: f.start))
    )
