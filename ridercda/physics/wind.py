"""Wind at the rider: height profile, apparent wind, and the axial area under yaw.

Conventions, here and everywhere: a wind direction is where the wind comes *from*, clockwise from true north;
yaw is positive when the wind comes from the rider's right. The axial air force is ½ρV²·CxA(yaw) with V the
speed of the air past the rider. A plain CdA means CxA = CdA·cos(yaw), that is ½ρ·CdA·V·u with u the
along-track air speed.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]

RIDER_HEIGHT = 1.2  # [m] where the wind acts on a rider; common practice
BROADSIDE_FADE = np.radians(80.0)  # [rad] see axial_table


class ApparentWind(NamedTuple):
    """The air as the rider meets it."""

    along: FloatArray  # along-track air speed, positive from ahead [m s⁻¹]
    across: FloatArray  # positive from the right [m s⁻¹]
    speed: FloatArray  # of the air past the rider, never negative [m s⁻¹]
    yaw: FloatArray  # positive: wind from the right; -π to π [rad]


def log_profile(
    height: npt.ArrayLike, reference_height: npt.ArrayLike, roughness: npt.ArrayLike
) -> FloatArray:
    r"""Return the wind speed at a height as a fraction of that at the reference height.

    Parameters
    ----------
    height, reference_height : array_like, shape (...)
        Heights above the ground, above the roughness length. [m]
    roughness : array_like, shape (...)
        Roughness length of the surroundings: 0.005 smooth, 0.03 open, 0.1 roughly open, 0.25 rough,
        0.5 very rough. [m]

    Returns
    -------
    ndarray, shape (...)
        Factor; NaN where any input is NaN. [1]

    Raises
    ------
    ValueError
        If a roughness is not positive or a height is not above it.

    Notes
    -----
    :math:`\ln(z/z_0)/\ln(z_{ref}/z_0)`, neutral air, no displacement height. Valid over a long uniform
    fetch; between hedges and houses it is a rough guide.

    References
    ----------
    World Meteorological Organization, "Guide to Instruments and Methods of Observation," WMO-No. 8 (from
    memory); roughness classes after Davenport as in R. Stull, "Meteorology for Scientists and Engineers."
    """
    z, z_ref, z0 = (np.asarray(a, float) for a in (height, reference_height, roughness))
    if np.any(z0 <= 0.0):
        raise ValueError(f"roughness must be positive (m), not {np.nanmin(z0):g}")
    if np.any(z <= z0) or np.any(z_ref <= z0):
        raise ValueError("heights must be above the roughness length (m)")
    return np.asarray(np.log(z / z0) / np.log(z_ref / z0))


def apparent_wind(
    speed: npt.ArrayLike, heading: npt.ArrayLike, wind_speed: npt.ArrayLike, wind_from: npt.ArrayLike
) -> ApparentWind:
    """Return the air that meets a rider.

    Parameters
    ----------
    speed : array_like, shape (...)
        Ground speed along the track. [m s⁻¹]
    heading : array_like, shape (...)
        Direction of travel, clockwise from true north. [rad]
    wind_speed : array_like, shape (...)
        Wind at the rider's height. [m s⁻¹]
    wind_from : array_like, shape (...)
        Direction the wind comes from, clockwise from true north. [rad]

    Returns
    -------
    ApparentWind
        Arrays of the broadcast shape; NaN where any input is NaN. In still air at rest yaw is 0.
    """
    v, course, w, source = (np.asarray(a, float) for a in (speed, heading, wind_speed, wind_from))
    along = v + w * np.cos(source - course)
    across = w * np.sin(source - course) + 0.0 * v
    return ApparentWind(
        np.asarray(along),
        np.asarray(across),
        np.asarray(np.hypot(along, across)),
        np.asarray(np.arctan2(across, along)),
    )


def axial_table(table_yaw: npt.ArrayLike, table_cxa: npt.ArrayLike) -> tuple[FloatArray, FloatArray]:
    """Return a yaw table carried on to π, ready for linear interpolation in |yaw|.

    Parameters
    ----------
    table_yaw : array_like, shape (n,)
        Yaw angles, strictly increasing, 0 to π. [rad]
    table_cxa : array_like, shape (n,)
        Axial force / (½ρV²) at those angles. [m²]

    Returns
    -------
    angles, areas : ndarray, shape (m,)
        The table, held flat below its first angle and beyond its last. [rad], [m²]

    Raises
    ------
    ValueError
        If the angles do not increase, are not within 0 to π, or the lengths differ.

    Notes
    -----
    Held flat to 80° (or the last angle); from there the area passes in a straight line through zero at 90°
    to its negative, since air that overtakes the rider pushes. No rider's table reaches so far: this
    matters in the first metres from a standing start only, and a jump there would upset any solver.
    """
    angles, areas = np.atleast_1d(np.asarray(table_yaw, float)), np.atleast_1d(np.asarray(table_cxa, float))
    if angles.ndim != 1 or angles.shape != areas.shape:
        raise ValueError(f"a yaw table needs as many areas as angles: {angles.shape} and {areas.shape}")
    if not (
        np.all(np.isfinite(areas)) and np.all(np.diff(angles) > 0) and 0 <= angles[0] <= angles[-1] <= np.pi
    ):
        raise ValueError("a yaw table needs finite areas at increasing angles from 0 to 180 degrees")
    if angles[-1] >= np.pi / 2:
        return angles, areas
    fade = max(BROADSIDE_FADE, float(angles[-1]))
    last = areas[-1]
    tail_angles = np.array([fade, np.pi / 2, np.pi - fade, np.pi])
    tail_areas = np.array([last, 0.0, -last, -last])
    keep = tail_angles > angles[-1]
    return np.concatenate([angles, tail_angles[keep]]), np.concatenate([areas, tail_areas[keep]])


def axial_area(yaw: npt.ArrayLike, table_yaw: npt.ArrayLike, table_cxa: npt.ArrayLike) -> FloatArray:
    """Return the axial area CxA at a yaw angle from a table, the same for wind from the left and the right.

    Parameters
    ----------
    yaw : array_like, shape (...)
        Yaw, of either sign. [rad]
    table_yaw : array_like, shape (n,)
        Yaw angles, strictly increasing, 0 to π. [rad]
    table_cxa : array_like, shape (n,)
        Axial force / (½ρV²) at those angles. [m²]

    Returns
    -------
    ndarray, shape (...)
        Area by linear interpolation, continued as `axial_table` says; NaN where yaw is NaN. [m²]

    Raises
    ------
    ValueError
        If the table is not one; see `axial_table`.
    """
    angles, areas = axial_table(table_yaw, table_cxa)
    folded = np.abs(np.asarray(yaw, float)) % (2.0 * np.pi)
    folded = np.minimum(folded, 2.0 * np.pi - folded)
    return np.asarray(np.interp(folded, angles, areas))


def plain_axial_area(yaw: npt.ArrayLike, cda: npt.ArrayLike) -> FloatArray:
    """Return the axial area a plain CdA stands for: CdA·cos(yaw). [m²]

    Parameters
    ----------
    yaw : array_like, shape (...)
        Yaw, of either sign. [rad]
    cda : array_like, shape (...)
        Drag area at zero yaw. [m²]
    """
    return np.asarray(np.asarray(cda, float) * np.cos(np.asarray(yaw, float)))


def air_force(density: npt.ArrayLike, cxa: npt.ArrayLike, air_speed: npt.ArrayLike) -> FloatArray:
    """Return the axial air force ½ρ·CxA·V². [N]

    Parameters
    ----------
    density : array_like, shape (...)
        Air density. [kg m⁻³]
    cxa : array_like, shape (...)
        Axial area at the yaw of the moment: `axial_area` or `plain_axial_area`. [m²]
    air_speed : array_like, shape (...)
        Speed of the air past the rider, not its along-track part. [m s⁻¹]
    """
    rho, area, v = (np.asarray(a, float) for a in (density, cxa, air_speed))
    return np.asarray(0.5 * rho * area * v**2)
