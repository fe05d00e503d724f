"""The tree of errors: one base per way of handling, drawn here.

::

    RiderCdaError                   anything a user can put right: one clear message, exit 2
    ├── InputError                  a file, key or value is wrong
    │   ├── QuantityError           "number unit" text that cannot be read
    │   ├── SessionError            session.toml: file, key, value, what to do
    │   ├── ReaderError             a ride file that cannot be read at all
    │   └── CourseError             a course that cannot be raced
    ├── SolveError                  the input is sound, but it cannot answer: exit 3
    │   ├── NotIdentifiable         the data hold no answer to this question
    │   └── NotConverged            the solver did not settle
    └── PlanError                   a power plan that is not feasible
    Cancelled                       the user stopped the work: exit 130
"""

from __future__ import annotations

from pathlib import Path


class RiderCdaError(Exception):
    """Something a user can put right; its text is one complete message."""


class InputError(RiderCdaError):
    """A file, key or value is wrong; nothing was changed."""


class QuantityError(InputError):
    """Text that is not a quantity of the kind asked for."""


class SessionError(InputError):
    """A session file that cannot be used, told with file, key, value and what to do.

    Parameters
    ----------
    message : str
        What is wrong and what to do.
    path : Path, optional
        The file at fault.
    key : str
        Dotted key at fault, e.g. ``run[2].start``; empty where none is.
    """

    def __init__(self, message: str, *, path: Path | None = None, key: str = "") -> None:
        self.path = path
        self.key = key
        where = ": ".join(part for part in (str(path) if path else "", key) if part)
        super().__init__(f"{where}: {message}" if where else message)


class ReaderError(InputError):
    """A ride file from which nothing can be read.

    Parameters
    ----------
    message : str
        What is wrong and what to do.
    path : Path, optional
        The file at fault.
    record : int, optional
        Where in the file reading stopped: line or record number.
    """

    def __init__(self, message: str, *, path: Path | None = None, record: int | None = None) -> None:
        self.path = path
        self.record = record
        where = str(path) if path else ""
        if record is not None:
            where += f" (record {record})" if where else f"record {record}"
        super().__init__(f"{where}: {message}" if where else message)


class CourseError(InputError):
    """A course that cannot be raced: too few points, no length, impossible values."""


class SolveError(RiderCdaError):
    """The input is sound, but it cannot give the answer."""


class NotIdentifiable(SolveError):
    """The data hold no answer to this question."""


class NotConverged(SolveError):
    """The solver did not settle."""


class PlanError(RiderCdaError):
    """A power plan that the rider or the course does not allow."""


class Cancelled(Exception):
    """The work was stopped on request."""
