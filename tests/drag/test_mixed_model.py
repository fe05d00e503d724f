"""Restricted likelihood and Satterthwaite degrees of freedom against certified values and closed forms."""

from __future__ import annotations

import numpy as np
import pytest
import statsmodels.api as sm
from numpy.testing import assert_allclose
from scipy.special import stdtrit

from ridercda.drag.mixed_model import Component, fit_mixed

# NIST StRD, one-way analysis of variance, set SiRstv: 5 instruments x 5 readings (certified values read in public
# test files that agree).
SIRSTV = np.array(
    [
        [196.3052, 196.1240, 196.1890, 196.2569, 196.3403],
        [196.3042, 196.3825, 196.1669, 196.3257, 196.0422],
        [196.1303, 196.2005, 196.2889, 196.0343, 196.1811],
        [196.2795, 196.1748, 196.1494, 196.1485, 195.9885],
        [196.2119, 196.1051, 196.1850, 196.0052, 196.2090],
    ]
)


def test_one_way_random_effects_of_nist_sirstv() -> None:
    groups, repeats = SIRSTV.shape
    y = (SIRSTV - 196.0).ravel()
    block = np.kron(np.eye(groups), np.ones((repeats, repeats)))
    fit = fit_mixed(
        y, np.ones((y.size, 1)), np.zeros((y.size, y.size)), [Component(np.eye(y.size)), Component(block)]
    )
    # Closed form: variance within = MSW, between = (MSB - MSW)/n; Var(mean) = MSB/(kn) with k - 1 degrees of freedom.
    assert fit.variances[0] == pytest.approx(0.0108318280, rel=1e-6)
    assert fit.variances[1] == pytest.approx(3.9094748e-4, rel=1e-6)
    assert fit.coefficients[0] + 196.0 == pytest.approx(196.189156, abs=5e-7)
    error = float(np.sqrt(fit.covariance[0, 0]))
    assert error == pytest.approx(0.0226155392595, rel=1e-6)
    freedom = fit.degrees_of_freedom(np.array([1.0]))
    assert freedom == pytest.approx(4.0, rel=1e-6)
    assert error * stdtrit(freedom, 0.975) == pytest.approx(0.0627908, abs=5e-8)


def test_randomised_block_has_the_closed_forms() -> None:
    # 4 runs x 3 setups, closed forms computed independently: MSE with 6 degrees of freedom for a difference,
    # Satterthwaite's 3.47921559 for one setup's mean.
    y = np.array(
        [
            [0.2520, 0.2475, 0.2441],
            [0.2555, 0.2490, 0.2462],
            [0.2498, 0.2446, 0.2407],
            [0.2532, 0.2493, 0.2436],
        ]
    )
    blocks, setups = y.shape
    design = np.tile(np.eye(setups), (blocks, 1))
    block = np.kron(np.eye(blocks), np.ones((setups, setups)))
    n = y.size
    fit = fit_mixed(y.ravel(), design, np.zeros((n, n)), [Component(np.eye(n)), Component(block)])
    assert fit.variances[0] == pytest.approx(5.61388888889e-7, rel=1e-6)
    assert fit.variances[1] == pytest.approx(4.57611111111e-6, rel=1e-6)
    assert_allclose(fit.coefficients, [0.252625, 0.2476, 0.24365], atol=1e-12)
    difference = np.array([-1.0, 1.0, 0.0])
    assert float(np.sqrt(difference @ fit.covariance @ difference)) == pytest.approx(5.29806044e-4, rel=1e-6)
    assert fit.degrees_of_freedom(difference) == pytest.approx(6.0, rel=1e-6)
    one = np.array([1.0, 0.0, 0.0])
    assert float(np.sqrt(fit.covariance[0, 0])) == pytest.approx(1.13330270e-3, rel=1e-6)
    assert fit.degrees_of_freedom(one) == pytest.approx(3.47921559, rel=1e-6)


def test_a_known_correlation_gives_statsmodels_gls() -> None:
    x = np.arange(6.0)
    y = np.array([1.0, 1.3, 2.1, 2.4, 3.2, 3.3])
    sigma = 0.5 ** np.abs(x[:, None] - x[None, :])
    design = np.column_stack([np.ones(6), x])
    fit = fit_mixed(y, design, np.zeros((6, 6)), [Component(sigma)])
    outside = sm.GLS(y, design, sigma=sigma).fit()
    assert_allclose(fit.coefficients, outside.params, rtol=1e-8)
    assert_allclose(np.sqrt(np.diag(fit.covariance)), outside.bse, rtol=1e-8)
    assert fit.degrees_of_freedom(np.array([0.0, 1.0])) == pytest.approx(4.0, rel=1e-6)
    assert_allclose(fit.coefficients, [1.00625, 0.4775], atol=1e-10)  # normal equations, by hand


def test_a_variance_that_wants_to_vanish_vanishes() -> None:
    # Two groups with the very same readings: nothing lies between them.
    y = np.array([1.0, 2.0, 3.0, 1.0, 2.0, 3.0])
    block = np.kron(np.eye(2), np.ones((3, 3)))
    fit = fit_mixed(y, np.ones((6, 1)), np.zeros((6, 6)), [Component(np.eye(6)), Component(block)])
    assert fit.variances[1] < 1e-9 * fit.variances[0]
    assert fit.variances[0] == pytest.approx(np.var(y, ddof=1), rel=1e-6)


def test_a_prior_keeps_two_repeats_from_passing_for_certainty() -> None:
    y = np.array([0.2600, 0.2600])  # agree by luck
    fit = fit_mixed(y, np.ones((2, 1)), np.zeros((2, 2)), [Component(np.eye(2), (0.0017, 0.8))])
    assert 0.0002 < np.sqrt(fit.variances[0]) < 0.0017
    assert 1.0 < fit.degrees_of_freedom(np.array([1.0])) < 10.0
