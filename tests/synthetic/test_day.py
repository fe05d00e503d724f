"""Whole invented days: seeds, order, targets, what the session says and what the truth says."""

from __future__ import annotations

import itertools
import math
from dataclasses import replace

import numpy as np
import pytest

from ridercda.rides.ride import CHANNELS
from ridercda.synthetic.day import SyntheticDay, simulate_day
from ridercda.synthetic.rider import RiderSpec, Spread, run_factors
from ridercda.synthetic.spec import (
    REFERENCE_DAY,
    TRACK_DAY,
    AirSpec,
    Cycle,
    DaySpec,
    LapTimes,
    SetupSpec,
    TyreSpec,
    noise_free,
)
from ridercda.synthetic.venue import LoopVenue, OutAndBackVenue, RoadVenue
from ridercda.synthetic.wind import WeatherReport, WindSpec


@pytest.fixture(scope="module")
def reference() -> SyntheticDay:
    return simulate_day(REFERENCE_DAY, 11)


def test_same_seed_same_day_other_seed_other_day(reference: SyntheticDay) -> None:
    again, other = simulate_day(REFERENCE_DAY, 11), simulate_day(REFERENCE_DAY, 12)
    assert again.session == reference.session
    for name, values in reference.rides["day"].channels.items():
        assert np.array_equal(values, again.rides["day"].channels[name])
    assert not np.array_equal(reference.truth.records.speed[:1000], other.truth.records.speed[:1000])


def test_instruments_do_not_change_what_happened(reference: SyntheticDay) -> None:
    sensors = replace(REFERENCE_DAY.sensors, power=replace(REFERENCE_DAY.sensors.power, noise=0.10))
    noisy = simulate_day(replace(REFERENCE_DAY, sensors=sensors), 11)
    assert np.array_equal(noisy.truth.records.speed, reference.truth.records.speed)
    assert not np.array_equal(noisy.rides["day"].channels["power"], reference.rides["day"].channels["power"])


def test_reference_day_is_the_day_it_is_meant_to_be(reference: SyntheticDay) -> None:
    session, truth = reference.session, reference.truth
    assert session.rider.mass + session.bike.mass == 84.0  # type: ignore[operator]
    assert "".join(session.setup(r.setup).letter for r in session.runs) == "ABCCBAABCCBA"
    assert truth.lap_length == pytest.approx(2400.0, rel=1e-4)
    assert 1.4 < reference.rides["day"].duration / 3600 < 2.1
    assert session.baseline is not None
    assert session.baseline.id == "a"
    powers = [target_of(reference, r.id) for r in session.runs]
    for setup in "abc":
        ridden = sorted(p for p, r in zip(powers, session.runs, strict=True) if r.setup == setup)
        assert {round(p, -1) for p in ridden} == {150, 220, 300}
    assert set(reference.rides["day"].channels) <= set(CHANNELS)


def target_of(day: SyntheticDay, run_id: str) -> float:
    run, records = day.session.run(run_id), day.truth.records
    inside = (records.time > run.start) & (records.time <= (run.end or math.inf))
    return float(records.power[inside].mean() / day.truth.efficiency)


def test_runs_cover_whole_laps_from_the_line(reference: SyntheticDay) -> None:
    records, lap = reference.truth.records, reference.truth.lap_length
    for run in reference.truth.runs:
        for crossing in run.lap_times:
            at = np.interp(crossing, records.time, np.unwrap(records.place, period=lap))
            assert abs((at + lap / 2) % lap - lap / 2) < 0.6  # position between records is not linear in time
        assert len(run.lap_times) == 3
    starts = [r.start for r in reference.session.runs]
    ends = [r.end for r in reference.session.runs]
    pauses = np.array(starts[1:]) - np.array(ends[:-1], float)
    assert np.all((pauses > 60) & (pauses < 150))


def test_truth_of_runs_follows_from_the_spec(reference: SyntheticDay) -> None:
    runs = reference.truth.runs
    spread = np.array([r.cda / reference.truth.cda[r.setup] - 1 for r in runs])
    assert 0 < spread.std() < 0.02
    for run in runs:
        assert run.crr == pytest.approx(0.0040)
        assert math.hypot(run.wind_east, run.wind_north) == pytest.approx(1.5, abs=0.6)
        assert run.gust_sd == pytest.approx(0.5, abs=0.15)


def test_lap_cycle_moves_on_every_lap() -> None:
    spec = replace(noise_free(REFERENCE_DAY), cycle=Cycle.LAP, order="AB")
    spec = replace(spec, rider=replace(spec.rider, wobble=0.0))
    day = simulate_day(spec, 1)
    power, time = day.rides["day"].channels["power"], day.rides["day"].time
    laps = [t for run in day.truth.runs for t in run.lap_times]
    ridden = [float(np.median(power[(time > a + 20) & (time < b)])) for a, b in itertools.pairwise(laps)]
    assert [round(ridden[k]) for k in (0, 1, 3, 4)] == [150, 220, 220, 300]


