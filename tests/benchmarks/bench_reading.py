"""How long reading takes: ``python tests/benchmarks/bench_reading.py [--hours 6] [--repeats 5]``.

A ride at 1 Hz with a dozen fields is written as FIT and read: by the bare decoder (the frames alone, set as the
reader sets it: no processor, no checksum), by the decoder as it comes, and by `read_ride`, which gives arrays. Then the
same ride as TCX, GPX and text, the search for faults, a second open out of the cache, and the growth with the length
of the ride. Times are the best of several, in milliseconds; only ratios within one run mean much elsewhere.
"""

from __future__ import annotations

import argparse
import datetime as dt
import sys
import tempfile
import time
from collections.abc import Callable, Sequence
from pathlib import Path
from types import MappingProxyType

import fitdecode
import numpy as np

from ridercda.rides.format import ReadOptions
from ridercda.rides.reader import read_ride
from ridercda.rides.repair import repair
from ridercda.rides.ride import Ride
from ridercda.rides.store import RideCache
from ridercda.synthetic.fit_writer import fit_bytes


def invented_ride(hours: float) -> Ride:
    """Return a ride of noise about steady values, with a position on a circle."""
    rng = np.random.default_rng(11)
    n = round(3600 * hours)
    time = np.arange(n, dtype=float)
    speed = 10.0 + 0.5 * np.sin(time / 90.0) + 0.02 * rng.standard_normal(n)
    distance = np.cumsum(speed)
    turn = distance / 500.0
    return Ride(
        time=time,
        start=dt.datetime(2026, 5, 9, tzinfo=dt.UTC),
        channels=MappingProxyType(
            {
                "power": np.maximum(0.0, np.round(220.0 + 25.0 * rng.standard_normal(n))),
                "speed": speed,
                "distance": distance - distance[0],
                "latitude": 0.87 + 500.0 * np.sin(turn) / 6.37e6,
                "longitude": 0.14 + 500.0 * np.cos(turn) / 4.1e6,
                "altitude": 120.0 + 5.0 * np.sin(turn) + 0.1 * rng.standard_normal(n),
                "cadence": 1.5 + 0.02 * rng.standard_normal(n),
                "heart_rate": 2.3 + 0.02 * rng.standard_normal(n),
                "temperature": np.full(n, 293.15),
            }
        ),
    )


def best(work: Callable[[], object], repeats: int) -> float:
    """Return the least time of a call. [ms]"""
    times = []
    for _ in range(repeats):
        begin = time.perf_counter()
        work()
        times.append(time.perf_counter() - begin)
    return 1000.0 * min(times)


def bare_decoder(path: Path) -> int:
    """Iterate over the frames as cheaply as the decoder goes; return their number."""
    settings = {
        "processor": None,
        "check_crc": fitdecode.CrcCheck.DISABLED,
        "error_handling": fitdecode.ErrorHandling.IGNORE,
    }
    with fitdecode.FitReader(path.read_bytes(), **settings) as frames:
        return sum(1 for _ in frames)


def decoder_as_it_comes(path: Path) -> int:
    """Iterate over the frames with the decoder's own defaults; return their number."""
    with fitdecode.FitReader(path) as frames:
        return sum(1 for _ in frames)


def as_text(ride: Ride) -> str:
    """Return the ride as delimited text in SI, degrees for angles."""
    names = [name for name in ride.channels if name in ("power", "speed", "distance", "altitude")]
    columns = np.column_stack([ride.time, *(ride.channels[name] for name in names)])
    rows = "\n".join(",".join(f"{value:.3f}" for value in row) for row in columns)
    return f"time,{','.join(names)}\n{rows}\n"


