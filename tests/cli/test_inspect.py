"""``ridercda inspect``: what it says of a ride, and what it says of a file that is none."""

from __future__ import annotations

import io
from pathlib import Path

import numpy as np
import pytest
from rich.console import Console

from ridercda.cli import inspect
from ridercda.cli.main import run as run_program


def table(rows: int = 400) -> str:
    rng = np.random.default_rng(1)
    power = np.round(220.0 + 15.0 * rng.standard_normal(rows))
    power[200] = 4000.0
    speed = 36.0 + 0.2 * np.sin(np.arange(rows) / 30.0) + 0.05 * rng.standard_normal(rows)
    lines = [f"{k},{power[k]:.0f},{speed[k]:.2f}" for k in range(rows) if not 300 <= k < 306]
    return "time,power,speed [km/h]\n" + "\n".join(lines) + "\n"


@pytest.fixture
def ride_path(tmp_path: Path) -> str:
    path = tmp_path / "ride.csv"
    path.write_text(table())
    return str(path)


def inspected(*paths: str, width: int = 120) -> tuple[int, str]:
    out = io.StringIO()
    code = inspect.run(list(paths), Console(file=out, width=width, highlight=False))
    return code, out.getvalue()


def test_channels_sampling_and_span(ride_path: str) -> None:
    code, shown = inspected(ride_path)
    assert code == 0
    assert "delimited text, 6:39 long, 394 records" in shown
    assert "A record every 1 s, 99.7 % of the time; the longest interval is 7 s" in shown
    rows = {line.split()[0]: line.split() for line in shown.splitlines() if line.strip()}
    assert rows["power"][1:3] == ["100", "%"]
    assert rows["power"][-2:] == ["4000", "W"]
    assert rows["speed"][-3:] == ["36.0", "36.3", "km/h"]


def test_faults_with_span_cause_and_repair(ride_path: str) -> None:
    _, shown = inspected(ride_path)
    lines = shown.splitlines()
    spike = next(line for line in lines if line.startswith("power-spike"))
    assert "3:20" in spike
    assert "Power leaps to 4000 W from about" in spike
    assert "Repair: blank (or: interpolate, leave)." in " ".join(shown.split())
    gap = next(line for line in lines if line.startswith("gap"))
    assert gap.split()[1:3] == ["4:59", "5:06"]
    assert "6 records missing: 7 s without one" in gap


def test_a_clean_ride_says_so(tmp_path: Path) -> None:
    path = tmp_path / "clean.csv"
    rows = "".join(f"{k},{220 + (k * 7919) % 23},{36 + 0.01 * ((k * 104729) % 13)}\n" for k in range(200))
    path.write_text("time,power,speed [km/h]\n" + rows)
    code, shown = inspected(str(path))
    assert code == 0
    assert "No faults found." in shown
    assert "A record every 1 s throughout" in shown


def test_many_faults_of_a_kind_are_counted(tmp_path: Path) -> None:
    rows = [f"{k},{220 + (k * 7919) % 23}" for k in range(900) if k % 60 != 30]
    path = tmp_path / "gaps.csv"
    path.write_text("time,power\n" + "\n".join(rows) + "\n")
    _, shown = inspected(str(path))
    assert sum(line.startswith("gap ") for line in shown.splitlines()) == inspect.FAULTS_PER_KIND + 1
    assert "… and 10 more of this kind" in shown


def test_an_unreadable_file_is_one_message_and_the_others_go_on(
    ride_path: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    bad = tmp_path / "notes.pdf"
    bad.write_bytes(b"%PDF-1.7\0\1")
    code, shown = inspected(str(bad), str(tmp_path / "nowhere.fit"), ride_path)
    told = capsys.readouterr().err.splitlines()
    assert code == 2
    assert len(told) == 2
    assert told[0].startswith(
        f"ridercda: {bad}: this is not a ride file that can be read; the formats read are FIT"
    )
    assert told[1] == f"ridercda: {tmp_path / 'nowhere.fit'}: there is no such file"
    assert "394 records" in shown
    assert "notes.pdf" not in shown


def test_unknown_columns_name_the_headers(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = tmp_path / "foreign.csv"
    path.write_text("Zeit;Watt\n0;200\n")
    assert inspected(str(path))[0] == 2
    told = capsys.readouterr().err
    assert "'Zeit', 'Watt'" in told
    assert "names understood are time, power, speed" in told


def test_it_fits_a_narrow_terminal(ride_path: str) -> None:
    _, shown = inspected(ride_path, width=80)
    assert max(len(line) for line in shown.splitlines()) <= 80


def test_the_program_dispatches_to_it(ride_path: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert run_program(["inspect", ride_path]) == 0
    assert "394 records" in capsys.readouterr().out
    assert run_program(["inspect"]) == 2
    assert "usage: ridercda inspect" in capsys.readouterr().err
    assert run_program(["inspect", "--help"]) == 0


def test_real_rides(capsys: pytest.CaptureFixture[str]) -> None:
    folder = Path(__file__).resolve().parents[2].parent / "shared" / "rides"
    if not folder.is_dir():
        pytest.skip("no folder ../shared/rides with ride files of real devices")
    paths = sorted(str(path) for path in folder.glob("*.fit"))
    code, shown = inspected(*paths)
    assert code == 0
    assert capsys.readouterr().err == ""
    for path in paths:
        assert path in shown
    assert "There is no power in this ride" in shown
    assert "Its checksum does not match its content" in shown
