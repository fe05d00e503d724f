"""What a trade study gives: setups in order on a course, seconds saved, how sure, and what they may cost."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import StrEnum
from types import MappingProxyType

import numpy as np
import numpy.typing as npt

from ridercda.drag.estimate import Figure

FloatArray = npt.NDArray[np.float64]


class Source(StrEnum):
    """Where a setup's drag comes from."""

    TESTED = "tested"
    DIFFERENCE = "difference"  # known from elsewhere against a setup of this session
    ELSEWHERE = "elsewhere"  # an absolute figure from elsewhere, with the offset between places


class Terrain(StrEnum):
    """Kinds of terrain; the first three and the last four each share out the whole course."""

    CLIMB = "climb"  # 2 % and steeper
    LEVEL = "level"
    DESCENT = "descent"  # 2 % and steeper
    HEADWIND = "headwind"  # within 45 degrees of the nose
    CROSSWIND = "crosswind"
    TAILWIND = "tailwind"
    CALM = "calm"  # less than 0.3 m/s at the rider


class SensitivityKind(StrEnum):
    """What is varied while everything else stays."""

    WIND_FROM = "wind-from"  # [rad]
    WIND_SPEED = "wind-speed"  # at the wind's own height [m/s]
    POWER = "power"  # mean of the plan, at the meter [W]
    TEMPERATURE = "temperature"  # [K]


@dataclass(frozen=True, slots=True)
class TradeWarning:
    """Something the user should know; codes are stable and listed in `ridercda.trade.warnings`."""

    code: str
    message: str


@dataclass(frozen=True, slots=True)
class TerrainGain:
    """What a setup saves against the baseline on one kind of terrain."""

    kind: Terrain
    length: float  # [m]
    saved: Figure  # [s]
    seconds_per_km: float  # [s/km]


@dataclass(frozen=True, slots=True, eq=False)
class GainCurve:
    """Where a setup gains on the baseline: the gap in seconds along the course, positive = ahead.

    `low` and `high` are the band of `gap` at the ranking's confidence, point by point. Arrays are read-only.
    """

    setup: str
    distance: FloatArray  # shape (k,), from 0 to the finish [m]
    gap: FloatArray  # shape (k,) [s]
    low: FloatArray  # shape (k,) [s]
    high: FloatArray  # shape (k,) [s]
    seconds_per_km: FloatArray  # shape (k - 1,), between neighbouring points [s/km]
    terrain: tuple[TerrainGain, ...] = ()

    def __post_init__(self) -> None:
        """Make the arrays read-only."""
        for values in (self.distance, self.gap, self.low, self.high, self.seconds_per_km):
            values.setflags(write=False)


@dataclass(frozen=True, slots=True, eq=False)
class SensitivityCurve:
    """Seconds each setup saves against the baseline while one condition of the race is varied."""

    kind: SensitivityKind
    at: FloatArray  # shape (k,), in the SI unit of `kind`
    saved: Mapping[str, FloatArray]  # setup id -> shape (k,) [s]
    now: float  # where the race stands

    def __post_init__(self) -> None:
        """Make the arrays read-only."""
        for values in (self.at, *self.saved.values()):
            values.setflags(write=False)


@dataclass(frozen=True, slots=True)
class HeldPosition:
    """A position that is not held all day: what that costs."""

    share: float  # of the race time for which it is held [1]
    fallback: str  # setup id
    saved_if_held: Figure  # seconds against the baseline were it held throughout [s]
    break_even_share: float | None  # held for less than this it is no faster; None: at no share, or at any


@dataclass(frozen=True, slots=True)
class SetupRanking:
    """One setup on one course. Seconds saved are against the baseline, positive = faster."""

    id: str
    rank: int  # 1 = fastest expected
    time: Figure  # [s]
    speed: float  # mean over the course [m/s]
    saved: Figure  # [s]; 0 for the baseline
    chance_fastest: float
    chance_faster_than_baseline: float | None  # None for the baseline
    break_even_power: Figure  # W at the meter that could still be lost, beyond any power cost counted
    break_even_share: Figure  # the same as a share of the race power [1]
    letter: str = ""
    name: str = ""
    baseline: bool = False
    source: Source = Source.TESTED
    cda: float = float("nan")  # used, at zero yaw [m^2]
    crr: float = float("nan")  # used, on this course and at its temperature [1]
    mass: float = float("nan")  # rider, bike and setup [kg]
    power_cost: float = 0.0  # counted, at the meter [W]
    power_cost_sd: float = 0.0  # [W]
    watts_at_baseline_speed: Figure | None = (
        None  # saved on the level in still air at the baseline's speed [W]
    )
    equivalent_mass: Figure | None = None  # mass off the baseline worth the same here [kg]
    crossover_speed: float | None = None  # course speed at which it and the baseline cross over [m/s]
    held: HeldPosition | None = None
    w_prime_left: float | None = None  # lowest balance on the way; None without critical power [J]


@dataclass(frozen=True, slots=True)
class Unranked:
    """A setup that cannot be raced, and why."""

    id: str
    reason: str


@dataclass(frozen=True, slots=True)
class CourseRanking:
    """Every setup on one course, the fastest expected first."""

    id: str
    name: str
    distance: float  # [m]
    climb: float  # metres climbed in all [m]
    power: float  # mean of the plan over time, at the meter [W]
    confidence: float  # of every interval
    setups: tuple[SetupRanking, ...]  # in order of rank
    unranked: tuple[Unranked, ...] = ()
    gains: tuple[GainCurve, ...] = ()  # one per setup that is not the baseline
    sensitivities: tuple[SensitivityCurve, ...] = ()
    notes: tuple[str, ...] = ()  # how the course was read and repaired
    warnings: tuple[TradeWarning, ...] = ()
    power_sd: float = 0.0  # [W]
    wind_speed: float = 0.0  # at its own height [m/s]
    wind_from: float = 0.0  # [rad]
    temperature: float = float("nan")  # [K]
    air_density: float = float("nan")  # mean along the course [kg/m^3]
    plan: str = "constant"
    w_prime_cost: float | None = None  # of the plan in the baseline; None without critical power [J]
    draws: int = 0
    surface_error: float = 0.0  # largest miss of the draws' time against direct simulation [s]
    by_id: Mapping[str, SetupRanking] = field(
        default_factory=lambda: MappingProxyType({}), repr=False, compare=False
    )

    def __post_init__(self) -> None:
        """Index the setups by id."""
        object.__setattr__(self, "by_id", MappingProxyType({s.id: s for s in self.setups}))

    @property
    def baseline(self) -> SetupRanking:
        """The setup the others are compared with."""
        return next(s for s in self.setups if s.baseline)
