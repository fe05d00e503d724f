"""What a solve gives: CdA per setup, Crr per tyre set, their joint covariance, and what limited it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType

import numpy as np
import numpy.typing as npt

from ridercda.drag.verdict import Verdict

FloatArray = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Figure:
    """A value with its uncertainty, in the SI unit of the quantity."""

    value: float
    standard_error: float
    interval: tuple[float, float]  # at the estimate's confidence
    degrees_of_freedom: float = float("inf")


@dataclass(frozen=True, slots=True)
class SetupEstimate:
    """CdA of one setup at the reference speed and zero yaw; None with the reason where it cannot be had."""

    id: str
    runs: int
    cda: Figure | None
    reason: str = ""


@dataclass(frozen=True, slots=True)
class TyreEstimate:
    """Crr of one tyre set at 20 degC; None with the reason where it cannot be had."""

    id: str
    crr: Figure | None
    reason: str = ""


@dataclass(frozen=True, slots=True)
class Difference:
    """CdA of `setup` minus CdA of `against`; a baseline always stands as `against`."""

    setup: str
    against: str
    cda: Figure | None
    verdict: Verdict | None
    chance_lower: float | None  # that the CdA of `setup` is the lower
    detectable: float | None  # found with 80 % chance by this design [m^2]
    variance_shares: Mapping[str, float] = field(default_factory=lambda: MappingProxyType({}))
    joint_interval: tuple[float, float] | None = None  # holds for all pairs at once
    reason: str = ""


@dataclass(frozen=True, slots=True)
class RunEstimate:
    """One run's figures; `cda` is the run's own, before it is averaged with its repeats."""

    id: str
    setup: str
    ride: str
    start: float  # [s]
    end: float  # [s]
    laps: int
    power: float | None  # [W]
    speed: float | None  # [m/s]
    air_density: float | None  # [kg/m^3]
    wind_speed: float | None  # at the rider's height [m/s]
    wind_from: float | None  # [rad]
    excluded: str  # the reason; "" = counted
    cda: Figure | None
    against_repeats: float | None = None  # this run minus the mean of its repeats, in standard errors
    influence: Mapping[str, float] = field(default_factory=lambda: MappingProxyType({}))
    # setup id -> how far its difference from the baseline moves when this run is left out [m^2]


@dataclass(frozen=True, slots=True)
class Gust:
    """The gusts found: standard deviation of each component and their time scale."""

    sd: float  # [m/s]
    time: float  # [s]


@dataclass(frozen=True, slots=True)
class SolveWarning:
    """Something the user should know; codes are stable and listed in `ridercda.drag.warnings`."""

    code: str
    message: str


@dataclass(frozen=True, slots=True)
class NextStep:
    """The cheapest thing to do that would tighten a difference."""

    setup: str
    against: str
    text: str
    half_width: float  # expected half-width afterwards [m^2]


@dataclass(frozen=True, slots=True, eq=False)
class VenueProfile:
    """The venue's profile as the runs show it, above its start. Arrays of shape (n,)."""

    position: FloatArray  # [m]
    height: FloatArray  # [m]
    standard_error: FloatArray  # [m]


@dataclass(frozen=True, slots=True)
class Regression:
    """The published regression on virtual elevation, beside the full model: least squares, no gusts."""

    cda: Mapping[str, float]  # setup id -> [m^2]
    crr: Mapping[str, float]  # tyre set -> [1]
    residual_sd: float  # of a block's mean power [W]


@dataclass(frozen=True, slots=True, eq=False)
class Estimate:
    """The answer of a solve.

    `parameters` name the rows of `values` and `covariance`: "cda:ID", "crr:ID" and, last, "power-scale": the
    day's relative power error, which a race with the same meter shares. Arrays are read-only.
    """

    confidence: float
    air_density: float | None  # mean over the counted runs [kg/m^3]
    reference_speed: float | None  # [m/s]
    setups: tuple[SetupEstimate, ...]
    tyres: tuple[TyreEstimate, ...]
    differences: tuple[Difference, ...]
    runs: tuple[RunEstimate, ...]
    parameters: tuple[str, ...]
    values: FloatArray  # shape (k,), SI
    covariance: FloatArray  # shape (k, k), SI
    degrees_of_freedom: float  # of the joint draw
    between_run_sd: float | None  # [m^2]
    gust: Gust | None
    warnings: tuple[SolveWarning, ...] = ()
    next_steps: tuple[NextStep, ...] = ()
    speed_range: tuple[float, float] | None = None  # of the counted runs [m/s]
    tested_power: tuple[float, float] | None = None  # of the counted runs [W]
    method: str = ""
    profile: VenueProfile | None = None
    regression: Regression | None = None

    def __post_init__(self) -> None:
        """Make the arrays read-only."""
        self.values.setflags(write=False)
        self.covariance.setflags(write=False)

    @property
    def answers(self) -> bool:
        """Whether anything at all was answered."""
        return (
            any(s.cda is not None for s in self.setups)
            or any(t.crr is not None for t in self.tyres)
            or any(d.cda is not None for d in self.differences)
        )
