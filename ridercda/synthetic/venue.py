"""Test places to invent: loop, out-and-back road, indoor track, open road."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from ridercda.session.document import Venue, VenueKind
from ridercda.synthetic.line import Line, closed_line, line_from_curvature

FloatArray = npt.NDArray[np.float64]

MASS_HEIGHT = 1.1  # [m] of rider and bike above the ground; common practice


@dataclass(frozen=True, slots=True)
class LoopVenue:
    """A closed road: a polygon with rounded corners over gentle rises.

    Parameters
    ----------
    length : float
        Once round. [m]
    rises : tuple of float
        Amplitudes of the first harmonics of height round the loop. [m]
    corners : int
        Corners of the polygon.
    corner_smoothing : float
        Standard deviation of the Gaussian that rounds them; 40 m gives radii of 60 m and more. [m]
    grip : float
        Lateral acceleration the rider allows, over g.
    shape_seed : int or None
        Of plan and heights; None draws a new place for each day.
    mass_height : float
        Of rider and bike above the ground. [m]
    """

    length: float = 2400.0
    rises: tuple[float, ...] = (3.0, 1.6, 0.9, 0.5, 0.3, 0.0, 0.15)
    corners: int = 6
    corner_smoothing: float = 40.0
    grip: float = 0.4
    shape_seed: int | None = None
    mass_height: float = MASS_HEIGHT


@dataclass(frozen=True, slots=True)
class OutAndBackVenue:
    """A road ridden there and back, with braked U-turns at both ends.

    Parameters
    ----------
    length : float
        One way. [m]
    rises : tuple of float
        Amplitudes of height along the road: half-waves, then their harmonics. [m]
    bend : float
        Amplitude of the slow changes of heading along it. [rad]
    turn_radius : float
        Of the U-turns; also half the distance between the lanes. [m]
    start : float
        Position of the line past the first U-turn, so that the rider can roll up to it. [m]
    grip, shape_seed, mass_height
        As for `LoopVenue`.
    """

    length: float = 1500.0
    rises: tuple[float, ...] = (2.5, 1.5, 0.8, 0.4, 0.2)
    bend: float = 0.12
    turn_radius: float = 4.0
    start: float = 260.0
    grip: float = 0.35
    shape_seed: int | None = None
    mass_height: float = MASS_HEIGHT


@dataclass(frozen=True, slots=True)
class TrackVenue:
    """An indoor track: two straights, two bends, curvature growing evenly in the transitions.

    Parameters
    ----------
    length : float
        Along the line the wheels follow. [m]
    bend_radius : float
        Of the wheels' path in the bend. [m]
    transition_length : float
        From straight to bend. [m]
    wander_mean, wander_sd, wander_time : float
        How far outside the line the rider rides, and how that varies. [m, m, s]
    dragged_air : float
        Speed of the air dragged round by the riding. [m/s]
    mass_height : float
        Of rider and bike above the ground. [m]
    """

    length: float = 250.0
    bend_radius: float = 23.0
    transition_length: float = 20.0
    wander_mean: float = 0.05
    wander_sd: float = 0.04
    wander_time: float = 12.0
    dragged_air: float = 0.0
    mass_height: float = MASS_HEIGHT


@dataclass(frozen=True, slots=True)
class RoadVenue:
    """A long road on which nothing repeats; every run is `stretch` metres further on.

    Parameters
    ----------
    stretch : float
        Length of one "lap" of a run. [m]
    runs : int
        Runs the road has room for.
    rises : tuple of float
        Amplitudes of height waves 8, 4, 2, 1, ... km long. [m]
    grip, shape_seed, mass_height
        As for `LoopVenue`.
    """

    stretch: float = 3000.0
    runs: int = 12
    rises: tuple[float, ...] = (15.0, 8.0, 4.0, 1.5, 0.6)
    grip: float = 0.4
    shape_seed: int | None = None
    mass_height: float = MASS_HEIGHT


VenueSpec = LoopVenue | OutAndBackVenue | TrackVenue | RoadVenue


@dataclass(frozen=True, slots=True, eq=False)
class Place:
    """A venue laid out: the line, where runs start, and what the session document says of it."""

    line: Line
    start: float  # position of the start line along the line [m]
    lap: float  # [m]
    turns_back: int  # 1: between runs the rider turns and comes back to the line
    gate: float  # 0: a run may start anywhere; else it starts at multiples of this past the start [m]
    venue: Venue


def lay_out(spec: VenueSpec, rng: np.random.Generator) -> Place:
    """Return the place that `spec` describes, its free shape drawn from `rng` or its own seed."""
    if isinstance(spec, TrackVenue):
        return _track(spec)
    shape = rng if spec.shape_seed is None else np.random.default_rng(spec.shape_seed)
    if isinstance(spec, LoopVenue):
        return _loop(spec, shape)
    if isinstance(spec, OutAndBackVenue):
        return _out_and_back(spec, shape)
    return _road(spec, shape)


def _loop(spec: LoopVenue, rng: np.random.Generator) -> Place:
    k = spec.corners
    angle = 2 * np.pi * (np.arange(k) + rng.uniform(-0.25, 0.25, k)) / k + rng.uniform(0, 2 * np.pi)
    radius = 1 + rng.uniform(-0.2, 0.2, k)
    plan = np.column_stack((radius * np.cos(angle), radius * np.sin(angle)))
    plan *= spec.length / np.hypot(*(np.roll(plan, -1, 0) - plan).T).sum()
    # Heights go onto many points along the sides, so that they follow the distance ridden.
    side = np.hypot(*(np.roll(plan, -1, 0) - plan).T)
    arc = np.concatenate(([0.0], np.cumsum(side)))
    even = np.linspace(0.0, arc[-1], 2400, endpoint=False)
    ring = np.vstack((plan, plan[:1]))
    phase = rng.uniform(0, 2 * np.pi, len(spec.rises))
    height = sum(
        a * np.cos(2 * np.pi * (j + 1) * even / arc[-1] + phase[j]) for j, a in enumerate(spec.rises)
    )
    points = np.column_stack(
        (np.interp(even, arc, ring[:, 0]), np.interp(even, arc, ring[:, 1]), height + np.zeros(len(even)))
    )
    line = closed_line(points, spec.corner_smoothing, spec.length, spec.grip)
    return Place(
        line=line,
        start=0.0,
        lap=line.length,
        turns_back=1,
        gate=line.length,
        venue=Venue(VenueKind.LOOP, lap_length=line.length),
    )


def _out_and_back(spec: OutAndBackVenue, rng: np.random.Generator) -> Place:
    n = round(spec.length)
    s = np.linspace(0.0, spec.length, n + 1)
    waves = 2 * np.pi * np.array([1, 2])[:, None] * s / spec.length
    swing = spec.bend * np.array([0.7, 0.3])[:, None] * rng.choice([-1.0, 1.0], (2, 1))
    # Waves of sine: the road ends with the heading it began with, so both lanes are equally long.
    bearing = rng.uniform(0, 2 * np.pi) + (swing * np.sin(waves)).sum(0)
    east = np.concatenate(([0.0], np.cumsum(np.sin(0.5 * (bearing[1:] + bearing[:-1])))))
    north = np.concatenate(([0.0], np.cumsum(np.cos(0.5 * (bearing[1:] + bearing[:-1])))))
    phase = rng.uniform(0, 2 * np.pi, len(spec.rises))
    height = np.zeros(n + 1)
    for j, a in enumerate(spec.rises):
        height += a * np.cos(np.pi * (j + 1) * s / spec.length + phase[j])
    w = spec.turn_radius
    right_east, right_north = w * np.cos(bearing), -w * np.sin(bearing)
    out = np.column_stack((east + right_east, north + right_north, height))
    back = np.column_stack((east - right_east, north - right_north, height))[::-1]
    half = np.linspace(0, np.pi, 26)[1:-1]

    def turn(at: int, direction: float) -> FloatArray:
        # From the right of the line of travel round to its left.
        ahead = np.array([np.sin(bearing[at]), np.cos(bearing[at])]) * direction
        right = np.array([np.cos(bearing[at]), -np.sin(bearing[at])]) * direction
        xy = np.array([east[at], north[at]]) + w * (
            np.cos(half)[:, None] * right + np.sin(half)[:, None] * ahead
        )
        return np.column_stack((xy, np.full(len(half), height[at])))

    points = np.vstack((out, turn(n, 1.0), back, turn(0, -1.0)))
    line = closed_line(points, 1.5, None, spec.grip)
    return Place(
        line=line,
        start=spec.start,
        lap=line.length,
        turns_back=1,
        gate=line.length,
        venue=Venue(VenueKind.OUT_AND_BACK, lap_length=line.length),
    )


def _track(spec: TrackVenue) -> Place:
    bend = math.pi * spec.bend_radius - spec.transition_length
    straight = spec.length / 2 - 2 * spec.transition_length - bend
    if bend < 0 or straight < 0:
        raise ValueError(
            f"a {spec.length:g} m track has no room for bends of {spec.bend_radius:g} m radius with "
            f"transitions of {spec.transition_length:g} m"
        )
    n = 2 * round(spec.length / 0.25 / 2)
    s = np.arange(n) * (spec.length / n) % (spec.length / 2)
    corners = np.cumsum(
        [0.0, straight / 2, spec.transition_length, bend, spec.transition_length, straight / 2]
    )
    curvature = np.interp(s, corners, np.array([0, 0, 1, 1, 0, 0]) / spec.bend_radius)
    line = line_from_curvature(curvature, spec.length / n, np.zeros(n), 0.0, 1, math.inf)
    return Place(
        line=line,
        start=0.0,
        lap=spec.length,
        turns_back=0,
        gate=spec.length,
        venue=Venue(
            VenueKind.TRACK,
            lap_length=spec.length,
            bend_radius=spec.bend_radius,
            transition_length=spec.transition_length,
            mass_height=spec.mass_height,
        ),
    )


def _road(spec: RoadVenue, rng: np.random.Generator) -> Place:
    total = (spec.stretch + 1200.0) * (spec.runs + 1)
    n = round(total)
    s = np.arange(n + 1, dtype=float)
    bearing = rng.uniform(0, 2 * np.pi) + sum(
        a * np.sin(2 * np.pi * s / wave + rng.uniform(0, 2 * np.pi))
        for a, wave in ((0.6, 9000.0), (0.3, 2500.0), (0.15, 700.0))
    )
    height = sum(
        a * np.cos(2 * np.pi * s / (8000.0 / 2**j * rng.uniform(0.85, 1.15)) + rng.uniform(0, 2 * np.pi))
        for j, a in enumerate(spec.rises)
    )
    curvature = -np.gradient(np.asarray(bearing), 1.0)
    line = line_from_curvature(
        curvature, 1.0, np.asarray(height) + np.zeros(n + 1), float(np.asarray(bearing)[0]), 0, spec.grip
    )
    return Place(
        line=line, start=600.0, lap=spec.stretch, turns_back=0, gate=0.0, venue=Venue(VenueKind.ROAD)
    )
