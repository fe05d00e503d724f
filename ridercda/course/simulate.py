"""Racing riders over a course: times, splits along the way, and one rider's ride in full."""

from __future__ import annotations

import os
from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, field

import numpy as np
import numpy.typing as npt

from ridercda.course import blocks
from ridercda.course.air_along import RaceAir
from ridercda.course.blocks import LANES, RIDER_ROWS, SEGMENT_COLUMNS, race_block
from ridercda.course.cutting import HELD_BACK, POSITION, SECONDS, SPEED_SQUARED, cut_course
from ridercda.course.route import Course
from ridercda.course.stepping import YAW_POINTS, yaw_at
from ridercda.errors import CourseError
from ridercda.physics.wind import axial_area
from ridercda.watch import NO_WATCH, Watch

FloatArray = npt.NDArray[np.float64]
IntArray = npt.NDArray[np.int64]

BRAKING = 2.5  # [m s⁻²] before corners and at descent limits: a quarter of g; common practice
START_GRIP = 0.33  # of the weight: 55 % on the rear wheel, 0.6 of that before it slips; common practice
TOLERANCE = 1e-3  # of a step's own error estimate; the time then misses by some 1e-5 of itself (tests)
CHUNK_STEPS = 2_000_000  # rider steps to a call: some 30 ms, so that stopping and repainting are prompt
NO_TABLES = np.empty((0, YAW_POINTS))


@dataclass(frozen=True, slots=True, eq=False)
class Riders:
    """Riders to be raced side by side; every array has shape (m,) or is a number for all.

    Parameters
    ----------
    cda : array_like
        Drag area at zero yaw, wheel rotation included; the scale of a yaw table where there is one. [m²]
    crr : array_like
        Coefficient of rolling resistance, at the race's temperature. [1]
    mass, moving_mass : array_like
        All-up, and with what the wheels' spin adds. [kg]
    drive : array_like
        Watts at the wheel for each watt of the plan. [1]
    wind_north, wind_east : array_like
        Components of where the wind comes from, at the rider's height. [m s⁻¹]
    fallback_cda : array_like, optional
        Drag area where the position is not held; by default `cda`. [m²]
    sit_speed : array_like
        Below it the fallback position is taken. [m s⁻¹]
    shape, fallback_shape : array_like
        Row of `tables`.
    tables : ndarray, shape (tables, YAW_POINTS)
        From `yaw_shape`; no rows where every rider has a plain drag area.
    """

    cda: npt.ArrayLike
    crr: npt.ArrayLike
    mass: npt.ArrayLike
    moving_mass: npt.ArrayLike
    drive: npt.ArrayLike = 1.0
    wind_north: npt.ArrayLike = 0.0
    wind_east: npt.ArrayLike = 0.0
    fallback_cda: npt.ArrayLike | None = None
    sit_speed: npt.ArrayLike = 0.0
    shape: npt.ArrayLike = 0.0
    fallback_shape: npt.ArrayLike = 0.0
    tables: FloatArray = field(default_factory=lambda: NO_TABLES)

    def rows(self, gravity: float) -> FloatArray:
        """Return the compiled loops' table of riders, shape (RIDER_ROWS, m)."""
        fallback = self.cda if self.fallback_cda is None else self.fallback_cda
        values = np.broadcast_arrays(
            *(
                np.atleast_1d(np.asarray(v, float))
                for v in (
                    self.cda,
                    fallback,
                    self.sit_speed,
                    self.crr,
                    self.mass,
                    self.drive,
                    self.wind_north,
                    self.wind_east,
                    self.moving_mass,
                    self.shape,
                    self.fallback_shape,
                )
            )
        )
        cda, fallback, sit_speed, crr, mass, drive, north, east, moving, shape, fallback_shape = values
        rows = np.empty((RIDER_ROWS, cda.size))
        rows[blocks.AREA] = cda / moving
        rows[blocks.FALLBACK] = fallback / moving
        rows[blocks.SIT_SPEED] = sit_speed
        rows[blocks.CRR] = crr
        rows[blocks.GRIP] = 2.0 * START_GRIP * mass * gravity / moving
        rows[blocks.DRIVE] = 2.0 * drive / moving
        rows[blocks.NORTH] = north
        rows[blocks.EAST] = east
        rows[blocks.PER_MASS] = 2.0 / moving
        rows[blocks.WEIGHT] = 2.0 * mass * gravity / moving
        rows[blocks.SHAPE] = shape
        rows[blocks.FALLBACK_SHAPE] = fallback_shape
        return rows


