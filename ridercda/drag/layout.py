"""Where each unknown of a day stands in the parameter vector, and what is known of it beforehand."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from ridercda.drag import innovations as at
from ridercda.drag import priors
from ridercda.drag.day import Day
from ridercda.drag.profile import VenueNodes, profile_evidence
from ridercda.session.document import RunKind, VenueKind

FloatArray = npt.NDArray[np.float64]
IntArray = npt.NDArray[np.int64]


@dataclass(frozen=True, slots=True, eq=False)
class Layout:
    """The parameter vector of a day: order, start values, and the Gaussian prior as a precision matrix.

    Order: CdA per run; wind per run, east then north; Crr per tyre set; the day's nuisances; speed factor per
    source; slope per node of the venue. `places[r]` maps the parameters one run sees (`innovations` order) to rows
    here. A parameter known exactly has `free` False: it stays at its mean.
    """

    mean: FloatArray  # (p,)
    precision: FloatArray  # (p, p), of the free parameters
    free: npt.NDArray[np.bool_]  # (p,)
    places: IntArray  # (runs, LEADING + nodes)
    runs: int
    crr: slice
    power_scale: int
    speed_slope: int
    power_lag: int
    slopes: slice

    @property
    def size(self) -> int:
        """Number of parameters, free or not."""
        return int(self.mean.size)

    @property
    def wind_east(self) -> slice:
        """Rows of the runs' wind components from the east."""
        return slice(self.runs, 2 * self.runs)

    @property
    def wind_north(self) -> slice:
        """Rows of the runs' wind components from the north."""
        return slice(2 * self.runs, 3 * self.runs)


def layout_of(day: Day, nodes: VenueNodes) -> Layout:
    """Return the parameter layout and prior of a day with at least one run."""
    runs = len(day.runs)
    tyres = len(day.tyres)
    sources = len(day.speed_factor_sd)
    crr = slice(3 * runs, 3 * runs + tyres)
    temperature = slice(crr.stop, crr.stop + tyres)
    slope, scale, offset, drift, lag, warm, air = range(temperature.stop, temperature.stop + 7)
    factor = slice(air + 1, air + 1 + sources)
    slopes = slice(factor.stop, factor.stop + nodes.count)
    size = slopes.stop

    mean = np.zeros(size)
    sd = np.zeros(size)  # 0 = known exactly
    mean[:runs], sd[:runs] = priors.CDA_MEAN, priors.CDA_SD
    guess, guess_sd = rolling_guess(day)
    for i, known in enumerate(day.tyres):
        mean[crr.start + i] = guess if known.crr is None else known.crr
        sd[crr.start + i] = guess_sd if known.crr is None else (known.crr_sd or 0.0)
        mean[temperature.start + i] = known.temperature_coefficient
        sd[temperature.start + i] = known.temperature_coefficient_sd
    sd[slope] = priors.SPEED_SLOPE_SD
    sd[scale] = day.power_scale_sd
    sd[offset], sd[drift] = priors.POWER_OFFSET_SD, priors.POWER_DRIFT_SD
    sd[lag] = 0.0 if day.flat else priors.POWER_LAG_SD  # whole laps know no lag
    sd[warm] = priors.TYRE_WARM_UP_SD
    if any(np.isfinite(run.records.air_speed).any() for run in day.runs):
        sd[air] = priors.AIR_SPEED_FACTOR_SD
    sd[factor] = day.speed_factor_sd
    sd[slopes] = 0.0 if day.flat else 1.0  # its precision follows below

    free = sd > 0
    precision = np.diag(np.where(free, 1.0 / np.where(free, sd, 1.0) ** 2, 0.0))
    precision[:runs, :runs] = repeats_precision(day)
    for rows, component in ((slice(runs, 2 * runs), 0), (slice(2 * runs, 3 * runs), 1)):
        expected, covariance = _wind_prior(day, component)
        mean[rows] = expected
        free[rows] = True
        precision[rows, rows] = np.linalg.inv(covariance)
    if not day.flat:
        precision[slopes, slopes], mean[slopes] = profile_evidence(day, nodes)

    places = np.empty((runs, at.LEADING + nodes.count), dtype=np.int64)
    for r, run in enumerate(day.runs):
        places[r, at.CDA] = r
        places[r, at.WIND_EAST] = runs + r
        places[r, at.WIND_NORTH] = 2 * runs + r
        places[r, at.CRR] = crr.start + run.tyres
        places[r, at.SPEED_SLOPE] = slope
        places[r, at.POWER_SCALE] = scale
        places[r, at.POWER_OFFSET] = offset
        places[r, at.POWER_DRIFT] = drift
        places[r, at.POWER_LAG] = lag
        places[r, at.TYRE_TEMPERATURE] = temperature.start + run.tyres
        places[r, at.TYRE_WARM_UP] = warm
        places[r, at.SPEED_FACTOR] = factor.start + run.speed_source
        places[r, at.AIR_SPEED_FACTOR] = air
        places[r, at.LEADING :] = np.arange(slopes.start, slopes.stop)
    return Layout(mean, precision, free, places, runs, crr, scale, slope, lag, slopes)


def rolling_guess(day: Day) -> tuple[float, float]:
    """Return what one would guess of a Crr unseen, and the guess's standard deviation."""
    if day.venue is VenueKind.TRACK:
        return priors.TRACK_CRR_MEAN, priors.TRACK_CRR_SD
    return priors.CRR_MEAN, priors.CRR_SD


def repeats_precision(day: Day) -> FloatArray:
    """Return the working prior of the runs' CdA: unknown per setup, a generous spread between its repeats.

    It steadies the search and the noise parameters; the treatment of repeats takes it out again.
    """
    setup = np.array([run.setup for run in day.runs])
    kind = np.array([run.kind == RunKind.COAST_DOWN for run in day.runs])
    same = (setup[:, None] == setup[None, :]) & (kind[:, None] == kind[None, :])
    spread = (priors.WORKING_SPREAD * priors.CDA_MEAN) ** 2
    return np.linalg.inv(priors.CDA_SD**2 * same + spread * np.eye(setup.size))


def _wind_prior(day: Day, component: int) -> tuple[FloatArray, FloatArray]:
    """Return mean and covariance of one wind component over the runs: report, its error, and drift in time."""
    runs = len(day.runs)
    hour = np.array([run.hour for run in day.runs])
    apart = np.abs(hour[:, None] - hour[None, :])
    near = np.exp(-apart / priors.WIND_DRIFT_HOURS)
    headed = all(np.isfinite(run.records.heading).any() for run in day.runs)
    if day.flat or not headed:
        # Heading is counted from the lap: the "north" component is air moving round the lap against the rider.
        spread = priors.DRAGGED_AIR_SD if component == 1 else 1e-4
        drift = priors.DRAGGED_AIR_DRIFT_SD if component == 1 else 1e-4
        return np.zeros(runs), spread**2 + drift**2 * near
    reports = [run.wind_from_report for run in day.runs]
    expected = np.array([report[component] if report else 0.0 for report in reports])
    strength = np.array([np.hypot(*report) if report else 0.0 for report in reports])
    shared = np.array(
        [run.wind_report_sd if run.wind_from_report else priors.WIND_UNKNOWN_SD for run in day.runs]
    )
    drift_sd = priors.WIND_DRIFT_SD + priors.WIND_DRIFT_SHARE * strength
    return expected, np.outer(shared, shared) + np.outer(drift_sd, drift_sd) * near + 1e-6 * np.eye(runs)
