"""What the day strip shows, gathered from session, rides and estimate: plain data (no Qt)."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

import numpy as np
import numpy.typing as npt

from ridercda.app.letters import Badge, badges
from ridercda.app.strip.day_axis import DayAxis, RideSpan, day_axis
from ridercda.drag.estimate import Estimate
from ridercda.rides.ride import FaultKind, Ride
from ridercda.session.document import Run, Session

FloatArray = npt.NDArray[np.float64]

# One shape per family of faults, so that a tick says what it is without colour.
FAULT_SHAPES: Mapping[FaultKind, str] = {
    FaultKind.GAP: "square",
    FaultKind.SMART_RECORDING: "square",
    FaultKind.AUTO_PAUSE: "square",
    FaultKind.CLOCK_DUPLICATE: "diamond",
    FaultKind.CLOCK_BACKWARD: "diamond",
    FaultKind.MIXED_SAMPLING: "diamond",
    FaultKind.POWER_DROPOUT: "triangle",
    FaultKind.POWER_SPIKE: "triangle",
    FaultKind.POWER_HELD: "triangle",
    FaultKind.POWER_LAG: "triangle",
    FaultKind.ONE_SIDED_POWER: "triangle",
}
OTHER_FAULT = "disc"
WHOLE_RIDE = 0.9  # a fault over more than this share of its ride is told once, at the ride's start


@dataclass(frozen=True, slots=True)
class StripRun:
    """A run as a block on the axis."""

    id: str
    ride: str
    setup: str
    start: float  # on the ride's clock [s]
    end: float  # [s]
    left: float  # along the axis [s]
    right: float  # [s]
    badge: Badge
    excluded: str
    wind_speed: float | None = None  # [m/s]
    wind_from: float | None = None  # [rad]
    spans_out: tuple[tuple[float, float], ...] = ()  # left out within the run, along the axis [s]


@dataclass(frozen=True, slots=True)
class StripProposal:
    """A run that is only proposed."""

    left: float  # along the axis [s]
    right: float  # [s]


@dataclass(frozen=True, slots=True)
class StripFault:
    """A fault as a tick."""

    ride: str
    kind: FaultKind
    along: float
    message: str

    @property
    def shape(self) -> str:
        """The shape of its tick."""
        return FAULT_SHAPES.get(self.kind, OTHER_FAULT)


@dataclass(frozen=True, slots=True, eq=False)
class StripTrace:
    """A ride's power and speed along the axis."""

    ride: str
    along: FloatArray
    power: FloatArray | None
    speed: FloatArray | None


@dataclass(frozen=True, slots=True, eq=False)
class StripPicture:
    """Everything the strip shows."""

    axis: DayAxis
    runs: tuple[StripRun, ...] = ()
    faults: tuple[StripFault, ...] = ()
    traces: tuple[StripTrace, ...] = ()
    rides: Mapping[str, Ride] = field(default_factory=dict)
    proposals: tuple[StripProposal, ...] = ()

    def run(self, run_id: str) -> StripRun | None:
        """Return a run's block."""
        return next((run for run in self.runs if run.id == run_id), None)

    @property
    def has_wind(self) -> bool:
        """Whether any run's wind is known."""
        return any(run.wind_speed is not None for run in self.runs)


def axis_of(session: Session, rides: Mapping[str, Ride]) -> DayAxis:
    """Return the day's axis for the rides that are here."""
    spans = []
    for entry in session.rides:
        ride = rides.get(entry.id)
        if ride is None or not ride.time.size:
            continue
        start = entry.start or ride.start
        spans.append(RideSpan(entry.id, start, ride.duration, _busy(ride)))
    return day_axis(spans)


def traces_of(axis: DayAxis, rides: Mapping[str, Ride]) -> tuple[StripTrace, ...]:
    """Return the traces of the rides that are here."""
    return tuple(
        StripTrace(key, axis.places(key, ride.time), ride.channels.get("power"), ride.channels.get("speed"))
        for key, ride in rides.items()
    )


def faults_of(axis: DayAxis, rides: Mapping[str, Ride]) -> tuple[StripFault, ...]:
    """Return a tick per fault that has a place; one that holds for a whole ride is the Rides page's to tell."""
    ticks = []
    for key, ride in rides.items():
        for fault in ride.faults:
            if fault.end - fault.start < WHOLE_RIDE * ride.duration:
                ticks.append(
                    StripFault(key, fault.kind, axis.place(key, 0.5 * (fault.start + fault.end)), fault.cause)
                )
    return tuple(ticks)


def runs_of(
    session: Session, axis: DayAxis, rides: Mapping[str, Ride], estimate: Estimate | None
) -> tuple[StripRun, ...]:
    """Return a block per run whose ride is here."""
    known = badges(session)
    figures = {run.id: run for run in estimate.runs} if estimate else {}
    blocks = []
    for run in session.runs:
        ride = rides.get(run.ride)
        if ride is None or not ride.time.size:
            continue
        end = run.end if run.end is not None else float(ride.time[-1])
        figure = figures.get(run.id)
        spans = tuple((axis.place(run.ride, x.start), axis.place(run.ride, x.end)) for x in run.exclusions)
        blocks.append(
            StripRun(
                run.id,
                run.ride,
                run.setup,
                run.start,
                end,
                axis.place(run.ride, run.start),
                axis.place(run.ride, end),
                known[run.setup],
                run.excluded,
                figure.wind_speed if figure else None,
                figure.wind_from if figure else None,
                spans,
            )
        )
    return tuple(sorted(blocks, key=lambda block: block.left))


def proposals_of(runs: Iterable[Run], axis: DayAxis, rides: Mapping[str, Ride]) -> tuple[StripProposal, ...]:
    """Return an outline per proposed run whose ride is here."""
    outlines = []
    for run in runs:
        ride = rides.get(run.ride)
        if ride is not None and ride.time.size:
            end = run.end if run.end is not None else float(ride.time[-1])
            outlines.append(StripProposal(axis.place(run.ride, run.start), axis.place(run.ride, end)))
    return tuple(outlines)


def _busy(ride: Ride) -> tuple[tuple[float, float], ...]:
    """Return the spans in which the bike moves or is pedalled, as well as can be told. [s]"""
    moving = np.zeros(ride.time.shape, dtype=bool)
    if (speed := ride.channels.get("speed")) is not None:
        moving |= speed > 1.0
    if (power := ride.channels.get("power")) is not None:
        moving |= power > 20.0
    if not moving.any():
        return ((float(ride.time[0]), float(ride.time[-1])),)
    edges = np.flatnonzero(np.diff(np.concatenate([[0], moving.astype(np.int8), [0]])))
    starts, ends = ride.time[edges[::2]], ride.time[edges[1::2] - 1]
    # Short stops never fold, so neighbouring spans are joined to keep their number small.
    breaks = np.flatnonzero(starts[1:] - ends[:-1] > 60.0)
    firsts = starts[np.concatenate([[0], breaks + 1])]
    lasts = ends[np.concatenate([breaks, [ends.size - 1]])]
    return tuple((float(a), float(b)) for a, b in zip(firsts, lasts, strict=True))
