"""From a prepared day to an estimate: fit, pool, compare, and say what the day cannot."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt

from ridercda.drag import innovations as at
from ridercda.drag import priors
from ridercda.drag.contrasts import all_differences, next_steps, student_figure
from ridercda.drag.day import Day, DayRun
from ridercda.drag.estimate import (
    Estimate,
    Figure,
    Gust,
    RunEstimate,
    SetupEstimate,
    SolveWarning,
    TyreEstimate,
    VenueProfile,
)
from ridercda.drag.lag import shift_power
from ridercda.drag.layout import rolling_guess
from ridercda.drag.likelihood import Fit, fit, model_of
from ridercda.drag.oddities import leave_out_oddities
from ridercda.drag.regression import disagreement, regress
from ridercda.drag.remarks import remarks
from ridercda.drag.repeats import Pooled, pool, residuals, run_alone, run_figures, without_run
from ridercda.session.document import VenueKind
from ridercda.watch import NO_WATCH, Watch

FloatArray = npt.NDArray[np.float64]

METHOD = (
    "Innovations likelihood with the gust as a latent process; noise by restricted likelihood; repeats by a mixed "
    "model with Satterthwaite degrees of freedom."
)
LAG_WORTH_A_SHIFT = 0.5  # [s]
MOST_SHIFTS = 2


def solve(day: Day, watch: Watch = NO_WATCH) -> Estimate:
    """Estimate CdA per setup and Crr per tyre set of a prepared day.

    What the day cannot answer is None with a reason, and a warning says why; nothing is invented.

    Raises
    ------
    NotConverged
        If the likelihood does not settle.
    Cancelled
        If `watch` says so.
    """
    warnings = [SolveWarning(code, message) for code, message in day.notes]
    warnings += [
        SolveWarning("run-left-out", f"Run {run.id} is not counted: {run.reason}.") for run in day.left_out
    ]
    if not day.runs:
        return _nothing(day, warnings, "no run could be used")
    if day.venue is VenueKind.ROAD and day.altitude_sd is None:
        message = (
            "Nothing repeats on this road and a head unit's altitude is not good enough: 0.05 % of slope is 10 % "
            "of CdA at 5 m/s. Ride a loop, or the road out and back."
        )
        return _nothing(day, [*warnings, SolveWarning("no-profile", message)], "nothing repeats on this road")
    fitted, shifted = _fit_with_lag(day, watch)
    kept, spans = leave_out_oddities(fitted)
    if spans:
        warnings.append(SolveWarning("spans-left-out", spans))
        fitted = fit(model_of(kept), watch)
    if shifted:
        warnings.append(
            SolveWarning(
                "power-lag",
                f"Power lay {abs(shifted):g} record(s) {'behind' if shifted > 0 else 'ahead of'} speed and was shifted.",
            )
        )
    return _estimate(fitted, warnings)


def _fit_with_lag(day: Day, watch: Watch) -> tuple[Fit, int]:
    """Return the fit, power shifted by whole records until less than half a record of lag is left."""
    fitted = fit(model_of(day), watch)
    shifted = 0
    for _ in range(MOST_SHIFTS):
        if day.flat:
            break
        lag = float(fitted.parameters[fitted.model.layout.power_lag])
        interval = float(np.median(day.runs[0].records.interval))
        records = round(lag / interval)
        if abs(lag) < LAG_WORTH_A_SHIFT * max(interval, 1.0) or records == 0:
            break
        day = shift_power(day, records)
        shifted += records
        fitted = fit(model_of(day), watch)
    return fitted, shifted


def _estimate(fitted: Fit, warnings: list[SolveWarning]) -> Estimate:
    day = fitted.model.day
    pooled = pool(fitted, run_figures(fitted, fitted.covariance_given_noise))
    crr = [_tyre(pooled, day, t) for t in range(len(day.tyres))]
    apart = _told_apart(pooled, day)
    if not apart:
        warnings.append(
            SolveWarning(
                "rolling-not-separated",
                "The speeds ridden do not tell drag area and rolling resistance apart: neither is given. Differences "
                "between setups on the same tyres still hold. Ride each setup at two clearly different speeds, or "
                "give the tyres' Crr.",
            )
        )
    reason = "" if apart else "the speeds ridden do not tell drag area and rolling resistance apart"
    setups = []
    for index, name in enumerate(day.setups):
        count = sum(run.setup == index for run in day.runs)
        if not count:
            setups.append(SetupEstimate(name, 0, None, "no run of this setup could be used"))
            continue
        figure = _coefficient(pooled, pooled.column(index), day.confidence)
        setups.append(SetupEstimate(name, count, figure if apart else None, reason))
    worthwhile = _worthwhile(day)
    differences = all_differences(fitted, pooled, worthwhile, apart)
    runs = _runs(fitted, pooled, apart)
    names, values, covariance = _joint(pooled, day, apart)
    freedom = [
        pooled.degrees_of_freedom(np.eye(pooled.design.shape[1])[pooled.column(s)]) for s in pooled.setups
    ]
    speeds = [_means(run)[1] for run in day.runs]
    powers = [_means(run)[0] for run in day.runs]
    density = float(np.mean([run.records.density.mean() for run in day.runs]))
    warnings += remarks(fitted, pooled, differences, setups, crr)
    regression = regress(day)
    warnings += disagreement(regression, differences)
    gust = None if day.flat else Gust(float(fitted.noise[at.GUST_SD]), float(fitted.noise[at.GUST_TIME]))
    return Estimate(
        confidence=day.confidence,
        air_density=density,
        reference_speed=day.reference_speed,
        setups=tuple(setups),
        tyres=tuple(
            TyreEstimate(t.id, f if apart or t.crr_sd == 0.0 else None, "" if apart else reason)
            for t, f in zip(day.tyres, crr, strict=True)
        ),
        differences=differences,
        runs=runs,
        parameters=names,
        values=values,
        covariance=covariance,
        degrees_of_freedom=min([d.cda.degrees_of_freedom for d in differences if d.cda] or freedom),
        between_run_sd=pooled.between_run_sd,
        gust=gust,
        warnings=tuple(dict.fromkeys(warnings)),
        next_steps=next_steps(fitted, pooled, differences),
        speed_range=(min(speeds), max(speeds)),
        tested_power=(min(powers), max(powers)),
        method=METHOD,
        profile=_profile(fitted),
        regression=regression,
    )


def _coefficient(pooled: Pooled, column: int, confidence: float) -> Figure:
    line = np.zeros(pooled.design.shape[1])
    line[column] = 1.0
    return student_figure(
        float(pooled.mixed.coefficients[column]),
        float(pooled.covariance[column, column]),
        pooled.degrees_of_freedom(line),
        confidence,
    )


def _tyre(pooled: Pooled, day: Day, tyres: int) -> Figure:
    if tyres in pooled.figures.tyres:
        return _coefficient(pooled, pooled.shared.start + pooled.figures.tyres.index(tyres), day.confidence)
    exact = day.tyres[tyres].crr or 0.0
    return Figure(exact, 0.0, (exact, exact))


def _told_apart(pooled: Pooled, day: Day) -> bool:
    """Whether every tyre set's Crr is known: given beforehand, or measured well beyond what one would guess."""
    for tyres in pooled.figures.tyres:
        if day.tyres[tyres].crr is not None:
            continue
        column = pooled.shared.start + pooled.figures.tyres.index(tyres)
        if np.sqrt(pooled.covariance[column, column]) > priors.CRR_SEPARATED * rolling_guess(day)[1]:
            return False
    return True


