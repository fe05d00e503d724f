"""An oracle to hold the solver against: generalised least squares that knows the road and the mean wind.

It is given the true heights, headings and positions along the venue, the true mean wind of every run, the
true strength of gusts and sensor noise, the true lag, circumference and dependence of Crr on temperature; not
the gusts themselves. Energy balances of 120 m blocks are regressed on drag area per setup and Crr. It does not
know the meter's scale. Nothing here is shared with the solver.

Two answers: `known`, with the true variances throughout (the least error such a regression can have), and
`reml`, which estimates the spread between runs and a factor on the noise by restricted maximum likelihood and
has Satterthwaite degrees of freedom, as an honest analyst would.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import combinations

import numpy as np
import numpy.typing as npt
from scipy.optimize import minimize_scalar
from scipy.special import stdtrit

from ridercda.synthetic.day import SyntheticDay
from ridercda.synthetic.sensors import SpeedSource
from ridercda.synthetic.spec import DaySpec

FloatArray = npt.NDArray[np.float64]

GRAVITY = 9.80665
BLOCK = 120.0  # [m]
SUB = 5  # instants per record at which forces are taken
ASSUMED_EFFICIENCY = 0.977
METER_SD = math.hypot(0.015, 0.005 / 0.977)  # what a session's defaults say of scale and efficiency


@dataclass(frozen=True, slots=True)
class Answer:
    """A figure with its standard error and 95 % interval."""

    value: float
    standard_error: float
    low: float
    high: float


@dataclass(frozen=True, slots=True, eq=False)
class OracleEstimate:
    """What the oracle makes of a day: per setup, per pair (setup, against), by both treatments."""

    known: dict[str, Answer]
    known_differences: dict[tuple[str, str], Answer]
    reml: dict[str, Answer]
    reml_differences: dict[tuple[str, str], Answer]


@dataclass(frozen=True, slots=True, eq=False)
class _Run:
    """One run's blocks: rows of y = X beta, their noise, and the direction a run's own drag area adds."""

    y: FloatArray
    air: FloatArray  # energy per unit of drag area
    rolling: FloatArray  # energy per unit of Crr
    noise: FloatArray  # covariance, shape (blocks, blocks)
    setup: int


def consult(day: SyntheticDay, spec: DaySpec) -> OracleEstimate:
    """Return the oracle's answer for a day invented from `spec`."""
    setups = [s.id for s in spec.setups]
    runs = [_blocks(day, spec, k, setups.index(run.setup)) for k, run in enumerate(day.truth.runs)]
    x, y, shared, noise = _stacked(runs, len(setups), spec)
    spread = spec.rider.run_spread * float(np.mean([s.cda for s in spec.setups]))
    known_beta, known_cov = _gls(x, y, noise + spread**2 * shared)
    reml = _reml(x, y, noise, shared)
    normal = 1.959964
    pairs = [(b, a) for a, b in combinations(setups, 2)]

    def contrast(plus: str, minus: str | None = None) -> FloatArray:
        c = np.zeros(x.shape[1])
        c[setups.index(plus)] = 1.0
        if minus is not None:
            c[setups.index(minus)] = -1.0
        return c

    def by_known(c: FloatArray, extra: float) -> Answer:
        return _answer(float(c @ known_beta), math.sqrt(float(c @ known_cov @ c) + extra**2), normal)

    def by_reml(c: FloatArray, extra: float) -> Answer:
        variance, df = reml.variance(c)
        whole = variance + extra**2
        # The meter's share has a known variance: it does not add to the doubt about the variance.
        df *= (whole / variance) ** 2
        return _answer(float(c @ reml.beta), math.sqrt(whole), float(stdtrit(df, 0.975)))

    meter = {s.id: METER_SD * s.cda for s in spec.setups}
    return OracleEstimate(
        known={s: by_known(contrast(s), meter[s]) for s in setups},
        known_differences={p: by_known(contrast(*p), 0.0) for p in pairs},
        reml={s: by_reml(contrast(s), meter[s]) for s in setups},
        reml_differences={p: by_reml(contrast(*p), 0.0) for p in pairs},
    )