def as_xml(ride: Ride) -> tuple[str, str]:
    """Return the ride as GPX and as TCX."""
    gpx = ['<?xml version="1.0"?><gpx xmlns="http://e.org/g"><trk><trkseg>']
    tcx = [
        '<?xml version="1.0"?><TrainingCenterDatabase xmlns="http://e.org/t"><Lap StartTime="2026-05-09T00:00:00Z"><Track>'
    ]
    channels = {name: values.tolist() for name, values in ride.channels.items()}
    for k in range(ride.time.size):
        moment = f"2026-05-09T{k // 3600:02d}:{k // 60 % 60:02d}:{k % 60:02d}Z"
        lat, lon = np.degrees(channels["latitude"][k]), np.degrees(channels["longitude"][k])
        gpx.append(
            f'<trkpt lat="{lat:.7f}" lon="{lon:.7f}"><ele>{channels["altitude"][k]:.1f}</ele><time>{moment}</time>'
            f"<extensions><power>{channels['power'][k]:.0f}</power></extensions></trkpt>"
        )
        tcx.append(
            f"<Trackpoint><Time>{moment}</Time><Position><LatitudeDegrees>{lat:.7f}</LatitudeDegrees><LongitudeDegrees>"
            f"{lon:.7f}</LongitudeDegrees></Position><AltitudeMeters>{channels['altitude'][k]:.1f}</AltitudeMeters>"
            f"<DistanceMeters>{channels['distance'][k]:.2f}</DistanceMeters><HeartRateBpm><Value>140</Value></HeartRateBpm>"
            f"<Cadence>90</Cadence><Extensions><TPX><Speed>{channels['speed'][k]:.3f}</Speed><Watts>"
            f"{channels['power'][k]:.0f}</Watts></TPX></Extensions></Trackpoint>"
        )
    return "".join(gpx) + "</trkseg></trk></gpx>", "".join(tcx) + "</Track></Lap></TrainingCenterDatabase>"


def main(arguments: Sequence[str] | None = None) -> int:
    """Print the tables."""
    parser = argparse.ArgumentParser(description="How long reading takes.")
    parser.add_argument("--hours", type=float, default=6.0)
    parser.add_argument("--repeats", type=int, default=5)
    given = parser.parse_args(arguments)
    ride = invented_ride(min(given.hours, 23.0))
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        out = [f"{ride.time.size} records, best of {given.repeats}"]
        fit = folder / "ride.fit"
        fit.write_bytes(fit_bytes(ride))
        bare = best(lambda: bare_decoder(fit), given.repeats)
        own = best(lambda: read_ride(fit), given.repeats)
        defaults = best(lambda: decoder_as_it_comes(fit), given.repeats)
        out.append(f"bare decoder            {bare:8.0f} ms")
        out.append(
            f"read_ride, FIT          {own:8.0f} ms   {own / bare:.2f} x the bare decoder (aim: 1.3 or less)"
        )
        out.append(f"decoder as it comes     {defaults:8.0f} ms   {defaults / bare:.2f} x the bare decoder")
        raw = read_ride(fit)
        gpx, tcx = as_xml(ride)
        for suffix, text in (("tcx", tcx), ("gpx", gpx), ("csv", as_text(ride))):
            path = folder / f"ride.{suffix}"
            path.write_text(text)
            out.append(
                f"read_ride, {suffix.upper()}          {best(lambda path=path: read_ride(path), given.repeats):8.0f} ms"
            )
        out.append(f"repair                  {best(lambda: repair(raw), given.repeats):8.0f} ms")
        cache = RideCache(folder / "cache")
        cache.put(raw.sha256, ReadOptions(), raw)
        kept = best(lambda: cache.get(raw.sha256, ReadOptions()), given.repeats)
        out.append(f"out of the cache        {kept:8.1f} ms   {own / kept:.0f} times as fast as reading")
        for share in (0.1, 1.0):
            part = invented_ride(ride.time.size / 3600.0 * share)
            fit.write_bytes(fit_bytes(part))
            spent = best(lambda: repair(read_ride(fit)), given.repeats)
            out.append(f"read and repair, {share:4.0%}  {spent:8.0f} ms   {part.time.size} records")
    sys.stdout.write("\n".join(out) + "\n")
    return 0


if __name__ == "__main__":
    sys.exit(main())
