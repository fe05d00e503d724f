"""What a fitter should know before trusting an estimate: checks on the day's design and on the result."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from ridercda.drag import innovations as at
from ridercda.drag import priors
from ridercda.drag.estimate import Difference, Figure, SetupEstimate, SolveWarning
from ridercda.drag.likelihood import Fit
from ridercda.drag.repeats import Pooled, residuals
from ridercda.session.document import VenueKind

ODD_RUN = 2.8  # standard errors from its repeats: one run in two hundred
DRIFT_MATTERS = 0.15  # of a difference's standard error
WARMER = 2.0  # [K] between the means of two setups
CDA_BAND = (0.15, 0.70)  # [m^2] track specialist to upright (from memory)
CRR_BAND = (0.0010, 0.0120)  # smooth track to rough road (from memory)
GUST_DOUBT = 0.25  # of the gust strength
STRONG_GUST = 0.8  # [m/s]


def remarks(
    fit: Fit,
    pooled: Pooled,
    differences: Sequence[Difference],
    setups: Sequence[SetupEstimate],
    crr: Sequence[Figure],
) -> list[SolveWarning]:
    """Return the warnings that the day's design and its result call for."""
    day = fit.model.day
    found: list[SolveWarning] = []
    once = [s.id for s in setups if s.runs == 1]
    if once:
        found.append(
            SolveWarning(
                "single-run-setup",
                f"Ridden only once: {', '.join(once)}. How well it repeats is taken from the other setups and from "
                "experience, not measured.",
            )
        )
    for difference in differences:
        gap = _hours_apart(fit, difference)
        moved = abs(gap) * priors.CDA_DRIFT_SD * abs(pooled.mixed.coefficients[0])
        if difference.cda is not None and moved > DRIFT_MATTERS * difference.cda.standard_error:
            found.append(
                SolveWarning(
                    "order-confounded",
                    f"{difference.setup} and {difference.against} were ridden {abs(gap) * 60:.0f} min apart on "
                    f"average, so a drift through the day looks like a difference: an ordinary one of "
                    f"{100 * priors.CDA_DRIFT_SD:.1f} % an hour makes {moved:.4f} m². It is in the interval; "
                    "alternating the setups removes it.",
                )
            )
            break
    for r, value in enumerate(residuals(pooled)):
        if value is not None and abs(value) > ODD_RUN:
            found.append(
                SolveWarning(
                    "run-disagrees",
                    f"Run {day.runs[r].id} lies {abs(value):.1f} standard errors {'above' if value > 0 else 'below'} "
                    "its repeats. Look at it: position, traffic, a sensor.",
                )
            )
    found += _temperature(fit, pooled)
    found += _plausible(setups, crr)
    doubt = float(np.sqrt(fit.log_noise_covariance[at.GUST_SD, at.GUST_SD]))
    gust = float(fit.noise[at.GUST_SD])
    if not day.flat and (gust > STRONG_GUST or (doubt > GUST_DOUBT and gust > 0.5 * STRONG_GUST)):
        found.append(
            SolveWarning(
                "gusts-uncertain",
                f"Gusts of {gust:.1f} m/s: absolute CdA tends to come out low and Crr high on such a day, because both "
                "lean on how strong the gusts were; their intervals are wide for that. Differences hardly lean on it.",
            )
        )
    if day.venue is VenueKind.OUT_AND_BACK and _one_speed(fit):
        found.append(
            SolveWarning(
                "slope-wind-confounded",
                "Out and back at one speed, a slope and a steady wind along the road look alike; a wind report or a "
                "second speed tells them apart.",
            )
        )
    return found


def _hours_apart(fit: Fit, difference: Difference) -> float:
    day = fit.model.day
    hours = {
        name: np.mean([run.hour for run in day.runs if day.setups[run.setup] == name])
        for name in (difference.setup, difference.against)
    }
    return float(hours[difference.setup] - hours[difference.against])


def _temperature(fit: Fit, pooled: Pooled) -> list[SolveWarning]:
    day = fit.model.day
    means = {
        s: float(np.mean([run.records.tyre_temperature.mean() for run in day.runs if run.setup == s]))
        for s in pooled.setups
    }
    if len(means) < 2 or max(means.values()) - min(means.values()) < WARMER:
        return []
    warm, cold = max(means, key=lambda s: means[s]), min(means, key=lambda s: means[s])
    return [
        SolveWarning(
            "temperature-confounded",
            f"{day.setups[warm]} was ridden {means[warm] - means[cold]:.1f} K warmer than {day.setups[cold]}; the "
            "tyres' answer to that is assumed within its uncertainty, not measured.",
        )
    ]


def _plausible(setups: Sequence[SetupEstimate], crr: Sequence[Figure]) -> list[SolveWarning]:
    found = []
    for setup in setups:
        if setup.cda and not CDA_BAND[0] <= setup.cda.value <= CDA_BAND[1]:
            found.append(
                SolveWarning(
                    "implausible",
                    f"CdA of {setup.id} is {setup.cda.value:.3f} m²; riders show {CDA_BAND[0]} to {CDA_BAND[1]}. "
                    "Check mass, power meter zero, wheel circumference and air.",
                )
            )
    for figure in crr:
        if not CRR_BAND[0] <= figure.value <= CRR_BAND[1]:
            found.append(
                SolveWarning(
                    "implausible",
                    f"Crr is {figure.value:.4f}; tyres on roads and tracks show {CRR_BAND[0]} to {CRR_BAND[1]}. "
                    "Check mass, power meter zero and wheel circumference.",
                )
            )
    return found


def _one_speed(fit: Fit) -> bool:
    speeds = [float(run.records.speed[run.records.usable].mean()) for run in fit.model.day.runs]
    return max(speeds) < 1.1 * min(speeds)
