"""The command line: dispatch on the first word, one clear message for every error, no traceback.

Exit codes: 0 something was answered, 1 our own fault, 2 bad usage or input, 3 nothing can be answered,
130 interrupted.
"""

from __future__ import annotations

import os
import sys
from collections.abc import Sequence

USAGE = """\
usage: ridercda [SESSION]                                 open the window
       ridercda inspect RIDE...                           channels, sampling, span and faults of ride files
       ridercda solve SESSION [--json FILE]               CdA per setup, Crr per tyre set
       ridercda samples [FOLDER]                          copy the sample sessions to a folder
       ridercda --version | --help

SESSION is a session folder or its session.toml. FILE may be - for standard output.
"""

OK, OUR_FAULT, BAD_INPUT, NO_ANSWER, INTERRUPTED = 0, 1, 2, 3, 130


def entry() -> None:
    """Run the program and exit with its code."""
    code = run(sys.argv[1:])
    try:
        sys.stdout.flush()
    except BrokenPipeError:  # the reader of a pipe has gone: nothing is left to say
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
    sys.exit(code)


def run(arguments: Sequence[str]) -> int:
    """Run one command and return its exit code; every error becomes one message on standard error."""
    from ridercda.errors import Cancelled, RiderCdaError, SolveError

    try:
        return _dispatch(list(arguments))
    except (KeyboardInterrupt, Cancelled):
        sys.stderr.write("Interrupted.\n")
        return INTERRUPTED
    except SolveError as error:
        sys.stderr.write(f"ridercda: {error}\n")
        return NO_ANSWER
    except RiderCdaError as error:
        sys.stderr.write(f"ridercda: {error}\n")
        return BAD_INPUT
    except BrokenPipeError:
        return OK
    except Exception as error:  # noqa: BLE001 - program border: the trace goes to a file, not to the user
        from ridercda.cli.crash import keep_trace

        sys.stderr.write(
            f"ridercda: this is our fault: {type(error).__name__}: {error}; details in {keep_trace()}\n"
        )
        return OUR_FAULT


def _dispatch(words: list[str]) -> int:
    if not words:
        return _open_window(None)
    first, rest = words[0], words[1:]
    match first:
        case "--version" | "-V":
            from ridercda import __version__

            sys.stdout.write(f"ridercda {__version__}\n")
            return OK
        case "--help" | "-h" | "help":
            sys.stdout.write(USAGE)
            return OK
        case "inspect":
            from ridercda.cli import inspect as inspecting

            return inspecting.command(rest)
        case "solve":
            from ridercda.cli import solve as solving

            return solving.command(rest)
        case "samples":
            from ridercda.cli import samples as copying

            return copying.command(rest)
    if first.startswith("-"):
        return _usage(f"there is no option {first}")
    if rest:
        return _usage(f"one session can be opened at a time, not {len(words)}")
    if not os.path.exists(first):
        return _usage(f"there is neither a command nor a session {first!r}")
    return _open_window(first)


def _usage(message: str) -> int:
    sys.stderr.write(f"ridercda: {message}\n\n{USAGE}")
    return BAD_INPUT


def _open_window(session: str | None) -> int:
    from pathlib import Path

    try:
        from ridercda.app.main import run as run_app
    except ImportError as error:
        if (error.name or "").split(".")[0] not in ("PySide6", "shiboken6", "pyqtgraph") and "lib" not in str(
            error
        ):
            raise
        sys.stderr.write(
            f"ridercda: the window needs Qt, which cannot be loaded here ({error}). Install it with: "
            'pip install "ridercda[app]"; on bare Linux see the README for the system packages. '
            "The commands inspect, solve and rank work without it.\n"
        )
        return BAD_INPUT
    return run_app(Path(session) if session else None)
