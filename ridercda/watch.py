"""Progress and cancelling for long work, passed into pure functions as one ``watch`` object."""

from __future__ import annotations

from typing import Protocol


class Watch(Protocol):
    """Told of progress at loop borders; may stop the work."""

    def step(self, done: int, total: int) -> None:
        """Note that `done` of `total` parts are done.

        Raises
        ------
        Cancelled
            If the work has been asked to stop.
        """


class NoWatch:
    """The default: nobody watches, nobody stops."""

    def step(self, done: int, total: int) -> None:
        """Do nothing."""


NO_WATCH = NoWatch()
