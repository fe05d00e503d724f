"""From a raw ride to one that can be worked with: faults found, repairs taken or refused, nothing resampled."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from types import MappingProxyType

import numpy as np

from ridercda.errors import InputError
from ridercda.rides.channel_faults import (
    find_frozen_channels,
    find_missing_channels,
    find_silent_speed,
    find_smoothed_channels,
)
from ridercda.rides.clock import mend_clock
from ridercda.rides.lag import find_power_lag
from ridercda.rides.position_faults import find_altitude_faults, find_position_faults
from ridercda.rides.power_faults import (
    find_absent_power,
    find_held_power,
    find_power_dropouts,
    find_power_spikes,
)
from ridercda.rides.repairs import LEAVE, REPAIRS
from ridercda.rides.ride import Fault, FaultKind, Ride
from ridercda.rides.sampling_faults import find_sampling_faults
from ridercda.rides.wheel_faults import find_circumference_faults, find_speed_from_position


@dataclass(frozen=True, slots=True)
class Choice:
    """Which repair to take for a kind of fault, on the whole ride or a span.

    Parameters
    ----------
    kind : str
        A `FaultKind` value.
    choice : str
        One of the fault's choices.
    start, end : float, optional
        Only faults that touch this span; None reaches to the ride's end. [s]
    value : float, optional
        Where the repair takes one, instead of the figure found. SI.
    """

    kind: str
    choice: str
    start: float | None = None
    end: float | None = None
    value: float | None = None

    def concerns(self, fault: Fault) -> bool:
        """Whether this choice is about a fault."""
        after = self.start is None or fault.end >= self.start
        before = self.end is None or fault.start <= self.end
        return fault.kind.value == self.kind and after and before


Search = Callable[[Ride], list[Fault]]


def repair(raw: Ride, choices: Sequence[Choice] = ()) -> Ride:
    """Return the ride with its faults found and repaired as chosen.

    Parameters
    ----------
    raw : Ride
        As read.
    choices : sequence of Choice
        Where the default repair is not wanted. One with a span goes before one for the whole ride, a later one
        before an earlier one.

    Returns
    -------
    Ride
        Time strictly increases; values that are not to be trusted are NaN; every fault is listed with the repair
        taken, None where it was left or there is none. Records are never added; they are only left out where the
        clock cannot be put right otherwise.

    Raises
    ------
    InputError
        If a choice names a repair that its kind of fault does not have.
    """
    decide = _Decision(choices)
    ride, clock_faults = mend_clock(raw, decide)
    found = [*clock_faults, *raw.faults]
    with np.errstate(invalid="ignore"):
        for search in _SEARCHES:
            if ride.time.size < 2:
                break
            ride = _searched(ride, search, decide, found)
    ride = _as_told(ride, decide, found)
    found.sort(key=lambda fault: (fault.start, fault.end, fault.kind))
    return replace(ride, faults=tuple(found))


def _with_power(search: Search) -> Search:
    return lambda ride: search(ride) if ride.has("power") else []


def _wheel_circumference(ride: Ride) -> list[Fault]:
    from_position = any(fault.kind is FaultKind.SPEED_FROM_GPS for fault in ride.faults)
    return [] if from_position else find_circumference_faults(ride)


# In the order in which one spoils the next: a wild fix would make the wheel look wrong.
_SEARCHES: tuple[Search, ...] = (
    find_sampling_faults,
    find_position_faults,
    find_missing_channels,
    _with_power(find_absent_power),
    find_silent_speed,
    find_frozen_channels,
    find_smoothed_channels,
    find_altitude_faults,
    _with_power(find_held_power),
    _with_power(find_power_spikes),
    _with_power(find_power_dropouts),
    find_speed_from_position,
    _wheel_circumference,
    find_power_lag,
)


class _Decision:
    """Takes the default or the chosen repair for each fault."""

    def __init__(self, choices: Sequence[Choice]) -> None:
        self._choices = tuple(choices)
        kinds = {kind.value for kind in FaultKind}
        for choice in choices:
            if choice.kind not in kinds:
                raise InputError(
                    f"there is no fault {choice.kind!r}; the kinds are {', '.join(sorted(kinds))}"
                )

    def __call__(self, fault: Fault) -> Fault:
        """Return the fault with the repair taken."""
        choice = self.about(fault)
        if choice is None:
            taken = fault.choices[0] if fault.choices else LEAVE
            return replace(fault, repair=None if taken == LEAVE else taken)
        if choice.choice not in (*fault.choices, LEAVE) or (choice.choice == LEAVE and not _may_leave(fault)):
            offered = ", ".join(fault.choices) or "none"
            raise InputError(
                f"{choice.choice!r} is no repair for {fault.kind.value}; those on offer are {offered}"
            )
        value = fault.value if choice.value is None else choice.value
        return replace(fault, repair=None if choice.choice == LEAVE else choice.choice, value=value)

    def about(self, fault: Fault) -> Choice | None:
        """Return the choice that concerns a fault: one with a span first, then the latest."""
        concerned = [choice for choice in self._choices if choice.concerns(fault)]
        with_span = [choice for choice in concerned if choice.start is not None or choice.end is not None]
        return next(reversed(with_span or concerned), None)

    def told(self, kind: FaultKind) -> Choice | None:
        """Return the choice for a kind that brings its own figure, whether or not the fault was found."""
        return next(
            (c for c in reversed(self._choices) if c.kind == kind.value and c.value is not None), None
        )


def _may_leave(fault: Fault) -> bool:
    return not fault.choices or LEAVE in fault.choices


def _searched(ride: Ride, search: Search, decide: _Decision, found: list[Fault]) -> Ride:
    for fault in search(ride):
        decided = decide(fault)
        found.append(decided)
        if decided.repair is not None:
            ride = _applied(ride, decided)
    return replace(ride, faults=tuple(found))


def _applied(ride: Ride, fault: Fault) -> Ride:
    changed = REPAIRS[fault.kind, str(fault.repair)](ride, fault)
    channels = {**ride.channels, **changed}
    return replace(ride, channels=MappingProxyType(channels))


def _as_told(ride: Ride, decide: _Decision, found: list[Fault]) -> Ride:
    """Apply a lag or a circumference that the user gives although none was found."""
    for kind, channel in ((FaultKind.POWER_LAG, "power"), (FaultKind.CIRCUMFERENCE, "distance")):
        choice = decide.told(kind)
        if choice is None or choice.choice == LEAVE or any(fault.kind is kind for fault in found):
            continue
        if (kind, choice.choice) not in REPAIRS:
            offered = ", ".join(name for each, name in REPAIRS if each is kind)
            raise InputError(f"{choice.choice!r} is no repair for {kind.value}; those on offer are {offered}")
        start = float(ride.time[0]) if choice.start is None else choice.start
        end = float(ride.time[-1]) if choice.end is None else choice.end
        cause = "Given by hand"
        fault = Fault(kind, start, end, channel, cause, choice.choice, (LEAVE, choice.choice), choice.value)
        found.append(fault)
        ride = _applied(ride, fault)
    return ride