def _worthwhile(day: Day) -> float | None:
    if day.smallest_worthwhile_cda is not None:
        return day.smallest_worthwhile_cda
    if day.smallest_worthwhile_power is None:
        return None
    density = float(np.mean([run.records.density.mean() for run in day.runs]))
    efficiency = float(np.mean([run.efficiency for run in day.runs]))
    return day.smallest_worthwhile_power * efficiency / (0.5 * density * day.reference_speed**3)


def _means(run: DayRun) -> tuple[float, float]:
    use = run.records.usable
    weight = run.records.interval[use]
    return (
        float(np.average(run.records.power[use], weights=weight)),
        float(np.average(run.records.speed[use], weights=weight)),
    )


def _runs(fitted: Fit, pooled: Pooled, apart: bool) -> tuple[RunEstimate, ...]:
    """Return the figures of every run, counted or not, in the order of their start."""
    day = fitted.model.day
    layout = fitted.model.layout
    odd = residuals(pooled)
    found = []
    headed = not day.flat and all(np.isfinite(run.records.heading).any() for run in day.runs)
    base = pooled.column(day.baseline) if day.baseline in pooled.setups and day.baseline is not None else None
    for r, run in enumerate(day.runs):
        value, error = run_alone(fitted, pooled, r)
        east = float(fitted.parameters[layout.wind_east][r])
        north = float(fitted.parameters[layout.wind_north][r])
        power, speed = _means(run)
        without = without_run(pooled, r) if base is not None else None
        influence = {}
        if without is not None and base is not None:
            for s in pooled.setups:
                c = pooled.column(s)
                if c != base:
                    now = pooled.mixed.coefficients[c] - pooled.mixed.coefficients[base]
                    influence[day.setups[s]] = float(without[c] - without[base] - now)
        found.append(
            RunEstimate(
                id=run.id,
                setup=day.setups[run.setup],
                ride=run.ride,
                start=run.start,
                end=run.end,
                laps=run.laps,
                power=power,
                speed=speed,
                air_density=float(run.records.density.mean()),
                wind_speed=float(np.hypot(east, north)) if headed else None,
                wind_from=float(np.arctan2(east, north) % (2.0 * np.pi)) if headed else None,
                excluded="",
                cda=student_figure(value, error**2, 1e4, day.confidence) if apart else None,
                against_repeats=odd[r],
                influence=influence,
            )
        )
    for out in day.left_out:
        found.append(
            RunEstimate(
                out.id,
                out.setup,
                out.ride,
                out.start,
                out.end,
                0,
                None,
                None,
                None,
                None,
                None,
                out.reason,
                None,
            )
        )
    return tuple(sorted(found, key=lambda run: (run.ride, run.start)))


