"""From an estimate to what the charts of the Drag page show (nothing is painted here)."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np
from PySide6.QtCore import QCoreApplication

from ridercda.app.desk import Desk
from ridercda.app.drag_words import against_baseline, cause_words, verdict_words
from ridercda.app.figures import bounds_text, plus_minus, value_text
from ridercda.app.letters import Badge
from ridercda.app.quantities import plain
from ridercda.app.strip.picture import axis_of
from ridercda.app.theme import Theme
from ridercda.app.widgets.ellipse_chart import Region, ellipse
from ridercda.app.widgets.interval_chart import IntervalPicture, IntervalRow, SecondAxis
from ridercda.app.widgets.run_chart import Level, RunDot
from ridercda.app.widgets.scatter_chart import Point, ScatterChart
from ridercda.app.widgets.table import Column
from ridercda.drag.estimate import Difference, Estimate, RunEstimate
from ridercda.physics.power_balance import road_power
from ridercda.session.defaults import default
from ridercda.session.document import MeterLocation, Session
from ridercda.units import Kind


def _tr(text: str) -> str:
    return QCoreApplication.translate("Drag", text)


def watts_per_area(session: Session, estimate: Estimate) -> float | None:
    """Return what a square metre of CdA costs at the power meter, at the reference speed in still air. [W/m²]"""
    if estimate.reference_speed is None or estimate.air_density is None:
        return None
    efficiency = session.bike.drivetrain_efficiency or default("bike.drivetrain_efficiency")
    if session.power_meter.location is MeterLocation.HUB:
        efficiency = 1.0
    with_drag, without = (
        float(
            road_power(
                estimate.reference_speed,
                mass=80.0,
                cda=cda,
                crr=0.0,
                density=estimate.air_density,
                efficiency=efficiency,
            ).meter
        )
        for cda in (1.0, 0.0)
    )
    return with_drag - without


def interval_picture(desk: Desk, estimate: Estimate, baseline: str) -> IntervalPicture:
    """Return the differences from the baseline, or the levels where there is one setup only."""
    badges, session = desk.badges(), desk.session
    levels = {s.id: s.cda for s in estimate.setups}
    base = levels.get(baseline)
    rows = []
    for pair in against_baseline(estimate, baseline):
        if pair.setup not in badges:
            continue
        singles = tuple(
            run.cda.value - base.value
            for run in estimate.runs
            if run.setup == pair.setup and run.cda and base and not run.excluded
        )
        tip = ""
        if pair.cda is not None:
            low, high = bounds_text(pair.cda.interval)
            tip = _tr("{name}: {value} m², between {low} and {high}").format(
                name=badges[pair.setup].name, value=value_text(pair.cda, signed=True), low=low, high=high
            )
        rows.append(
            IntervalRow(
                pair.setup,
                desk.theme.chip(badges[pair.setup].index),
                badges[pair.setup].letter,
                verdict_words(pair),
                pair.cda.value if pair.cda else None,
                pair.cda.interval if pair.cda else None,
                singles,
                tip or pair.reason,
                picked=pair.setup == desk.selection.setup,
                note=badges[pair.setup].name,
            )
        )
    factor = watts_per_area(session, estimate)
    second = None
    if factor and estimate.reference_speed:
        caption = _tr("at {}").format(desk.units.text(estimate.reference_speed, Kind.SPEED, 0))
        second = SecondAxis(factor, "W", caption)
    worth = session.smallest_worthwhile.cda
    if worth is None and session.smallest_worthwhile.power and factor:
        worth = session.smallest_worthwhile.power / factor
    letter = badges[baseline].letter if baseline in badges else ""
    return IntervalPicture(tuple(rows), _tr("CdA against {} [m²]").format(letter), second, worthwhile=worth)


def run_dots(desk: Desk, estimate: Estimate) -> tuple[tuple[RunDot, ...], tuple[Level, ...]]:
    """Return every run's own figure through the day, and the level of each setup."""
    badges = desk.badges()
    axis = axis_of(desk.session, desk.shelf.rides())
    known = {run.id for run in desk.session.runs}
    dots = []
    for run in estimate.runs:
        if run.cda is None or run.id not in known or run.setup not in badges:
            continue
        badge = badges[run.setup]
        moment = axis.offsets.get(run.ride, 0.0) + 0.5 * (run.start + run.end)
        tip = _tr("Run {id}, {letter}: {value} {within} m²").format(
            id=run.id, letter=badge.letter, value=value_text(run.cda), within=plus_minus(run.cda)
        )
        dots.append(
            RunDot(
                run.id,
                run.id,
                desk.theme.chip(badge.index),
                badge.letter,
                moment,
                run.cda.value,
                run.cda.interval,
                run.excluded,
                run.id in desk.selection.runs,
                tip,
            )
        )
    levels = tuple(
        Level(desk.theme.chip(badges[s.id].index), s.cda.value)
        for s in estimate.setups
        if s.cda and s.id in badges
    )
    return tuple(sorted(dots, key=lambda dot: dot.moment)), levels