def test_heavy_tails_keep_the_standard_deviation() -> None:
    rng = np.random.default_rng(1)
    heavy = run_factors(RiderSpec(run_spread=0.02, run_spread_kind=Spread.STUDENT_3), 200_000, rng) - 1
    assert heavy.std() == pytest.approx(0.02, rel=0.15)
    assert np.mean(np.abs(heavy) > 0.08) > 10 * np.mean(np.abs(0.02 * rng.standard_normal(200_000)) > 0.08)


def test_warming_morning_and_cold_tyres_move_crr_and_density() -> None:
    spec = replace(
        REFERENCE_DAY,
        order="ABC",
        air=AirSpec(warming_per_hour=6.0, readings=(0.0, 0.5, 1.0)),
        tyres=(TyreSpec(warm_up=0.2, warm_up_time=300.0),),
    )
    day = simulate_day(spec, 2)
    first, last = day.truth.runs[0], day.truth.runs[-1]
    assert first.crr > last.crr * 1.05
    assert first.density > last.density
    readings = day.session.air.readings
    assert [r.time for r in readings] == [9 * 3600, 9.5 * 3600, 10 * 3600]
    temperatures = [r.temperature for r in readings]
    assert np.diff(temperatures) == pytest.approx([3.0, 3.0])  # type: ignore[arg-type]


def test_tyre_sets_and_mass_changes_reach_the_road() -> None:
    spec = replace(
        REFERENCE_DAY,
        order="AB",
        tyres=(TyreSpec("one", 0.0035), TyreSpec("two", 0.0050)),
        setups=(
            SetupSpec("a", 0.26, "A", tyres="one"),
            SetupSpec("b", 0.26, "B", tyres="two", mass_change=2.0),
        ),
    )
    day = simulate_day(spec, 3)
    assert [r.crr for r in day.truth.runs] == pytest.approx([0.0035, 0.0050])
    assert [r.mass for r in day.truth.runs] == [84.0, 86.0]
    assert [t.id for t in day.session.tyres] == ["one", "two"]
    assert day.session.setup("b").mass_change == 2.0


def test_lap_times_as_asked() -> None:
    day = {kind: simulate_day(replace(REFERENCE_DAY, order="A", lap_times=kind), 4) for kind in LapTimes}
    true = np.array(day[LapTimes.EXACT].truth.runs[0].lap_times)
    assert day[LapTimes.NONE].session.runs[0].laps == ()
    assert day[LapTimes.EXACT].session.runs[0].laps == pytest.approx(true)
    pressed = np.array(day[LapTimes.PRESSED].session.runs[0].laps)
    assert 0.0 < np.abs(pressed - true).max() < 1.6


def test_weather_report_is_only_there_when_asked_for(reference: SyntheticDay) -> None:
    assert reference.session.air.wind_speed is None
    day = simulate_day(replace(REFERENCE_DAY, order="A", wind=WindSpec(report=WeatherReport())), 5)
    air = day.session.air
    assert air.wind_height == 10.0
    assert air.wind_speed is not None
    assert 0.0 <= air.wind_speed < 6.0


@pytest.mark.parametrize("venue", [LoopVenue(), OutAndBackVenue(), RoadVenue()], ids=["loop", "out", "road"])
def test_speed_of_exact_records_is_distance_over_time(venue: LoopVenue | OutAndBackVenue | RoadVenue) -> None:
    day = simulate_day(noise_free(replace(REFERENCE_DAY, venue=venue, order="AB")), 6)
    channels = day.rides["day"].channels
    assert channels["speed"][1:] == pytest.approx(np.diff(channels["distance"]), abs=1e-9)
    assert channels["power"] * 0.977 == pytest.approx(day.truth.records.power, abs=1e-9)
    run = day.truth.runs[0]
    travelled = np.interp([run.start, run.end], day.rides["day"].time, channels["distance"])
    assert np.diff(travelled)[0] == pytest.approx(2 * day.truth.lap_length, abs=0.5)


def test_track_has_no_position_and_closes_by_distance() -> None:
    day = simulate_day(noise_free(TRACK_DAY), 7)
    ride = day.rides["day"]
    assert "latitude" not in ride.channels
    for run in day.truth.runs:
        laps = np.interp(run.lap_times, ride.time, ride.channels["distance"])
        assert np.diff(laps) == pytest.approx(250.0, abs=0.3)
    assert day.session.venue is not None
    assert (day.session.venue.bend_radius, day.session.venue.mass_height) == (23.0, 1.1)


def test_ten_records_a_second_have_the_same_work() -> None:
    spec = noise_free(replace(REFERENCE_DAY, order="A"))
    fast = replace(spec, sensors=replace(spec.sensors, interval=0.1))
    one, ten = (simulate_day(s, 8).rides["day"] for s in (spec, fast))
    assert ten.channels["power"][: 10 * 300].reshape(-1, 10).mean(1) == pytest.approx(
        one.channels["power"][:300]
    )


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"order": "AX"}, "order names setup 'X'"),
        ({"setups": (SetupSpec("a", 0.26, "A", tyres="none"),), "order": "A"}, "tyres 'none'"),
    ],
)
def test_spec_that_does_not_hang_together_is_an_error(changes: dict[str, object], message: str) -> None:
    spec: DaySpec = replace(REFERENCE_DAY, **changes)  # type: ignore[arg-type]
    with pytest.raises(ValueError, match=message):
        simulate_day(spec, 1)