def block_table(
    day: SyntheticDay, spec: DaySpec
) -> tuple[FloatArray, FloatArray, npt.NDArray[np.int64], FloatArray]:
    """Return the day's blocks for a regression package: y, columns (air per setup, rolling), run, air energy."""
    setups = [s.id for s in spec.setups]
    runs = [_blocks(day, spec, k, setups.index(run.setup)) for k, run in enumerate(day.truth.runs)]
    x, y, _, _ = _stacked(runs, len(setups), spec)
    run = np.concatenate([np.full(len(r.y), k) for k, r in enumerate(runs)])
    return y, x, run, np.concatenate([r.air for r in runs])


def _answer(value: float, error: float, quantile: float) -> Answer:
    return Answer(value, error, value - quantile * error, value + quantile * error)


# -- one run's energy balances -----------------------------------------------------------------------------


def _blocks(day: SyntheticDay, spec: DaySpec, index: int, setup: int) -> _Run:
    truth = day.truth
    run, records = truth.runs[index], truth.records
    dt = spec.sensors.interval
    first, last = math.ceil(run.start / dt) + 1, math.floor(run.end / dt)
    at = np.arange(first, last + 1)  # record k covers (k - 1, k] intervals
    speed = _speed(day, spec)
    power = _power(day, spec)[at]
    edge_speed = 0.5 * (speed[first - 1 : last + 1] + speed[first : last + 2])  # at the ends of records
    edge_place = _unwrapped(records.place[first - 1 : last + 1], truth.lap_length)
    air, rolling, bearings, gust_gain, heading = _forces(day, spec, run, edge_place, edge_speed)
    energy = _stored(day, spec, run.mass, edge_place, edge_speed)
    travelled = edge_place - edge_place[0]
    block_of_record = np.minimum((travelled[1:] / _block_length(spec)).astype(int), 10**6)
    edges = np.concatenate(([0], np.flatnonzero(np.diff(block_of_record)) + 1, [len(at)]))
    blocks = len(edges) - 1
    pick = np.zeros((blocks, len(at)))
    for b in range(blocks):
        pick[b, edges[b] : edges[b + 1]] = 1.0
    work = ASSUMED_EFFICIENCY * power * dt
    y = pick @ (work - bearings) - np.diff(energy[edges])
    noise = _noise(spec, pick, edges, power, edge_speed, gust_gain, heading, run.mass, dt)
    good = np.ones(blocks, bool)
    for b in range(blocks):  # brakes and tight turns are no part of the balance
        span = at[edges[b] : edges[b + 1]]
        tight = truth.curvature(records.place[span]).max() > 0.06
        good[b] = records.braked[span].max() < 1.0 and not tight and edges[b + 1] - edges[b] >= 3
    return _Run(y[good], (pick @ air)[good], (pick @ rolling)[good], noise[np.ix_(good, good)], setup)


def _block_length(spec: DaySpec) -> float:
    # On a track a block is a lap, so that the lean is the same at both its ends.
    return 250.0 if spec.sensors.position is None else BLOCK


def _unwrapped(place: FloatArray, lap: float) -> FloatArray:
    unwrapped = np.unwrap(place, period=lap)
    return np.asarray(unwrapped - lap * np.round(unwrapped[0] / lap))


def _speed(day: SyntheticDay, spec: DaySpec) -> FloatArray:
    sensor = spec.sensors.speed
    ride = day.rides["day"]
    speed = ride.channels["speed"] / (1 + sensor.circumference_error)
    if sensor.source is SpeedSource.GPS:
        # GPS shows the speed of gps_delay + gps_smoothing ago; a record stands for half an interval ago.
        ahead = sensor.gps_delay + sensor.gps_smoothing - 0.5 * spec.sensors.interval
        speed = np.interp(ride.time + ahead, ride.time, speed)
    return np.asarray(speed)


def _power(day: SyntheticDay, spec: DaySpec) -> FloatArray:
    ride = day.rides["day"]
    return np.asarray(np.interp(ride.time + spec.sensors.power.lag, ride.time, ride.channels["power"]))


