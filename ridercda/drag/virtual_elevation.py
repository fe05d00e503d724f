"""Virtual elevation: the height that explains the measured power at a trial CdA and Crr.

R. Chung, "Estimating CdA with a power meter" (slides, 2012): seen in excerpts; the elevation form is from memory.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from ridercda.drag.day import DayRun
from ridercda.drag.innovations import BEARING_CONSTANT, BEARING_SLOPE

FloatArray = npt.NDArray[np.float64]


def record_energies(run: DayRun, wind: tuple[float, float]) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return, per record, the energy left for air, tyres and height, and what a unit of CdA and of Crr takes of it.

    Parameters
    ----------
    run : DayRun
    wind : tuple of float
        Components the wind comes from, east and north, at the rider. [m/s]

    Returns
    -------
    left : ndarray, shape (n,)
        Work at the wheel less bearings and change of kinetic energy; NaN where power or speed is unknown. [J]
    by_cda : ndarray, shape (n,)
        [J/m^2]
    by_crr : ndarray, shape (n,)
        At the tyres' temperature. [J]
    """
    r = run.records
    speed, dt = r.speed, r.interval
    inertia = run.mass * r.path_ratio**2 + run.rotating_mass
    kinetic = 0.5 * inertia * (r.end_speed**2 - r.start_speed**2)
    wheel = np.where(r.power > 0, run.efficiency, 1.0) * r.power + r.lean_power
    bearings = (BEARING_CONSTANT + BEARING_SLOPE * speed) * speed
    left = (wheel - bearings) * dt - kinetic
    heading = np.nan_to_num(r.heading)
    along = wind[0] * np.sin(heading) + wind[1] * np.cos(heading)
    across = wind[0] * np.cos(heading) - wind[1] * np.sin(heading)
    u = r.path_ratio * speed + along
    by_cda = 0.5 * r.density * np.hypot(u, across) * u * r.path_ratio * speed * dt
    return left, by_cda, r.load * speed * dt


def virtual_elevation(
    run: DayRun, cda: float, crr: float, wind: tuple[float, float], gravity: float
) -> FloatArray:
    """Return the virtual elevation at the end of each record, from 0 at the run's start, shape (n,). [m]

    A record that is not usable adds nothing: the curve runs level over it.
    """
    left, by_cda, by_crr = record_energies(run, wind)
    weight = run.mass * gravity
    step = (left - cda * by_cda - crr * weight * by_crr) / weight
    return np.asarray(np.cumsum(np.where(run.records.usable & np.isfinite(step), step, 0.0)))