def yaw_shape(yaw: npt.ArrayLike, cxa: npt.ArrayLike) -> FloatArray:
    """Return a yaw table as the simulation reads it, relative to its area at zero yaw.

    Parameters
    ----------
    yaw : array_like, shape (n,)
        Increasing, 0 to π. [rad]
    cxa : array_like, shape (n,)
        Axial force / (½ρV²), positive at the first angle. [m²]

    Returns
    -------
    ndarray, shape (YAW_POINTS,)

    Raises
    ------
    CourseError
        If the area at zero yaw is not positive.
    """
    at = yaw_at(np.linspace(0.0, 2.0, YAW_POINTS))
    area = axial_area(at, yaw, cxa)
    if not area[0] > 0:
        raise CourseError(f"a yaw table needs a positive area at its first angle, not {area[0]:g} m²")
    return np.asarray(area / area[0])


def plain_shape() -> FloatArray:
    """Return the yaw table a plain drag area stands for: cos(yaw), shape (YAW_POINTS,)."""
    return np.cos(yaw_at(np.linspace(0.0, 2.0, YAW_POINTS)))


@dataclass(frozen=True, slots=True, eq=False)
class Trace:
    """One rider's ride in full; entry k is the end of step k, entry 0 the start. Arrays are read-only."""

    distance: FloatArray  # shape (k + 1,) [m]
    time: FloatArray  # shape (k + 1,) [s]
    speed: FloatArray  # shape (k + 1,) [m/s]
    segment: IntArray  # shape (k,), the course's stretch of each step
    power: FloatArray  # shape (k,), at the meter, meaned over the step [W]
    braking: FloatArray  # shape (k,), taken by the brakes at the wheel, meaned over the step [W]

    def __post_init__(self) -> None:
        """Make the arrays read-only."""
        for name in self.__slots__:
            getattr(self, name).setflags(write=False)

    @property
    def finish(self) -> float:
        """Time for the course; infinite if the rider comes to a stand. [s]"""
        return float(self.time[-1])

    @property
    def mean_power(self) -> float:
        """Over time, at the meter. [W]"""
        return float(np.sum(self.power * np.diff(self.time)) / self.time[-1])


@dataclass(frozen=True, slots=True, eq=False)
class Race:
    """A course on a day, cut into steps: ready for any number of riders. Arrays are read-only.

    Parameters
    ----------
    course : Course
        The route.
    air : RaceAir
        Density along it; the wind comes with the riders.
    watts : ndarray, shape (plans, n)
        Power plans at the meter, by stretch. [W]
    segments, steps : ndarray
        The compiled loops' tables.
    positions : ndarray, shape (steps,)
        Where each step ends. [m]
    trace : Trace
        The ride of the rider for whom it was cut.
    """

    course: Course
    air: RaceAir
    watts: FloatArray
    segments: FloatArray
    steps: FloatArray
    positions: FloatArray
    trace: Trace


def prepare_race(
    course: Course,
    air: RaceAir,
    watts: npt.ArrayLike,
    typical: Riders,
    *,
    sits_up: npt.ArrayLike = False,
    braking: float = BRAKING,
    tolerance: float = TOLERANCE,
) -> Race:
    """Cut a course into steps by riding it once.

    Parameters
    ----------
    course : Course
        The route.
    air : RaceAir
        Density along it.
    watts : array_like, shape (n,), () or (plans, n)
        Power at the meter on each stretch; the first plan cuts the course. [W]
    typical : Riders
        The first of them cuts the course.
    sits_up : array_like of bool, shape (n,) or ()
        Stretches on which every rider takes the fallback position.
    braking : float
        Deceleration before corners. [m s⁻²]
    tolerance : float
        Of a step's own estimate of its error in time.

    Raises
    ------
    CourseError
        If a power is negative or not finite.
    """
    n = course.lengths.size
    plans = np.atleast_2d(np.asarray(watts, float))
    plans = np.ascontiguousarray(np.broadcast_to(plans, (plans.shape[0], n)))
    if not (np.all(np.isfinite(plans)) and np.all(plans >= 0)):
        raise CourseError(f"course {course.id!r}: a power plan needs finite watts of 0 or more")
    segments = np.zeros((n, SEGMENT_COLUMNS))
    segments[:, blocks.SINE] = course.sine
    segments[:, blocks.COSINE] = course.cosine
    segments[:, blocks.COS_HEADING] = np.cos(course.heading)
    segments[:, blocks.SIN_HEADING] = np.sin(course.heading)
    segments[:, blocks.SHELTER] = course.shelter
    segments[:, blocks.DENSITY] = air.density
    segments[:, blocks.CRR_FACTOR] = course.crr_factor
    segments[:, blocks.SITS_UP] = np.asarray(sits_up, float)
    rider = np.ascontiguousarray(typical.rows(course.gravity)[:, 0])
    steps, record = cut_course(
        rider,
        plans[0],
        segments,
        typical.tables,
        course.lengths,
        course.speed_limit**2,
        braking,
        course.start_speed,
        tolerance,
    )
    trace = _trace(course, rider, plans[0], steps, record)
    for array in (plans, segments, steps):
        array.setflags(write=False)
    return Race(course, air, plans, segments, steps, record[:, POSITION], trace)


