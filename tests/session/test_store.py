from __future__ import annotations

import os
import stat
from dataclasses import replace
from pathlib import Path

import pytest

from ridercda.errors import SessionError
from ridercda.session import edits
from ridercda.session.document import Session, Setup
from ridercda.session.store import StoredSession, create_session, load_session, save_session

HAND_WRITTEN = (Path(__file__).parent / "hand_written.toml").read_bytes().decode()


def stored(folder: Path, text: str = HAND_WRITTEN) -> StoredSession:
    (folder / "session.toml").write_bytes(text.encode())
    return load_session(folder)


def saved_lines(folder: Path, text: str, session: Session) -> list[str]:
    """Save an edit and return the lines that are new."""
    before = stored(folder, text)
    save_session(before, session)
    assert load_session(folder).session == session
    return [
        line for line in (folder / "session.toml").read_text().splitlines() if line not in text.splitlines()
    ]


@pytest.mark.parametrize(
    "text",
    [
        HAND_WRITTEN,
        HAND_WRITTEN.replace("\n", "\r\n"),
        "\ufeff" + HAND_WRITTEN,
        HAND_WRITTEN.replace("\n", "   \n") + "\n\n  \n",
        HAND_WRITTEN.replace(" = ", "   =\t").replace("\n[", "\n  ["),
        HAND_WRITTEN.rstrip(),
    ],
    ids=["plain", "crlf", "byte order mark", "trailing spaces", "odd spacing", "no last line end"],
)
def test_load_then_save_without_an_edit_changes_no_byte(tmp_path: Path, text: str) -> None:
    before = stored(tmp_path, text)
    after = save_session(before, before.session)
    assert (tmp_path / "session.toml").read_bytes() == text.encode()
    assert after.text == text
    assert sorted(path.name for path in tmp_path.iterdir()) == ["session.toml"]


def test_an_edit_taken_back_changes_no_byte(tmp_path: Path) -> None:
    before = stored(tmp_path)
    edited = save_session(before, edits.set_rider_mass(before.session, 80.0))
    assert edited.text != HAND_WRITTEN
    again = save_session(edited, edits.set_rider_mass(edited.session, before.session.rider.mass or 0.0))
    assert again.text == HAND_WRITTEN


def test_a_quantity_keeps_the_unit_it_was_written_in(tmp_path: Path) -> None:
    day = stored(tmp_path).session
    heavier = edits.set_rider_mass(day, 166 * 0.45359237)
    assert saved_lines(tmp_path, HAND_WRITTEN, heavier) == ['mass = "166 lb"']
    warmer = replace(day.air, readings=(replace(day.air.readings[0], temperature=293.15),))
    assert saved_lines(tmp_path, HAND_WRITTEN, edits.set_air(day, warmer)) == ['temperature = "20 C"']
    low = replace(day.setup("low"), power_cost_share=0.02, mass_change=0.5)
    lines = saved_lines(tmp_path, HAND_WRITTEN, edits.change_setup(day, "low", low))
    assert lines == ['power_cost = "2 %"', 'mass_change = "+0.5 kg"']
    watts = replace(day.setup("low"), power_cost_share=None, power_cost=4.0, power_cost_sd=1.0)
    lines = saved_lines(tmp_path, HAND_WRITTEN, edits.change_setup(day, "low", watts))
    assert lines == ['power_cost = "4 W"', 'power_cost_sd = "1 W"']


def test_a_decimal_comma_stays_one(tmp_path: Path) -> None:
    text = HAND_WRITTEN.replace('"8.5 kg"', '"8,5kg"')
    day = stored(tmp_path, text).session
    lines = saved_lines(tmp_path, text, edits.set_bike(day, replace(day.bike, mass=8.75)))
    assert lines == ['mass = "8,75kg"']


def test_times_stay_in_the_manner_they_were_written_in(tmp_path: Path) -> None:
    day = stored(tmp_path).session
    run = replace(day.run("1"), start=311.5, laps=(312.0, 400.5))
    lines = saved_lines(tmp_path, HAND_WRITTEN, edits.change_run(day, "1", run))
    assert lines == ['start = "0:05:11.5"', "laps = [312, 400.5]"]


def test_comments_stand_where_they_stood(tmp_path: Path) -> None:
    before = stored(tmp_path)
    day = edits.remove_runs(edits.set_rider_mass(before.session, 80.0), ["1"])
    text = save_session(before, day).text
    assert "# omitted: to the end of the ride" not in text  # it went with its run
    for line in HAND_WRITTEN.splitlines():
        comment = line.partition("#")[2]
        if comment and "omitted: to the end" not in comment:
            assert comment in text


