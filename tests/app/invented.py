"""Invented days and estimates for tests of the window: figures from a seed, shaped like an answer, true of nothing."""

from __future__ import annotations

import datetime as dt
from types import MappingProxyType

import numpy as np

from ridercda.app.desk import Desk
from ridercda.drag.estimate import (
    Difference,
    Estimate,
    Figure,
    Gust,
    NextStep,
    RunEstimate,
    SetupEstimate,
    SolveWarning,
    TyreEstimate,
)
from ridercda.drag.verdict import verdict
from ridercda.rides.ride import Fault, FaultKind, Ride
from ridercda.session.document import Bike, RideEntry, Rider, Run, Session, Setup, Venue, VenueKind

START = dt.datetime(2026, 5, 9, 8, 0, tzinfo=dt.timezone(dt.timedelta(hours=2)))


def invented_ride(
    runs: int = 12, lap: float = 210.0, rest: float = 150.0, rate: float = 1.0, seed: int = 5
) -> Ride:
    """Return a ride with `runs` runs of two laps round an oval, 1 Hz."""
    rng = np.random.default_rng(seed)
    length = 300.0 + runs * (2 * lap + rest) + 300.0
    time = np.arange(0.0, length, 1.0 / rate)
    power, speed = np.zeros(time.size), np.zeros(time.size)
    for k in range(runs):
        start = 300.0 + k * (2 * lap + rest)
        inside = (time >= start) & (time < start + 2 * lap)
        target = (160.0, 220.0, 290.0)[k % 3]
        power[inside] = (
            target + 12 * np.sin(2 * np.pi * (time[inside] - start) / lap) + rng.normal(0, 8, inside.sum())
        )
        speed[inside] = 11.4 * (target / 220) ** 0.4 + 0.4 * np.cos(2 * np.pi * (time[inside] - start) / lap)
        near = (time >= start + 2 * lap) & (time < start + 2 * lap + rest)
        speed[near] = 4.0
        power[near] = 60.0
    angle = 2 * np.pi * np.cumsum(speed) / rate / 2400.0
    latitude = np.radians(47.5) + 320 * np.sin(angle) / 6.371e6
    longitude = np.radians(8.2) + 430 * np.cos(angle) * (1 + 0.2 * np.sin(angle)) / (
        6.371e6 * np.cos(np.radians(47.5))
    )
    faults = (
        Fault(
            FaultKind.POWER_DROPOUT,
            1210.0,
            1216.0,
            "power",
            "Power reads 0 W for 6 s while the speed holds.",
            "fill",
            ("fill", "leave"),
        ),
        Fault(
            FaultKind.POSITION_SPIKE,
            3020.0,
            3022.0,
            "latitude",
            "The position jumps 84 m and back within 2 s.",
            "drop",
            ("drop", "leave"),
        ),
    )
    channels = {"power": power, "speed": speed, "latitude": latitude, "longitude": longitude}
    return Ride(
        time,
        MappingProxyType(channels),
        START,
        source="fit",
        device="invented",
        sha256="0" * 64,
        faults=faults,
    )


def invented_session(setups: int = 3, runs: int = 12, lap: float = 210.0, rest: float = 150.0) -> Session:
    """Return a session over `invented_ride` of the same numbers."""
    names = (
        "Drops, vented helmet",
        "Drops, smooth helmet",
        "Forearms level",
        "Forearms high",
        "Deep front wheel",
        "Disc wheel",
        "Skinsuit",
        "Loose jersey",
        "Shoe covers",
        "Narrow bars",
        "Low hoods",
        "Long-tail helmet",
    )
    order = [*range(setups), *reversed(range(setups))]
    made = tuple(
        Setup(f"s{k}", letter=chr(65 + k), name=names[k], baseline=k == 0, tyres="25 mm clincher")
        for k in range(setups)
    )
    spans = tuple(
        Run(
            str(k + 1),
            "am",
            f"s{order[k % len(order)]}",
            300.0 + k * (2 * lap + rest),
            300.0 + k * (2 * lap + rest) + 2 * lap,
        )
        for k in range(runs)
    )
    return Session(
        "Quarry loop, morning",
        Venue(VenueKind.LOOP, lap_length=2400.0),
        START.date(),
        7200.0,
        rider=Rider(mass=75.5),
        bike=Bike(mass=8.5),
        rides=(RideEntry("am", "rides/am.fit"),),
        setups=made,
        runs=spans,
    )


