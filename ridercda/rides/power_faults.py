"""Power that cannot be true: spikes, dropouts and values held after the pedals stopped."""

from __future__ import annotations

import numpy as np

from ridercda.rides import thresholds as limit
from ridercda.rides.channel_faults import frozen_spans
from ridercda.rides.ride import Fault, FaultKind, FloatArray, Ride
from ridercda.rides.spans import median_about, true_spans

BLANK, ZERO, INTERPOLATE, LEAVE = "blank", "zero", "interpolate", "leave"


def find_power_spikes(ride: Ride) -> list[Fault]:
    """Return surges that no rider makes, or that left no trace in speed."""
    power = ride.channels["power"]
    around = median_about(power, 61)
    high = (power > limit.POWER_LIMIT) | (power > around + limit.POWER_EXCESS)
    faults = []
    for first, last in true_spans(high):
        top = float(power[first : last + 1].max())
        cause = f"Power leaps to {top:.0f} W from about {float(around[first]):.0f} W"
        if top > limit.POWER_LIMIT:
            cause += f", more than the {limit.POWER_LIMIT:.0f} W that is believed"
        elif ride.time[last] - ride.time[first] > limit.SPIKE_LONGEST:
            continue
        else:
            share = _work_seen(ride, power - around, first, last)
            if share is None and last - first <= 1 and top > 4.0 * float(around[first]) + limit.POWER_EXCESS:
                cause += " for a moment, with no speed to show whether it was real"
            elif share is None or share >= limit.SPIKE_ENERGY:
                continue
            else:
                cause += "; speed does not rise with it"
        faults.append(
            _power_fault(ride, FaultKind.POWER_SPIKE, first, last, cause, (BLANK, INTERPOLATE, LEAVE))
        )
    return faults


def find_held_power(ride: Ride) -> list[Fault]:
    """Return where power repeats its last value after pedalling stopped, told by cadence or by the drop to zero."""
    power = ride.channels["power"]
    faults = []
    seen = np.zeros(power.size, bool)
    if ride.has("cadence"):
        repeated = np.concatenate(([False], power[1:] == power[:-1])) & (power > 0)
        for first, last in true_spans(repeated & (ride.channels["cadence"] == 0)):
            seen[first : last + 1] = True
            span = float(ride.time[last] - ride.time[first - 1])
            cause = f"Power stays at {power[first]:.0f} W for {span:.0f} s after the cranks stopped"
            faults.append(_power_fault(ride, FaultKind.POWER_HELD, first, last, cause, (ZERO, BLANK, LEAVE)))
    for first, last in frozen_spans(power, shortest=4):
        if last + 1 >= power.size or power[last + 1] != 0 or seen[first : last + 1].any():
            continue
        span = float(ride.time[last] - ride.time[first])
        cause = f"Power stays at {power[first]:.0f} W for {span:.0f} s and drops to zero, as when pedalling has stopped"
        # The first of the run may be a true reading.
        faults.append(_power_fault(ride, FaultKind.POWER_HELD, first + 1, last, cause, (BLANK, ZERO, LEAVE)))
    return faults


def find_absent_power(ride: Ride) -> list[Fault]:
    """Return short holes in power amid steady power; there is nothing to blank, a line may be drawn across."""
    power = ride.channels["power"]
    faults = []
    for first, last in true_spans(~np.isfinite(power)):
        span = float(ride.time[last] - ride.time[first])
        if first == 0 or last == power.size - 1 or span >= limit.DROPOUT_LONGEST:
            continue
        before, after = _power_beside(ride.time, power, first, last)
        if min(before, after) > limit.DROPOUT_POWER:
            records = f"{last - first + 1} records" if last > first else "1 record"
            cause = f"No power for {records} amid steady {0.5 * (before + after):.0f} W"
            dropout = FaultKind.POWER_DROPOUT
            faults.append(_power_fault(ride, dropout, first, last, cause, (LEAVE, INTERPOLATE)))
    return faults


