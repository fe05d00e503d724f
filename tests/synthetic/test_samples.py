"""The sample sessions: reproducible, loadable, consistent with their rides, and openly invented."""

from __future__ import annotations

import csv
import io
import math
import xml.etree.ElementTree as ET
from pathlib import Path

import fitdecode
import numpy as np
import pytest

from ridercda.session.store import load_session
from ridercda.synthetic import samples
from ridercda.synthetic.day import simulate_day
from ridercda.synthetic.sample_days import QUARRY_LOOP, RIDGE_OUT_AND_BACK, SAMPLES, SampleDay
from ridercda.synthetic.text_writer import csv_text

STORED = Path(__file__).parents[2] / "sample_sessions"


@pytest.fixture(scope="module")
def fresh(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("samples")
    samples.write_samples(folder)
    return folder


def test_stored_samples_are_what_the_command_writes(fresh: Path) -> None:
    for path in sorted(p for p in fresh.rglob("*") if p.is_file()):
        stored = STORED / path.relative_to(fresh)
        if path.suffix in {".toml", ".md"}:
            assert stored.read_text(encoding="utf-8") == path.read_text(encoding="utf-8")
        else:
            # Another processor may round the last digit of a record otherwise.
            assert stored.stat().st_size == pytest.approx(path.stat().st_size, rel=1e-3)
    assert sum(p.stat().st_size for p in STORED.rglob("*") if p.is_file()) < 4e6


@pytest.mark.parametrize("sample", SAMPLES, ids=lambda s: s.folder)
def test_sample_loads_and_its_runs_lie_within_its_rides(sample: SampleDay) -> None:
    session = load_session(STORED / sample.folder).session
    assert {s.id for s in session.setups} == {s.id for s in sample.spec.setups}
    assert len(session.runs) == len(sample.spec.order)
    assert session.courses
    assert all(run.end is not None and run.end - run.start > 180 for run in session.runs)
    truth = simulate_day(sample.spec, sample.seed).truth
    for run, true in zip(session.runs, truth.runs, strict=True):
        assert run.setup == true.setup
        assert true.end - true.start - 2 < (run.end or math.inf) - run.start <= true.end - true.start
    for ride in session.rides:
        assert (STORED / sample.folder / ride.file).is_file()
    for course in session.courses:
        assert not course.file or (STORED / sample.folder / course.file).is_file()


@pytest.mark.parametrize("sample", SAMPLES, ids=lambda s: s.folder)
def test_sample_says_that_it_is_invented(sample: SampleDay) -> None:
    text = (STORED / sample.folder / "session.toml").read_text(encoding="utf-8")
    assert f"from seed {sample.seed}" in text
    assert "Invented" in text


@pytest.mark.parametrize("sample", SAMPLES, ids=lambda s: s.folder)
def test_sample_is_a_believable_day(sample: SampleDay) -> None:
    session = load_session(STORED / sample.folder).session
    total = 0.0
    for ride in session.rides:
        path = STORED / sample.folder / ride.file
        if path.suffix == ".fit":
            with fitdecode.FitReader(path, check_crc=fitdecode.CrcCheck.RAISE) as reader:
                records = [
                    f for f in reader if isinstance(f, fitdecode.FitDataMessage) and f.name == "record"
                ]
            power = np.array([r.get_value("power", fallback=None) for r in records], float)
            speed = np.array([r.get_value("speed", fallback=None) for r in records], float)
        else:
            rows = list(csv.DictReader(io.StringIO(path.read_text(encoding="utf-8"))))
            power = np.array([r["power [W]"] or "nan" for r in rows], float)
            speed = np.array([r["speed [km/h]"] for r in rows], float) / 3.6
        total += len(power)
        assert 100 < np.nanmean(power) < 350
        assert 5 < np.nanmean(speed) < 14
    assert 1.4 < total / 3600 < 2.1


def test_quarry_loop_has_the_faults_a_real_day_has() -> None:
    path = STORED / QUARRY_LOOP.folder / "rides" / "morning.fit"
    with fitdecode.FitReader(path) as reader:
        frames = [f for f in reader if isinstance(f, fitdecode.FitDataMessage)]
    records = [f for f in frames if f.name == "record"]
    moments = [r.get_value("timestamp").timestamp() for r in records]
    assert sorted(set(np.diff(moments))) == [1.0, 9.0]
    power = np.array([r.get_value("power") for r in records])
    assert power.max() > 1500
    laps = [f for f in frames if f.name == "lap"]
    assert len(laps) == 36  # the way to the line, and between runs, count as laps to a head unit


def test_course_file_is_a_believable_road() -> None:
    path = STORED / QUARRY_LOOP.folder / "courses" / "ridge-road-tt.gpx"
    points = ET.parse(path).getroot().findall(".//{*}trkpt")
    height = np.array([float(p.findtext("{*}ele") or "nan") for p in points])
    latitude, longitude = (np.array([float(p.attrib[k]) for p in points]) for k in ("lat", "lon"))
    steps = np.hypot(np.diff(latitude), np.diff(longitude) * np.cos(np.radians(47.2))) * 111_200
    assert steps.sum() == pytest.approx(40_000, rel=0.02)
    assert np.abs(np.diff(height) / steps).max() < 0.15
    assert np.ptp(height) > 60


def test_rides_of_a_day_cut_in_two_join_up() -> None:
    day = simulate_day(RIDGE_OUT_AND_BACK.spec, RIDGE_OUT_AND_BACK.seed)
    rides, runs = samples.cut_into_rides(RIDGE_OUT_AND_BACK, day)
    first, second = rides.values()
    assert first.start is not None
    assert second.start is not None
    assert 20 < (second.start - first.start).total_seconds() - first.duration < 120
    assert first.time[0] == second.time[0] == 0.0
    assert second.channels["distance"][0] == 0.0
    assert [r.ride for r in runs] == ["first"] * 4 + ["second"] * 4
    for run in runs:
        assert 0 <= run.start < run.end <= rides[run.ride].duration


def test_text_of_a_ride_reads_back() -> None:
    day = simulate_day(RIDGE_OUT_AND_BACK.spec, RIDGE_OUT_AND_BACK.seed)
    ride = day.rides["day"]
    rows = list(csv.DictReader(io.StringIO(csv_text(ride))))
    assert len(rows) == len(ride.time)
    power = np.array([row["power [W]"] or "nan" for row in rows], float)
    assert np.isnan(power).sum() == 5  # the dropout
    assert power == pytest.approx(ride.channels["power"], abs=0.5, nan_ok=True)
    speed = np.array([row["speed [km/h]"] for row in rows], float) / 3.6
    assert speed == pytest.approx(ride.channels["speed"], abs=0.002)


def test_command_names_what_it_wrote(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert samples.main([str(tmp_path)]) == 0
    assert capsys.readouterr().out.split() == [str(tmp_path / s.folder) for s in SAMPLES]
