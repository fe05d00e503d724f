"""Reader of GPX files: track points with the extensions that devices write for power, speed and the rest."""

from __future__ import annotations

from typing import BinaryIO
from xml.etree.ElementTree import Element

from ridercda.errors import ReaderError
from ridercda.rides.assembly import FaultSpan, Records, assemble
from ridercda.rides.format import Reader, ReadOptions
from ridercda.rides.ride import Fault, FaultKind, Ride
from ridercda.rides.xml_records import PointColumns, elements, local_name, number, starts_with_root
from ridercda.watch import Watch

_KEPT = frozenset({"trkpt"})


def read_gpx(stream: BinaryIO, options: ReadOptions, watch: Watch) -> Ride:
    """Return the raw ride of a GPX stream; its tracks follow one another on one clock.

    Parameters
    ----------
    stream : binary stream
        Read to its end, one point in memory at a time.
    options : ReadOptions
        `columns` and `power_channel` name elements of a track point by local name.
    watch : Watch
        Told of the bytes read.

    Raises
    ------
    ReaderError
        If no track point has a time, or the file declares entities.
    """
    points = PointColumns(options)
    damage: list[str] = []
    for _, element in elements(stream, _KEPT, watch, damage):
        _add_point(points, element)
    if not len(points):
        raise ReaderError("there are no track points in this GPX file" + (f". {damage[0]}" if damage else ""))
    return assemble(
        Records(
            clock=points.clock(),
            channels=points.channels(),
            zero=points.zero,
            faults=[FaultSpan(Fault(FaultKind.FILE_DAMAGED, 0.0, 0.0, "", text)) for text in damage],
            source="gpx",
        ),
        options,
    )


def _is_gpx(head: bytes) -> bool:
    return starts_with_root(head, b"gpx")


READER = Reader("GPX", (".gpx",), _is_gpx, read_gpx)


def _add_point(points: PointColumns, element: Element) -> None:
    values = {"latitude": number(element.get("lat")), "longitude": number(element.get("lon"))}
    time: str | None = None
    for child in element.iter():
        name = local_name(child)
        if name == "time":
            time = child.text
        elif name == "ele":
            values["altitude"] = number(child.text)
        else:
            channel = points.channel(name)
            if channel is not None:
                values[channel] = number(child.text)
    points.add(time, values)