def test_the_file_before_the_last_save_is_kept(tmp_path: Path) -> None:
    before = stored(tmp_path)
    once = save_session(before, edits.set_name(before.session, "once"))
    save_session(once, edits.set_name(before.session, "twice"))
    assert (tmp_path / "session.toml.previous").read_text() == once.text
    assert sorted(path.name for path in tmp_path.iterdir()) == ["session.toml", "session.toml.previous"]


def test_a_file_changed_by_another_program_is_not_written_over(tmp_path: Path) -> None:
    before = stored(tmp_path)
    other = HAND_WRITTEN.replace("165 lb", "170 lb")
    (tmp_path / "session.toml").write_text(other)
    with pytest.raises(
        SessionError, match="was changed by another program since it was loaded; load it again"
    ):
        save_session(before, edits.set_name(before.session, "mine"))
    assert (tmp_path / "session.toml").read_text() == other


def test_a_session_that_is_not_valid_is_not_saved(tmp_path: Path) -> None:
    before = stored(tmp_path)
    with pytest.raises(SessionError, match=r"session\.toml: rider\.mass: 900 kg cannot be"):
        save_session(before, replace(before.session, rider=replace(before.session.rider, mass=900.0)))
    assert (tmp_path / "session.toml").read_text() == HAND_WRITTEN


@pytest.mark.skipif(os.name != "posix", reason="file modes are those of POSIX")
def test_a_saved_file_keeps_its_mode_and_a_link_stays_a_link(tmp_path: Path) -> None:
    (tmp_path / "real").mkdir()
    (tmp_path / "linked").mkdir()
    before = stored(tmp_path / "real")
    before.path.chmod(0o640)
    (tmp_path / "linked" / "session.toml").symlink_to(before.path)
    linked = load_session(tmp_path / "linked")
    save_session(linked, edits.set_name(linked.session, "linked"))
    assert (tmp_path / "linked" / "session.toml").is_symlink()
    assert stat.S_IMODE(before.path.stat().st_mode) == 0o640
    assert load_session(before.path).session.name == "linked"


def test_a_folder_that_is_gone_is_one_clear_message(tmp_path: Path) -> None:
    folder = tmp_path / "day"
    folder.mkdir()
    before = stored(folder)
    before.path.unlink()
    folder.rmdir()
    with pytest.raises(SessionError, match="cannot be written: No such file or directory"):
        save_session(before, edits.set_name(before.session, "x"))


def test_a_new_session_goes_into_a_folder_without_one(tmp_path: Path) -> None:
    session = Session("New", setups=(Setup("a", baseline=True),))
    made = create_session(tmp_path / "new" / "day", session)
    assert load_session(tmp_path / "new" / "day") == made
    assert made.text.startswith("format = 1\n")
    with pytest.raises(SessionError, match="is there already"):
        create_session(tmp_path / "new" / "day", session)


def test_a_session_without_a_name_is_called_like_its_folder(tmp_path: Path) -> None:
    (tmp_path / "quarry").mkdir()
    before = stored(tmp_path / "quarry", "format = 1\n")
    assert before.session == Session("quarry")
    assert save_session(before, before.session).text == "format = 1\n"


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (b"", "format: is missing; begin the file with the line: format = 1"),
        (b"format = 2\n", r"format: 2 is newer than this program reads \(1\)"),
        (b"format = 0\n", "format: 0 is not a format number"),
        (b"format = '1'\n", "format: 1 is not a format number"),
        (b"format = \n", r"is not valid TOML: Invalid value \(at line 1, column 10\)"),
        (b"format = 1\nname = '\xff'\n", r"is not UTF-8 text \(byte 19\)"),
    ],
)
def test_a_file_that_is_no_session_is_refused(tmp_path: Path, content: bytes, message: str) -> None:
    (tmp_path / "session.toml").write_bytes(content)
    with pytest.raises(SessionError, match=message) as refusal:
        load_session(tmp_path)
    assert str(refusal.value).startswith(str(tmp_path / "session.toml"))


def test_a_session_that_is_not_there_is_refused(tmp_path: Path) -> None:
    with pytest.raises(SessionError, match=r"the folder holds no session\.toml"):
        load_session(tmp_path)
    with pytest.raises(SessionError, match="there is no such file or folder"):
        load_session(tmp_path / "nowhere")
