"""A course as the simulation sees it: stretches on which grade, heading, surface and limits are constant."""

from __future__ import annotations

import dataclasses
from dataclasses import dataclass, field

import numpy as np
import numpy.typing as npt

from ridercda.errors import CourseError
from ridercda.physics.air import STANDARD_GRAVITY
from ridercda.physics.track import TrackShape

FloatArray = npt.NDArray[np.float64]

TURN_LENGTH = 5.0  # [m] on either side of a turning point, ridden at its speed


@dataclass(frozen=True, slots=True)
class CourseNote:
    """How a course was read or repaired; codes are stable."""

    code: str
    message: str


@dataclass(frozen=True, slots=True, eq=False)
class Course:
    """A race route: n stretches between n + 1 edges. Arrays are read-only.

    Parameters
    ----------
    id, name : str
        As in the session.
    edges : ndarray, shape (n + 1,)
        Distance along the road, from 0, strictly increasing. [m]
    grade : ndarray, shape (n,)
        Rise over horizontal run. [1]
    heading : ndarray, shape (n,)
        Of travel, clockwise from true north. [rad]
    altitude : ndarray, shape (n + 1,)
        Above sea level at the edges. [m]
    curvature : ndarray, shape (n,)
        Of the wheels' path in the plane, 0 or more. [m⁻¹]
    crr_factor : ndarray, shape (n,)
        Crr of the surface over that of the venue. [1]
    shelter : ndarray, shape (n,)
        Share of the wind that reaches the rider. [1]
    speed_limit : ndarray, shape (n,)
        Of corners and descents; infinite where there is none. [m s⁻¹]
    latitude, longitude : ndarray, shape (n + 1,) or (0,)
        Of the edges, where the course has a place on the map. [rad]
    start_speed : float
        0 from a standing start. [m s⁻¹]
    gravity : float
        Local gravity. [m s⁻²]
    track : TrackShape, optional
        An indoor track: riders lean through its bends, and there is no wind.
    mass_height : float
        Of rider and bike above the ground, for the lean. [m]
    notes : tuple of CourseNote
        How it was read and repaired.
    """

    id: str
    name: str
    edges: FloatArray
    grade: FloatArray
    heading: FloatArray
    altitude: FloatArray
    curvature: FloatArray
    crr_factor: FloatArray
    shelter: FloatArray
    speed_limit: FloatArray
    latitude: FloatArray = field(default_factory=lambda: np.empty(0))
    longitude: FloatArray = field(default_factory=lambda: np.empty(0))
    start_speed: float = 0.0
    gravity: float = STANDARD_GRAVITY
    track: TrackShape | None = None
    mass_height: float = 1.1
    notes: tuple[CourseNote, ...] = ()

    def __post_init__(self) -> None:
        """Check the shapes and make the arrays read-only."""
        n = self.edges.size - 1
        if n < 1:
            raise CourseError(f"course {self.id!r} has no length: it needs at least one stretch")
        steps = np.diff(self.edges)
        if not (np.all(np.isfinite(self.edges)) and np.all(steps > 0)):
            raise CourseError(f"course {self.id!r}: distance must grow from edge to edge")
        for name in ("grade", "heading", "curvature", "crr_factor", "shelter", "speed_limit"):
            values = getattr(self, name)
            if values.shape != (n,):
                raise CourseError(f"course {self.id!r}: {name} has {values.shape} values for {n} stretches")
            if np.any(np.isnan(values)):
                raise CourseError(f"course {self.id!r}: {name} is missing in places")
        for name in ("altitude", "latitude", "longitude"):
            values = getattr(self, name)
            if values.shape != (n + 1,) and (name == "altitude" or values.size):
                raise CourseError(f"course {self.id!r}: {name} has {values.shape} values for {n + 1} edges")
        for name in ("edges", "grade", "heading", "altitude", "curvature", "crr_factor", "shelter"):
            getattr(self, name).setflags(write=False)
        for values in (self.speed_limit, self.latitude, self.longitude):
            values.setflags(write=False)

    @property
    def lengths(self) -> FloatArray:
        """Length of each stretch along the road, shape (n,). [m]"""
        return np.diff(self.edges)

    @property
    def distance(self) -> float:
        """From start to finish along the road. [m]"""
        return float(self.edges[-1])

    @property
    def climb(self) -> float:
        """Metres climbed in all. [m]"""
        rise = np.diff(self.altitude)
        return float(rise[rise > 0].sum())

    @property
    def sine(self) -> FloatArray:
        """Sine of the slope, shape (n,). [1]"""
        return np.asarray(self.grade / np.sqrt(1.0 + self.grade**2))

    @property
    def cosine(self) -> FloatArray:
        """Cosine of the slope, shape (n,). [1]"""
        return np.asarray(1.0 / np.sqrt(1.0 + self.grade**2))

    def with_edges(self, distances: npt.ArrayLike) -> Course:
        """Return the course with further edges, at distances along the road; it rides the same.

        Parameters
        ----------
        distances : array_like, shape (k,)
            Where to cut; those outside the course or within 1 mm of an edge are passed over. [m]
        """
        wanted = np.unique(np.asarray(distances, float))
        wanted = wanted[(wanted > 0) & (wanted < self.distance)]
        near = np.searchsorted(self.edges, wanted)
        apart = np.minimum(self.edges[near] - wanted, wanted - self.edges[near - 1])
        wanted = wanted[apart > 1e-3]
        if not wanted.size:
            return self
        edges = np.union1d(self.edges, wanted)
        source = np.searchsorted(self.edges, edges[:-1], side="right") - 1
        placed = self.latitude.size > 0
        return dataclasses.replace(
            self,
            edges=edges,
            altitude=np.interp(edges, self.edges, self.altitude),
            latitude=np.interp(edges, self.edges, self.latitude) if placed else self.latitude,
            longitude=np.interp(edges, self.edges, self.longitude) if placed else self.longitude,
            **{
                name: getattr(self, name)[source]
                for name in ("grade", "heading", "curvature", "crr_factor", "shelter", "speed_limit")
            },
        )


