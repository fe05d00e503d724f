"""Runs cut at gates, and proposals kept clear of runs that stand."""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import replace

from ridercda.errors import SessionError
from ridercda.runs.proposal import ProposedRun
from ridercda.session import edits
from ridercda.session.document import Run, Session

EDGE = 1e-6  # [s] neighbours share an edge; rounding is no overlap


def clear_of(
    proposed: Sequence[ProposedRun], taken: Sequence[Run], ride_end: float, least: float
) -> tuple[ProposedRun, ...]:
    """Return proposals with what standing runs cover taken out of them; runs that stand always win.

    Parameters
    ----------
    proposed : sequence of ProposedRun
    taken : sequence of Run
        Of the same ride.
    ride_end : float
        Moment of the ride's last record: the end of a run that has none. [s]
    least : float
        A rest shorter than this is dropped. [s]

    Returns
    -------
    tuple of ProposedRun
        In order; none overlaps another or a standing run.
    """
    spans = sorted((run.start, ride_end if run.end is None else run.end) for run in taken)
    clear: list[ProposedRun] = []
    reached = float("-inf")
    for run in sorted(proposed, key=lambda run: (run.start, run.end)):
        pieces = [(max(run.start, reached), min(run.end, ride_end))]
        for low, high in spans:
            pieces = [
                piece
                for start, end in pieces
                for piece in ((start, min(end, low)), (max(start, high), end))
                if piece[1] > piece[0]
            ]
        for start, end in pieces:
            whole = start <= run.start + EDGE and end >= run.end - EDGE
            if end - start >= least or (whole and end > start):
                laps = tuple(t for t in run.laps if start - EDGE <= t <= end + EDGE)
                clear.append(replace(run, start=start, end=end, laps=laps if len(laps) > 1 else ()))
                reached = end
    return tuple(clear)


def split_at(session: Session, run_id: str, times: Sequence[float]) -> Session:
    """Return the session with a run split at some moments, its laps and exclusions shared out.

    Parameters
    ----------
    session : Session
    run_id : str
    times : sequence of float
        Each inside the run, on the ride's clock. [s]

    Raises
    ------
    SessionError
        If a moment lies outside the run.
    """
    for time in sorted(times, reverse=True):  # from the back, so that the first part keeps the id
        session = edits.split_run(session, run_id, time)
    return session


def trimmed_to_laps(run: Run, gates: Sequence[float]) -> Run:
    """Return a run cut down to its whole laps.

    Parameters
    ----------
    run : Run
    gates : sequence of float
        When it passed its gate. [s]

    Raises
    ------
    SessionError
        If fewer than two passes lie inside the run.
    """
    end = float("inf") if run.end is None else run.end
    inside = [t for t in sorted(gates) if run.start - EDGE <= t <= end + EDGE]
    if len(inside) < 2:
        raise SessionError(
            f"run {run.id} holds no whole lap: {len(inside)} passes of the gate lie inside it",
            key=f"run[{run.id}]",
        )
    return replace(run, start=inside[0], end=inside[-1], laps=tuple(inside))


def fresh_ids(taken: Collection[str], count: int) -> tuple[str, ...]:
    """Return run ids "1", "2", ... that are not taken yet."""
    used = set(taken)
    ids: list[str] = []
    number = 1
    while len(ids) < count:
        if str(number) not in used:
            ids.append(str(number))
        number += 1
    return tuple(ids)
