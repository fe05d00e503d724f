"""The equation of motion against independent integration, closed forms and the track table."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

from ridercda.synthetic import motion
from ridercda.synthetic.day import SyntheticDay, simulate_day
from ridercda.synthetic.rider import Holds, RiderSpec
from ridercda.synthetic.spec import REFERENCE_DAY, TRACK_DAY, DaySpec, SetupSpec, noise_free
from ridercda.synthetic.venue import LoopVenue, OutAndBackVenue, RoadVenue, TrackVenue

SPIN = 0.14 / (2.105 / (2 * math.pi)) ** 2


def steady(spec: DaySpec) -> DaySpec:
    day = noise_free(spec)
    return replace(day, rider=replace(day.rider, wobble=0.0))


def one_run(**changes: object) -> DaySpec:
    base = replace(REFERENCE_DAY, order="A", setups=(SetupSpec("a", 0.30, "A"),), targets=(250.0,))
    return steady(replace(base, **changes))  # type: ignore[arg-type]


@pytest.mark.parametrize(
    ("speed", "radius", "height", "lean_deg", "body_speed", "load"),
    [  # rigid steady turn, solved with a root finder elsewhere (exact arithmetic of the stated equations)
        (15.0, 23.0, 1.0, 44.050469, 14.546549, 1.391348),
        (16.0, 22.0, 1.1, 48.791396, 15.398147, 1.517906),
        (14.0, 25.0, 1.0, 37.946859, 13.655639, 1.268100),
    ],
)
def test_lean_agrees_with_the_track_table(
    speed: float, radius: float, height: float, lean_deg: float, body_speed: float, load: float
) -> None:
    sine, cosine, ratio = motion._lean(speed, 1 / radius, height)
    assert math.degrees(math.asin(sine)) == pytest.approx(lean_deg, abs=1e-6)
    assert speed * ratio == pytest.approx(body_speed, abs=1e-6)
    assert 1 / cosine == pytest.approx(load, abs=1e-6)


def test_flat_straight_road_settles_at_the_speed_where_the_forces_balance() -> None:
    day = simulate_day(one_run(venue=RoadVenue(stretch=4000, runs=2, rises=(), mass_height=0.0)), 1)
    rho, mass = day.truth.runs[0].density, day.truth.runs[0].mass

    def surplus(v: float) -> float:
        air, rolling = 0.5 * rho * 0.30 * v**3, 0.004 * mass * 9.80665 * v
        return 250 * 0.977 - air - rolling - (0.091 + 0.0087 * v) * v

    speed = day.rides["day"].channels["speed"]
    end = round(day.truth.runs[0].end)
    # Bends of this road are wider than half a kilometre; their lean adds some 1e-5 of load.
    assert speed[end] == pytest.approx(brentq(surplus, 1, 30), rel=2e-5)


def test_hilly_road_agrees_with_a_high_order_integrator() -> None:
    venue = RoadVenue(stretch=3000, runs=2, shape_seed=5, mass_height=0.0)
    day = simulate_day(one_run(venue=venue, laps=1), 3)
    line, ride = day.truth.line, day.rides["day"]
    run, records = day.truth.runs[0], day.truth.records
    first, last = math.ceil(run.start) + 1, math.floor(run.end)
    rho, mass = run.density, run.mass

    def rate(_: float, state: np.ndarray) -> list[float]:
        s, v = state
        at = s + day.truth.line_start
        sine = float(np.interp(at, np.arange(len(line.height) - 1) + 0.5, np.diff(line.height)))
        curvature = float(line.at(line.curvature, at))
        tangent = v * v * curvature / 9.80665
        load = mass * 9.80665 * math.sqrt(1 - sine**2) * math.hypot(1, tangent)
        air, bearings = 0.5 * rho * 0.30 * v * v, 0.091 + 0.0087 * v
        force = 250 * 0.977 / v - air - 0.004 * load - bearings - mass * 9.80665 * sine
        return [v, force / (mass + SPIN)]

    # Speed at the start from the records either side: they are means over a second.
    v0 = 0.5 * (records.speed[first] + records.speed[first + 1])
    curve = solve_ivp(
        rate, (first, last), [records.place[first], v0], method="DOP853", rtol=1e-10, atol=1e-10,
        max_step=1.0, t_eval=np.arange(first, last + 1),
    )  # fmt: skip
    assert curve.y[0] == pytest.approx(records.place[first : last + 1], abs=0.15)
    assert np.diff(curve.y[0])[30:] == pytest.approx(
        ride.channels["speed"][first + 1 : last + 1][30:], abs=2e-3
    )
    assert np.ptp(ride.channels["speed"][first:last]) > 3  # or the hills would not have been a test


@pytest.mark.parametrize(
    "spec",
    [
        REFERENCE_DAY,
        TRACK_DAY,
        replace(REFERENCE_DAY, venue=OutAndBackVenue(), order="AB"),
        replace(REFERENCE_DAY, venue=RoadVenue(), order="AB"),
        replace(REFERENCE_DAY, rider=RiderSpec(holds=Holds.SPEED), targets=(9.0, 11.0), order="AB"),
    ],
    ids=["loop", "track", "out-and-back", "road", "speed-holding"],
)
def test_power_balance_closes_at_every_step(spec: DaySpec) -> None:
    assert simulate_day(spec, 4).truth.energy_error < 1e-6


def audit(day: SyntheticDay, setup_cda: float, crr: float, mass_height: float) -> tuple[float, float]:
    """Work of the wheel over a run, and what resistances and stored energy account for; from 1 Hz records."""
    truth, ride = day.truth, day.rides["day"]
    run, records = truth.runs[0], truth.records
    a, b = math.ceil(run.start) + 1, math.floor(run.end)
    span = slice(a + 1, b + 1)
    v = ride.channels["speed"][span]
    middle = records.place[a:b] + 0.5 * v
    curvature = truth.curvature(middle)
    lean = np.zeros_like(v)
    for _ in range(50):
        lean = np.arctan(v**2 * curvature * (1 - mass_height * curvature * np.sin(lean)) / 9.80665)
    body = v * (1 - mass_height * curvature * np.sin(lean))
    air = 0.5 * run.density * setup_cda * body**3
    rolling = crr * run.mass * 9.80665 / np.cos(lean) * v
    bearings = (0.091 + 0.0087 * v) * v
    speed_at = 0.5 * (ride.channels["speed"][a : b + 1] + ride.channels["speed"][a + 1 : b + 2])
    height = truth.height(records.place[[a, b]])
    stored = 0.5 * (run.mass + SPIN) * (speed_at[-1] ** 2 - speed_at[0] ** 2)
    stored += run.mass * 9.80665 * (height[1] - height[0])
    work = float(ride.channels["power"][span].sum() * 0.977)
    return work, float((air + rolling + bearings).sum() + stored)


def test_noise_free_loop_records_hold_the_power_balance() -> None:
    day = simulate_day(one_run(venue=LoopVenue(mass_height=0.0)), 5)
    work, spent = audit(day, 0.30, 0.004, 0.0)
    assert spent == pytest.approx(work, rel=2e-4)


def test_noise_free_track_records_hold_the_power_balance() -> None:
    spec = steady(replace(TRACK_DAY, order="A", laps=20, targets=(330.0,)))
    day = simulate_day(spec, 5)
    work, spent = audit(day, 0.26, 0.0025, 1.1)
    # One record covers 13 m, over which the lean changes: the audit is coarse, the motion is not.
    assert spent == pytest.approx(work, rel=2e-3)
    _, without_lean = audit(day, 0.26, 0.0025, 0.0)
    assert without_lean > 1.02 * work


def test_more_drag_or_resistance_or_headwind_is_slower() -> None:
    def mean_speed(spec: DaySpec) -> float:
        run = simulate_day(spec, 6).truth.runs[0]
        return 1 / (run.end - run.start)

    base = one_run()
    assert mean_speed(one_run(setups=(SetupSpec("a", 0.31, "A"),))) < mean_speed(base)
    tyres = (replace(base.tyres[0], crr=0.005),)
    assert mean_speed(replace(base, tyres=tyres)) < mean_speed(base)
    breezy = replace(base, wind=replace(base.wind, speed=3.0))
    assert mean_speed(breezy) < mean_speed(base)  # a wind costs more on one side of a loop than it gives back
    assert mean_speed(replace(base, rider=replace(base.rider, mass=90.0))) < mean_speed(base)


def test_effort_speed_and_yaw_move_the_drag_area() -> None:
    def lap_time(**changes: float) -> float:
        base = one_run()
        breezy = replace(base.wind, speed=3.0, blows_from=0.0)
        run = simulate_day(replace(base, wind=breezy, rider=replace(base.rider, **changes)), 6).truth.runs[0]
        return run.end - run.start

    plain = lap_time()
    assert lap_time(effort_slope=0.05) > plain  # 250 W is above the reference of 220 W
    assert lap_time(speed_slope=-0.2, speed_reference=5.0) < plain
    assert lap_time(yaw_square=-1.0) < plain


def test_holding_speed_holds_speed() -> None:
    rider = RiderSpec(holds=Holds.SPEED)
    day = simulate_day(one_run(rider=rider, targets=(10.0,)), 7)
    run, ride = day.truth.runs[0], day.rides["day"]
    inside = (ride.time > run.start + 30) & (ride.time < run.end)
    assert ride.channels["speed"][inside].mean() == pytest.approx(10.0, abs=0.1)
    assert ride.channels["speed"][inside].std() < 0.7
    held_power = simulate_day(one_run(), 7)
    span = (held_power.rides["day"].time > 60) & (held_power.rides["day"].time < 300)
    assert held_power.rides["day"].channels["speed"][span].std() > 0.7  # the same hills at a held power


def test_brakes_before_u_turns_and_rides_them_slowly() -> None:
    venue = OutAndBackVenue(turn_radius=4.0, grip=0.35)
    day = simulate_day(one_run(venue=venue, laps=1), 8)
    records, run = day.truth.records, day.truth.runs[0]
    inside = (records.time > run.start) & (records.time < run.end)
    assert records.braked[inside].max() > 500
    assert records.speed[inside].min() == pytest.approx(math.sqrt(0.35 * 9.80665 * 4.0), abs=0.35)


def test_rider_who_cannot_get_up_the_hill_is_an_error() -> None:
    spec = one_run(venue=LoopVenue(rises=(300.0,)))
    with pytest.raises(ValueError, match="did not end"):
        simulate_day(spec, 9)


def test_track_without_room_for_its_bends_is_an_error() -> None:
    with pytest.raises(ValueError, match="no room for bends"):
        simulate_day(replace(TRACK_DAY, venue=TrackVenue(bend_radius=45.0)), 1)
