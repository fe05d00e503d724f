from __future__ import annotations

import datetime as dt
import gzip
import io
from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from ridercda.errors import ReaderError
from ridercda.rides.delimited import CANONICAL_NAMES, READER, UnknownColumns, read_delimited, read_headers
from ridercda.rides.format import ReadOptions
from ridercda.rides.ride import FaultKind, LapMark, Ride
from ridercda.watch import NO_WATCH


def read(text: str, options: ReadOptions | None = None, encoding: str = "utf-8") -> Ride:
    return read_delimited(io.BytesIO(text.encode(encoding)), options or ReadOptions(), NO_WATCH)


def test_canonical_names_in_their_usual_units() -> None:
    head = "time,power,speed,distance,latitude,longitude,altitude,cadence,heart_rate,temperature,air_speed"
    ride = read(
        f"{head},dynamic_pressure,yaw\n0,200,10,50,45,-90,100,90,150,20,11,75,180\n1,210,11,61,45,-90,101,90,150,20,11,75,180\n"
    )
    expected = {
        "power": [200.0, 210.0],
        "speed": [10.0, 11.0],
        "distance": [0.0, 11.0],
        "latitude": np.pi / 4,
        "longitude": -np.pi / 2,
        "altitude": [100.0, 101.0],
        "cadence": 1.5,
        "heart_rate": 2.5,
        "temperature": 293.15,
        "air_speed": 11.0,
        "dynamic_pressure": 75.0,
        "yaw": np.pi,
    }
    assert set(ride.channels) == set(expected)
    for name, values in expected.items():
        assert_allclose(ride.channels[name], values)
    assert ride.start is None
    assert ride.source == "text"


@pytest.mark.parametrize(
    ("header", "cell", "channel", "value"),
    [
        ("speed [km/h]", "36", "speed", 10.0),
        ("Speed (mph)", "10", "speed", 4.4704),
        ("distance [km]", "1.5", "distance", 0.0),
        ("Temperature [degF]", "68", "temperature", 293.15),
        ("altitude [ft]", "1000", "altitude", 304.8),
        ("dynamic pressure [hPa]", "1.5", "dynamic_pressure", 150.0),
        ("heart rate", "120", "heart_rate", 2.0),
        ("Heart-Rate [Hz]", "2", "heart_rate", 2.0),
        ("yaw [rad]", "0.5", "yaw", 0.5),
        ("power [kW]", "0.2", "power", 200.0),
    ],
)
def test_units_in_headers(header: str, cell: str, channel: str, value: float) -> None:
    assert_allclose(read(f"time;{header}\n0;{cell}\n").channels[channel], value)


@pytest.mark.parametrize(
    "text",
    [
        "time;power;speed\n0;200;9,5\n1,5;201;9,75\n",
        "time\tpower\tspeed\n0\t200\t9,5\n1,5\t201\t9,75\n",
        'time,power,speed\n0,200,"9,5"\n"1,5",201,"9,75"\n',
    ],
)
def test_decimal_commas(text: str) -> None:
    ride = read(text)
    assert_allclose(ride.time, [0.0, 1.5])
    assert_allclose(ride.channels["speed"], [9.5, 9.75])


def test_parts_of_thousands_are_no_decimal_mark() -> None:
    ride = read('time,distance,power\n0,"1,234.5","1.050,5"\n1,"1,244.5",100\n')
    assert_allclose(ride.channels["distance"], [0.0, 10.0])
    assert_allclose(ride.channels["power"], [1050.5, 100.0])


@pytest.mark.parametrize(
    ("cells", "times"),
    [
        (("5", "6.5"), (0.0, 1.5)),
        (("0:59:59", "1:00:00.5"), (0.0, 1.5)),
        (("59:59", "60:00,5"), (0.0, 1.5)),
        (("2026-05-09T09:00:00Z", "2026-05-09T09:00:01.5Z"), (0.0, 1.5)),
        (("2026-05-09 09:00:00", "2026-05-09 09:00:01,5"), (0.0, 1.5)),
        (("1778310000", "1778310001.5"), (0.0, 1.5)),
    ],
)
def test_time_in_every_guise(cells: tuple[str, str], times: tuple[float, float]) -> None:
    ride = read(f"time;power\n{cells[0]};200\n{cells[1]};201\n")
    assert_allclose(ride.time, times)


def test_start_of_absolute_times() -> None:
    zone = dt.timezone(dt.timedelta(hours=2))
    start = read("time,power\n2026-05-09T09:00:00+02:00,200\n").start
    assert start == dt.datetime(2026, 5, 9, 9, tzinfo=zone)
    assert start is not None
    assert start.tzinfo == zone
    assert read("time,power\n2026-05-09T09:00:00,200\n").start == dt.datetime(2026, 5, 9, 9)
    assert read("time,power\n1778310000,200\n").start == dt.datetime.fromtimestamp(1778310000, dt.UTC)


def test_start_of_elapsed_times_is_told_by_the_user() -> None:
    options = ReadOptions(start=dt.datetime(2026, 5, 9, 9))
    assert read("time,power\n10,200\n11,201\n", options).start == dt.datetime(2026, 5, 9, 9, 0, 10)


def test_time_in_minutes() -> None:
    assert_allclose(read("time [min],power\n0,1\n0.5,2\n").time, [0.0, 30.0])


