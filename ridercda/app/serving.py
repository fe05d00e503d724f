"""The other process's side of a worker: does jobs one at a time, tells of progress, hears of cancellations (no Qt)."""

from __future__ import annotations

import contextlib
import time
import traceback
from collections.abc import Callable
from multiprocessing.connection import Connection
from multiprocessing.reduction import ForkingPickler
from types import MappingProxyType
from typing import Any

from ridercda.errors import Cancelled, RiderCdaError

Task = Callable[..., Any]
_POLL_EVERY = 0.005  # s between looks for a cancellation; a look costs some 5 microseconds
_TELL_EVERY = 0.05  # s between reports of progress


def read_only(content: dict[Any, Any]) -> MappingProxyType[Any, Any]:
    """Return a read-only view of a dictionary."""
    return MappingProxyType(content)


# Read-only mappings of sessions, rides and estimates cross the border as what they are.
ForkingPickler.register(MappingProxyType, lambda mapping: (read_only, (dict(mapping),)))


class _PipeWatch:
    """Sends progress home and hears of cancellations."""

    def __init__(self, job: int, home: Connection, stops: Connection, stopped: set[int]) -> None:
        self._job, self._home, self._stops, self._stopped = job, home, stops, stopped
        self._looked = self._told = 0.0

    def step(self, done: int, total: int) -> None:
        """Note progress; raises Cancelled once asked to stop."""
        now = time.monotonic()
        if now - self._looked >= _POLL_EVERY:
            self._looked = now
            while self._stops.poll():
                self._stopped.add(self._stops.recv())
            if self._job in self._stopped:
                raise Cancelled
        if now - self._told >= _TELL_EVERY:
            self._told = now
            self._home.send((self._job, "progress", (done, total)))


def serve(home: Connection, stops: Connection) -> None:
    """Do jobs until the other end hangs up; runs in the other process."""
    stopped: set[int] = set()
    with contextlib.suppress(EOFError, OSError, KeyboardInterrupt):
        while True:
            job, task, arguments = home.recv()
            while stops.poll():
                stopped.add(stops.recv())
            if job in stopped:
                home.send((job, "cancelled", None))
                continue
            try:
                answer = (job, "done", task(_PipeWatch(job, home, stops, stopped), *arguments))
            except Cancelled:
                answer = (job, "cancelled", None)
            except (RiderCdaError, OSError) as error:
                answer = (job, "failed", str(error))
            except Exception:  # noqa: BLE001 - process border: nothing may vanish
                answer = (job, "fault", traceback.format_exc())
            home.send(answer)