def figure(value: float, error: float, freedom: float = 9.0) -> Figure:
    """Return a figure with an interval of about 95 %."""
    return Figure(value, error, (value - 2.26 * error, value + 2.26 * error), freedom)


def invented_estimate(session: Session, seed: int = 7) -> Estimate:
    """Return an estimate that fits a session: levels a little apart, every run about its setup's level."""
    rng = np.random.default_rng(seed)
    levels = {s.id: 0.2601 - 0.0065 * k + 0.003 * (k % 3 == 1) for k, s in enumerate(session.setups)}
    runs, counted = [], {s.id: 0 for s in session.setups}
    for k, run in enumerate(session.runs):
        counted[run.setup] += not run.excluded
        value = levels[run.setup] + rng.normal(0, 0.0018)
        influence = {s.id: float(rng.normal(0, 0.0012)) for s in session.setups[1:]}
        runs.append(
            RunEstimate(
                run.id,
                run.setup,
                run.ride,
                run.start,
                run.end or run.start + 400,
                2,
                (160.0, 220.0, 290.0)[k % 3],
                11.4 * ((160.0, 220.0, 290.0)[k % 3] / 220) ** 0.4,
                1.205 - 0.0008 * k,
                0.8 + 0.07 * k,
                4.1 + 0.02 * k,
                run.excluded,
                figure(value, 0.0012),
                float(rng.normal(0, 0.8)),
                MappingProxyType(influence),
            )
        )
    base = session.setups[0].id
    shares = MappingProxyType({"repeats": 0.46, "gusts": 0.33, "power": 0.13, "rolling": 0.08})
    differences = []
    for setup in session.setups[1:]:
        value = figure(levels[setup.id] - levels[base], 0.0017)
        differences.append(
            Difference(setup.id, base, value, verdict(value.interval, 0.002), 0.97, 0.0041, shares)
        )
    names = (*(f"cda:{s.id}" for s in session.setups), "crr:25 mm clincher", "power-scale")
    k = len(names)
    covariance = np.full((k, k), 1e-6) + np.eye(k) * 1.2e-6
    covariance[-2, :] = covariance[:, -2] = -2.4e-7
    covariance[-2, -2] = 9e-8
    covariance[-1, :] = covariance[:, -1] = 0.0
    covariance[-1, -1] = 0.015**2
    values = np.array([*levels.values(), 0.0042, 0.0])
    return Estimate(
        0.95,
        1.201,
        12.5,
        tuple(SetupEstimate(s.id, counted[s.id], figure(levels[s.id], 0.0015)) for s in session.setups),
        (TyreEstimate("25 mm clincher", figure(0.0042, 0.0003)),),
        tuple(differences),
        tuple(runs),
        names,
        values,
        covariance,
        8.3,
        0.0013,
        Gust(0.5, 11.0),
        (SolveWarning("invented", "These figures are invented for a test of the window."),),
        (
            NextStep(
                session.setups[-1].id,
                base,
                "Two more repeats each (about 32 min) would bring the interval to ± 0.0028 m².",
                0.0028,
            ),
        )
        if len(session.setups) > 1
        else (),
    )


def opened(desk: Desk, setups: int = 3, runs: int = 12, rate: float = 1.0) -> Desk:
    """Open an invented day on a desk."""
    lengths = {} if runs <= 12 else {"lap": 120.0, "rest": 60.0}
    session = invented_session(setups, runs, **lengths)
    desk.document.open(session, None)
    desk.shelf.put("am", invented_ride(runs, rate=rate, **lengths))
    desk.solving.put(invented_estimate(session))
    return desk