def regions(desk: Desk, estimate: Estimate) -> tuple[Region, ...]:
    """Return the joint regions of CdA and Crr of the picked setup and the baseline."""
    session, badges = desk.session, desk.badges()
    baseline = session.baseline
    wanted = [baseline.id] if baseline else []
    picked = desk.selection.setup or next(
        (p.setup for p in against_baseline(estimate, baseline.id if baseline else "")), ""
    )
    if picked and picked not in wanted:
        wanted.append(picked)
    places = {name: place for place, name in enumerate(estimate.parameters)}
    result = []
    for setup_id in wanted:
        setup = next((s for s in session.setups if s.id == setup_id), None)
        if setup is None:
            continue
        tyres = setup.tyres or (estimate.tyres[0].id if estimate.tyres else "")
        rows = [places.get(f"cda:{setup_id}"), places.get(f"crr:{tyres}")]
        if None in rows:
            continue
        pick = np.array(rows, dtype=np.int64)
        covariance = estimate.covariance[np.ix_(pick, pick)]
        if not np.isfinite(covariance).all() or covariance[0, 0] <= 0:
            continue
        radius = joint_radius(estimate.degrees_of_freedom, estimate.confidence)
        centre = (float(estimate.values[pick[0]]), float(estimate.values[pick[1]]))
        badge = badges[setup_id]
        name = _tr("{name}: region that holds CdA and Crr with {share} %").format(
            name=badge.name, share=round(100 * estimate.confidence)
        )
        result.append(
            Region(
                setup_id,
                name,
                desk.theme.chip(badge.index),
                badge.letter,
                centre,
                ellipse(centre, covariance, radius),
            )
        )
    return tuple(result)


def joint_radius(degrees_of_freedom: float, confidence: float) -> float:
    """Return how many standard deviations out the joint region of two figures reaches.

    The square is twice the quantile of Fisher's F with 2 and nu degrees of freedom, which has a closed form:
    (nu/2) ((1 - p)^(-2/nu) - 1), and -ln(1 - p) in the limit.
    """
    if degrees_of_freedom > 1e6:
        return math.sqrt(-2.0 * math.log1p(-confidence))
    half = degrees_of_freedom / 2.0
    return math.sqrt(2.0 * half * ((1.0 - confidence) ** (-1.0 / half) - 1.0))


SHARES_SHOWN = 4


def shares(pair: Difference | None) -> tuple[tuple[str, float, str], ...]:
    """Return the largest causes of a difference's variance, the small ones taken together."""
    causes = sorted((pair.variance_shares if pair else {}).items(), key=lambda cause: -cause[1])
    shown = [(cause_words(key)[0], float(share), cause_words(key)[1]) for key, share in causes]
    if len(shown) > SHARES_SHOWN:
        rest = shown[SHARES_SHOWN - 1 :]
        names = ", ".join(name for name, _, _ in rest)
        shown = [*shown[: SHARES_SHOWN - 1], (_tr("Others"), sum(share for _, share, _ in rest), names)]
    return tuple(shown)


