"""The innovations likelihood of a day: Gauss-Newton for what is sought, restricted likelihood for the noise.

For given noise parameters the unknowns (CdA per run, Crr, wind, the venue's slopes, nuisances) are found by
Gauss-Newton on the innovations, with their prior. The noise parameters (gust strength and time, power, speed and
air-speed noise) maximise the likelihood with the unknowns integrated out (restricted likelihood, Laplace form), and
their own uncertainty is carried into the covariance: with it left out intervals are too narrow.
"""

from __future__ import annotations

from collections.abc import Mapping
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from functools import partial
from types import MappingProxyType

import numpy as np
import numpy.typing as npt
from scipy.linalg import cho_factor, cho_solve

from ridercda.drag import innovations as at
from ridercda.drag import priors
from ridercda.drag.day import Day
from ridercda.drag.layout import Layout, layout_of
from ridercda.drag.profile import VenueNodes, venue_nodes
from ridercda.errors import NotConverged
from ridercda.watch import NO_WATCH, Watch

FloatArray = npt.NDArray[np.float64]

NOISE_STEP = 0.01  # of the logarithms, for first differences
CURVATURE_STEP = 0.08  # of the logarithms, for second differences
NOISE_ROUNDS = 25
NOISE_SETTLED = 0.03  # of a standard deviation of each noise parameter
GAUSS_NEWTON_ROUNDS = 12
STEP_HALVINGS = 8
SETTLED = 0.02  # of a standard deviation, over all unknowns together


@dataclass(frozen=True, slots=True, eq=False)
class RunTable:
    """One run as the kernel wants it."""

    table: FloatArray
    mark: npt.NDArray[np.int8]
    node: npt.NDArray[np.int64]
    share: FloatArray
    mass: float
    rotating_mass: float
    efficiency: float
    rows: int  # of innovations: n, or 2 n with an air-speed sensor
    usable: int


@dataclass(frozen=True, slots=True, eq=False)
class Model:
    """A day laid out for the likelihood."""

    day: Day
    nodes: VenueNodes
    layout: Layout
    tables: tuple[RunTable, ...]
    noise_mean: FloatArray  # logarithms (NOISES,)
    noise_sd: FloatArray  # logarithms; 0 = not in play

    @property
    def day_has_air_speed(self) -> bool:
        """Whether any run has an air-speed sensor."""
        return any(table.rows > table.table.shape[0] for table in self.tables)


@dataclass(frozen=True, slots=True, eq=False)
class Pass:
    """One pass of the filter over all runs at given unknowns and noise."""

    parameters: FloatArray
    log_noise: FloatArray
    information: FloatArray  # (free, free): of data and prior
    gradient: FloatArray  # (free,)
    step: FloatArray  # (free,): to the optimum of the linearised model
    log_likelihood: float  # restricted, at the optimum of the linearised model
    achieved: float  # restricted, at these very unknowns
    innovation: FloatArray  # over its standard deviation
    variance: FloatArray  # 0: no innovation here


@dataclass(frozen=True, slots=True, eq=False)
class Fit:
    """The settled likelihood: unknowns with their covariance, noise with its own."""

    model: Model
    parameters: FloatArray  # (p,)
    covariance: FloatArray  # (p, p): noise uncertainty included; zero rows for what is known exactly
    covariance_given_noise: FloatArray  # (p, p)
    log_noise: FloatArray
    log_noise_covariance: FloatArray
    by_noise: FloatArray  # (p, NOISES): how the unknowns move with the logarithms of the noise
    last: Pass
    grown: Mapping[
        int, FloatArray
    ]  # noise parameter -> covariance given noise, with it raised by the share `grown_by`
    grown_by: float = NOISE_STEP

    @property
    def noise(self) -> FloatArray:
        """Noise parameters in SI, in the order of `innovations`."""
        return np.exp(self.log_noise)


