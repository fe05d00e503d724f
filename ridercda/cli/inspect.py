"""``ridercda inspect``: channels, sampling, span and faults of ride files."""

from __future__ import annotations

import sys
from collections.abc import Iterator, Sequence
from pathlib import Path

import numpy as np
from rich.console import Console, Group, RenderableType
from rich.table import Table
from rich.text import Text

from ridercda.cli.arguments import Parser, parsed
from ridercda.cli.progress import progress_bar
from ridercda.errors import ReaderError
from ridercda.rides.format import CHANNEL_KINDS
from ridercda.rides.reader import read_ride
from ridercda.rides.repair import repair
from ridercda.rides.ride import Fault, Ride
from ridercda.units import TRUE_MINUS, display_symbol, format_duration, format_number, to_display

FAULTS_PER_KIND = 5  # told one by one; the rest is counted

# Decimals that suit a range; where two channels of one kind are shown in different units, the unit too.
_DECIMALS = {
    "power": 0,
    "speed": 1,
    "distance": 2,
    "latitude": 4,
    "longitude": 4,
    "altitude": 0,
    "cadence": 0,
    "heart_rate": 0,
    "temperature": 0,
    "air_speed": 1,
    "dynamic_pressure": 2,
    "yaw": 0,
}
_SYMBOLS = {"heart_rate": "bpm"}


def command(words: Sequence[str]) -> int:
    """Inspect the files named; 0, or 2 when one of them cannot be read."""
    parser = Parser(prog="ridercda inspect", description="Channels, sampling, span and faults of ride files.")
    parser.add_argument(
        "rides", metavar="RIDE", nargs="+", help="FIT, TCX, GPX or delimited text, also gzipped"
    )
    arguments = parsed(parser, words)
    if arguments is None:
        return 0
    return run(arguments.rides, Console(highlight=False))


def run(paths: Sequence[str], console: Console) -> int:
    """Print what each file holds; one that cannot be read gets one message and the others go on.

    Parameters
    ----------
    paths : sequence of str
        Files to inspect.
    console : Console
        Where to print; messages go to standard error.

    Returns
    -------
    int
        0 when every file could be read, else 2.
    """
    code = 0
    for number, name in enumerate(paths):
        try:
            with progress_bar(Console(stderr=True), f"Reading {Path(name).name}") as watch:
                raw = read_ride(Path(name), watch=watch)
            ride = repair(raw)
        except ReaderError as error:
            sys.stderr.write(f"ridercda: {error}\n")
            code = 2
            continue
        if number:
            console.print()
        console.print(ride_report(name, raw, ride))
    return code


def ride_report(name: str, raw: Ride, ride: Ride) -> RenderableType:
    """Return what there is to know of a ride as something a rich console prints.

    Parameters
    ----------
    name : str
        Of the file.
    raw : Ride
        As read; its values are shown.
    ride : Ride
        Repaired; its faults are shown.
    """
    return Group(*_parts(name, raw, ride))


def _parts(name: str, raw: Ride, ride: Ride) -> Iterator[RenderableType]:
    yield Text(name, style="bold")
    yield Text(_facts(raw), style="dim")
    yield Text(sampling(ride), style="dim")
    for note in _notes(raw):
        yield Text(note, style="dim")
    yield Text("")
    yield _channels(raw)
    yield Text("")
    if not ride.faults:
        yield Text("No faults found.")
        return
    yield _faults(ride)


def _facts(ride: Ride) -> str:
    facts = [ride.source.upper() if ride.source in ("fit", "tcx", "gpx") else "delimited text"]
    if ride.device:
        facts.append(ride.device)
    if ride.start is not None:
        facts.append(ride.start.isoformat(sep=" ", timespec="seconds"))
    span = float(ride.time.max() - ride.time.min())
    facts.append(f"{format_duration(span)} long")
    facts.append(f"{ride.time.size} records" if ride.time.size != 1 else "1 record")
    if ride.laps:
        facts.append(f"{len(ride.laps)} laps" if len(ride.laps) > 1 else "1 lap")
    return ", ".join(facts)


def sampling(ride: Ride) -> str:
    """Return how often a ride was recorded, in words."""
    if ride.time.size < 2:
        return "A single record"
    steps = np.diff(ride.time)
    usual = float(np.median(steps))
    share = float(np.mean(np.abs(steps - usual) <= 0.25 * usual))
    if share == 1.0:
        return f"A record every {usual:.3g} s throughout"
    longest = float(steps.max())
    told = f"{longest:.3g} s" if longest < 100.0 else format_duration(longest)
    return f"A record every {usual:.3g} s, {_percent(share)} of the time; the longest interval is {told}"


def _notes(ride: Ride) -> Iterator[str]:
    for about, text in ride.notes.items():
        if not text.startswith("from the column"):
            yield f"{about.replace('_', ' ')}: {text}"


def _channels(ride: Ride) -> Table:
    table = Table(box=None, pad_edge=False, padding=(0, 2, 0, 0), header_style="dim")
    for heading in ("channel", "records", "lowest", "median", "highest", ""):
        table.add_column(heading, justify="left" if heading in ("channel", "") else "right")
    for name, values in ride.channels.items():
        known = values[np.isfinite(values)]
        shown = to_display([known.min(), np.median(known), known.max()], CHANNEL_KINDS[name])
        figures = [format_number(float(value), _DECIMALS[name], TRUE_MINUS) for value in shown]
        unit = _SYMBOLS.get(name, display_symbol(CHANNEL_KINDS[name]))
        records = _percent(known.size / values.size)
        table.add_row(name.replace("_", " "), records, *figures, unit)
    return table


def _percent(share: float) -> str:
    """Return a share that reads 100 % only where nothing is lacking."""
    return "100 %" if share == 1.0 else f"{min(100.0 * share, 99.9):.1f} %"


def _faults(ride: Ride) -> Table:
    table = Table(box=None, pad_edge=False, padding=(0, 2, 0, 0), header_style="dim")
    table.add_column("fault", no_wrap=True)
    table.add_column("from", justify="right", no_wrap=True)
    table.add_column("to", justify="right", no_wrap=True)
    table.add_column("what was found, and what was done about it")
    counts: dict[str, int] = {}
    for fault in ride.faults:
        counts[fault.kind] = counts.get(fault.kind, 0) + 1
        if counts[fault.kind] <= FAULTS_PER_KIND:
            table.add_row(
                fault.kind.value, _clock(fault.start), _clock(fault.end), f"{fault.cause}.{_done(fault)}"
            )
    for kind, count in counts.items():
        if count > FAULTS_PER_KIND:
            table.add_row(str(kind), "", "", f"… and {count - FAULTS_PER_KIND} more of this kind")
    return table


def _clock(seconds: float) -> str:
    return format_duration(seconds, 0 if float(seconds).is_integer() else 1)


def _done(fault: Fault) -> str:
    """Return what was done about a fault, nothing where nothing can be done."""
    others = [choice for choice in fault.choices if choice != (fault.repair or "leave")]
    offered = f" (or: {', '.join(others)})" if others else ""
    if fault.repair is not None:
        return f" Repair: {fault.repair}{offered}."
    return f" Left as recorded{offered}." if others else ""
