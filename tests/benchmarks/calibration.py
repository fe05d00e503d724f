"""The calibration study: ``python tests/benchmarks/calibration.py [--days 200] [--scenario ID ...]``.

Invents days of every scenario, solves each, and holds the answers against the truth and against an oracle
that knows the road and the mean wind. Writes `calibration.md` (the table), `calibration.csv` (its numbers) and
`calibration-shots.csv` (every figure of every day) into the output folder. Days are numbered from
--first-seed, so a run can be repeated to the digit; 200 days a scenario are for work, 2000 for a table to publish.
"""

from __future__ import annotations

import argparse
import multiprocessing
import os
import sys
import time
from collections.abc import Sequence
from concurrent.futures import ProcessPoolExecutor
from functools import partial
from pathlib import Path

from oracle import consult
from scenarios import SCENARIOS, scenario
from scores import DayScore, Row, score, tally
from solved_day import solve_day
from table import line, markdown, write

from ridercda.synthetic.day import simulate_day


def run_day(scenario_id: str, seed: int) -> DayScore:
    """Invent, solve and score one day."""
    spec = scenario(scenario_id).day(seed)
    day = simulate_day(spec, seed)
    return score(scenario_id, seed, day.truth, solve_day(day), consult(day, spec))


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the study."""
    parser = argparse.ArgumentParser(description="Hold the solver against invented days.")
    parser.add_argument("--days", type=int, default=200, help="days a scenario")
    parser.add_argument("--first-seed", type=int, default=0)
    parser.add_argument("--processes", type=int, default=2)
    parser.add_argument("--scenario", nargs="*", default=[s.id for s in SCENARIOS], metavar="ID")
    parser.add_argument("--out", type=Path, default=Path(__file__).parent / "results")
    given = parser.parse_args(arguments)
    # The days are spread over processes; threads within one would only get in each other's way. Spawned
    # processes read this before they load the linear algebra.
    for threads in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"):
        os.environ.setdefault(threads, "1")
    rows: list[Row] = []
    everything: list[DayScore] = []
    seeds = range(given.first_seed, given.first_seed + given.days)
    with ProcessPoolExecutor(given.processes, multiprocessing.get_context("spawn")) as pool:
        for scenario_id in given.scenario:
            begin = time.perf_counter()
            days = list(pool.map(partial(run_day, scenario_id), seeds, chunksize=2))
            rows.append(tally(days))
            everything += days
            sys.stderr.write(f"{scenario_id}: {time.perf_counter() - begin:.0f} s\n{line(rows[-1])}\n")
            write(given.out, rows, everything)  # what is done is not lost when the rest is stopped
    sys.stdout.write(markdown(rows))
    return 0


if __name__ == "__main__":
    sys.exit(main())
