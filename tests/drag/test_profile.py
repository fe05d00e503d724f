"""The venue's profile: a spline of slopes whose heights are its integral."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.testing import assert_allclose

from ridercda.drag.profile import VenueNodes


@pytest.mark.parametrize("closed", [True, False])
def test_weights_sum_to_one_everywhere(closed: bool) -> None:
    nodes = VenueNodes(20, 40.0, closed)
    acts, share = nodes.place(np.linspace(0.0, 800.0, 997))
    assert_allclose(share.sum(axis=1), 1.0, atol=1e-12)
    assert acts.min() >= 0
    assert acts.max() < nodes.count


def test_a_lap_joins_smoothly() -> None:
    nodes = VenueNodes(20, 40.0, True)
    coefficients = np.random.default_rng(1).normal(size=nodes.count)
    before, after = nodes.slope(coefficients, np.array([800.0 - 1e-9, 0.0]))
    assert before == pytest.approx(after, abs=1e-9)


@pytest.mark.parametrize("closed", [True, False])
def test_heights_are_the_integral_of_the_slope(closed: bool) -> None:
    nodes = VenueNodes(12, 50.0, closed)
    coefficients = np.random.default_rng(2).normal(0.0, 0.02, nodes.count)
    fine = np.linspace(0.0, float(nodes.knots[-1]), 200_001)
    slope = nodes.slope(coefficients, fine)
    height = np.concatenate([[0.0], np.cumsum(0.5 * (slope[1:] + slope[:-1]) * np.diff(fine))])
    assert_allclose(nodes.rise @ coefficients, np.interp(nodes.knots, fine, height), atol=1e-9)


def test_coefficients_that_sum_to_zero_close_the_lap() -> None:
    nodes = VenueNodes(30, 40.0, True)
    coefficients = np.random.default_rng(3).normal(size=30)
    coefficients -= coefficients.mean()
    slope = nodes.slope(coefficients, np.arange(0.0, 1200.0, 0.1))
    assert abs(slope.mean()) < 1e-6