def model_of(day: Day) -> Model:
    """Lay a day out for the likelihood."""
    nodes = venue_nodes(day)
    layout = layout_of(day, nodes)
    tables = []
    for run in day.runs:
        r = run.records
        acts, share = nodes.place(np.nan_to_num(r.position))
        headed = np.isfinite(r.heading)
        lagged = np.zeros(r.size)
        if r.size > 2:
            change = (r.power[2:] - r.power[:-2]) / np.maximum(r.time[2:] - r.time[:-2], 1e-6)
            lagged[1:-1] = np.nan_to_num(change)  # beside a dropout the rate is unknown: no lag there
        table = np.empty((r.size, at.COLUMNS))
        table[:, at.DT] = r.interval
        table[:, at.POWER] = r.power
        table[:, at.EXTRA_POWER] = r.lean_power
        table[:, at.SPEED] = r.speed
        table[:, at.AIR_SPEED] = r.air_speed
        table[:, at.DENSITY] = r.density
        table[:, at.SIN_HEADING] = np.where(headed, np.sin(np.where(headed, r.heading, 0.0)), 0.0)
        table[:, at.COS_HEADING] = np.where(headed, np.cos(np.where(headed, r.heading, 0.0)), 1.0)
        table[:, at.SIGN] = r.direction
        table[:, at.LOAD] = r.load
        table[:, at.PATH_RATIO] = r.path_ratio
        table[:, at.TEMPERATURE] = r.tyre_temperature
        table[:, at.WARM_UP] = r.warm_up
        table[:, at.POWER_RATE] = lagged
        table[:, at.CLOCK] = run.hour + (r.time - 0.5 * (run.start + run.end)) / 3600.0
        good = r.usable
        table[:, at.SLOW_POWER] = r.power[good].mean() if good.any() else 0.0
        mark = np.full(r.size, at.SKIP, dtype=np.int8)
        mark[good] = at.USE
        after_skip = good & ~np.concatenate([[False], good[:-1]])
        mark[after_skip] = at.START
        table[~good] = 0.0
        with_air = bool(np.isfinite(r.air_speed[good]).any())
        rows = 2 * r.size if with_air else r.size
        tables.append(
            RunTable(
                table,
                mark,
                acts,
                share,
                run.mass,
                run.rotating_mass,
                run.efficiency,
                rows,
                int(good.sum()),
            )
        )
    known = (priors.GUST_SD, priors.GUST_TIME, priors.POWER_NOISE, priors.SPEED_NOISE, priors.AIR_SPEED_NOISE)
    noise_mean = np.log([median for median, _ in known])
    noise_sd = np.array([spread for _, spread in known])
    model = Model(day, nodes, layout, tuple(tables), noise_mean, noise_sd)
    if not model.day_has_air_speed:
        noise_sd[at.AIR_SPEED_NOISE] = 0.0
    return model


def filter_pass(model: Model, parameters: FloatArray, log_noise: FloatArray) -> Pass:
    """Run the filter over all runs with sensitivities and solve the linearised problem."""
    layout = model.layout
    size = layout.size
    information = np.zeros((size, size))
    gradient = np.zeros(size)
    cost = 0.0
    log_det = 0.0
    kept_e: list[FloatArray] = []
    kept_s: list[FloatArray] = []
    for r in range(len(model.tables)):
        one = run_pass(model, r, parameters, log_noise)
        e, s = one.innovation, one.variance
        place = layout.places[r]
        information[np.ix_(place, place)] += one.information
        gradient[place] += one.gradient
        cost += float(e @ e)
        log_det += float(np.log(s[s > 0]).sum())
        kept_e.append(e)
        kept_s.append(s)
    off = parameters - layout.mean
    information += layout.precision
    gradient += layout.precision @ off
    cost += float(off @ layout.precision @ off)
    free = layout.free
    information = information[np.ix_(free, free)]
    gradient = gradient[free]
    try:
        scale = 1.0 / np.sqrt(np.diag(information))
        factor = cho_factor(information * np.outer(scale, scale), check_finite=True)
    except (np.linalg.LinAlgError, ValueError) as error:
        raise NotConverged("the estimate did not settle: the runs contradict the model of a rider") from error
    step = -scale * cho_solve(factor, scale * gradient)
    log_det_information = 2.0 * float(np.log(np.diag(factor[0])).sum() - np.log(scale).sum())
    off_noise = log_noise - model.noise_mean
    in_play = model.noise_sd > 0
    prior = float(((off_noise[in_play] / model.noise_sd[in_play]) ** 2).sum())
    achieved = -0.5 * (cost + log_det + log_det_information + prior)
    log_likelihood = achieved - 0.5 * float(gradient @ step)
    return Pass(
        parameters,
        log_noise,
        information,
        gradient,
        step,
        log_likelihood,
        achieved,
        np.concatenate(kept_e),
        np.concatenate(kept_s),
    )


@dataclass(frozen=True, slots=True, eq=False)
class RunPass:
    """One run's part of a pass."""

    innovation: FloatArray  # (rows,), over its standard deviation
    variance: FloatArray  # (rows,); 0 = no innovation here
    information: FloatArray  # (LEADING + nodes,) * 2
    gradient: FloatArray  # (LEADING + nodes,)


