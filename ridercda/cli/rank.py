"""``ridercda rank``: seconds saved on each course."""

from __future__ import annotations

from collections.abc import Sequence

from rich.console import Console

from ridercda.cli.arguments import parsed, session_parser, write_json
from ridercda.cli.progress import progress_bar
from ridercda.cli.solve import can_solve, solve_session
from ridercda.errors import SessionError
from ridercda.session.store import load_session


def command(words: Sequence[str]) -> int:
    """Rank the setups of a session and return 0, or 3 when none can be raced."""
    parser = session_parser(
        "rank", "Seconds each setup saves on each course, with the chance of being right."
    )
    parser.add_argument("--course", metavar="ID", action="append", help="only this course; may be repeated")
    arguments = parsed(parser, words)
    if arguments is None:
        return 0
    stored = load_session(arguments.session)
    session = stored.session
    known = [course.id for course in session.courses]
    if not known:
        raise SessionError("has no course; add a [[course]] table to rank on", path=stored.path)
    for wanted in arguments.course or ():
        if wanted not in known:
            raise SessionError(
                f"there is no course {wanted!r}; there are: {', '.join(known)}", path=stored.path
            )
    estimate = solve_session(stored) if can_solve(session) else None
    from ridercda.report.ranking_json import ranking_json
    from ridercda.trade.rank import rank_session

    with progress_bar(Console(stderr=True), "Racing") as watch:
        rankings = rank_session(session, stored.folder, estimate, tuple(arguments.course or known), watch)
    if arguments.json:
        warnings = estimate.warnings if estimate else ()
        write_json(ranking_json(rankings, session.name, warnings), arguments.json)
    if arguments.json != "-":
        from ridercda.cli.rank_view import render

        Console(highlight=False).print(render(rankings, session))
    return 0 if any(ranking.setups for ranking in rankings) else 3
