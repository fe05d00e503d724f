"""Critical power and W'.

Sources: H. Monod, J. Scherrer 1965 in the form W = W' + CP·t, and P. F. Skiba et al. 2012,
doi:10.1249/MSS.0b013e3182517a80, P. F. Skiba, D. C. Clarke 2021, doi:10.1123/ijspp.2021-0205 (both read for
the hyperbola; the differential equation from memory). Hyperbola values exact; balances from solve_ivp at
1e-12, computed outside this package. CP 250 W, W' 20 kJ.
"""

from __future__ import annotations

import numpy as np
import pytest

from ridercda.physics.critical_power import (
    fit_critical_power,
    power_for_duration,
    time_to_exhaustion,
    w_balance,
)


def test_hyperbola() -> None:
    assert float(time_to_exhaustion(350.0, 250.0, 20e3)) == pytest.approx(200.0, abs=1e-9)
    np.testing.assert_allclose(
        power_for_duration([180.0, 300.0, 720.0], 250.0, 20e3), [361.111, 316.667, 277.778], atol=5e-4
    )


def test_work_time_line_returns_what_made_it() -> None:
    durations = np.array([180.0, 300.0, 720.0])
    fitted = fit_critical_power(durations, 250.0 + 20e3 / durations)
    assert fitted.critical_power == pytest.approx(250.0, rel=1e-9)
    assert fitted.w_prime == pytest.approx(20e3, rel=1e-9)


def test_balance_after_one_effort_and_one_recovery() -> None:
    # Euler steps of one second end 7e-4 higher, so 1e-6 tells the exact solution apart.
    balance = w_balance([450.0, 150.0], [60.0, 120.0], 250.0, 20e3)
    np.testing.assert_allclose(balance, [8000.0, 13414.260367], rtol=1e-6 / 13414)


def test_balance_through_five_pieces() -> None:
    balance = w_balance([400.0, 200.0, 400.0, 150.0, 500.0], [60.0, 120.0, 60.0, 180.0, 30.0], 250.0, 20e3)
    np.testing.assert_allclose(
        balance, [11000.0, 13332.636014, 4332.636014, 13630.125155, 6130.125155], atol=5.1e-7
    )