def _lean(spec: DaySpec, speed: FloatArray, curvature: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Lean angle, and speed of the mass over wheel speed."""
    height = spec.venue.mass_height
    angle = np.zeros_like(speed)
    for _ in range(40):
        ratio = 1 - height * curvature * np.sin(angle)
        angle = np.arctan(speed**2 * curvature * ratio / GRAVITY)
    return angle, np.asarray(1 - height * curvature * np.sin(angle))


def _forces(
    day: SyntheticDay, spec: DaySpec, run: object, edge_place: FloatArray, edge_speed: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray, FloatArray]:
    """Per record: air energy per drag area, rolling energy per Crr at 20 °C, bearings, air energy per m/s of
    gust along the road, and the road's bearing."""
    truth = day.truth
    dt = spec.sensors.interval
    part = (np.arange(SUB) + 0.5) / SUB
    speed = edge_speed[:-1, None] + part * np.diff(edge_speed)[:, None]
    place = edge_place[:-1, None] + part * np.diff(edge_place)[:, None]
    curvature = truth.curvature(place)
    angle, ratio = _lean(spec, speed, curvature)
    north, east = truth.heading(place)
    wind_north, wind_east = run.wind_north, run.wind_east  # type: ignore[attr-defined]
    dragged = getattr(spec.venue, "dragged_air", 0.0)
    body = speed * ratio
    along = body - (wind_east * east + wind_north * north) - dragged
    across = wind_east * north - wind_north * east
    whole = np.hypot(along, across)
    density = run.density  # type: ignore[attr-defined]
    air = 0.5 * density * whole * along * body
    gain = 0.5 * density * (whole + along**2 / whole) * body
    load = run.mass * GRAVITY / np.cos(angle)  # type: ignore[attr-defined]
    tyres = {s.id: s.tyres for s in spec.setups}[run.setup]  # type: ignore[attr-defined]
    factor = run.crr / truth.crr[tyres]  # type: ignore[attr-defined]
    rolling = factor * load * speed
    bearings = (0.091 + 0.0087 * speed) * speed
    return (
        air.mean(1) * dt,
        rolling.mean(1) * dt,
        bearings.mean(1) * dt,
        gain.mean(1) * dt,
        np.arctan2(east.mean(1), north.mean(1)),
    )


def _stored(
    day: SyntheticDay, spec: DaySpec, mass: float, place: FloatArray, speed: FloatArray
) -> FloatArray:
    truth = day.truth
    angle, ratio = _lean(spec, speed, truth.curvature(place))
    spin = spec.wheel_inertia / (spec.wheel_circumference / (2 * math.pi)) ** 2
    height = truth.height(place) + spec.venue.mass_height * np.cos(angle)
    return np.asarray(0.5 * mass * (speed * ratio) ** 2 + 0.5 * spin * speed**2 + mass * GRAVITY * height)


def _noise(
    spec: DaySpec,
    pick: FloatArray,
    edges: npt.NDArray[np.int64],
    power: FloatArray,
    edge_speed: FloatArray,
    gust_gain: FloatArray,
    heading: FloatArray,
    mass: float,
    dt: float,
) -> FloatArray:
    """Covariance of a run's block energies: power noise, speed noise at the edges, gusts."""
    sensors = spec.sensors
    meter = np.diag(pick @ (ASSUMED_EFFICIENCY * sensors.power.noise * power * dt) ** 2)
    # An edge is the mean of two records; neighbouring blocks share it with opposite signs.
    edge = (mass * edge_speed[edges] * sensors.speed.noise) ** 2 / 2
    kinetic = np.diag(edge[:-1] + edge[1:]) - np.diag(edge[1:-1], 1) - np.diag(edge[1:-1], -1)
    cda = float(np.mean([s.cda for s in spec.setups]))
    gusts = spec.wind.gusts
    # A change of position within the run acts like a gust of the same time scale.
    restless = (spec.rider.within_run * cda) ** 2
    time = np.arange(len(power)) * dt
    apart = np.abs(time[:, None] - time[None, :])
    gain = cda * gust_gain
    aligned = np.cos(heading[:, None] - heading[None, :])
    blow = gusts.sd**2 * np.exp(-apart / gusts.time) * aligned * gain[:, None] * gain[None, :]
    sit = 0.0
    if restless:
        pull = gust_gain * edge_speed[1:] / 2
        sit = restless * np.exp(-apart / spec.rider.within_run_time) * pull[:, None] * pull[None, :]
    return np.asarray(meter + kinetic + pick @ (blow + sit) @ pick.T)


# -- the regression ----------------------------------------------------------------------------------------


def _stacked(
    runs: list[_Run], setups: int, spec: DaySpec
) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray]:
    rows = sum(len(r.y) for r in runs)
    x, y = np.zeros((rows, setups + 1)), np.zeros(rows)
    shared, noise = np.zeros((rows, rows)), np.zeros((rows, rows))
    at = 0
    for run in runs:
        span = slice(at, at + len(run.y))
        y[span], x[span, run.setup], x[span, setups] = run.y, run.air, run.rolling
        shared[span, span] = np.outer(run.air, run.air)
        noise[span, span] = run.noise
        at += len(run.y)
    tyres = spec.tyres[0]
    if tyres.stated_crr is not None and tyres.stated_crr_sd:  # what is stated is one more observation
        x = np.vstack((x, np.eye(setups + 1)[setups]))
        y = np.append(y, tyres.stated_crr)
        shared = np.pad(shared, (0, 1))
        noise = np.pad(noise, (0, 1))
        noise[-1, -1] = tyres.stated_crr_sd**2
    return x, y, shared, noise


