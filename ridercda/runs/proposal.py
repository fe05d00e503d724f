"""Runs as proposed, before they are assigned to setups."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class ProposedRun:
    """A span that looks like a run.

    Parameters
    ----------
    start, end : float
        On the ride's clock. [s]
    laps : tuple of float
        When whole laps begin and end within it, interpolated between records; empty where none is known. [s]
    reason : str
        Why it is proposed, for the rider.
    confidence : float
        0 to 1, roughly; orders proposals, no more.
    """

    start: float
    end: float
    laps: tuple[float, ...]
    reason: str
    confidence: float

    @property
    def lap_count(self) -> int:
        """Whole laps within it."""
        return max(len(self.laps) - 1, 0)


@dataclass(frozen=True, slots=True)
class Proposal:
    """All runs proposed for a ride, in order, and what the rider should know."""

    runs: tuple[ProposedRun, ...]
    notes: tuple[str, ...] = ()
