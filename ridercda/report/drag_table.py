"""An estimate on a terminal: the answer first, then the figures it rests on."""

from __future__ import annotations

import math
from collections.abc import Iterator

from rich.console import Group, RenderableType
from rich.padding import Padding
from rich.table import Table
from rich.text import Text

from ridercda.drag.estimate import Estimate, Figure
from ridercda.drag.verdict import Verdict
from ridercda.report.cautions import CAUTIONS
from ridercda.report.sentences import answer, called
from ridercda.session.document import Session
from ridercda.units.display import digits_for, format_number


def drag_report(estimate: Estimate, session: Session) -> RenderableType:
    """Return the estimate as something a rich console prints."""
    return Group(*_parts(estimate, session))


def _parts(estimate: Estimate, session: Session) -> Iterator[RenderableType]:
    yield Text(session.name, style="bold")
    counted = sum(not run.excluded for run in estimate.runs)
    facts = f"{counted} runs, {sum(s.runs > 0 for s in estimate.setups)} setups"
    if estimate.air_density is not None:
        facts += f", air {estimate.air_density:.3f} kg/m³"
    if estimate.gust is not None:
        facts += f", gusts {estimate.gust.sd:.1f} m/s"
    yield Text(facts, style="dim")
    yield Text("")
    yield Text(answer(estimate, session), style="bold")
    yield Text("")
    speed = f" at {3.6 * estimate.reference_speed:.0f} km/h" if estimate.reference_speed else ""
    yield Text(f"CdA in m²{speed}, change against the baseline; runs in W, km/h and m/s", style="dim")
    yield _setups(estimate, session)
    if any(t.crr is not None for t in estimate.tyres):
        yield Text("")
        yield _tyres(estimate)
    yield Text("")
    yield _runs(estimate, session)
    if estimate.next_steps:
        step = estimate.next_steps[0]
        names = [called(session.setup(s)) for s in (step.setup, step.against)]
        yield Text("")
        yield Text(f"Cheapest next step for {names[0]} against {names[1]}: {step.text}")
    if estimate.warnings:
        yield Text("")
        yield Text("To know before you trust it", style="bold")
        for warning in estimate.warnings:
            yield Padding(Text(f"{warning.message} [{warning.code}]"), (0, 0, 0, 2))
    yield Text("")
    yield Text(" ".join(CAUTIONS), style="dim")


def _setups(estimate: Estimate, session: Session) -> Table:
    percent = f"{100 * estimate.confidence:.0f} %"
    table = Table(box=None, pad_edge=False, header_style="dim")
    table.add_column("setup", min_width=14, max_width=34)
    table.add_column("CdA", justify="right", no_wrap=True)
    table.add_column(f"{percent} interval", justify="right", no_wrap=True)
    table.add_column("change", justify="right", no_wrap=True)
    table.add_column(f"{percent} interval", justify="right", no_wrap=True)
    table.add_column("verdict", no_wrap=True)
    base = session.baseline
    by_setup = {d.setup: d for d in estimate.differences if base is not None and d.against == base.id}
    for result in estimate.setups:
        setup = session.setup(result.id)
        name = f"{setup.letter}  {setup.name or setup.id}" if setup.letter else setup.name or setup.id
        difference = by_setup.get(result.id)
        value, interval = _figure(result.cda)
        change, band = _figure(difference.cda if difference else None, "+")
        verdict = "baseline" if base is not None and base.id == result.id else "–"
        style = ""
        if difference and difference.verdict:
            verdict = difference.verdict.value
            style = "bold" if difference.verdict in (Verdict.LOWER, Verdict.HIGHER) else ""
        table.add_row(name, value, interval, change, band, Text(verdict, style=style))
    return table


def _tyres(estimate: Estimate) -> Table:
    table = Table(box=None, pad_edge=False, header_style="dim")
    table.add_column("tyres")
    table.add_column("Crr at 20 °C", justify="right")
    table.add_column(f"{100 * estimate.confidence:.0f} % interval", justify="right")
    for tyres in estimate.tyres:
        value, interval = _figure(tyres.crr)
        table.add_row(tyres.id or "all", value, interval)
    return table


def _runs(estimate: Estimate, session: Session) -> Table:
    table = Table(box=None, pad_edge=False, header_style="dim")
    table.add_column("run")
    table.add_column("setup")
    for heading in ("laps", "power", "speed", "wind", "from", "CdA", "against repeats"):
        table.add_column(heading, justify="right")
    for run in estimate.runs:
        setup = called(session.setup(run.setup))
        if run.excluded:
            table.add_row(run.id, setup, Text(f"left out: {run.excluded}", style="dim"))
            continue
        value, _ = _figure(run.cda)
        table.add_row(
            run.id,
            setup,
            str(run.laps),
            _plain(run.power, 0),
            _plain(None if run.speed is None else 3.6 * run.speed, 1),
            _plain(run.wind_speed, 1),
            "–" if run.wind_from is None else f"{math.degrees(run.wind_from):.0f}°",
            value,
            "–" if run.against_repeats is None else f"{format_number(run.against_repeats, 1, plus='+')} se",
        )
    return table


def _figure(figure: Figure | None, plus: str = "") -> tuple[str, str]:
    """Return value and interval with the digits the interval allows; dashes where there is none."""
    if figure is None:
        return "–", "–"
    low, high = figure.interval
    half = 0.5 * (high - low)
    if half <= 0.0:
        return f"{figure.value:.4f}", "exact"
    digits = digits_for(half)
    value = format_number(figure.value, digits, plus=plus)
    return value, f"{format_number(low, digits, plus=plus)} to {format_number(high, digits, plus=plus)}"


def _plain(value: float | None, digits: int) -> str:
    return "–" if value is None else f"{value:.{digits}f}"