@dataclass(frozen=True, slots=True)
class InfluenceRow:
    """How the differences move when a run is left out."""

    run: str
    badge: Badge
    moves: Mapping[str, float]
    against_repeats: float | None
    excluded: str


def influence(
    desk: Desk, estimate: Estimate
) -> tuple[tuple[Column[InfluenceRow], ...], tuple[InfluenceRow, ...]]:
    """Return columns and rows of the table of influence."""
    badges = desk.badges()
    baseline = desk.session.baseline
    others = [s.id for s in estimate.setups if s.id in badges and (baseline is None or s.id != baseline.id)]
    columns: list[Column[InfluenceRow]] = [
        Column(
            _tr("Run"), lambda row: row.run, raw=lambda row: _run_order(row.run), chip=lambda row: row.badge
        ),
        Column(
            _tr("vs repeats [σ]"),
            lambda row: "–" if row.against_repeats is None else plain(row.against_repeats, 1, signed=True),
            raw=lambda row: row.against_repeats,
        ),
    ]
    columns += [_moves_column(setup_id, badges[setup_id].letter) for setup_id in others]
    rows = tuple(
        InfluenceRow(run.id, badges[run.setup], run.influence, run.against_repeats, run.excluded)
        for run in estimate.runs
        if run.setup in badges
    )
    return tuple(columns), rows


def _moves_column(setup_id: str, letter: str) -> Column[InfluenceRow]:
    def text(row: InfluenceRow) -> str:
        return plain(row.moves[setup_id], 4, signed=True) if setup_id in row.moves else "–"

    return Column(_tr("{} by [m²]").format(letter), text, raw=lambda row: row.moves.get(setup_id))


def _run_order(run: str) -> float | str:
    return float(run) if run.isdigit() else run


def trend_chart(theme: Theme) -> ScatterChart:
    """Return an empty chart of runs against something."""
    return ScatterChart(theme)


def show_speed_trend(desk: Desk, estimate: Estimate, chart: ScatterChart) -> None:
    """Show each run's distance from its setup against its speed."""
    points = _points(
        desk, estimate, lambda run: None if run.speed is None else desk.units.shown(run.speed, Kind.SPEED)
    )
    across = _tr("Mean speed [{}]").format(desk.units.symbol(Kind.SPEED))
    chart.show_points(points, across, _tr("CdA of the run less that of its setup [m²]"))


def show_wind_trend(desk: Desk, estimate: Estimate, chart: ScatterChart) -> None:
    """Show each run's distance from its setup against the wind it met."""
    points = _points(
        desk,
        estimate,
        lambda run: None if run.wind_speed is None else desk.units.shown(run.wind_speed, Kind.WIND_SPEED),
    )
    across = _tr("Wind at the rider [{}]").format(desk.units.symbol(Kind.WIND_SPEED))
    chart.show_points(points, across, _tr("CdA of the run less that of its setup [m²]"))


def _points(
    desk: Desk, estimate: Estimate, across: Callable[[RunEstimate], float | None]
) -> tuple[Point, ...]:
    badges = desk.badges()
    levels = {s.id: s.cda.value for s in estimate.setups if s.cda}
    points = []
    for run in estimate.runs:
        x = across(run)
        if run.cda is None or run.excluded or x is None or run.setup not in levels or run.setup not in badges:
            continue
        badge = badges[run.setup]
        level = levels[run.setup]
        points.append(
            Point(
                run.id,
                desk.theme.chip(badge.index),
                badge.letter,
                x,
                run.cda.value - level,
                run.id in desk.selection.runs,
                _tr("Run {}").format(run.id),
            )
        )
    return tuple(points)
