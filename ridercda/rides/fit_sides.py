"""Which side of the bike power was measured on, from what the pedals report beside it."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from ridercda.rides.ride import FloatArray

_FEWEST = 60  # records before anything is concluded
_RIGHT_FLAG = 0x80
_SHARE = 0x7F


def one_sided(columns: Mapping[str, FloatArray]) -> str:
    """Return a sentence saying that power was measured on one side only; empty where nothing says so.

    Parameters
    ----------
    columns : mapping of str to ndarray, shape (n,)
        The pedal fields of the record messages as stored, NaN where missing.

    Notes
    -----
    A one-sided meter doubles its leg. Where the file carries pedal figures it shows as a balance that never
    leaves one side or 50 %, or as pedal figures of one leg only (common practice; a meter may say nothing).
    """
    for name, noun in (
        ("torque_effectiveness", "torque effectiveness"),
        ("pedal_smoothness", "pedal smoothness"),
    ):
        left, right = (_known(columns, f"{side}_{name}") for side in ("left", "right"))
        if left >= _FEWEST and right == 0:
            return f"Only the left leg reports {noun}: power is the left leg's, doubled"
        if right >= _FEWEST and left == 0:
            return f"Only the right leg reports {noun}: power is the right leg's, doubled"
    return _from_balance(columns)


def _known(columns: Mapping[str, FloatArray], name: str) -> int:
    values = columns.get(name)
    return 0 if values is None else int(np.isfinite(values).sum())


def _from_balance(columns: Mapping[str, FloatArray]) -> str:
    stored, power = columns.get("left_right_balance"), columns.get("power")
    if stored is None or power is None:
        return ""
    with np.errstate(invalid="ignore"):
        pedalled = np.isfinite(stored) & (power > 0) & (stored >= 0) & (stored < 0xFF)
    if int(pedalled.sum()) < _FEWEST:
        return ""
    bits = stored[pedalled].astype(np.int64)
    share = bits & _SHARE
    share_is_right = bool((bits & _RIGHT_FLAG).all())  # else the file does not say whose share it is
    if share_is_right and (share == 100).all():
        return "The balance is 100 % right in every record: power was measured on the right only"
    if share_is_right and (share == 0).all():
        return "The balance is 100 % left in every record: power was measured on the left only"
    if (share == 50).all():
        return "The balance is exactly 50 % in every record: one leg was measured and doubled"
    return ""
