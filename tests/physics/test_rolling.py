from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from ridercda.physics.rolling import bearing_force, bearing_power, crr_at_temperature, rolling_force


def test_rolling_force_is_a_share_of_the_load() -> None:
    np.testing.assert_allclose(rolling_force([0.004, 0.005], 800.0), [3.2, 4.0])


@given(st.floats(0.001, 0.01), st.floats(-0.02, 0.02))
def test_reference_temperature_changes_nothing(crr: float, coefficient: float) -> None:
    assert float(crr_at_temperature(crr, 293.15, coefficient)) == crr


def test_warm_rubber_rolls_easier() -> None:
    crr = crr_at_temperature(0.004, np.array([273.15, 283.15, 293.15, 303.15]), -0.01)
    np.testing.assert_allclose(crr, [0.0048, 0.0044, 0.0040, 0.0036])


def test_temperature_that_leaves_no_rolling_resistance_is_refused() -> None:
    with pytest.raises(
        ValueError, match=r"coefficient of -0.01 per K leaves no rolling resistance 100 K from 20 °C"
    ):
        crr_at_temperature(0.004, 393.15, -0.01)


def test_dropouts_stay() -> None:
    assert np.isnan(crr_at_temperature(0.004, np.nan, -0.01))
    assert np.isnan(bearing_power(np.nan))


@given(st.floats(0.1, 30.0))
def test_bearing_power_is_force_times_speed(speed: float) -> None:
    assert float(bearing_power(speed)) == pytest.approx(float(bearing_force(speed)) * speed, rel=1e-14)