def run_pass(model: Model, run: int, parameters: FloatArray, log_noise: FloatArray) -> RunPass:
    """Run the filter over one run."""
    t = model.tables[run]
    local = parameters[model.layout.places[run]]
    lower = np.empty((local.size, local.size))
    gradient = np.empty(local.size)
    innovation = np.empty(t.rows)
    variance = np.empty(t.rows)
    at.run_innovations(
        t.table,
        t.mark,
        t.node,
        t.share,
        local[: at.LEADING],
        local[at.LEADING :],
        np.exp(log_noise),
        t.mass,
        t.rotating_mass,
        model.day.gravity,
        t.efficiency,
        model.day.reference_speed,
        lower,
        gradient,
        innovation,
        variance,
    )
    return RunPass(innovation, variance, np.tril(lower) + np.tril(lower, -1).T, gradient)


def fit(model: Model, watch: Watch = NO_WATCH) -> Fit:
    """Settle unknowns and noise.

    Raises
    ------
    NotConverged
        If the unknowns or the noise do not settle.
    """
    least, most = _noise_bounds(model)
    in_play = np.flatnonzero(model.noise_sd > 0)
    with ThreadPoolExecutor(2) as pool:
        here = settle(
            model, filter_pass(model, model.layout.mean.copy(), np.log(priors.NOISE_START)), rounds=6
        )
        for round_ in range(NOISE_ROUNDS):
            watch.step(round_, NOISE_ROUNDS)
            raised = list(pool.map(partial(_raised, model, here), in_play))
            gradient, information = _noise_score(model, here, raised, in_play)
            move = np.zeros(at.NOISES)
            wanted = np.linalg.solve(information, gradient)
            if np.abs(wanted).max() > 1.0:  # far off, where the information misleads: each by its own slope
                wanted = np.clip(gradient / np.diag(information), -0.8, 0.8)
            move[in_play] = wanted
            move = np.clip(here.log_noise + move, least, most) - here.log_noise
            sd = np.sqrt(np.diag(np.linalg.inv(information)))
            if np.all(np.abs(move[in_play]) < NOISE_SETTLED * sd):
                break
            there = _stepped(model, here, move)
            if there is None:
                break
            here = there
        here = settle(model, here, rounds=GAUSS_NEWTON_ROUNDS)
        raised = list(pool.map(partial(_raised, model, here), in_play))
        information = _noise_curvature(model, here, in_play, pool)
    noise_covariance = np.zeros((at.NOISES, at.NOISES))
    noise_covariance[np.ix_(in_play, in_play)] = np.linalg.inv(information)
    if not model.day.flat:
        noise_covariance[at.GUST_SD, at.GUST_SD] += priors.GUST_MODEL_SD**2
    by_noise = np.zeros((model.layout.size, at.NOISES))
    free = model.layout.free
    for i, other in zip(in_play, raised, strict=True):
        by_noise[free, i] = (other.step - here.step) / NOISE_STEP
    given = np.zeros((model.layout.size, model.layout.size))
    given[np.ix_(free, free)] = _inverse(here.information)
    by_estimate = by_noise @ noise_covariance @ by_noise.T
    grown = {}
    for i, other in zip(in_play, raised, strict=True):
        grown[int(i)] = np.zeros_like(given)
        grown[int(i)][np.ix_(free, free)] = _inverse(other.information)
    covariance = given + by_estimate
    return Fit(
        model,
        _moved(model, here),
        covariance,
        given,
        here.log_noise,
        noise_covariance,
        by_noise,
        here,
        MappingProxyType(grown),
    )


def settle(model: Model, here: Pass, rounds: int) -> Pass:
    """Return a pass at the optimum for the noise of `here`, reached by Gauss-Newton within `rounds` steps."""
    for _ in range(rounds):
        if (
            -float(here.gradient @ here.step) < SETTLED**2
        ):  # the step in standard deviations, all unknowns together
            break
        there = _stepped(model, here, np.zeros(at.NOISES))
        if there is None:
            break
        here = there
    return here


def _stepped(model: Model, here: Pass, move: FloatArray) -> Pass | None:
    """Return a better pass along the step of the unknowns and a move of the noise, None if there is none.

    The linearised model promises too much far from its optimum, so what counts is the likelihood reached.
    """
    share = 1.0
    for _ in range(STEP_HALVINGS):
        parameters = here.parameters.copy()
        parameters[model.layout.free] += share * here.step
        there = filter_pass(model, parameters, here.log_noise + share * move)
        if there.achieved > here.achieved:
            return there
        share *= 0.5
    return None


