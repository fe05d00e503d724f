"""Speed at the ends of records, from their means."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]


def speed_at_ends(speed: FloatArray) -> FloatArray:
    """Return the speed at the ends of records from their means, (n,) -> (n + 1,); NaN counts as the mean beside."""
    filled = np.nan_to_num(speed)
    if not filled.size:
        return np.zeros(1)
    ends = np.empty(filled.size + 1)
    ends[1:-1] = 0.5 * (filled[1:] + filled[:-1])
    ends[0], ends[-1] = 1.5 * filled[0] - 0.5 * ends[1], 1.5 * filled[-1] - 0.5 * ends[-2]
    return ends