def course_of_stretches(
    course_id: str,
    lengths: npt.ArrayLike,
    grade: npt.ArrayLike = 0.0,
    heading: npt.ArrayLike = 0.0,
    *,
    name: str = "",
    start_altitude: float = 0.0,
    curvature: npt.ArrayLike = 0.0,
    crr_factor: npt.ArrayLike = 1.0,
    shelter: npt.ArrayLike = 1.0,
    speed_limit: npt.ArrayLike = np.inf,
    start_speed: float = 0.0,
    gravity: float = STANDARD_GRAVITY,
    notes: tuple[CourseNote, ...] = (),
) -> Course:
    """Return a course built by hand.

    Parameters
    ----------
    course_id, name : str
        As in the session.
    lengths : array_like, shape (n,)
        Along the road, positive. [m]
    grade, heading, curvature, crr_factor, shelter, speed_limit : array_like, shape (n,) or ()
        As in `Course`.
    start_altitude : float
        Above sea level at the start. [m]
    start_speed : float
        0 from a standing start. [m s⁻¹]
    gravity : float
        Local gravity. [m s⁻²]
    notes : tuple of CourseNote
        To go with it.

    Raises
    ------
    CourseError
        If there is no stretch or a length is not positive.
    """
    length = np.atleast_1d(np.asarray(lengths, float))
    if length.size == 0 or not np.all(length > 0):
        raise CourseError(
            f"course {course_id!r}: every stretch needs a positive length, not "
            f"{np.min(length, initial=0.0):g} m"
        )

    def along(values: npt.ArrayLike) -> FloatArray:
        return np.array(np.broadcast_to(np.asarray(values, float), length.shape))

    slope = along(grade)
    rise = length * slope / np.sqrt(1.0 + slope**2)
    return Course(
        id=course_id,
        name=name or course_id,
        edges=np.concatenate([[0.0], np.cumsum(length)]),
        grade=slope,
        heading=along(heading),
        altitude=start_altitude + np.concatenate([[0.0], np.cumsum(rise)]),
        curvature=along(curvature),
        crr_factor=along(crr_factor),
        shelter=along(shelter),
        speed_limit=along(speed_limit),
        start_speed=start_speed,
        gravity=gravity,
        notes=notes,
    )


def in_laps(course: Course, laps: int) -> Course:
    """Return a circuit ridden several times.

    Parameters
    ----------
    course : Course
        Once round; it ends where it starts.
    laps : int
        1 or more.

    Raises
    ------
    CourseError
        If laps is below 1, or the course does not come back to the altitude of its start.
    """
    if laps < 1:
        raise CourseError(f"course {course.id!r}: laps must be 1 or more, not {laps}")
    if laps == 1:
        return course
    gap = float(course.altitude[-1] - course.altitude[0])
    if abs(gap) > 1.0:
        raise CourseError(
            f"course {course.id!r} ends {gap:+.0f} m above its start, so it cannot be ridden {laps} times; "
            "use laps = 1, or a file of one whole circuit"
        )

    def tile(values: FloatArray) -> FloatArray:
        return np.tile(values, laps)

    def join(values: FloatArray) -> FloatArray:
        return np.concatenate([np.tile(values[:-1], laps), values[-1:]]) if values.size else values

    offsets = np.repeat(np.arange(laps) * course.distance, course.lengths.size)
    return dataclasses.replace(
        course,
        edges=np.concatenate([tile(course.edges[:-1]) + offsets, [laps * course.distance]]),
        altitude=join(course.altitude),
        latitude=join(course.latitude),
        longitude=join(course.longitude),
        grade=tile(course.grade),
        heading=tile(course.heading),
        curvature=tile(course.curvature),
        crr_factor=tile(course.crr_factor),
        shelter=tile(course.shelter),
        speed_limit=tile(course.speed_limit),
    )


def there_and_back(course: Course, turn_speed: float = np.inf) -> Course:
    """Return a course ridden to its end and back again.

    Parameters
    ----------
    course : Course
        The way out.
    turn_speed : float
        At the turn; infinite where the turn costs nothing. [m s⁻¹]
    """
    if np.isfinite(turn_speed):
        course = course.with_edges([course.distance - TURN_LENGTH])
    limit = course.speed_limit.copy()
    limit[-1] = min(limit[-1], turn_speed)
    return dataclasses.replace(
        course,
        edges=np.concatenate([course.edges, 2.0 * course.distance - course.edges[-2::-1]]),
        grade=np.concatenate([course.grade, -course.grade[::-1]]),
        heading=np.concatenate([course.heading, np.mod(course.heading[::-1] + np.pi, 2.0 * np.pi)]),
        altitude=np.concatenate([course.altitude, course.altitude[-2::-1]]),
        latitude=np.concatenate([course.latitude, course.latitude[-2::-1]]),
        longitude=np.concatenate([course.longitude, course.longitude[-2::-1]]),
        curvature=np.concatenate([course.curvature, course.curvature[::-1]]),
        crr_factor=np.concatenate([course.crr_factor, course.crr_factor[::-1]]),
        shelter=np.concatenate([course.shelter, course.shelter[::-1]]),
        speed_limit=np.concatenate([limit, limit[::-1]]),
    )
