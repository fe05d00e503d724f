"""Write the sample sessions: ``python -m ridercda.synthetic.samples [FOLDER]``.

Every sample is invented from the seed in `ridercda.synthetic.sample_days`, so the command always writes the
same files. FOLDER is `sample_sessions` unless named; what it holds of these samples is written over.
"""

from __future__ import annotations

import argparse
import datetime as dt
import math
import sys
from collections.abc import Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from types import MappingProxyType

import numpy as np

from ridercda.rides.ride import LapMark, Ride
from ridercda.session.document import Air, Session
from ridercda.synthetic.day import UTC_OFFSET, SyntheticDay, simulate_day
from ridercda.synthetic.fit_writer import fit_bytes
from ridercda.synthetic.sample_days import SAMPLES, RideFormat, SampleDay
from ridercda.synthetic.text_writer import csv_text, gpx_text
from ridercda.synthetic.truth import Truth
from ridercda.synthetic.venue import lay_out


@dataclass(frozen=True, slots=True)
class WrittenRun:
    """A run as it stands in session.toml: whole seconds on the clock of its ride."""

    id: str
    ride: str
    setup: str
    start: int
    end: int


def write_samples(folder: Path) -> tuple[Path, ...]:
    """Write every sample below `folder`; return the session folders."""
    folders = tuple(write_sample(sample, folder / sample.folder) for sample in SAMPLES)
    truths = [(sample, simulate_day(sample.spec, sample.seed).truth) for sample in SAMPLES]
    (folder / "README.md").write_text(_read_me(truths), encoding="utf-8", newline="\n")
    return folders


def write_sample(sample: SampleDay, folder: Path) -> Path:
    """Write one sample session into `folder`; return the folder."""
    day = simulate_day(sample.spec, sample.seed)
    rides, runs = cut_into_rides(sample, day)
    (folder / "rides").mkdir(parents=True, exist_ok=True)
    for ride_id, ride in rides.items():
        path = folder / "rides" / f"{ride_id}.{sample.format.value}"
        if sample.format is RideFormat.FIT:
            path.write_bytes(fit_bytes(ride))
        else:
            path.write_text(csv_text(ride), encoding="utf-8", newline="\n")
    for name, venue, seed, title in sample.course_files:
        (folder / "courses").mkdir(exist_ok=True)
        line = lay_out(venue, np.random.default_rng(seed)).line
        remark = f"An invented road, drawn from seed {seed}."
        (folder / "courses" / name).write_text(
            gpx_text(line, title, 30.0, remark), encoding="utf-8", newline="\n"
        )
    text = session_text(sample, day.session, tuple(rides), runs)
    (folder / "session.toml").write_text(text, encoding="utf-8", newline="\n")
    return folder


def cut_into_rides(sample: SampleDay, day: SyntheticDay) -> tuple[dict[str, Ride], tuple[WrittenRun, ...]]:
    """Return the day's record cut into the sample's rides, and its runs on their clocks."""
    whole = day.rides["day"]
    runs = day.truth.runs
    rides: dict[str, Ride] = {}
    written: list[WrittenRun] = []
    begin, first_run = -1.0, 0
    for part in sample.rides:
        last_run = part.before_run - 1 if part.before_run else len(runs)
        end = runs[last_run - 1].end + 25.0 if part.before_run else math.inf
        keep = (whole.time >= begin) & (whole.time <= end)
        clock = float(whole.time[keep][0])
        laps = tuple(
            LapMark(max(lap.start - clock, 0.0), lap.end - clock, lap.trigger)
            for lap in whole.laps
            if lap.end > clock and lap.end <= end
        )
        rides[part.id] = replace(
            whole,
            time=whole.time[keep] - clock,
            channels=MappingProxyType(
                {
                    name: values[keep] - (values[keep][0] if name == "distance" else 0.0)
                    for name, values in whole.channels.items()
                }
            ),
            start=whole.start + dt.timedelta(seconds=clock) if whole.start else None,
            laps=laps,
        )
        # As marked by the button, and rounded inwards: a rider reads whole seconds off the screen.
        for run in runs[first_run:last_run]:
            start, stop = math.ceil(run.start - clock), math.floor(run.end - clock)
            written.append(WrittenRun(run.id, part.id, run.setup, start, stop))
        begin, first_run = end + 60.0, last_run
    return rides, tuple(written)


def session_text(
    sample: SampleDay, session: Session, rides: tuple[str, ...], runs: tuple[WrittenRun, ...]
) -> str:
    """Return session.toml as the rider of a sample would have written it."""
    parts = [_head(sample, session), _rider(session), _air(session.air), _venue(session)]
    parts += [f'[[ride]]\nid = "{ride}"\nfile = "rides/{ride}.{sample.format.value}"\n' for ride in rides]
    parts.append(sample.setups)
    parts.append("# Whole laps, settle time left out; h:mm:ss since the start of the ride.")
    notes = dict(sample.notes)
    for run in runs:
        note = f'note = "{notes[run.id]}"\n' if run.id in notes else ""
        parts.append(
            f'[[run]]\nid = "{run.id}"\nride = "{run.ride}"\nstart = "{_clock(run.start)}"\n'
            f'end = "{_clock(run.end)}"\nsetup = "{run.setup}"\n{note}'
        )
    parts.append(sample.courses)
    return "\n".join(part.rstrip("\n") + "\n" for part in parts)


