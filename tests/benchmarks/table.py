"""The calibration table as Markdown and its numbers as delimited text."""

from __future__ import annotations

import csv
import dataclasses
from collections.abc import Sequence
from pathlib import Path

from scenarios import scenario
from scores import DayScore, Row, Shot, Tally

_HEAD = (
    "| scenario | days | answered | difference: bias | RMS | oracle RMS | ratio | held 95 % "
    "| width / oracle's | absolute: bias | in SE | RMS | oracle RMS | held 95 % | answered | Crr held "
    "| false lower | warned | solve |"
)
_HEAD_RULE = "|" + " --- |" * (_HEAD.count("|") - 1)

_LEGEND = """\
# Calibration

CdA in cm² (10⁻⁴ m²). *held 95 %*: share of 95 % intervals that held the truth, with the band that so many
days allow. *oracle*: generalised least squares of 120 m blocks that knows the road, the mean wind and the
strength of every noise; *width* is against the same oracle when it has to estimate the spread between runs.
Bias and RMS of absolutes leave the meter's scale out, which nothing can see; whether they held the truth counts
it. *false lower*: share of days with a pair called lower that is not. *warned*: of anything but that there is no
weather report.
"""


def markdown(rows: Sequence[Row]) -> str:
    """Return the table and, below it, what was warned of."""
    lines = [_LEGEND]
    for keeps, title in ((True, "## Days that keep the model"), (False, "## Days that break it")):
        chosen = [r for r in rows if scenario(r.scenario).keeps_model is keeps]
        if not chosen:
            continue
        lines += [title, "", _HEAD, _HEAD_RULE]
        lines += [line(row) for row in chosen]
        lines.append("")
    lines += [
        "## What the scenarios are, and what was warned of",
        "",
        "| scenario | days | warnings, share of days |",
    ]
    lines.append("| --- | --- | --- |")
    for row in rows:
        told = {**row.warnings, **row.refusals}
        codes = ", ".join(f"`{code}` {100 * share:.0f} %" for code, share in told.items()) or "none"
        lines.append(f"| {row.scenario} | {scenario(row.scenario).text} | {codes} |")
    return "\n".join(lines) + "\n"


def line(row: Row) -> str:
    """Return the row as a line of the table."""
    cells = [row.scenario, str(row.days), f"{100 * row.answered:.1f} %"]
    cells += _difference_cells(row.differences)
    cells += _absolute_cells(row.absolutes)
    cells.append(f"{100 * row.absolutes_answered:.0f} %")
    cells.append(_held(row.rolling) if row.rolling else "–")
    cells += [
        f"{100 * row.false_lower:.1f} %",
        f"{100 * row.warned:.0f} %",
        f"{1000 * row.solve_seconds:.0f} ms",
    ]
    return "| " + " | ".join(cells) + " |"


def _difference_cells(found: Tally | None) -> list[str]:
    if found is None:
        return ["–"] * 6
    return [
        _bias(found),
        f"{1e4 * found.rms:.1f}",
        f"{1e4 * found.oracle_rms:.1f}",
        f"{found.rms_ratio:.2f}",
        _held(found),
        f"{found.width_ratio:.2f}",
    ]


def _absolute_cells(found: Tally | None) -> list[str]:
    if found is None:
        return ["–"] * 5
    return [
        _bias(found),
        f"{found.bias_in_errors:+.2f}",
        f"{1e4 * found.rms:.1f}",
        f"{1e4 * found.oracle_rms:.1f}",
        _held(found),
    ]


def _bias(found: Tally) -> str:
    return f"{1e4 * found.bias:+.1f} ± {1e4 * found.bias_error:.1f}"


def _held(found: Tally) -> str:
    low, high = found.coverage_band
    return f"{100 * found.coverage:.1f} % ({100 * low:.0f}–{100 * high:.0f})"


def write(folder: Path, rows: Sequence[Row], days: Sequence[DayScore]) -> None:
    """Write the table, its numbers and every shot."""
    folder.mkdir(parents=True, exist_ok=True)
    (folder / "calibration.md").write_text(markdown(rows), encoding="utf-8", newline="\n")
    with (folder / "calibration.csv").open("w", encoding="utf-8", newline="") as file:
        out = csv.writer(file, lineterminator="\n")
        names = [f.name for f in dataclasses.fields(Tally)]
        kinds = ("differences", "absolutes", "rolling")
        single = ("scenario", "days", "answered", "absolutes_answered", "warned", "false_lower")
        out.writerow(
            [*single, "prepare_seconds", "solve_seconds", *(f"{k}_{n}" for k in kinds for n in names)]
        )
        for row in rows:
            cells = [getattr(row, name) for name in single]
            cells += [f"{row.prepare_seconds:.4f}", f"{row.solve_seconds:.4f}"]
            for kind in kinds:
                found = getattr(row, kind)
                cells += [getattr(found, name) if found else "" for name in names]
            out.writerow(cells)
    with (folder / "calibration-shots.csv").open("w", encoding="utf-8", newline="") as file:
        out = csv.writer(file, lineterminator="\n")
        kinds = ("differences", "absolutes", "rolling")
        out.writerow(["scenario", "kind", *(f.name for f in dataclasses.fields(Shot))])
        for day in days:
            for kind in kinds:
                for shot in getattr(day, kind):
                    out.writerow([day.scenario, kind, *dataclasses.astuple(shot)])
