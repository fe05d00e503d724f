"""Wind: strength, time scale, spectrum, drift, shelter and reports."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from ridercda.synthetic.wind import (
    STILL,
    GustKind,
    GustSpec,
    PassingCars,
    WeatherReport,
    WindSpec,
    blow,
    reported_wind,
    shelter,
)

STEP = 0.05
STEPS = 600_000  # over eight hours: sample statistics settle


@pytest.mark.parametrize("kind", list(GustKind))
def test_gusts_have_the_strength_and_time_asked_for(kind: GustKind) -> None:
    spec = replace(STILL, gusts=GustSpec(0.8, 11.0, kind))
    wind = blow(spec, STEPS, STEP, 3600.0, np.random.default_rng(1))
    sd = math.sqrt(0.5 * (wind.east.var() + wind.north.var()))
    assert sd == pytest.approx(0.8, rel=0.12 if kind is GustKind.BURSTS else 0.06)
    assert abs(np.corrcoef(wind.east, wind.north)[0, 1]) < 0.08
    # The integral time scale: half the spectrum at zero frequency over the variance, from means of 4 minutes.
    window = round(240 / STEP)
    means = np.concatenate(
        [w[: len(w) // window * window].reshape(-1, window).mean(1) for w in (wind.east, wind.north)]
    )
    assert means.var() / sd**2 * 240 / 2 == pytest.approx(11.0, rel=0.35)


def test_spectra_differ_in_slope_at_high_frequency() -> None:
    def slope(kind: GustKind) -> float:
        spec = replace(STILL, gusts=GustSpec(1.0, 11.0, kind))
        wind = blow(spec, STEPS, STEP, 3600.0, np.random.default_rng(2)).east
        power = np.abs(np.fft.rfft(wind)) ** 2
        frequency = np.fft.rfftfreq(STEPS, STEP)
        low, high = (power[(frequency > a) & (frequency < 1.2 * a)].mean() for a in (0.15, 1.5))
        return math.log10(high / low)

    assert slope(GustKind.ORNSTEIN_UHLENBECK) == pytest.approx(-2.0, abs=0.15)
    assert slope(GustKind.KAIMAL) == pytest.approx(-5 / 3, abs=0.15)


def test_bursts_have_heavy_tails() -> None:
    def kurtosis(kind: GustKind) -> float:
        spec = replace(STILL, gusts=GustSpec(1.0, 11.0, kind))
        wind = blow(spec, STEPS, STEP, 3600.0, np.random.default_rng(3)).east
        return float(np.mean(wind**4) / np.mean(wind**2) ** 2)

    assert kurtosis(GustKind.ORNSTEIN_UHLENBECK) == pytest.approx(3.0, abs=0.4)
    assert kurtosis(GustKind.BURSTS) > 5.0


def test_mean_blows_from_where_asked_and_turns_and_grows() -> None:
    spec = replace(STILL, speed=2.0, blows_from=math.radians(270), turn=math.radians(90), growth=1.0)
    wind = blow(spec, 1000, 3.6, 3600.0, np.random.default_rng(4))
    assert wind.east[500] == pytest.approx(2.0, rel=1e-6)  # from the west: the air moves east
    assert wind.north[500] == pytest.approx(0.0, abs=1e-6)
    for at, speed, blows_from in ((0, 1.5, 225.0), (999, 2.5, 315.0)):
        assert math.hypot(wind.east[at], wind.north[at]) == pytest.approx(speed, abs=0.01)
        assert math.degrees(math.atan2(-wind.east[at], -wind.north[at])) % 360 == pytest.approx(
            blows_from, abs=0.2
        )


def test_cars_push_the_air_along_and_leave_none_behind() -> None:
    spec = replace(STILL, cars=PassingCars(per_hour=60, push=2.5, push_sd=0.0, decay=2.5))
    push = blow(spec, STEPS, STEP, 3600.0, np.random.default_rng(5)).push
    assert push.min() == 0.0
    hours = STEPS * STEP / 3600
    cars = np.count_nonzero((push[1:] > 0.3) & (push[:-1] <= 0.3))
    assert cars == pytest.approx(60 * hours, abs=3 * math.sqrt(60 * hours))
    assert np.mean(push == 0.0) > 0.5


def test_shelter_varies_about_one() -> None:
    spec = replace(STILL, shelter_variation=0.3)
    share = shelter(spec, 4800, 2400.0, np.random.default_rng(6))
    assert share.mean() == pytest.approx(1.0)
    assert share.std() == pytest.approx(0.3, rel=0.1)
    assert share.min() > 0
    assert np.all(shelter(STILL, 100, 2400.0, np.random.default_rng(6)) == 1.0)


def test_report_stands_at_its_own_height_with_its_own_error() -> None:
    exact = WindSpec(report=WeatherReport(speed_error=0.0, from_error=0.0))
    speed, blows_from = reported_wind(exact, 0.0, -2.0, np.random.default_rng(7))
    # ln(10/0.03) over ln(1.2/0.03): the log profile of WMO-No. 8.
    assert speed == pytest.approx(2.0 * math.log(10 / 0.03) / math.log(1.2 / 0.03))
    assert blows_from == pytest.approx(0.0)
    rough = WindSpec(report=WeatherReport(speed_error=0.25))
    rng = np.random.default_rng(8)
    reports = np.array([reported_wind(rough, 0.0, -2.0, rng)[0] for _ in range(2000)])
    assert reports.std() / reports.mean() == pytest.approx(0.25, abs=0.02)