def _gls(x: FloatArray, y: FloatArray, covariance: FloatArray) -> tuple[FloatArray, FloatArray]:
    weighted = np.linalg.solve(covariance, x)
    spread = np.linalg.inv(x.T @ weighted)
    return spread @ (weighted.T @ y), spread


@dataclass(frozen=True, slots=True, eq=False)
class _Reml:
    beta: FloatArray
    covariance: FloatArray
    derivatives: tuple[FloatArray, FloatArray]  # of the covariance by the two variances
    information: FloatArray

    def variance(self, c: FloatArray) -> tuple[float, float]:
        """Variance of a contrast and its Satterthwaite degrees of freedom."""
        value = float(c @ self.covariance @ c)
        slope = np.array([float(c @ d @ c) for d in self.derivatives])
        spread = float(slope @ np.linalg.pinv(self.information) @ slope)
        return value, max(1.0, 2 * value**2 / spread) if spread > 0 else 1e6


def _reml(x: FloatArray, y: FloatArray, noise: FloatArray, shared: FloatArray) -> _Reml:
    """Restricted maximum likelihood of noise factor s and between-run variance s * ratio."""
    root = np.linalg.cholesky(noise)
    xw, yw = np.linalg.solve(root, x), np.linalg.solve(root, y)
    sw = np.linalg.solve(root, np.linalg.solve(root, shared).T)
    values, vectors = np.linalg.eigh(sw)
    values = np.maximum(values, 0.0)
    xv, yv = vectors.T @ xw, vectors.T @ yw
    n, p = x.shape

    def pieces(ratio: float) -> tuple[FloatArray, FloatArray, float, float]:
        weight = 1 / (1 + ratio * values)
        normal = xv.T @ (weight[:, None] * xv)
        beta = np.linalg.solve(normal, xv.T @ (weight * yv))
        residual = yv - xv @ beta
        scale = float(weight @ residual**2) / (n - p)
        _, log_det = np.linalg.slogdet(normal)
        loss = (n - p) * math.log(scale) - np.log(weight).sum() + log_det
        return beta, np.linalg.inv(normal), scale, float(loss)

    top = 1e-4  # [m^4] far above any spread between runs, relative to a noise factor near 1
    found = minimize_scalar(
        lambda e: pieces(math.exp(e))[3], bounds=(math.log(1e-10), math.log(top)), method="bounded"
    )
    ratio = math.exp(float(found.x))
    if pieces(0.0)[3] <= float(found.fun):
        ratio = 0.0
    beta, spread, scale, _ = pieces(ratio)
    # Expected information of (s, between-run variance), in the rotated coordinates.
    variance = scale * (1 + ratio * values)
    inverse = 1 / variance
    half = inverse[:, None] * xv
    project = np.diag(inverse) - half @ (scale * spread) @ half.T
    by_scale, by_runs = np.ones(n), values
    pairs = (by_scale, by_runs)

    def shared_information(a: FloatArray, b: FloatArray) -> float:
        return 0.5 * float(((project * b) * (project * a).T).sum())

    information = np.array([[shared_information(a, b) for b in pairs] for a in pairs])
    covariance = scale * spread
    derivatives = tuple(covariance @ (half.T @ (d[:, None] * half)) @ covariance for d in pairs)
    return _Reml(beta, covariance, (derivatives[0], derivatives[1]), information)
