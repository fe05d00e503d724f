"""The share of air in the resistance on a level road, against published bands and the trade's rule of thumb.

- "more than 90 % above 40 km/h": J. E. Peterman et al. 2015, PeerJ 3, e1144, doi:10.7717/peerj.1144
(introduction, read) - "about 90 % at 40 km/h": T. van Druenen, B. Blocken 2021,
doi:10.1007/s12283-021-00345-2 (introduction, read) - "80-90 % of power at 45 km/h; air dominant above 15
km/h": N. Barry 2018, Proceedings 2, 211,
  doi:10.3390/proceedings2060211 (read)
- 70-90 % at 40 km/h: common practice in the trade, no source
- the percentages of the model for 80 kg, Crr 0.004, density 1.2: computed outside this package
"""

from __future__ import annotations

import itertools

import numpy as np
import pytest

from ridercda.physics.power_balance import RoadPower, road_power


def without_bearings(terms: RoadPower) -> float:
    return float(terms.aero / (terms.aero + terms.rolling))


@pytest.mark.parametrize(
    ("cda", "crr", "mass"),
    list(itertools.product([0.22, 0.26, 0.30], [0.004, 0.005, 0.006], [80.0, 82.5, 85.0])),
)
def test_trade_rule_of_thumb_at_40_km_h(cda: float, crr: float, mass: float) -> None:
    terms = road_power(40.0 / 3.6, mass=mass, cda=cda, crr=crr, density=1.2)
    assert 0.70 < float(terms.aero / terms.wheel) < 0.90
    assert 0.70 < without_bearings(terms) < 0.90


@pytest.mark.parametrize(("cda", "shares"), [(0.25, (79.1, 85.5, 88.2)), (0.35, (84.1, 89.2, 91.3))])
def test_model_shares_at_32_40_and_45_km_h(cda: float, shares: tuple[float, ...]) -> None:
    for speed_kmh, share in zip((32.0, 40.0, 45.0), shares, strict=True):
        terms = road_power(speed_kmh / 3.6, mass=80.0, cda=cda, crr=0.004, density=1.2)
        assert 100.0 * without_bearings(terms) == pytest.approx(share, abs=0.05)


@pytest.mark.parametrize("cda", [0.25, 0.30, 0.35])
def test_published_bands(cda: float) -> None:
    at_40 = without_bearings(road_power(40.0 / 3.6, mass=80.0, cda=cda, crr=0.004, density=1.2))
    assert 0.75 < at_40 < 0.95
    at_45 = without_bearings(road_power(45.0 / 3.6, mass=80.0, cda=cda, crr=0.004, density=1.2))
    assert 0.80 < at_45 < 0.92  # 80-90 %, read as rounded figures


def test_air_overtakes_rolling_at_15_km_h() -> None:
    speeds = np.linspace(10.0, 20.0, 1001) / 3.6
    terms = road_power(speeds, mass=80.0, cda=0.30, crr=0.004, density=1.2)
    crossing = float(np.interp(0.0, terms.aero - terms.rolling, speeds))
    assert crossing * 3.6 == pytest.approx(15.03, abs=0.005)
