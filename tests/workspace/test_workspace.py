"""The memo: the same figures afresh, and nothing done twice that need not be."""

from __future__ import annotations

import shutil
from dataclasses import replace
from pathlib import Path

import pytest

from ridercda.session.samples import samples_folder
from ridercda.session.store import StoredSession, load_session
from ridercda.workspace.workspace import Workspace, user_cache


@pytest.fixture
def stored(tmp_path: Path) -> StoredSession:
    source = samples_folder()
    assert source is not None
    shutil.copytree(source / "one-speed", tmp_path / "day")
    return load_session(tmp_path / "day")


def test_a_rename_solves_nothing_anew(stored: StoredSession) -> None:
    workspace = Workspace()
    rides = workspace.rides(stored.folder, stored.session)
    first = workspace.estimate(stored.session, rides)
    setups = (replace(stored.session.setups[0], name="Another name"), *stored.session.setups[1:])
    assert workspace.estimate(replace(stored.session, setups=setups), rides) is first


def test_a_moved_edge_reads_nothing_anew_but_solves(stored: StoredSession) -> None:
    workspace = Workspace()
    rides = workspace.rides(stored.folder, stored.session)
    first = workspace.estimate(stored.session, rides)
    runs = (
        replace(stored.session.runs[0], start=stored.session.runs[0].start + 20.0),
        *stored.session.runs[1:],
    )
    moved = replace(stored.session, runs=runs)
    again = workspace.rides(stored.folder, moved)
    assert all(again[name] is rides[name] for name in rides)
    assert workspace.estimate(moved, again) is not first


def test_a_workspace_built_afresh_gives_the_same_figures(stored: StoredSession, tmp_path: Path) -> None:
    figures = []
    for _ in range(2):
        workspace = Workspace(tmp_path / "cache")
        rides = workspace.rides(stored.folder, stored.session)
        figures.append(workspace.estimate(stored.session, rides).differences[0].cda)
    assert figures[0] == figures[1]


def test_a_changed_file_is_read_anew(stored: StoredSession) -> None:
    workspace = Workspace()
    entry = stored.session.rides[0]
    before = workspace.ride(stored.folder, entry)
    path = stored.folder / entry.file
    other = next(path for path in (samples_folder() or Path()).glob("quarry-loop/rides/*"))
    shutil.copy(other, path)
    assert workspace.ride(stored.folder, entry).sha256 != before.sha256


def test_the_cache_folder_can_be_named(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    monkeypatch.setenv("RIDERCDA_CACHE", str(tmp_path / "kept"))
    assert user_cache() == tmp_path / "kept"
