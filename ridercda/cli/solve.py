"""``ridercda solve``: CdA per setup and Crr per tyre set of a session."""

from __future__ import annotations

import sys
from collections.abc import Sequence
from pathlib import Path

from rich.console import Console

from ridercda.cli.arguments import parsed, session_parser, write_json
from ridercda.cli.progress import progress_bar
from ridercda.drag.estimate import Estimate
from ridercda.report.estimate_json import estimate_json
from ridercda.session.document import Session
from ridercda.session.store import StoredSession, load_session

COMPILING = "Compiling the solver for this machine; only the first time"


def command(words: Sequence[str]) -> int:
    """Solve a session, print the report or JSON, and return 0, or 3 when nothing can be answered."""
    arguments = parsed(session_parser("solve", "CdA per setup and Crr per tyre set, with intervals."), words)
    if arguments is None:
        return 0
    stored = load_session(arguments.session)
    estimate = solve_session(stored)
    if arguments.json:
        write_json(estimate_json(estimate, stored.session.name), arguments.json)
    if arguments.json != "-":
        from ridercda.report.drag_table import drag_report

        Console(highlight=False).print(drag_report(estimate, stored.session))
    return 0 if estimate.answers else 3


def solve_session(stored: StoredSession) -> Estimate:
    """Return the estimate of a stored session, with progress on a terminal."""
    from ridercda.workspace.workspace import Workspace, user_cache

    console = Console(stderr=True, highlight=False)
    workspace = Workspace(user_cache())
    with progress_bar(console, "Reading rides") as watch:
        rides = workspace.rides(stored.folder, stored.session, watch)
    text = "Solving" if _compiled() else COMPILING
    if text == COMPILING and not console.is_terminal:
        sys.stderr.write(f"{text} ...\n")
    with progress_bar(console, text) as watch:
        return workspace.estimate(stored.session, rides, watch)


def can_solve(session: Session) -> bool:
    """Whether a session has runs to solve at all."""
    return bool(session.runs)


def _compiled() -> bool:
    """Whether compiled code is in its cache, so that a solve starts at once."""
    import ridercda.drag

    folder = Path(ridercda.drag.__file__).parent / "__pycache__"
    return any(folder.glob("innovations.run_innovations*.nbc"))