def race_times(
    race: Race, riders: Riders, *, plan_of: npt.ArrayLike = 0, watch: Watch = NO_WATCH
) -> FloatArray:
    """Return the riders' times for the course, shape (m,). [s]

    Parameters
    ----------
    race : Race
        The course, cut into steps.
    riders : Riders
        m of them.
    plan_of : array_like, shape (m,) or ()
        Row of the race's plans that each follows.
    watch : Watch
        Told of progress; may stop the work.

    Returns
    -------
    ndarray, shape (m,)
        Infinite for a rider who comes to a stand. [s]
    """
    return race_splits(race, riders, [race.course.distance], plan_of=plan_of, watch=watch)[:, 0]


def race_splits(
    race: Race,
    riders: Riders,
    distances: npt.ArrayLike,
    *,
    plan_of: npt.ArrayLike = 0,
    watch: Watch = NO_WATCH,
) -> FloatArray:
    """Return the riders' times at places along the course.

    Parameters
    ----------
    race : Race
        The course, cut into steps.
    riders : Riders
        m of them.
    distances : array_like, shape (k,)
        Increasing; each stands for the nearest end of a step (an edge of the course is one). [m]
    plan_of : array_like, shape (m,) or ()
        Row of the race's plans that each follows.
    watch : Watch
        Told of progress; may stop the work.

    Returns
    -------
    ndarray, shape (m, k)
        Infinite from where a rider comes to a stand. [s]
    """
    rows = riders.rows(race.course.gravity)
    m = rows.shape[1]
    plans = np.ascontiguousarray(np.broadcast_to(np.asarray(plan_of, np.int64), (m,)))
    marks, place = _marks(race.positions, np.atleast_1d(np.asarray(distances, float)))
    times = np.empty((m, int(marks.max()) + 1))
    if not np.isfinite(race.trace.finish):
        times[:] = np.inf  # the steps end where the rider who cut them came to a stand
        return times[:, place]

    def run(part: slice) -> None:
        for start in range(part.start, part.stop, LANES):
            block = slice(start, min(start + LANES, part.stop))
            race_block(
                np.ascontiguousarray(rows[:, block]),
                plans[block],
                race.watts,
                race.segments,
                riders.tables,
                race.steps,
                race.course.start_speed,
                marks,
                times[block],
            )

    parts = list(_chunks(m, race.steps.shape[0]))
    if len(parts) == 1:
        run(parts[0])
        return times[:, place]
    with ThreadPoolExecutor(min(len(parts), os.cpu_count() or 1)) as pool:
        jobs = [pool.submit(run, part) for part in parts]
        try:
            for done, job in enumerate(jobs, start=1):
                job.result()
                watch.step(done, len(jobs))
        except BaseException:
            pool.shutdown(cancel_futures=True)
            raise
    return times[:, place]


def _chunks(riders: int, steps: int) -> Iterator[slice]:
    """Yield spans of riders, whole blocks each, that take a call of bounded length."""
    size = max(1, CHUNK_STEPS // (steps * LANES)) * LANES
    for start in range(0, riders, size):
        yield slice(start, min(start + size, riders))


def _marks(positions: FloatArray, distances: FloatArray) -> tuple[IntArray, IntArray]:
    """Return the column of the splits for each step, -1 for none, and the column of each distance."""
    right = np.clip(np.searchsorted(positions, distances), 1, positions.size - 1) if positions.size > 1 else 0
    left_nearer = (
        distances - positions[right - 1] < positions[right] - distances if positions.size > 1 else False
    )
    nearest = np.where(left_nearer, np.asarray(right) - 1, right)
    chosen, place = np.unique(np.broadcast_to(nearest, distances.shape), return_inverse=True)
    marks = np.full(positions.size, -1, dtype=np.int64)
    marks[chosen] = np.arange(chosen.size)
    return marks, place.astype(np.int64)


def _trace(
    course: Course, rider: FloatArray, watts: FloatArray, steps: FloatArray, record: FloatArray
) -> Trace:
    """Return the ride of the rider who cut the course."""
    segment = steps[:, blocks.SEGMENT].astype(np.int64)
    time = np.concatenate([[0.0], record[:, SECONDS]])
    speed = np.concatenate([[course.start_speed], np.sqrt(record[:, SPEED_SQUARED])])
    # Watts at the wheel for the push held back over half the moving mass, at the mean speed of the step.
    per_push = steps[:, blocks.LENGTH] / np.diff(time) / rider[blocks.PER_MASS]
    planned = watts[segment] * rider[blocks.DRIVE] / rider[blocks.PER_MASS]
    at_wheel = np.minimum(planned, rider[blocks.GRIP] * per_push)
    held = record[:, HELD_BACK] * per_push
    kept = np.maximum(at_wheel - held, 0.0)
    power = kept * rider[blocks.PER_MASS] / rider[blocks.DRIVE]
    distance = np.concatenate([[0.0], record[:, POSITION]])
    return Trace(distance, time, speed, segment, power, np.maximum(held - at_wheel, 0.0))
