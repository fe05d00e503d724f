"""The command line from outside: exit codes, one clear message, JSON."""

from __future__ import annotations

import json
import os
import shutil
import subprocess
import sys
from pathlib import Path

import jsonschema
import pytest

from ridercda.cli.main import run
from ridercda.report.schemas import schema
from ridercda.session.samples import samples_folder


@pytest.fixture(autouse=True)
def _own_cache(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    monkeypatch.setenv("RIDERCDA_CACHE", str(tmp_path / "cache"))


@pytest.fixture
def sample(tmp_path: Path) -> Path:
    source = samples_folder()
    assert source is not None
    return Path(shutil.copytree(source / "quarry-loop", tmp_path / "quarry-loop"))


def test_solve_prints_a_report_and_writes_json(sample: Path, capsys: pytest.CaptureFixture[str]) -> None:
    target = sample / "out.json"
    assert run(["solve", str(sample), "--json", str(target)]) == 0
    shown = capsys.readouterr().out
    assert "Quarry loop" in shown
    assert "verdict" in shown
    assert "a low head is not a test condition" in " ".join(shown.split())
    content = json.loads(target.read_text())
    jsonschema.Draft202012Validator(schema("estimate")).validate(content)
    assert [s["id"] for s in content["setups"]]


def test_json_on_standard_output_is_all_there_is(sample: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["solve", str(sample / "session.toml"), "--json", "-"]) == 0
    assert json.loads(capsys.readouterr().out)["kind"] == "estimate"


def test_a_day_that_cannot_answer_exits_three_and_writes_json(
    sample: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = sample / "session.toml"
    path.write_text(path.read_text().replace('kind = "loop"', 'kind = "road"'))
    assert run(["solve", str(sample), "--json", "-"]) == 3
    content = json.loads(capsys.readouterr().out)
    jsonschema.Draft202012Validator(schema("estimate")).validate(content)
    assert "no-profile" in {w["code"] for w in content["warnings"]}


@pytest.mark.parametrize(
    ("words", "told"),
    [
        (["solve"], "SESSION"),
        (["solve", "no-such-place"], "no-such-place"),
        (["solve", ".", "--nonsense"], "--nonsense"),
        (["--nonsense"], "there is no option --nonsense"),
        (["no-such-session"], "neither a command nor a session"),
    ],
)
def test_bad_usage_is_one_message_and_two(
    words: list[str], told: str, capsys: pytest.CaptureFixture[str]
) -> None:
    assert run(words) == 2
    shown = capsys.readouterr().err
    assert told in shown
    assert "Traceback" not in shown


def test_a_bad_value_names_file_key_and_value(sample: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = sample / "session.toml"
    text = path.read_text()
    path.write_text(text.replace('"75.5 kg"', '"75.5 watts"'))
    assert run(["solve", str(sample)]) == 2
    shown = capsys.readouterr().err
    for part in ("session.toml", "rider.mass", "75.5 watts", "kg"):
        assert part in shown


def test_a_missing_ride_file_is_named(sample: Path, capsys: pytest.CaptureFixture[str]) -> None:
    for path in (sample / "rides").iterdir():
        path.unlink()
    assert run(["solve", str(sample)]) == 2
    assert ".file" in capsys.readouterr().err


def test_json_that_cannot_be_written_is_told(sample: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["solve", str(sample), "--json", str(sample / "nowhere" / "out.json")]) == 2
    assert "cannot be written" in capsys.readouterr().err


def test_samples_are_copied_once(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["samples", str(tmp_path / "mine")]) == 0
    assert (tmp_path / "mine" / "quarry-loop" / "session.toml").is_file()
    capsys.readouterr()
    assert run(["samples", str(tmp_path / "mine")]) == 0
    assert "left as it is" in capsys.readouterr().out


def test_version_starts_light() -> None:
    code = (
        "import sys; from ridercda.cli.main import run; run(['--version']);"
        "print([m for m in ('numpy', 'numba', 'pint', 'scipy', 'PySide6', 'rich') if m in sys.modules])"
    )
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, check=True, env=dict(os.environ)
    )
    assert done.stdout.splitlines()[0].startswith("ridercda ")
    assert done.stdout.splitlines()[1] == "[]"


def test_everything_but_the_window_works_without_qt(sample: Path) -> None:
    code = (
        "import sys\n"
        "for name in ('PySide6', 'shiboken6', 'pyqtgraph'): sys.modules[name] = None\n"
        "from ridercda.cli.main import run\n"
        f"code = run(['solve', {str(sample)!r}, '--json', '-'])\n"
        "sys.stderr.write(f'solve {code}\\n')\n"
        "sys.stderr.write(f'window {run([])}\\n')\n"
    )
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, check=False, env=dict(os.environ)
    )
    assert "solve 0" in done.stderr
    assert "window 2" in done.stderr
    assert "needs Qt" in done.stderr
    assert "Traceback" not in done.stderr
