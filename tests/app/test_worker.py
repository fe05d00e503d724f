from __future__ import annotations

import os
import sys
from collections.abc import Iterator
from pathlib import Path
from types import MappingProxyType

import pytest
from pytestqt.qtbot import QtBot

from ridercda.app.worker import Worker

sys.path.insert(0, str(Path(__file__).parent))  # the other process inherits it and finds the jobs there

import jobs

PATIENCE = 20_000  # ms: starting a process is slow on a busy machine


@pytest.fixture(scope="module")
def worker(qapp: object) -> Iterator[Worker]:
    made = Worker("test")
    yield made
    made.stop()


def test_work_is_done_elsewhere(worker: Worker, qtbot: QtBot) -> None:
    job = worker.request(jobs.doubled, 21)
    with qtbot.waitSignal(job.finished, timeout=PATIENCE) as done:
        pass
    assert done.args == [42]
    assert worker.is_idle


def test_progress_is_heard_and_the_process_is_another(worker: Worker, qtbot: QtBot) -> None:
    job = worker.request(jobs.told, 100)
    heard: list[tuple[int, int]] = []
    job.progressed.connect(lambda done, total: heard.append((done, total)))
    with qtbot.waitSignal(job.finished, timeout=PATIENCE) as done:
        pass
    assert done.args[0] != os.getpid()
    assert heard
    assert all(total == 100 for _, total in heard)
    assert heard == sorted(heard)


def test_read_only_mappings_cross_as_such(worker: Worker, qtbot: QtBot) -> None:
    job = worker.request(jobs.mirrored, MappingProxyType({"a": 1}))
    with qtbot.waitSignal(job.finished, timeout=PATIENCE) as done:
        pass
    assert isinstance(done.args[0], MappingProxyType)
    assert dict(done.args[0]) == {"a": 1}


def test_a_clear_failure_is_one_sentence(worker: Worker, qtbot: QtBot) -> None:
    job = worker.request(jobs.refused)
    with qtbot.waitSignal(job.failed, timeout=PATIENCE) as failed:
        pass
    assert failed.args == ["no ride in it; choose another file"]


def test_our_own_fault_comes_with_its_trace(worker: Worker, qtbot: QtBot) -> None:
    job = worker.request(jobs.broken)
    with qtbot.waitSignal(job.faulted, timeout=PATIENCE) as faulted:
        pass
    assert "ZeroDivisionError: our own fault" in faulted.args[0]


def test_a_cancelled_job_is_never_heard_of_again(worker: Worker, qtbot: QtBot) -> None:
    long = worker.request(jobs.told, 5000)  # ten seconds, were it left alone
    waiting = worker.request(jobs.doubled, 1)
    heard: list[object] = []
    long.finished.connect(heard.append)
    waiting.finished.connect(heard.append)
    with qtbot.waitSignal(long.progressed, timeout=PATIENCE):
        pass
    long.cancel()
    waiting.cancel()
    after = worker.request(jobs.doubled, 4)
    with qtbot.waitSignal(after.finished, timeout=5_000) as done:
        pass
    assert done.args == [8]
    assert heard == []


def test_a_process_that_dies_is_told_of_and_comes_back(worker: Worker, qtbot: QtBot) -> None:
    job = worker.request(jobs.died)
    with qtbot.waitSignals([job.failed, worker.stopped_by_itself], timeout=PATIENCE):
        pass
    again = worker.request(jobs.doubled, 5)
    with qtbot.waitSignal(again.finished, timeout=PATIENCE) as done:
        pass
    assert done.args == [10]


def test_stopping_leaves_no_process_and_no_thread(qapp: object, qtbot: QtBot) -> None:
    worker = Worker("short")
    job = worker.request(jobs.doubled, 1)
    with qtbot.waitSignal(job.finished, timeout=PATIENCE):
        pass
    process, threads = worker._process, worker._threads
    worker.stop()
    assert process is not None
    assert not process.is_alive()
    assert not any(thread.is_alive() for thread in threads)
    worker.stop()  # once more does no harm