def _joint(pooled: Pooled, day: Day, apart: bool) -> tuple[tuple[str, ...], FloatArray, FloatArray]:
    """Return names, values and covariance of all that a race needs: CdA, Crr and the day's power scale, last."""
    columns: list[tuple[str, int | None, float]] = []
    for s in pooled.setups:
        columns.append((f"cda:{day.setups[s]}", pooled.column(s), 0.0))
    for t, tyres in enumerate(day.tyres):
        if t in pooled.figures.tyres:
            columns.append((f"crr:{tyres.id}", pooled.shared.start + pooled.figures.tyres.index(t), 0.0))
        else:
            columns.append((f"crr:{tyres.id}", None, tyres.crr or 0.0))
    scaled = pooled.shared.start + len(pooled.figures.tyres)
    has_scale = scaled < pooled.shared.stop
    columns.append(("power-scale", scaled if has_scale else None, 0.0))
    size = len(columns)
    values = np.zeros(size)
    covariance = np.zeros((size, size))
    known = [(i, c) for i, (_, c, _) in enumerate(columns) if c is not None]
    for i, (_, column, exact) in enumerate(columns):
        values[i] = exact if column is None else pooled.mixed.coefficients[column]
    rows = [i for i, _ in known]
    cols = [c for _, c in known]
    covariance[np.ix_(rows, rows)] = pooled.covariance[np.ix_(cols, cols)]
    return tuple(name for name, _, _ in columns), values, 0.5 * (covariance + covariance.T)


def _profile(fitted: Fit) -> VenueProfile | None:
    """Return the venue's profile as found, None on an indoor track."""
    day = fitted.model.day
    if day.flat:
        return None
    nodes = fitted.model.nodes
    layout = fitted.model.layout
    knots = nodes.knots
    rise = nodes.rise
    height = rise @ fitted.parameters[layout.slopes]
    spread = rise @ fitted.covariance[layout.slopes, layout.slopes] @ rise.T
    if day.closed:
        knots = np.append(knots, day.venue_length)
        height = np.append(height, height[0])
        error = np.sqrt(np.maximum(np.append(np.diag(spread), 0.0), 0.0))
    else:
        error = np.sqrt(np.maximum(np.diag(spread), 0.0))
    return VenueProfile(knots, height, error)


def _nothing(day: Day, warnings: Sequence[SolveWarning], reason: str) -> Estimate:
    """Return an estimate that answers nothing, with the reason at every setup and tyre set."""
    runs = tuple(
        RunEstimate(
            out.id, out.setup, out.ride, out.start, out.end, 0, None, None, None, None, None, out.reason, None
        )
        for out in day.left_out
    ) + tuple(
        RunEstimate(
            run.id, day.setups[run.setup], run.ride, run.start, run.end, run.laps, *_means(run),
            float(run.records.density.mean()), None, None, "", None,
        )
        for run in day.runs
    )  # fmt: skip
    return Estimate(
        confidence=day.confidence,
        air_density=None,
        reference_speed=None,
        setups=tuple(SetupEstimate(name, 0, None, reason) for name in day.setups),
        tyres=tuple(TyreEstimate(t.id, None, reason) for t in day.tyres),
        differences=(),
        runs=runs,
        parameters=(),
        values=np.zeros(0),
        covariance=np.zeros((0, 0)),
        degrees_of_freedom=1.0,
        between_run_sd=None,
        gust=None,
        warnings=tuple(dict.fromkeys(warnings)),
        method=METHOD,
    )