def _head(sample: SampleDay, session: Session) -> str:
    sign = "+" if UTC_OFFSET >= 0 else "-"
    zone = f"{sign}{int(abs(UTC_OFFSET) // 3600):02d}:{int(abs(UTC_OFFSET) % 3600 // 60):02d}"
    return (
        f"{sample.introduction}\n"
        f"# Invented, every second of it, from seed {sample.seed}: no such rider, place or day.\n\n"
        f'format = 1\nname = "{session.name}"\ndate = {session.date}\ntimezone = "{zone}"\n'
        f'smallest_worthwhile = "0.002 m^2"'
    )


def _rider(session: Session) -> str:
    rider, bike, meter = session.rider, session.bike, session.power_meter
    location = meter.location.value if meter.location else "crank"
    return (
        f'[rider]                            # with kit, shoes and helmet\nmass = "{rider.mass:g} kg"\n'
        f'critical_power = "275 W"\nw_prime = "18 kJ"\n\n'
        f'[bike]                             # with bottles\nmass = "{bike.mass:g} kg"\n'
        f'wheel_inertia = "{bike.wheel_inertia:g} kg*m^2"     # both wheels\n'
        f'wheel_circumference = "{bike.wheel_circumference:.3f} m"    # rolled out with the rider on\n'
        f"drivetrain_efficiency = {bike.drivetrain_efficiency:g}\n\n"
        f'[power_meter]\nlocation = "{location}"\nsides = "both"\nscale_sd = {meter.scale_sd:g}'
    )


def _air(air: Air) -> str:
    lines = [
        "[air]",
        f'temperature = "{(air.temperature or 0) - 273.15:.1f} degC"',
        f'pressure = "{(air.pressure or 0) / 100:.0f} hPa"                # at the venue',
        f"humidity = {air.humidity:g}",
    ]
    if air.wind_speed is not None and air.wind_from is not None:
        lines += [
            f'wind_speed = "{air.wind_speed:.1f} m/s"             # the weather report\'s, at 10 m',
            f"wind_from = {math.degrees(air.wind_from):.0f}",
        ]
    for reading in air.readings:
        minutes = round(reading.time / 60)
        lines += [
            "",
            "[[air.reading]]",
            f'time = "{minutes // 60:02d}:{minutes % 60:02d}"',
            f'temperature = "{(reading.temperature or 0) - 273.15:.1f} degC"',
        ]
    return "\n".join(lines)


def _venue(session: Session) -> str:
    venue = session.venue
    if venue is None:
        raise ValueError("a sample has a venue")
    lines = ["[venue]", f'kind = "{venue.kind.value}"', f'lap_length = "{venue.lap_length:.0f} m"']
    if venue.bend_radius is not None:
        lines += [
            f'bend_radius = "{venue.bend_radius:g} m"',
            f'transition_length = "{venue.transition_length:g} m"',
            f'mass_height = "{venue.mass_height:g} m"',
        ]
    return "\n".join(lines)


def _clock(seconds: int) -> str:
    return f"{seconds // 3600}:{seconds % 3600 // 60:02d}:{seconds % 60:02d}"


def _read_me(truths: Sequence[tuple[SampleDay, Truth]]) -> str:
    lines = [
        "# Sample sessions",
        "",
        "Invented days, written by `python -m ridercda.synthetic.samples`; the same seeds always give the",
        "same files. No such rider, place or day exists. What was put in, to hold an answer against:",
        "",
        "| folder | seed | true CdA [m²] | true Crr at 20 °C | power meter reads |",
        "| --- | --- | --- | --- | --- |",
    ]
    for sample, truth in truths:
        cda = ", ".join(f"{k} {v:.4f}" for k, v in truth.cda.items())
        crr = ", ".join(f"{v:.4f}" for v in truth.crr.values())
        lines.append(
            f"| `{sample.folder}` | {sample.seed} | {cda} | {crr} | {100 * truth.power_scale:+.2f} % |"
        )
    return "\n".join(lines) + "\n"


def main(arguments: Sequence[str] | None = None) -> int:
    """Write the samples and say where."""
    parser = argparse.ArgumentParser(
        prog="python -m ridercda.synthetic.samples",
        description="Write the sample sessions, each from its seed.",
    )
    parser.add_argument("folder", nargs="?", type=Path, default=Path("sample_sessions"))
    for folder in write_samples(parser.parse_args(arguments).folder):
        sys.stdout.write(f"{folder}\n")
    return 0


if __name__ == "__main__":
    sys.exit(main())
