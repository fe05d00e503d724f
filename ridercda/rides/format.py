"""What a reader of one kind of file is, and what it is told about the file."""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import BinaryIO

from ridercda.rides.ride import Ride
from ridercda.units import Kind
from ridercda.watch import Watch

CHANNEL_KINDS: Mapping[str, Kind] = MappingProxyType(
    {
        "power": Kind.POWER,
        "speed": Kind.SPEED,
        "distance": Kind.DISTANCE,
        "latitude": Kind.ANGLE,
        "longitude": Kind.ANGLE,
        "altitude": Kind.HEIGHT,
        "cadence": Kind.FREQUENCY,
        "heart_rate": Kind.FREQUENCY,
        "temperature": Kind.TEMPERATURE,
        "air_speed": Kind.SPEED,
        "dynamic_pressure": Kind.PRESSURE,
        "yaw": Kind.ANGLE,
    }
)
"""What each channel measures, so that the unit a file names can be converted."""

USUAL_UNITS: Mapping[str, str] = MappingProxyType(
    {
        "power": "W",
        "speed": "m/s",
        "distance": "m",
        "latitude": "deg",
        "longitude": "deg",
        "altitude": "m",
        "cadence": "rpm",
        "heart_rate": "bpm",
        "temperature": "degC",
        "air_speed": "m/s",
        "dynamic_pressure": "Pa",
        "yaw": "deg",
    }
)
"""The unit of a channel for which a file names none."""


@dataclass(frozen=True, slots=True)
class ReadOptions:
    """What the user says about a file; hashable, so that a parsed ride can be kept under it.

    Parameters
    ----------
    columns : tuple of (channel, name) pairs
        Which column or field of the file holds a channel, where it does not bear the channel's own name. The
        name may end in a unit, ``("speed", "Tempo [km/h]")``. Build from a mapping with `with_columns`.
    start : datetime, optional
        Wall clock at elapsed time zero, for text that holds elapsed times only.
    power_channel : str
        Name of the field to take as power where a file holds several.
    wheel_circumference : float, optional
        As set in the head unit. Speed and distance are kept as recorded; the figure goes to the notes. [m]
    """

    columns: tuple[tuple[str, str], ...] = ()
    start: dt.datetime | None = None
    power_channel: str = ""
    wheel_circumference: float | None = None

    @classmethod
    def with_columns(
        cls,
        columns: Mapping[str, str],
        *,
        start: dt.datetime | None = None,
        power_channel: str = "",
        wheel_circumference: float | None = None,
    ) -> ReadOptions:
        """Return options with a mapping of channel to the name it bears in the file."""
        return cls(tuple(sorted(columns.items())), start, power_channel, wheel_circumference)

    @property
    def names(self) -> Mapping[str, str]:
        """The names files give the channels, by channel; the choice of a power channel included."""
        named = dict(self.columns)
        if self.power_channel:
            named["power"] = self.power_channel
        return named


@dataclass(frozen=True, slots=True)
class Reader:
    """A reader of one kind of ride file; packing (gzip) is outside it.

    Parameters
    ----------
    name : str
        As shown to users.
    suffixes : tuple of str
        Lower case, with the dot.
    sniff : callable
        Whether the first bytes of a file look like this kind.
    read : callable
        From a stream, options and a watch to a raw ride; raises ReaderError.
    """

    name: str
    suffixes: tuple[str, ...]
    sniff: Callable[[bytes], bool]
    read: Callable[[BinaryIO, ReadOptions, Watch], Ride]


def plain_name(text: str) -> str:
    """Return a name as the canonical ones are written: lower case, words joined by underscores."""
    return "_".join(text.replace("_", " ").replace("-", " ").split()).casefold()
