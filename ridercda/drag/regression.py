"""The published regression on virtual elevation, beside the full model as a cross-check.

All runs share one profile; CdA per setup and Crr per tyre set are those with which the virtual elevations of all laps
agree, by least squares over blocks of some seconds. Wind is the report's or none; gusts are noise. In wind it reads
absolute CdA low and Crr high, because the measured speed answers the gusts.
"""

from __future__ import annotations

from collections.abc import Sequence
from types import MappingProxyType

import numpy as np
import numpy.typing as npt

from ridercda.drag.day import Day
from ridercda.drag.estimate import Difference, Regression, SolveWarning
from ridercda.drag.profile import profile_evidence, venue_nodes
from ridercda.drag.virtual_elevation import record_energies

FloatArray = npt.NDArray[np.float64]

BLOCK = 10.0  # [s]
EDGE = 2  # records beside a gap, whose speed at the ends is not known well
BLOCK_SD = 0.05  # of a block's energy over its distance, as a slope: only weighs the profile's smoothness
FAR_APART = 3.0  # standard errors of the full model's difference


def regress(day: Day) -> Regression | None:
    """Return the regression's figures; None where the day holds too little or cannot tell CdA from Crr."""
    nodes = venue_nodes(day)
    setups = sorted({run.setup for run in day.runs})
    free_tyres = [t for t, tyres in enumerate(day.tyres) if tyres.crr is None or (tyres.crr_sd or 0.0) > 0]
    columns = len(setups) + len(free_tyres)
    slopes = 0 if day.flat else nodes.count
    normal = np.zeros((columns + slopes, columns + slopes))
    pull = np.zeros(columns + slopes)
    rows: list[FloatArray] = []
    targets: list[FloatArray] = []
    weights: list[FloatArray] = []
    for run in day.runs:
        r = run.records
        left, by_cda, by_crr = record_energies(run, run.wind_from_report or (0.0, 0.0))
        weight = run.mass * day.gravity
        use = r.usable & np.isfinite(left)
        if not day.flat:
            use = _inside(use)
        block = _blocks(use, r.interval, 0.0 if day.flat else BLOCK)
        count = int(block.max()) + 1 if block.size else 0
        if count < 1:
            continue
        kept = block >= 0
        design = np.zeros((r.size, columns + slopes))
        design[:, setups.index(run.setup)] = by_cda
        known = day.tyres[run.tyres]
        softness = 1.0 + known.temperature_coefficient * r.tyre_temperature
        if run.tyres in free_tyres:
            design[:, len(setups) + free_tyres.index(run.tyres)] = weight * by_crr * softness
        else:
            left = left - (known.crr or 0.0) * weight * by_crr * softness
        if slopes:
            acts, share = nodes.place(np.nan_to_num(r.position))
            climb = (weight * r.direction * r.path_ratio * np.nan_to_num(r.speed) * r.interval)[
                :, None
            ] * share
            np.add.at(design, (np.arange(r.size)[:, None], columns + acts), climb)
        summed = np.zeros((count, columns + slopes))
        np.add.at(summed, block[kept], design[kept])
        energy = np.bincount(block[kept], left[kept], minlength=count)
        time = np.bincount(block[kept], r.interval[kept], minlength=count)
        travelled = np.bincount(block[kept], (r.speed * r.interval)[kept], minlength=count)
        size = BLOCK_SD * weight * np.sqrt(np.maximum(travelled, 1.0) * 10.0 * BLOCK)
        rows.append(summed / size[:, None])
        targets.append(energy / size)
        weights.append(size / np.maximum(time, 1e-9))
    if not rows:
        return None
    design, target = np.concatenate(rows), np.concatenate(targets)
    normal += design.T @ design
    pull += design.T @ target
    if slopes:
        precision, mean = profile_evidence(day, nodes)
        scale = 1e-4  # the profile's prior only settles what no lap shows
        normal[columns:, columns:] += scale * precision
        pull[columns:] += scale * precision @ mean
    size = np.sqrt(np.diag(normal))
    if np.any(size == 0):
        return None
    scaled = normal / np.outer(size, size)
    if np.linalg.cond(scaled) > 1e12:
        return None
    found = np.linalg.solve(scaled, pull / size) / size
    rest = (target - design @ found) * np.concatenate(weights)
    crr = {t.id: float(t.crr or 0.0) for t in day.tyres}
    crr.update({day.tyres[t].id: float(found[len(setups) + i]) for i, t in enumerate(free_tyres)})
    return Regression(
        MappingProxyType({day.setups[s]: float(found[i]) for i, s in enumerate(setups)}),
        MappingProxyType(crr),
        float(np.sqrt(np.mean(rest**2))),
    )


def disagreement(regression: Regression | None, differences: Sequence[Difference]) -> list[SolveWarning]:
    """Return a warning where the regression's difference lies far from the full model's, with the likely cause."""
    if regression is None:
        return []
    for difference in differences:
        if difference.cda is None or difference.setup not in regression.cda:
            continue
        other = regression.cda[difference.setup] - regression.cda[difference.against]
        if abs(other - difference.cda.value) > FAR_APART * difference.cda.standard_error:
            return [
                SolveWarning(
                    "regression-disagrees",
                    f"The plain regression on virtual elevation puts {difference.setup} at {other:+.4f} m² against "
                    f"{difference.against}, the full model at {difference.cda.value:+.4f} m². The regression takes "
                    "gusts and unequal wind between runs for drag; where they are strong, trust the full model.",
                )
            ]
    return []


def _inside(use: npt.NDArray[np.bool_]) -> npt.NDArray[np.bool_]:
    """Return the usable records that are not beside a gap."""
    kept = use.copy()
    for shift in range(1, EDGE + 1):
        kept[shift:] &= use[:-shift]
        kept[:-shift] &= use[shift:]
        kept[:shift] = False
        kept[-shift:] = False
    return kept


def _blocks(use: npt.NDArray[np.bool_], interval: FloatArray, length: float) -> npt.NDArray[np.int64]:
    """Return the block of each record, -1 outside; a block never spans a gap."""
    block = np.full(use.size, -1, dtype=np.int64)
    number = -1
    filled = np.inf
    for k in range(use.size):
        if not use[k]:
            filled = np.inf
            continue
        if filled >= length:
            number += 1
            filled = 0.0
        block[k] = number
        filled += interval[k]
    return block
