"""The filter's sensitivities against differences, and its innovations against what they should be."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from numpy.testing import assert_allclose

from ridercda.drag import innovations as at
from ridercda.drag.likelihood import Fit, Model, fit, model_of, run_pass
from ridercda.drag.prepare import prepare_day
from ridercda.synthetic.day import simulate_day
from ridercda.synthetic.spec import REFERENCE_DAY


@pytest.fixture(scope="module")
def model() -> Model:
    day = simulate_day(replace(REFERENCE_DAY, order="ABCABC", laps=1), 4)
    return model_of(prepare_day(day.session, day.rides))


@pytest.fixture(scope="module")
def settled(model: Model) -> Fit:
    return fit(model)


STEPS = {
    at.CDA: 1e-4,
    at.WIND_EAST: 1e-3,
    at.CRR: 1e-5,
    at.SPEED_SLOPE: 1e-3,
    at.POWER_SCALE: 1e-4,
    at.POWER_OFFSET: 1e-2,
    at.POWER_LAG: 1e-3,
    at.TYRE_WARM_UP: 1e-3,
    at.SPEED_FACTOR: 1e-5,
    at.LEADING + 5: 1e-5,
}


@pytest.mark.parametrize("which", STEPS)
def test_sensitivities_are_the_innovations_slopes(model: Model, settled: Fit, which: int) -> None:
    """The kernel leaves out how the gain itself moves with the unknowns, which is worth up to 1 % (by design)."""
    noise = np.log([1e-3, 11.0, 0.03, 0.02, 0.3])
    place = model.layout.places[0]
    start = settled.parameters.copy()
    up, down = start.copy(), start.copy()
    up[place[which]] += STEPS[which]
    down[place[which]] -= STEPS[which]
    middle = run_pass(model, 0, start, noise)
    high, low = run_pass(model, 0, up, noise), run_pass(model, 0, down, noise)
    root = np.sqrt(middle.variance)
    slope = (high.innovation * np.sqrt(high.variance) - low.innovation * np.sqrt(low.variance)) / (
        2 * STEPS[which]
    )
    slope = np.divide(slope, root, out=np.zeros_like(slope), where=root > 0)
    assert middle.information[which, which] == pytest.approx(float(slope @ slope), rel=1e-2)


def test_innovations_of_a_fitted_day_are_white_and_of_unit_size(settled: Fit) -> None:
    e = settled.last.innovation[settled.last.variance > 0]
    assert np.sqrt(np.mean(e**2)) == pytest.approx(1.0, abs=0.06)
    echo = float(np.corrcoef(e[:-1], e[1:])[0, 1])
    assert abs(echo) < 4.0 / np.sqrt(e.size)


def test_the_noise_put_in_is_found(settled: Fit) -> None:
    gust, _, power, speed, _ = settled.noise
    spec = REFERENCE_DAY
    assert gust == pytest.approx(0.5, rel=0.35)
    assert speed == pytest.approx(spec.sensors.speed.noise, rel=0.25)
    assert 0.008 <= power < 0.12


def test_no_figure_depends_on_what_was_solved_before(model: Model, settled: Fit) -> None:
    assert_allclose(settled.parameters, fit(model_of(model.day)).parameters, rtol=0, atol=0)
