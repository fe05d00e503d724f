from __future__ import annotations

import json
import os
from pathlib import Path

import pytest
from invented import invented_session
from pytestqt.qtbot import QtBot

from ridercda.app.autosave import Autosave, drop, unsaved_work
from ridercda.app.desk import Desk
from ridercda.app.files import SessionFiles
from ridercda.app.samples import Sample, copy_sample, samples
from ridercda.session import edits
from ridercda.session.store import create_session, load_session


@pytest.fixture
def files(desk: Desk, tmp_path: Path) -> SessionFiles:
    return SessionFiles(desk, Autosave(desk.document, tmp_path / "unsaved"))


def ride_file(folder: Path, name: str = "am.csv") -> Path:
    folder.mkdir(parents=True, exist_ok=True)
    path = folder / name
    path.write_text("time,power,speed\n0,200,10\n1,201,10.1\n2,199,10\n", encoding="utf-8")
    return path


def stored(folder: Path) -> Path:
    create_session(folder, invented_session())
    ride_file(folder / "rides", "am.fit")
    return folder


def test_save_and_open_again_gives_the_same(files: SessionFiles, desk: Desk, tmp_path: Path) -> None:
    assert files.open(stored(tmp_path / "day"))
    desk.document.edit("Mass", lambda s: edits.set_rider_mass(s, 80.0))
    saved = desk.session
    assert files.save()
    assert desk.document.undo_stack.isClean()
    assert load_session(tmp_path / "day").session == saved
    assert files.open(tmp_path / "day")
    assert desk.session == saved
    assert desk.settings.recent == (tmp_path / "day",)


def test_saving_without_an_edit_changes_no_byte(files: SessionFiles, tmp_path: Path) -> None:
    folder = stored(tmp_path / "day")
    before = (folder / "session.toml").read_bytes()
    assert files.open(folder)
    assert files.save()
    assert (folder / "session.toml").read_bytes() == before


def test_a_session_that_cannot_be_opened_is_told_in_one_sentence(
    files: SessionFiles, desk: Desk, qtbot: QtBot, tmp_path: Path
) -> None:
    (tmp_path / "session.toml").write_text("format = 1\nnonsense = 3\n", encoding="utf-8")
    before = desk.session
    with qtbot.waitSignal(files.failed) as failed:
        assert not files.open(tmp_path)
    assert "nonsense" in failed.args[0]
    assert desk.session is before


def test_dropped_rides_begin_a_session_in_one_step(files: SessionFiles, desk: Desk, tmp_path: Path) -> None:
    paths = [ride_file(tmp_path / "one", "morning.csv"), ride_file(tmp_path / "two", "morning.csv")]
    files.add_rides(paths)
    assert [ride.id for ride in desk.session.rides] == ["morning", "morning-2"]
    assert all(len(ride.sha256) == 64 for ride in desk.session.rides)
    assert desk.document.undo_stack.undoText() == "Add 2 rides"
    desk.document.undo_stack.undo()
    assert desk.session.rides == ()


def test_save_as_takes_copies_of_the_rides_along(files: SessionFiles, desk: Desk, tmp_path: Path) -> None:
    files.add_rides([ride_file(tmp_path / "one", "a.csv"), ride_file(tmp_path / "two", "a.csv")])
    ride_file(tmp_path / "two", "a.csv").write_text("time,power,speed\n0,100,9\n1,100,9\n", encoding="utf-8")
    assert files.save_as(tmp_path / "kept")
    assert [ride.file for ride in desk.session.rides] == ["rides/a.csv", "rides/a-2.csv"]
    assert (tmp_path / "kept" / "rides" / "a-2.csv").is_file()
    assert load_session(tmp_path / "kept").session == desk.session
    assert desk.document.undo_stack.isClean()
    assert not files.save_as(tmp_path / "kept")  # never over a session that is there


def test_a_moved_file_is_found_again_with_its_neighbours(
    files: SessionFiles, desk: Desk, tmp_path: Path
) -> None:
    paths = [ride_file(tmp_path / "old", "a.csv"), ride_file(tmp_path / "old", "b.csv")]
    paths[1].write_text("time,power,speed\n0,100,9\n1,100,9\n", encoding="utf-8")
    files.add_rides(paths)
    (tmp_path / "old").rename(tmp_path / "new")
    files.relocate("a", tmp_path / "new" / "a.csv")
    assert [Path(ride.file) for ride in desk.session.rides] == [
        tmp_path / "new" / "a.csv",
        tmp_path / "new" / "b.csv",
    ]
    assert desk.document.undo_stack.undoText() == "Find 2 ride files again"


def test_what_is_not_saved_is_kept_within_seconds_and_found_again(
    files: SessionFiles, desk: Desk, tmp_path: Path, qtbot: QtBot
) -> None:
    autosave, root = files._autosave, tmp_path / "unsaved"
    files.open(stored(tmp_path / "day"))
    desk.document.edit("Mass", lambda s: edits.set_rider_mass(s, 81.0))
    qtbot.waitUntil(lambda: any(root.glob("*/session.toml")), timeout=5_000)
    kept_file = next(root.glob("*/session.toml"))
    assert load_session(kept_file).session.rider.mass == 81.0
    # The same process still runs, so this is nobody's leftover; once its number is gone, it is.
    origin = kept_file.with_name("origin.json")
    about = json.loads(origin.read_text())
    assert about["process"] == os.getpid()
    assert unsaved_work(root) == ()
    about["process"] = 2**22 + 1  # beyond any process number
    origin.write_text(json.dumps(about))
    (kept,) = unsaved_work(root)
    assert kept.session.rider.mass == 81.0
    assert kept.folder == tmp_path / "day"
    files.recover(kept)
    assert desk.session.rider.mass == 81.0
    assert desk.document.undo_stack.undoText() == "Recover unsaved changes"
    assert not desk.document.undo_stack.isClean()
    assert files.save()
    assert load_session(tmp_path / "day").session.rider.mass == 81.0
    assert unsaved_work(root) == ()
    assert not any(root.glob("*")), autosave


def test_saved_and_undone_work_is_not_kept(files: SessionFiles, desk: Desk, tmp_path: Path) -> None:
    files.open(stored(tmp_path / "day"))
    desk.document.edit("Mass", lambda s: edits.set_rider_mass(s, 81.0))
    files._autosave.keep()
    assert any((tmp_path / "unsaved").glob("*"))
    desk.document.undo_stack.undo()
    assert not any((tmp_path / "unsaved").glob("*"))


def test_a_damaged_leftover_is_passed_over(tmp_path: Path) -> None:
    place = tmp_path / "broken"
    place.mkdir()
    (place / "origin.json").write_text("{")
    assert unsaved_work(tmp_path) == ()
    (place / "origin.json").write_text('{"folder": "", "process": 4194305}')
    (place / "session.toml").write_text("format = 1\n[rider\n")
    assert unsaved_work(tmp_path) == ()


def test_a_leftover_can_be_given_up(tmp_path: Path) -> None:
    place = tmp_path / "x"
    create_session(place, invented_session())
    (place / "origin.json").write_text('{"folder": "", "process": 4194305}')
    (kept,) = unsaved_work(tmp_path)
    drop(kept)
    assert unsaved_work(tmp_path) == ()


def test_a_sample_is_copied_before_it_is_opened(tmp_path: Path) -> None:
    found = samples()
    assert found
    assert all(isinstance(sample, Sample) and sample.name for sample in found)
    first = copy_sample(found[0], tmp_path)
    second = copy_sample(found[0], tmp_path)
    assert first != second
    assert (first / "session.toml").read_bytes() == (found[0].folder / "session.toml").read_bytes()
