"""Power recorded out of step with speed: shift it by whole records."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from ridercda.drag.day import Day


def shift_power(day: Day, records: int) -> Day:
    """Return the day with power moved `records` earlier (negative: later); ends without power are not usable."""
    runs = []
    for run in day.runs:
        r = run.records
        power = np.roll(r.power, -records)
        known = np.isfinite(np.roll(np.where(r.usable, r.power, np.nan), -records))
        if records > 0:
            known[-records:] = False
        elif records < 0:
            known[:-records] = False
        usable = r.usable & known
        moved = replace(r, power=np.where(usable, power, np.nan), usable=usable)
        runs.append(replace(run, records=moved))
    return replace(day, runs=tuple(runs))