def _noise_bounds(model: Model) -> tuple[FloatArray, FloatArray]:
    """Return the least and most the logarithms of the noise may be; the floors are those of records of a second."""
    least, most = np.log(priors.NOISE_LEAST), np.log(priors.NOISE_MOST)
    if model.day.flat:  # a record is a lap: the noise of its seconds averages out
        seconds = float(np.median(np.concatenate([run.records.interval for run in model.day.runs])))
        for which in (at.POWER_NOISE, at.SPEED_NOISE, at.AIR_SPEED_NOISE):
            least[which] -= 0.5 * np.log(max(seconds, 1.0))
    return least, most


def _moved(model: Model, here: Pass) -> FloatArray:
    """Return the unknowns after the step of a pass."""
    moved = here.parameters.copy()
    moved[model.layout.free] += here.step
    return moved


def _raised(model: Model, here: Pass, which: int) -> Pass:
    """Return a pass at the same unknowns with one noise parameter raised by the step of differences."""
    log_noise = here.log_noise.copy()
    log_noise[which] += NOISE_STEP
    return filter_pass(model, here.parameters, log_noise)


def _noise_score(
    model: Model, here: Pass, raised: list[Pass], in_play: npt.NDArray[np.int64]
) -> tuple[FloatArray, FloatArray]:
    """Return gradient and expected information of the restricted likelihood in the logarithms of the noise."""
    seen = here.variance > 0
    d_log_s = np.stack([np.log(r.variance[seen] / here.variance[seen]) for r in raised]) / NOISE_STEP
    size = np.sqrt(here.variance[seen])
    plain = here.innovation[seen]
    moved = [r.innovation[seen] * np.sqrt(r.variance[seen]) / size - plain for r in raised]
    d_e = np.stack(moved) / NOISE_STEP
    information = 0.5 * d_log_s @ d_log_s.T + d_e @ d_e.T
    # What the unknowns can mimic is no information: a stronger gust's mean square looks like rolling resistance.
    d_gradient = np.stack([r.gradient - here.gradient for r in raised]) / NOISE_STEP
    d_unknowns = np.stack([here.step - r.step for r in raised]) / NOISE_STEP
    mimicked = d_gradient @ d_unknowns.T
    information -= 0.5 * (mimicked + mimicked.T)
    information = _at_least_prior(information, model.noise_sd[in_play])
    difference = np.array([r.log_likelihood for r in raised]) - here.log_likelihood
    gradient = difference / NOISE_STEP + 0.5 * NOISE_STEP * np.diag(information)
    return gradient, information


def _noise_curvature(
    model: Model, here: Pass, in_play: npt.NDArray[np.int64], pool: ThreadPoolExecutor
) -> FloatArray:
    """Return the observed information of the restricted likelihood in the logarithms of the noise."""
    count = in_play.size
    shifts = [s * CURVATURE_STEP * np.eye(count)[i] for s in (1.0, -1.0) for i in range(count)]
    pairs = [(i, k) for i in range(count) for k in range(i)]
    shifts += [CURVATURE_STEP * (np.eye(count)[i] + np.eye(count)[k]) for i, k in pairs]

    def at_shift(shift: FloatArray) -> float:
        log_noise = here.log_noise.copy()
        log_noise[in_play] += shift
        off = (log_noise - model.noise_mean)[in_play] / model.noise_sd[in_play]
        return filter_pass(model, here.parameters, log_noise).log_likelihood + 0.5 * float(off @ off)

    off = (here.log_noise - model.noise_mean)[in_play] / model.noise_sd[in_play]
    middle = here.log_likelihood + 0.5 * float(off @ off)
    values = list(pool.map(at_shift, shifts))
    up, down, both = values[:count], values[count : 2 * count], values[2 * count :]
    information = np.diag([2.0 * middle - u - d for u, d in zip(up, down, strict=True)])
    for (i, k), value in zip(pairs, both, strict=True):
        information[i, k] = information[k, i] = up[i] + up[k] - value - middle
    return _at_least_prior(information / CURVATURE_STEP**2, model.noise_sd[in_play])


def _at_least_prior(information: FloatArray, prior_sd: FloatArray) -> FloatArray:
    """Return the information of data and prior, where the data may not take any of the prior's away."""
    scaled = information * np.outer(prior_sd, prior_sd)
    value, vector = np.linalg.eigh(scaled)
    scaled = (vector * (1.0 + np.maximum(value, 0.0))) @ vector.T
    return np.asarray(scaled / np.outer(prior_sd, prior_sd))


def _inverse(matrix: FloatArray) -> FloatArray:
    """Return the inverse of a positive definite matrix whose entries span many decades."""
    scale = 1.0 / np.sqrt(np.diag(matrix))
    outer = np.outer(scale, scale)
    return np.asarray(cho_solve(cho_factor(matrix * outer), np.eye(scale.size)) * outer)