def test_foreign_headers_by_mapping() -> None:
    text = "Zeit,Leistung,Tempo,Puls\n0,200,36,120\n1,201,36,120\n"
    columns = {"time": "Zeit", "power": "Leistung", "speed": "Tempo [km/h]"}
    ride = read(text, ReadOptions.with_columns(columns))
    assert_allclose(ride.channels["power"], [200.0, 201.0])
    assert_allclose(ride.channels["speed"], 10.0)
    assert ride.notes["columns"] == "not read: Puls"


def test_a_mapping_goes_before_the_canonical_name() -> None:
    text = "time,power,Watts (right)\n0,200,100\n"
    assert_allclose(read(text, ReadOptions(power_channel="Watts (right)")).channels["power"], 100.0)


def test_unknown_headers_are_told_with_the_names_understood() -> None:
    with pytest.raises(
        UnknownColumns, match=r"no column holds the time.*'Zeit', 'Watt'.*names understood are time, power"
    ) as caught:
        read("Zeit,Watt\n0,200\n")
    assert caught.value.headers == ("Zeit", "Watt")
    assert caught.value.canonical == CANONICAL_NAMES
    with pytest.raises(UnknownColumns, match="no column holds a channel of a ride"):
        read("time,Watt\n0,200\n")
    with pytest.raises(UnknownColumns, match="there is no column 'Watts' to take as power"):
        read("time,Watt\n0,200\n", ReadOptions.with_columns({"power": "Watts"}))
    with pytest.raises(ReaderError, match="'watt' is not a channel"):
        read("time,Watt\n0,200\n", ReadOptions.with_columns({"watt": "Watt"}))


def test_a_unit_of_another_kind_is_refused() -> None:
    with pytest.raises(ReaderError, match=r"speed \[W\]: 'W' is not a unit of speed; use one of m/s, km/h"):
        read("time,speed [W]\n0,200\n")
    with pytest.raises(ReaderError, match=r"time \[km\]: 'km' is not a unit of duration"):
        read("time [km],speed\n0,9\n")


def test_speed_that_must_be_in_another_unit_is_refused() -> None:
    rows = "".join(f"{k},{35 + k % 3}\n" for k in range(10))
    with pytest.raises(
        ReaderError, match=r"'speed' names no unit and half its values are above 25 m/s.*\[km/h\]"
    ):
        read("time,speed\n" + rows)
    assert read("time,speed [m/s]\n" + rows).channels["speed"][0] == 35.0


def test_blank_and_odd_cells_are_nan() -> None:
    ride = read("time,power,speed\n0,200,9\n1,,\n2,nan,inf\n3,n/a,9\n4,205\n")
    assert_array_equal(np.isnan(ride.channels["power"]), [False, True, True, True, False])
    assert_array_equal(np.isnan(ride.channels["speed"]), [False, True, True, False, True])


def test_rows_without_a_time_are_left_out_and_told() -> None:
    ride = read("# a note\ntime,power\n0,200\n--,201\n2,202\n")
    assert_array_equal(ride.time, [0.0, 2.0])
    (fault,) = ride.faults
    assert fault.kind is FaultKind.FILE_DAMAGED
    assert fault.cause.startswith("1 of 3 rows have no readable time, the first on line 4")


def test_a_lap_column_makes_laps() -> None:
    ride = read("time,power,lap\n" + "".join(f"{k},200,{1 + k // 4}\n" for k in range(10)))
    assert [(lap.start, lap.end) for lap in ride.laps] == [(0.0, 3.0), (3.0, 7.0), (7.0, 9.0)]
    assert isinstance(ride.laps[0], LapMark)


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "latin-1"])
def test_encodings(encoding: str) -> None:
    ride = read("time;power;Höhe [m]\n0;200;5\n", ReadOptions.with_columns({"altitude": "Höhe"}), encoding)
    assert_allclose(ride.channels["altitude"], 5.0)


def test_a_table_without_rows_is_one_message() -> None:
    with pytest.raises(ReaderError, match="a header row but no row below it"):
        read("time,power\n")
    with pytest.raises(ReaderError, match=r"no cell of 'time' is a time.*first is 'x'"):
        read("time,power\nx,1\n")


def test_it_is_told_by_its_first_line() -> None:
    assert READER.sniff(b"time,power\n0,200\n")
    assert READER.sniff("# note\ntime;power\n".encode("utf-16"))
    assert not READER.sniff(b"<gpx>,</gpx>")
    assert not READER.sniff(b"\x0e\x10\x64\x00,;\x00\x00.FIT")
    assert not READER.sniff(b"just words\n")


def test_headers_can_be_asked_for(tmp_path: Path) -> None:
    path = tmp_path / "ride.csv.gz"
    path.write_bytes(gzip.compress(b'# note\nZeit;"Leistung; links [W]"\n0;1\n'))
    assert read_headers(path) == ("Zeit", "Leistung; links [W]")
    with pytest.raises(ReaderError, match=r"nowhere.csv: the file cannot be read"):
        read_headers(tmp_path / "nowhere.csv")
    (tmp_path / "empty.csv").write_bytes(b"\n# only a note\n")
    with pytest.raises(ReaderError, match="there is no header row"):
        read_headers(tmp_path / "empty.csv")
