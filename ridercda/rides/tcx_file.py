"""Reader of TCX files: trackpoints with the power and speed extension that devices write, and laps."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import BinaryIO
from xml.etree.ElementTree import Element

import numpy as np

from ridercda.errors import ReaderError
from ridercda.rides.assembly import FaultSpan, LapSpan, Records, assemble
from ridercda.rides.format import Reader, ReadOptions
from ridercda.rides.ride import Fault, FaultKind, LapTrigger, Ride
from ridercda.rides.xml_records import PointColumns, elements, local_name, number, seconds, starts_with_root
from ridercda.watch import Watch

_KEPT = frozenset({"trackpoint", "lap", "creator"})
_OWN = {"latitudedegrees": "latitude", "longitudedegrees": "longitude", "altitudemeters": "altitude"}
_OWN |= {"distancemeters": "distance"}
_TRIGGERS = {
    "manual": LapTrigger.MANUAL,
    "distance": LapTrigger.DISTANCE,
    "time": LapTrigger.TIME,
    "location": LapTrigger.POSITION,
}


@dataclass(frozen=True, slots=True)
class _Lap:
    start: float
    duration: float
    last_point: float
    trigger: LapTrigger


def read_tcx(stream: BinaryIO, options: ReadOptions, watch: Watch) -> Ride:
    """Return the raw ride of a TCX stream.

    Parameters
    ----------
    stream : binary stream
        Read to its end, one point in memory at a time.
    options : ReadOptions
        `columns` and `power_channel` name elements of a trackpoint by local name.
    watch : Watch
        Told of the bytes read.

    Raises
    ------
    ReaderError
        If no trackpoint has a time, or the file declares entities.
    """
    points = PointColumns(options)
    laps: list[_Lap] = []
    damage: list[str] = []
    device = ""
    for name, element in elements(stream, _KEPT, watch, damage):
        if name == "trackpoint":
            _add_point(points, element)
        elif name == "lap":
            laps.append(_lap(element, points.last_time))
        elif not device:
            device = next((child.text or "" for child in element if local_name(child) == "name"), "").strip()
    if not len(points):
        raise ReaderError("there are no trackpoints in this TCX file" + (f". {damage[0]}" if damage else ""))
    return assemble(
        Records(
            clock=points.clock(),
            channels=points.channels(),
            zero=points.zero,
            laps=_spans(laps),
            faults=[FaultSpan(Fault(FaultKind.FILE_DAMAGED, 0.0, 0.0, "", text)) for text in damage],
            source="tcx",
            device=device,
        ),
        options,
    )


def _is_tcx(head: bytes) -> bool:
    return starts_with_root(head, b"trainingcenterdatabase")


READER = Reader("TCX", (".tcx",), _is_tcx, read_tcx)


def _add_point(points: PointColumns, element: Element) -> None:
    values: dict[str, float] = {}
    time: str | None = None
    for child in element.iter():
        name = local_name(child)
        if name == "time":
            time = child.text
        elif name == "heartratebpm":
            beats = next((number(inner.text) for inner in child if local_name(inner) == "value"), np.nan)
            values["heart_rate"] = beats
        else:
            channel = _OWN.get(name) or points.channel(name)
            if channel is not None:
                values[channel] = number(child.text)
    points.add(time, values)


def _lap(element: Element, last_point: float) -> _Lap:
    texts = {local_name(child): child.text for child in element}
    trigger = _TRIGGERS.get((texts.get("triggermethod") or "").strip().lower(), LapTrigger.UNKNOWN)
    return _Lap(seconds(element.get("StartTime")), number(texts.get("totaltimeseconds")), last_point, trigger)


def _spans(laps: Sequence[_Lap]) -> list[LapSpan]:
    """Return laps that end where the next begins: the time a lap carries leaves pauses out."""
    spans = []
    for place, lap in enumerate(laps):
        following = laps[place + 1] if place + 1 < len(laps) else None
        if following is not None and following.start >= lap.start:
            end = following.start
        else:
            ends = (lap.start, lap.start + lap.duration, lap.last_point)
            end = max((moment for moment in ends if np.isfinite(moment)), default=np.nan)
        spans.append(LapSpan(lap.start, end, lap.trigger))
    return spans
