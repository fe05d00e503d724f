"""Lean in a bend, solved together with the path of the mass, and the shape of a track.

Speeds and radii of a track are those of the wheels' path on the ground; the mass of rider and bike rides a
smaller circle, more slowly. A rigid steady turn: tan(lean) = v_cm²/(g·r_cm), r_cm = R - h·sin(lean), v_cm =
v_wheel·r_cm/R.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
import numpy.typing as npt

from ridercda.physics.air import STANDARD_GRAVITY

FloatArray = npt.NDArray[np.float64]


class Lean(NamedTuple):
    """A rider leaning in a bend."""

    angle: FloatArray  # of rider and bike from the vertical [rad]
    path_radius: FloatArray  # of the mass [m]
    mass_speed: FloatArray  # of the mass [m s⁻¹]
    load_factor: FloatArray  # force on the surface / weight: 1/cos(lean) [1]


def lean(
    wheel_speed: npt.ArrayLike,
    bend_radius: npt.ArrayLike,
    mass_height: npt.ArrayLike,
    gravity: npt.ArrayLike = STANDARD_GRAVITY,
) -> Lean:
    r"""Return how a rider leans in a bend of a track or a road corner.

    Parameters
    ----------
    wheel_speed : array_like, shape (...)
        Speed of the wheels over the ground. [m s⁻¹]
    bend_radius : array_like, shape (...)
        Radius of the wheels' path, positive; infinite on a straight. [m]
    mass_height : array_like, shape (...)
        Height of the mass of rider and bike when upright, 0 or more. [m]
    gravity : array_like, shape (...)
        Local gravity. [m s⁻²]

    Returns
    -------
    Lean
        Arrays of the broadcast shape; NaN where any input is NaN.

    Raises
    ------
    ValueError
        If a radius is not positive or a height is negative.

    Notes
    -----
    With t = tan(lean), a = v²/(g R) and c = a h/R the three conditions are one:
    :math:`t - a + c\,t/\sqrt{1 + t^2} = 0`. It rises and is concave for t > 0, and :math:`a/(1 + c)` lies to
    the left of the root, so Newton's method climbs to it from there without fail.
    """
    v, radius, height, g = np.broadcast_arrays(
        *(np.asarray(x, float) for x in (wheel_speed, bend_radius, mass_height, gravity))
    )
    if np.any(radius <= 0.0):
        raise ValueError(
            f"a bend radius must be positive (m; infinite on a straight), not {np.nanmin(radius):g}"
        )
    if np.any(height < 0.0):
        raise ValueError(f"the height of the mass must be 0 m or more, not {np.nanmin(height):g}")
    pull = v**2 / (g * radius)
    coupling = pull * height / radius
    tangent = pull / (1.0 + coupling)
    for _ in range(60):
        secant = np.sqrt(1.0 + tangent**2)
        step = (pull - tangent - coupling * tangent / secant) / (1.0 + coupling / secant**3)
        tangent = tangent + step
        if not np.any(np.abs(step) > 4.0 * np.finfo(float).eps * tangent):
            break
    secant = np.sqrt(1.0 + tangent**2)
    inward = height * tangent / secant  # always short of the centre: c·t/√(1 + t²) < a
    return Lean(
        np.arctan(tangent), np.asarray(radius - inward), np.asarray(v * (1.0 - inward / radius)), secant
    )


def mass_drop(angle: npt.ArrayLike, mass_height: npt.ArrayLike) -> FloatArray:
    """Return how far the mass comes down when the rider leans: h·(1 - cos(lean)). [m]

    Parameters
    ----------
    angle : array_like, shape (...)
        Lean from the vertical. [rad]
    mass_height : array_like, shape (...)
        Height of the mass when upright. [m]
    """
    half = np.sin(0.5 * np.asarray(angle, float))
    return np.asarray(2.0 * np.asarray(mass_height, float) * half**2)


@dataclass(frozen=True, slots=True)
class TrackShape:
    """Two straights and two bends, joined by transitions along which the curvature grows in a straight line.

    Position 0 is the middle of the home straight; riders turn left. A bend turns by π, half a transition's
    length counting at each end, so its constant part is π·R less one transition long.

    Parameters
    ----------
    lap_length : float
        Once round on the measuring line. [m]
    bend_radius : float
        Of the measuring line in the constant part of the bends. [m]
    transition_length : float
        Of each of the four transitions; 0 for semicircles. [m]

    Raises
    ------
    ValueError
        If the parts do not fit into the lap.
    """

    lap_length: float
    bend_radius: float
    transition_length: float = 0.0

    def __post_init__(self) -> None:
        """Refuse parts that do not fit."""
        if not (self.lap_length > 0 and self.bend_radius > 0 and self.transition_length >= 0):
            raise ValueError(
                f"a track needs a positive lap length and bend radius and no negative transition, not "
                f"{self.lap_length:g}, {self.bend_radius:g} and {self.transition_length:g} m"
            )
        if self.arc_length < 0:
            raise ValueError(
                f"transitions of {self.transition_length:g} m are too long for bends of radius "
                f"{self.bend_radius:g} m: at most {np.pi * self.bend_radius:.4g} m"
            )
        if self.straight_length < 0:
            raise ValueError(
                f"bends of radius {self.bend_radius:g} m with transitions of {self.transition_length:g} m do "
                f"not fit into a lap of {self.lap_length:g} m"
            )

    @property
    def arc_length(self) -> float:
        """Length of the constant part of one bend. [m]"""
        return float(np.pi) * self.bend_radius - self.transition_length

    @property
    def straight_length(self) -> float:
        """Length of one straight. [m]"""
        return 0.5 * self.lap_length - float(np.pi) * self.bend_radius - self.transition_length

    def curvature(self, position: npt.ArrayLike) -> FloatArray:
        """Return the curvature of the measuring line, 0 or more. [m⁻¹]

        Parameters
        ----------
        position : array_like, shape (...)
            Along the measuring line from the middle of the home straight, over any number of laps. [m]
        """
        # The shape repeats each half lap and is the same seen from the middle of a bend in both directions.
        from_apex = np.abs(np.asarray(position, float) % (0.5 * self.lap_length) - 0.25 * self.lap_length)
        beyond_arc = from_apex - 0.5 * self.arc_length
        if self.transition_length == 0.0:
            return np.asarray(np.where(beyond_arc <= 0.0, 1.0, 0.0) / self.bend_radius + 0.0 * beyond_arc)
        return np.asarray(np.clip(1.0 - beyond_arc / self.transition_length, 0.0, 1.0) / self.bend_radius)

    def heading(self, position: npt.ArrayLike) -> FloatArray:
        """Return the direction of travel, clockwise from that of the home straight, 0 to 2π. [rad]

        Parameters
        ----------
        position : array_like, shape (...)
            Along the measuring line from the middle of the home straight, over any number of laps. [m]
        """
        s = np.asarray(position, float)
        half_laps = np.floor(s / (0.5 * self.lap_length))
        from_apex = s - (half_laps + 0.5) * 0.5 * self.lap_length
        distance = np.abs(from_apex)
        in_arc = np.minimum(distance, 0.5 * self.arc_length)
        in_transition = np.clip(distance - 0.5 * self.arc_length, 0.0, self.transition_length)
        turned = in_arc + in_transition
        if self.transition_length > 0.0:
            turned = turned - 0.5 * in_transition**2 / self.transition_length
        left = np.pi * (half_laps + 0.5) + np.sign(from_apex) * turned / self.bend_radius
        clockwise = -left % (2.0 * np.pi)
        return np.asarray(np.where(clockwise >= 2.0 * np.pi, 0.0, clockwise))  # rounding can give 2π itself
