"""Each lap's virtual elevation and the profile the laps share: plain data."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class LapTrace:
    """One lap along the venue."""

    run: str
    lap: int
    time: FloatArray  # on the ride's clock [s]
    position: FloatArray  # along the venue [m]
    elevation: FloatArray  # virtual, from the lap's own beginning on [m]
    residual: FloatArray  # against the profile [m]


@dataclass(frozen=True, slots=True, eq=False)
class Laps:
    """The laps of a day and the profile they share."""

    position: FloatArray  # [m]
    profile: FloatArray  # [m]
    traces: tuple[LapTrace, ...]
