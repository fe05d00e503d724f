"""Faults to put into a ride: gaps, dropouts, held power, spikes."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]


class InjectedFault(StrEnum):
    """What goes wrong."""

    GAP = "gap"  # no records at all
    POWER_DROPOUT = "power-dropout"  # records without power
    POWER_ZERO = "power-zero"  # the meter lost its radio: zeros though the rider pedals
    POWER_HELD = "power-held"  # the last value repeated
    POWER_SPIKE = "power-spike"
    SPEED_ZERO = "speed-zero"  # a wheel sensor out of reach


@dataclass(frozen=True, slots=True)
class FaultSpec:
    """One fault: when it starts on the ride's clock, and how long it lasts. [s, s]"""

    kind: InjectedFault
    start: float
    duration: float


def inject(
    time: FloatArray, channels: dict[str, FloatArray], faults: tuple[FaultSpec, ...]
) -> tuple[FloatArray, dict[str, FloatArray]]:
    """Return time and channels of a ride, all shape (n,), with the faults put in; gaps shorten them."""
    channels = {name: values.copy() for name, values in channels.items()}
    keep = np.ones(len(time), bool)
    for fault in faults:
        span = (time >= fault.start) & (time < fault.start + fault.duration)
        where = np.flatnonzero(span)
        if not where.size:
            continue
        power, speed = channels.get("power"), channels.get("speed")
        if fault.kind is InjectedFault.GAP:
            keep &= ~span
        elif fault.kind is InjectedFault.SPEED_ZERO:
            if speed is not None:
                speed[span] = 0.0
        elif power is None:
            continue
        elif fault.kind is InjectedFault.POWER_DROPOUT:
            power[span] = np.nan
        elif fault.kind is InjectedFault.POWER_ZERO:
            power[span] = 0.0
        elif fault.kind is InjectedFault.POWER_HELD:
            power[span] = power[max(where[0] - 1, 0)]
        elif fault.kind is InjectedFault.POWER_SPIKE:
            power[span] += 1500.0
    return time[keep], {name: values[keep] for name, values in channels.items()}
