"""How long a solve takes: ``python tests/benchmarks/bench_solve.py [--repeats 9]``.

Three tables: milliseconds for the reference day (12 runs of two laps, 1 Hz), compiled code cached; the same as a
ratio to statsmodels' MixedLM (Powell) on the table of 120 m blocks of the same day, which models far less; and
the growth with the number of samples. Times are medians; only ratios within one run mean much on another machine.
"""

from __future__ import annotations

import argparse
import sys
import time
import warnings
from collections.abc import Callable, Sequence
from dataclasses import replace

import numpy as np
import statsmodels.api as sm
from oracle import block_table
from statsmodels.tools.sm_exceptions import ConvergenceWarning

from ridercda.drag.prepare import prepare_day
from ridercda.drag.solve import solve
from ridercda.rides.repair import repair
from ridercda.synthetic.day import SyntheticDay, simulate_day
from ridercda.synthetic.spec import REFERENCE_DAY, DaySpec


def seconds(work: Callable[[], object], repeats: int) -> float:
    """Return the median time of a call, the first left out. [s]"""
    work()
    taken = []
    for _ in range(repeats):
        begin = time.perf_counter()
        work()
        taken.append(time.perf_counter() - begin)
    return float(np.median(taken))


def mixed_model(day: SyntheticDay, spec: DaySpec) -> Callable[[], object]:
    """Return the fit of a mixed model to the day's blocks: drag area per setup, Crr, a random slope by run."""
    y, x, run, air = block_table(day, spec)
    # Its optimiser wants columns of like size.
    scale = np.abs(x).max(axis=0)
    model = sm.MixedLM(y / y.std(), x / scale, groups=run, exog_re=air[:, None] / air.max())

    def fit() -> object:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore", ConvergenceWarning)  # no spread between runs: its boundary
            return model.fit(method="powell", reml=True)

    return fit


def at_rate(interval: float) -> DaySpec:
    """Return the reference day recorded at another rate."""
    return replace(REFERENCE_DAY, sensors=replace(REFERENCE_DAY.sensors, interval=interval))


def main(arguments: Sequence[str] | None = None) -> int:
    """Measure and print."""
    parser = argparse.ArgumentParser(description="Time the solver.")
    parser.add_argument("--repeats", type=int, default=9)
    parser.add_argument("--seed", type=int, default=1)
    given = parser.parse_args(arguments)
    day = simulate_day(REFERENCE_DAY, given.seed)
    rides = {name: repair(ride) for name, ride in day.rides.items()}
    prepared = prepare_day(day.session, rides)
    rows = {
        "repair the ride": seconds(lambda: repair(day.rides["day"]), given.repeats),
        "prepare the day": seconds(lambda: prepare_day(day.session, rides), given.repeats),
        "solve": seconds(lambda: solve(prepared), given.repeats),
        "MixedLM, Powell, 120 m blocks": seconds(mixed_model(day, REFERENCE_DAY), given.repeats),
    }
    out = sys.stdout.write
    out("| reference day | ms | against MixedLM |\n| --- | --- | --- |\n")
    for name, taken in rows.items():
        ratio = taken / rows["MixedLM, Powell, 120 m blocks"]
        out(f"| {name} | {1000 * taken:.0f} | {ratio:.2f} |\n")
    out("\n| samples | prepare, ms | solve, ms | solve, ms per 1000 samples |\n| --- | --- | --- | --- |\n")
    for interval in (1.0, 0.5, 0.2, 0.1):
        dense = simulate_day(at_rate(interval), given.seed)
        ready = prepare_day(dense.session, dense.rides)
        count = len(dense.rides["day"].time)
        preparing = seconds(lambda d=dense: prepare_day(d.session, d.rides), max(1, given.repeats // 3))
        solving = seconds(lambda r=ready: solve(r), max(1, given.repeats // 3))
        out(f"| {count} | {1000 * preparing:.0f} | {1000 * solving:.0f} | {1e6 * solving / count:.1f} |\n")
    return 0


if __name__ == "__main__":
    sys.exit(main())
