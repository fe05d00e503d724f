"""A ride: one recorded log as SI arrays on its own clock, and the faults found in it."""

from __future__ import annotations

import datetime as dt
from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import StrEnum
from types import MappingProxyType

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]

CHANNELS: Mapping[str, str] = MappingProxyType(
    {
        "power": "W, mean over the record interval, as the meter reports it",
        "speed": "m/s, mean over the record interval",
        "distance": "m since the first record",
        "latitude": "rad, WGS84, positive north",
        "longitude": "rad, WGS84, positive east",
        "altitude": "m",
        "cadence": "crank turns per second (Hz)",
        "heart_rate": "beats per second (Hz)",
        "temperature": "K",
        "air_speed": "m/s along the bike, at the rider's height",
        "dynamic_pressure": "Pa",
        "yaw": "rad, positive: wind from the right",
    }
)
"""The channels a ride may have, with unit and meaning."""


class LapTrigger(StrEnum):
    """What made the head unit close a lap."""

    MANUAL = "manual"
    DISTANCE = "distance"
    TIME = "time"
    POSITION = "position"
    SESSION_END = "session-end"
    UNKNOWN = "unknown"


@dataclass(frozen=True, slots=True)
class LapMark:
    """One lap as the head unit recorded it: [start, end] in seconds since the ride's first record."""

    start: float
    end: float
    trigger: LapTrigger = LapTrigger.UNKNOWN


class FaultKind(StrEnum):
    """What can be wrong with a ride; the value is the stable code users and files see."""

    GAP = "gap"
    SMART_RECORDING = "smart-recording"
    CLOCK_DUPLICATE = "clock-duplicate"
    CLOCK_BACKWARD = "clock-backward"
    AUTO_PAUSE = "auto-pause"
    POWER_DROPOUT = "power-dropout"
    POWER_SPIKE = "power-spike"
    POWER_HELD = "power-held"
    CHANNEL_FROZEN = "channel-frozen"
    CHANNEL_SMOOTHED = "channel-smoothed"
    CHANNEL_MISSING = "channel-missing"
    ONE_SIDED_POWER = "one-sided-power"
    SPEED_FROM_GPS = "speed-from-gps"
    CIRCUMFERENCE = "circumference"
    MIXED_SAMPLING = "mixed-sampling"
    ALTITUDE_STEP = "altitude-step"
    POWER_LAG = "power-lag"
    POSITION_SPIKE = "position-spike"
    FILE_DAMAGED = "file-damaged"


@dataclass(frozen=True, slots=True)
class Fault:
    """Something wrong in a ride: where, why, and what was done about it.

    Parameters
    ----------
    kind : FaultKind
        What it is.
    start, end : float
        Span on the ride's clock. [s]
    channel : str
        The channel it concerns; empty for the whole record.
    cause : str
        One sentence for the rider, with the figures that show it.
    repair : str or None
        The repair taken; None when it was refused or there is none.
    choices : tuple of str
        The repairs on offer, the default first; "leave" keeps the data as recorded.
    value : float or None
        The figure found, where the repair takes one: a lag [s], a step [m], a factor on wheel distance [1].
    """

    kind: FaultKind
    start: float
    end: float
    channel: str
    cause: str
    repair: str | None = None
    choices: tuple[str, ...] = ()
    value: float | None = None


@dataclass(frozen=True, slots=True, eq=False)
class Ride:
    """One recorded log on its own clock; read by a reader (raw) or repaired from a raw one.

    Parameters
    ----------
    time : ndarray, shape (n,)
        Wall-clock seconds since the first record as stored, pauses included. [s] A repaired ride's time
        strictly increases; a raw one's may not.
    channels : mapping of str to ndarray, shape (n,)
        Those of `CHANNELS` that were recorded, in SI; NaN where a record has no value. Read-only.
    start : datetime, optional
        Moment of the first record, with its UTC offset where known.
    laps : tuple of LapMark
        As the head unit recorded them.
    source : str
        What kind of file it came from: "fit", "tcx", "gpx", "text".
    device : str
        What recorded it, if the file says.
    sha256 : str
        Of the file's bytes as stored.
    faults : tuple of Fault
        In order of start.
    notes : mapping of str to str
        What the reader learned of each channel, e.g. that speed came from position.
    """

    time: FloatArray
    channels: Mapping[str, FloatArray]
    start: dt.datetime | None = None
    laps: tuple[LapMark, ...] = ()
    source: str = ""
    device: str = ""
    sha256: str = ""
    faults: tuple[Fault, ...] = ()
    notes: Mapping[str, str] = field(default_factory=lambda: MappingProxyType({}))

    def __post_init__(self) -> None:
        """Make the arrays read-only: freezing a dataclass does not freeze them."""
        for name, values in (("time", self.time), *self.channels.items()):
            if values.shape != self.time.shape:
                raise ValueError(f"channel {name} has shape {values.shape}, time has {self.time.shape}")
            values.setflags(write=False)

    @property
    def duration(self) -> float:
        """Span from the first to the last record. [s]"""
        return float(self.time[-1] - self.time[0]) if self.time.size else 0.0

    def has(self, *names: str) -> bool:
        """Whether every named channel was recorded with at least one value."""
        return all(name in self.channels and bool(np.isfinite(self.channels[name]).any()) for name in names)
