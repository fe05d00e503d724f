"""A ride as delimited text, and a line as a GPX track."""

from __future__ import annotations

import datetime as dt
from collections.abc import Mapping
from types import MappingProxyType

import numpy as np
import numpy.typing as npt

from ridercda.rides.ride import Ride
from ridercda.synthetic.line import Line
from ridercda.synthetic.recording import ALTITUDE, to_geographic

FloatArray = npt.NDArray[np.float64]

# Channel -> header, factor and offset from SI to what the column holds, decimals.
_COLUMNS: Mapping[str, tuple[str, float, float, int]] = MappingProxyType(
    {
        "power": ("power [W]", 1.0, 0.0, 0),
        "speed": ("speed [km/h]", 3.6, 0.0, 2),
        "distance": ("distance [m]", 1.0, 0.0, 1),
        "latitude": ("latitude [deg]", 180 / np.pi, 0.0, 7),
        "longitude": ("longitude [deg]", 180 / np.pi, 0.0, 7),
        "altitude": ("altitude [m]", 1.0, 0.0, 1),
        "cadence": ("cadence [rpm]", 60.0, 0.0, 0),
        "heart_rate": ("heart_rate [bpm]", 60.0, 0.0, 0),
        "temperature": ("temperature [degC]", 1.0, -273.15, 0),
        "air_speed": ("air_speed [m/s]", 1.0, 0.0, 2),
    }
)


def csv_text(ride: Ride) -> str:
    """Return the ride as comma-separated text with a header row; a missing value is an empty cell.

    Time is ISO 8601 with its offset where the ride knows its start, else seconds. A `lap` column counts the
    ride's laps.
    """
    names = [name for name in _COLUMNS if name in ride.channels]
    header = ["time" if ride.start else "time [s]", *(_COLUMNS[name][0] for name in names)]
    columns = [_times(ride), *(_cells(ride.channels[name], name) for name in names)]
    if ride.laps:
        starts = np.array([lap.start for lap in ride.laps])
        header.append("lap")
        columns.append([str(n) for n in np.searchsorted(starts, ride.time, side="right")])
    rows = [",".join(row) for row in zip(*columns, strict=True)]
    return "\n".join([",".join(header), *rows]) + "\n"


def _times(ride: Ride) -> list[str]:
    if ride.start is None:
        return [f"{t:g}" for t in ride.time]
    return [(ride.start + dt.timedelta(seconds=float(t))).isoformat(timespec="seconds") for t in ride.time]


def _cells(values: FloatArray, name: str) -> list[str]:
    _, factor, offset, decimals = _COLUMNS[name]
    return ["" if np.isnan(v) else f"{v:.{decimals}f}" for v in values * factor + offset]


def gpx_text(line: Line, name: str, spacing: float, remark: str) -> str:
    """Return a line as a GPX 1.1 track.

    Parameters
    ----------
    line : Line
    name : str
        Of the track.
    spacing : float
        Between points. [m]
    remark : str
        Goes into the track's description.
    """
    place = np.arange(0.0, line.length, spacing)
    latitude, longitude = to_geographic(line.at(line.east, place), line.at(line.north, place))
    height = line.at(line.height, place) + ALTITUDE
    points = "\n".join(
        f'      <trkpt lat="{np.degrees(a):.6f}" lon="{np.degrees(b):.6f}"><ele>{h:.1f}</ele></trkpt>'
        for a, b, h in zip(latitude, longitude, height, strict=True)
    )
    return (
        '<?xml version="1.0" encoding="UTF-8"?>\n'
        '<gpx version="1.1" creator="ridercda" xmlns="http://www.topografix.com/GPX/1/1">\n'
        f"  <trk>\n    <name>{name}</name>\n    <desc>{remark}</desc>\n    <trkseg>\n{points}\n"
        "    </trkseg>\n  </trk>\n</gpx>\n"
    )
