"""Jobs for tests of the other process; they live in a module so that it can import them."""

from __future__ import annotations

import os
import time
from types import MappingProxyType

from ridercda.errors import ReaderError
from ridercda.watch import Watch


def doubled(watch: Watch, number: int) -> int:
    """Return twice a number."""
    return 2 * number


def told(watch: Watch, parts: int) -> int:
    """Report progress now and then, and return who worked."""
    for done in range(parts):
        watch.step(done, parts)
        time.sleep(0.002)
    return os.getpid()


def refused(watch: Watch) -> None:
    """Fail as a reader does."""
    raise ReaderError("no ride in it; choose another file")


def broken(watch: Watch) -> None:
    """Fail as nobody should."""
    raise ZeroDivisionError("our own fault")


def died(watch: Watch) -> None:
    """Take the process down."""
    os._exit(3)


def mirrored(watch: Watch, mapping: MappingProxyType[str, int]) -> MappingProxyType[str, int]:
    """Return what was sent."""
    assert isinstance(mapping, MappingProxyType)
    return mapping