def find_power_dropouts(ride: Ride) -> list[Fault]:
    """Return where steady power reads zero though the rider pedalled on."""
    power = ride.channels["power"]
    faults = []
    for first, last in true_spans(power == 0):
        if first == 0 or last == power.size - 1:
            continue
        span = float(ride.time[last + 1] - ride.time[first - 1])
        if span > limit.DROPOUT_LONGEST:
            continue
        before, after = _power_beside(ride.time, power, first, last)
        abrupt = power[first - 1] > 0.5 * before and power[last + 1] > 0.5 * after
        if min(before, after) > limit.DROPOUT_POWER and abrupt and _pedals_on(ride, first, last, before):
            cause = f"Power reads zero for {span:.0f} s amid steady {0.5 * (before + after):.0f} W while pedalling goes on"
            choices = (BLANK, INTERPOLATE, LEAVE)
            faults.append(_power_fault(ride, FaultKind.POWER_DROPOUT, first, last, cause, choices))
    return faults


def _power_fault(
    ride: Ride, kind: FaultKind, first: int, last: int, cause: str, choices: tuple[str, ...]
) -> Fault:
    return Fault(kind, float(ride.time[first]), float(ride.time[last]), "power", cause, choices=choices)


def _work_seen(ride: Ride, excess: FloatArray, first: int, last: int) -> float | None:
    """Return which share of a surge's work above the usual shows as kinetic energy; None without speed."""
    speed = ride.channels.get("speed")
    if speed is None or first < 2:
        return None
    steps = np.diff(ride.time[first - 1 : last + 1])
    work = float((np.nan_to_num(excess[first : last + 1]) * np.minimum(steps, 2.0)).sum())
    before = speed[max(0, first - 3) : first]
    after = speed[last : last + 4]
    if not (np.isfinite(before).any() and np.isfinite(after).any()) or work <= 0:
        return None
    gain = 0.5 * limit.NOMINAL_MASS * float(np.nanmax(after) ** 2 - np.nanmin(before) ** 2)
    return gain / work


def _power_beside(time: FloatArray, power: FloatArray, first: int, last: int) -> tuple[float, float]:
    """Return the mean power of the five records on either side; 0 where they are not pedalled or not adjacent."""
    sides = []
    for side in (slice(max(0, first - 5), first), slice(last + 1, last + 6)):
        values = power[side]
        together = values.size >= 3 and time[side][-1] - time[side][0] <= 12.0
        steady = together and bool(np.isfinite(values).all()) and float(values.min()) > 0
        sides.append(float(values.mean()) if steady else 0.0)
    return sides[0], sides[1]


def _pedals_on(ride: Ride, first: int, last: int, before: float) -> bool:
    """Whether the rider pedalled through a stretch of zero power, by cadence and by how little speed fell."""
    slowing = _slowing_share(ride, first, last, before)
    if ride.has("cadence"):
        cadence = ride.channels["cadence"][first : last + 1]
        about = np.concatenate(
            (
                ride.channels["cadence"][max(0, first - 5) : first],
                ride.channels["cadence"][last + 1 : last + 6],
            )
        )
        known = cadence[np.isfinite(cadence)]
        usual = float(np.nanmedian(about)) if np.isfinite(about).any() else 0.0
        turning = known.size > 0 and bool((known > max(limit.PEDALLING, 0.8 * usual)).all())
        if not turning:
            return False
        if ride.time[last] - ride.time[first] <= limit.DROPOUT_SHORT:
            return slowing is None or slowing < 1.0
    return slowing is not None and slowing < limit.DROPOUT_SLOWING


def _slowing_share(ride: Ride, first: int, last: int, before: float) -> float | None:
    """Return how much the bike slowed as a share of what losing the power would cause; None without speed."""
    speed = ride.channels.get("speed")
    if speed is None or not np.isfinite(speed[[first - 1, last]]).all() or speed[first - 1] < limit.MOVING:
        return None
    span = float(ride.time[last] - ride.time[first - 1])
    expected = before * span / (limit.NOMINAL_MASS * float(speed[first - 1]))
    return float(speed[first - 1] - speed[last]) / expected
