"""Runs placed on their venue by the best evidence there is."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from ridercda.runs.closure_placement import place_by_closure
from ridercda.runs.gps_placement import place_loop_by_fixes, place_road_by_fixes
from ridercda.runs.placement import Placement
from ridercda.runs.traced import RideTrace, TracedRun
from ridercda.session.document import Venue, VenueKind
from ridercda.watch import NO_WATCH, Watch

TYPICAL_RIDER = 75.0  # [kg] where no mass is given: only the shape of the ground's signals is used
TYPICAL_BIKE = 9.0  # [kg]


def _with_fixes(spans: Sequence[RideTrace]) -> list[RideTrace]:
    return [span for span in spans if np.isfinite(span.east).mean() > 1 / 3]


def place_runs(
    venue: Venue, runs: Sequence[TracedRun], spans: Sequence[RideTrace], mass: float, watch: Watch = NO_WATCH
) -> Placement:
    """Return where runs lie on their venue, by their fixes where they have any, else by what closes a lap.

    Parameters
    ----------
    venue : Venue
    runs : sequence of TracedRun
    spans : sequence of RideTrace
        Each ride from the start of its first run to the end of its last.
    mass : float
        Rider and bike, roughly; it only scales the signals of the ground. [kg]
    watch : Watch

    Returns
    -------
    Placement
        Runs that could not be placed are missing, with a note.
    """
    fixed = [run for run in runs if run.fixed]
    placement = None
    notes: tuple[str, ...] = ()
    if fixed and venue.kind in (VenueKind.LOOP, VenueKind.TRACK):
        placement = place_loop_by_fixes(fixed, spans, venue.lap_length, watch)
        if placement is None and venue.kind is VenueKind.LOOP:
            notes = ("The recorded positions do not close a loop.",)
    elif fixed:
        out_and_back = venue.kind is VenueKind.OUT_AND_BACK
        given = venue.lap_length if out_and_back else None
        guides: Sequence[TracedRun | RideTrace] = fixed if out_and_back else _with_fixes(spans)
        placement = place_road_by_fixes(fixed, guides, given, watch)
    at_hand = placement.runs if placement is not None else {}
    rest = [run for run in runs if run.run.id not in at_hand and (placement is None or not run.fixed)]
    if not rest and placement is not None:
        return placement
    located = [run for run in runs if run.run.id in at_hand]
    closed = place_by_closure(venue, rest, placement, located, mass)
    return Placement(
        line=closed.line,
        length=closed.length,
        length_error=closed.length_error,
        runs=closed.runs,
        scales=closed.scales,
        notes=(*notes, *closed.notes),
    )
