"""Instruments to invent: power, wheel or GPS speed, position, barometer, thermometer, air-speed probe."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum


class PowerAveraging(StrEnum):
    """Over what a power reading is averaged."""

    RECORD = "record"
    REVOLUTION = "revolution"  # whole turns of the crank completed by the record


class SpeedSource(StrEnum):
    """Where speed and distance come from."""

    WHEEL = "wheel"  # white noise on each record; distance is its sum
    WHEEL_EVENTS = "wheel-events"  # jitter in time of the wheel's passes: noise that cancels over records
    GPS = "gps"  # filtered and late
    NONE = "none"


@dataclass(frozen=True, slots=True)
class PowerSpec:
    """The power meter.

    Parameters
    ----------
    noise : float
        Relative standard deviation of each record.
    scale, scale_sd : float
        Relative error of the day, known to nobody: `scale` plus a draw with `scale_sd`.
    zero, zero_drift_per_hour : float
        Offset at the start, and how it drifts. [W, W/h]
    lag : float
        By how much power comes late. [s]
    averaging : PowerAveraging
    resolution : float
        0 for none. [W]
    efficiency, efficiency_sd : float
        True share that reaches the wheel: `efficiency` plus a draw with `efficiency_sd`.
    """

    noise: float = 0.03
    scale: float = 0.0
    scale_sd: float = 0.0
    zero: float = 0.0
    zero_drift_per_hour: float = 0.0
    lag: float = 0.0
    averaging: PowerAveraging = PowerAveraging.RECORD
    resolution: float = 0.0
    efficiency: float = 0.977
    efficiency_sd: float = 0.0


@dataclass(frozen=True, slots=True)
class SpeedSpec:
    """Speed and distance.

    Parameters
    ----------
    source : SpeedSource
    noise : float
        Standard deviation of each record. [m/s]
    circumference_error : float
        Relative: recorded speed is true speed times one plus this.
    resolution : float
        0 for none. [m/s]
    gps_smoothing, gps_delay : float
        Time constant and delay of GPS speed. [s]
    """

    source: SpeedSource = SpeedSource.WHEEL
    noise: float = 0.02
    circumference_error: float = 0.0
    resolution: float = 0.0
    gps_smoothing: float = 1.0
    gps_delay: float = 1.0


@dataclass(frozen=True, slots=True)
class PositionSpec:
    """GPS position: slow wander and white jitter of each horizontal component. [m, s, m]"""

    wander: float = 1.5
    wander_time: float = 40.0
    jitter: float = 0.3


@dataclass(frozen=True, slots=True)
class BarometerSpec:
    """Barometric altitude. [m, m, m/h, m]"""

    noise: float = 0.15
    offset_sd: float = 8.0
    drift_per_hour: float = 2.0
    resolution: float = 0.2


@dataclass(frozen=True, slots=True)
class AirProbeSpec:
    """An air-speed probe at the rider's height, reading speed along the bike.

    `factor_sd` is the spread of its calibration between days, `setup_factor_sd` the further one between
    setups, `noise` the standard deviation of each record. [1, 1, m/s]
    """

    factor_sd: float = 0.02
    setup_factor_sd: float = 0.003
    noise: float = 0.15


@dataclass(frozen=True, slots=True)
class ThermometerSpec:
    """The head unit's thermometer: warmer than the air in the sun, slow to follow. [K, K, s]"""

    warm_bias: float = 2.5
    noise: float = 0.2
    time: float = 300.0


@dataclass(frozen=True, slots=True)
class SensorSpec:
    """All instruments of a day; None for one that was not there.

    Parameters
    ----------
    interval : float
        Between records; a whole number of integration steps. [s]
    """

    interval: float = 1.0
    power: PowerSpec = PowerSpec()
    speed: SpeedSpec = SpeedSpec()
    position: PositionSpec | None = PositionSpec()
    barometer: BarometerSpec | None = BarometerSpec()
    air_probe: AirProbeSpec | None = None
    thermometer: ThermometerSpec | None = ThermometerSpec()
