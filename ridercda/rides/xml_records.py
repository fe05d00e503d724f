"""Streaming through the XML of ride files: one point at a time, and no entity is ever expanded."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterator, Mapping
from types import MappingProxyType
from typing import BinaryIO
from xml.etree.ElementTree import Element, ParseError

import numpy as np
from defusedxml.common import DefusedXmlException
from defusedxml.ElementTree import iterparse

from ridercda.errors import ReaderError
from ridercda.rides.assembly import UNIX_EPOCH, seconds_of_moment
from ridercda.rides.format import CHANNEL_KINDS, USUAL_UNITS, ReadOptions, plain_name
from ridercda.rides.ride import FloatArray
from ridercda.units import conversion
from ridercda.watch import Watch

EXTENSION_CHANNELS: Mapping[str, str] = MappingProxyType(
    {
        "power": "power",
        "watts": "power",
        "powerinwatts": "power",
        "speed": "speed",
        "cadence": "cadence",
        "cad": "cadence",
        "hr": "heart_rate",
        "heartrate": "heart_rate",
        "atemp": "temperature",
        "temp": "temperature",
        "temperature": "temperature",
        "distance": "distance",
        "airspeed": "air_speed",
        "air_speed": "air_speed",
        "dynamic_pressure": "dynamic_pressure",
        "yaw": "yaw",
    }
)
"""Elements that devices write into points, by local name in any namespace, in the units of `USUAL_UNITS`."""

_POINTS_PER_STEP = 2048


def local_name(element: Element) -> str:
    """Return an element's name without its namespace, in lower case."""
    tag = element.tag
    return tag.rpartition("}")[2].lower() if isinstance(tag, str) else ""


def starts_with_root(head: bytes, root: bytes) -> bool:
    """Whether the first bytes are XML whose root element has this local name."""
    text = head.removeprefix(b"\xef\xbb\xbf").replace(b"\0", b"").lstrip(b"\xff\xfe\r\n\t ").lower()
    if not text.startswith(b"<"):
        return False
    at = 0
    while at < len(text):
        at = text.find(b"<", at)
        if at < 0:
            return False
        rest = text[at + 1 :]
        if rest.startswith((b"?", b"!")):
            at += 1
            continue
        name = rest.split(None, 1)[0].split(b">", 1)[0] if rest else b""
        return name.rpartition(b":")[2].rstrip(b"/") == root
    return False


def elements(
    stream: BinaryIO, kept: frozenset[str], watch: Watch, damage: list[str]
) -> Iterator[tuple[str, Element]]:
    """Yield (local name, element) as elements of the kept names end, and drop each afterwards.

    Parameters
    ----------
    stream : binary stream
        The file.
    kept : frozenset of str
        Local names in lower case. An element inside a kept one is still there when the outer one ends, unless
        it was itself yielded.
    watch : Watch
        Told of the bytes read.
    damage : list of str
        Gets a sentence where the XML breaks off; what came before has been yielded.

    Raises
    ------
    ReaderError
        If the file declares a document type or entities.
    """
    start = stream.tell()
    total = stream.seek(0, 2) - start
    stream.seek(start)
    path: list[Element] = []
    count = 0
    try:
        for event, element in iterparse(stream, events=("start", "end"), forbid_dtd=True):
            if event == "start":
                path.append(element)
                continue
            path.pop()
            name = local_name(element)
            if name in kept:
                yield name, element
                element.clear()
                if path:
                    path[-1].remove(element)
                count += 1
                if count % _POINTS_PER_STEP == 0:
                    watch.step(stream.tell() - start, total)
    except DefusedXmlException as error:
        raise ReaderError(
            "the file declares a document type or entities, which no ride file needs and which can be made "
            "to exhaust a computer; it was refused"
        ) from error
    except ParseError as error:
        line = error.position[0]
        damage.append(f"The XML breaks off at line {line}; all that could be read before it was kept")
    except (LookupError, ValueError) as error:  # an encoding that does not exist or does not fit
        damage.append(f"The text cannot be decoded ({error}); all that could be read before it was kept")


class PointColumns:
    """Gathers the channels of points, in the order of the file."""

    def __init__(self, options: ReadOptions) -> None:
        self._channel_of: dict[str, str] = dict(EXTENSION_CHANNELS)
        self._asked: dict[str, str] = {}
        for channel, name in options.names.items():
            if channel not in CHANNEL_KINDS:
                raise ReaderError(
                    f"{channel!r} is not a channel; the channels are {', '.join(CHANNEL_KINDS)}"
                )
            plain = plain_name(name)
            self._channel_of = {key: kept for key, kept in self._channel_of.items() if kept != channel}
            self._channel_of[plain] = channel
            self._asked[plain] = channel
        self._seen: set[str] = set()
        self._rows: list[dict[str, float]] = []
        self._times: list[float] = []
        self._zone: dt.tzinfo | None = None

    def __len__(self) -> int:
        """Return the number of points."""
        return len(self._times)

    @property
    def last_time(self) -> float:
        """Time of the last point; NaN without one. [s since 1970]"""
        return self._times[-1] if self._times else np.nan

    def channel(self, name: str) -> str | None:
        """Return the channel an element of this local name holds."""
        found = self._channel_of.get(name)
        if name in self._asked:
            self._seen.add(name)
        return found

    @property
    def zero(self) -> dt.datetime:
        """Moment at which `clock` reads zero, in the first point's offset from UTC where it has one."""
        if self._zone is None:
            return UNIX_EPOCH.replace(tzinfo=None)
        return UNIX_EPOCH.astimezone(self._zone)

    def add(self, time: str | None, values: dict[str, float]) -> None:
        """Add one point, its values in the units of `USUAL_UNITS`."""
        at = moment(time)
        if at is None:
            self._times.append(np.nan)
        else:
            if self._zone is None:
                self._zone = at.tzinfo
            self._times.append(seconds_of_moment(at))
        self._rows.append(values)

    def clock(self) -> FloatArray:
        """Return the time of each point. [s since 1970]"""
        return np.array(self._times, dtype=np.float64)

    def channels(self) -> dict[str, FloatArray]:
        """Return the channels in SI.

        Raises
        ------
        ReaderError
            If an element the user named was in no point.
        """
        for name, channel in self._asked.items():
            if name not in self._seen and len(self):
                raise ReaderError(f"no point has an element {name!r} to take as {channel}")
        found: dict[str, FloatArray] = {}
        for channel, kind in CHANNEL_KINDS.items():
            if any(channel in row for row in self._rows):
                raw = np.array([row.get(channel, np.nan) for row in self._rows], dtype=np.float64)
                found[channel] = conversion(USUAL_UNITS[channel], kind).to_si(raw)
        return found


def number(text: str | None) -> float:
    """Return a number of a file; NaN where it is none."""
    try:
        return float(text or "")
    except ValueError:
        return np.nan


def moment(text: str | None) -> dt.datetime | None:
    """Return an ISO 8601 moment; None where it is none."""
    try:
        return dt.datetime.fromisoformat((text or "").strip())
    except ValueError:
        return None


def seconds(text: str | None) -> float:
    """Return an ISO 8601 moment as seconds since 1970; NaN where it is none."""
    at = moment(text)
    return np.nan if at is None else seconds_of_moment(at)
