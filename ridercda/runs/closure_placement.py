"""Runs placed without fixes."""

from __future__ import annotations

from collections.abc import Sequence
from types import MappingProxyType

import numpy as np

from ridercda.runs.placement import Placed, Placement, Scale
from ridercda.runs.traced import TracedRun
from ridercda.session.document import Venue


def place_by_closure(
    venue: Venue, runs: Sequence[TracedRun], rest: Sequence[TracedRun], known: Placement | None, mass: float
) -> Placement:
    """Temporary."""
    length = known.length if known else venue.lap_length or 1000.0
    placed = dict(known.runs) if known else {}
    for run in rest:
        placed[run.run.id] = Placed(
            run.travelled - run.travelled[0],
            np.ones(run.time.size),
            np.ones(run.time.size),
            np.zeros(run.time.size, bool),
        )
    return Placement(
        known.line if known else None,
        length,
        0.01 * length,
        MappingProxyType(placed),
        known.scales if known else {(r.group): Scale(1.0, 0.01, "") for r in rest},
    )
