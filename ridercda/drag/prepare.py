"""From a session and its rides to a prepared day."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

import numpy as np
import numpy.typing as npt

from ridercda.drag import priors
from ridercda.drag.day import Day, DayRun, DayTyres, LeftOut, RunRecords
from ridercda.drag.ends import speed_at_ends
from ridercda.drag.laps import whole_laps
from ridercda.drag.run_air import RunAir, air_of_run
from ridercda.errors import SessionError
from ridercda.physics.geodesy import gravity
from ridercda.physics.track import lean
from ridercda.rides.ride import FaultKind, Ride
from ridercda.runs.position import RunPosition, VenuePath, locate
from ridercda.session.defaults import default
from ridercda.session.document import MeterLocation, MeterSides, Run, RunKind, Session, Setup, VenueKind
from ridercda.watch import NO_WATCH, Watch

FloatArray = npt.NDArray[np.float64]

SLOWEST = 2.5  # [m/s] below it bearings, steering and starting effort are not those of riding
LONGEST_INTERVAL = 5.0  # [s] a longer record says too little of what happened in it
FEWEST_RECORDS = 20
FEWEST_LAPS = 2
COASTING_POWER = 30.0  # [W]
EASED_OFF = 0.45  # of the run's usual power
SLOWING = 0.2  # [m/s^2]
SHARPEST_PATH = 0.15  # [1/m] a tighter curve is a turn on the spot, or noise of position
LIGHTEST, HEAVIEST = 30.0, 250.0  # [kg] all up


def prepare_day(session: Session, rides: Mapping[str, Ride], watch: Watch = NO_WATCH) -> Day:
    """Return what the estimator sees of a session.

    Parameters
    ----------
    session : Session
        Valid; runs refer to `rides` by id.
    rides : mapping of ride id to Ride
        Repaired: their time strictly increases. Runs of rides that are missing are left out with the reason.
    watch : Watch

    Raises
    ------
    SessionError
        If rider or bike has no mass, or a tyre set or mass is impossible.
    """
    path = locate(session, rides, watch)
    notes = [("position", note) for note in path.notes]
    mass = _all_up_mass(session)
    kind = session.venue.kind if session.venue else VenueKind.ROAD
    tyres = tuple(
        dict.fromkeys(s.tyres for s in session.setups if any(r.setup == s.id for r in session.runs))
    )
    ids = tuple(setup.id for setup in session.setups)
    baseline = session.baseline
    g = _gravity(rides)
    meter = session.power_meter
    before_chain = meter.location is not MeterLocation.HUB
    efficiency, efficiency_sd = _efficiency(session) if before_chain else (1.0, 0.0)
    scale_sd = default("power_meter.scale_sd") if meter.scale_sd is None else meter.scale_sd
    if meter.sides in (MeterSides.LEFT, MeterSides.RIGHT) or any(
        fault.kind is FaultKind.ONE_SIDED_POWER for ride in rides.values() for fault in ride.faults
    ):
        notes.append(
            (
                "one-sided-power",
                "Power is measured on one side and doubled; the balance of the legs may change with effort and "
                "position, which no interval here covers.",
            )
        )

    sources: dict[tuple[str, str], int] = {}
    factor_sd: list[float] = []
    clock = _ride_clock(session, rides)
    runs: list[DayRun] = []
    left_out: list[LeftOut] = []
    for run in session.runs:
        setup = session.setup(run.setup)
        end = run.end if run.end is not None else _last(rides.get(run.ride), run.start)
        reason = _unusable(run, rides, path)
        if reason:
            left_out.append(LeftOut(run.id, run.ride, run.setup, run.start, end, reason))
            continue
        ride = rides[run.ride]
        placed = path.runs[run.id]
        scale = path.circumference_factor(run.ride, setup.tyres)
        group = (run.ride, setup.tyres)
        if group not in sources:
            sources[group] = len(factor_sd)
            factor_sd.append(max(scale.standard_error, 1e-5))
            if abs(scale.factor - 1.0) > 0.004 and scale.basis:
                notes.append(
                    (
                        "circumference",
                        f"Ride {run.ride}: the wheel reads {100 * (1 / scale.factor - 1):+.1f} % in distance against the "
                        f"{scale.basis}; corrected.",
                    )
                )
        air = air_of_run(session, run, ride, clock.get(run.ride))
        lap = path.length if path.closed else None
        records = _records(run, ride, placed, scale.factor, air, session, setup, mass, g, lap)
        if kind is VenueKind.TRACK:
            records = whole_laps(records, placed.gates)
        if int(records.usable.sum()) < (FEWEST_LAPS if kind is VenueKind.TRACK else FEWEST_RECORDS):
            left_out.append(
                LeftOut(run.id, run.ride, run.setup, run.start, end, "too few records with power and speed")
            )
            continue
        circumference = session.bike.wheel_circumference or default("bike.wheel_circumference")
        inertia = (
            default("bike.wheel_inertia")
            if session.bike.wheel_inertia is None
            else session.bike.wheel_inertia
        )
        runs.append(
            DayRun(
                id=run.id,
                ride=run.ride,
                setup=ids.index(run.setup),
                tyres=tyres.index(setup.tyres),
                kind=run.kind,
                start=run.start,
                end=end,
                hour=(_offset(clock, run.ride) + 0.5 * (run.start + end)) / 3600.0,
                laps=placed.laps,
                mass=mass + setup.mass_change,
                efficiency=efficiency,
                rotating_mass=inertia * (2.0 * np.pi / circumference) ** 2,
                speed_source=sources[group],
                wind_from_report=air.wind,
                wind_report_sd=air.wind_sd,
                records=records,
            )
        )
        notes.extend(air.notes)
    if runs:
        middle = runs[0].hour
        runs = [_later(run, middle) for run in runs]
        if kind is not VenueKind.TRACK and not path.has_heading:
            notes.append(
                (
                    "wind-not-modelled",
                    "No positions were recorded, so headings are unknown: a steady wind is not modelled and makes "
                    "absolute CdA or Crr come out high.",
                )
            )
        elif kind is not VenueKind.TRACK and all(run.wind_from_report is None for run in runs):
            notes.append(
                (
                    "wind-unknown",
                    "No wind is reported; it is found from the rides alone. A report, even a rough one, tightens "
                    "absolute values.",
                )
            )
    reference = session.reference_speed
    if reference is None:
        speeds = [float(run.records.speed[run.records.usable].mean()) for run in runs]
        reference = round(2.0 * float(np.mean(speeds))) / 2.0 if speeds else 10.0
    worthwhile = session.smallest_worthwhile
    return Day(
        venue=kind,
        venue_length=path.length,
        closed=path.closed,
        flat=kind is VenueKind.TRACK,
        setups=ids,
        baseline=ids.index(baseline.id) if baseline else None,
        tyres=tuple(_tyres(session, name) for name in tyres),
        runs=tuple(runs),
        left_out=tuple(left_out),
        gravity=g,
        power_scale_sd=float(np.hypot(scale_sd, efficiency_sd / efficiency)),
        speed_factor_sd=tuple(factor_sd),
        reference_speed=reference,
        smallest_worthwhile_cda=worthwhile.cda,
        smallest_worthwhile_power=worthwhile.power,
        confidence=default("confidence"),
        altitude_sd=None,
        notes=tuple(dict.fromkeys(notes)),
    )


def _records(
    run: Run,
    ride: Ride,
    placed: RunPosition,
    factor: float,
    air: RunAir,
    session: Session,
    setup: Setup,
    mass: float,
    g: float,
    lap: float | None,
) -> RunRecords:
    """Return the record intervals of one run."""
    points = placed.points
    time = ride.time[points]
    dt = np.diff(time)
    along = placed.unwrapped
    inside = slice(points.start + 1, points.stop)
    nothing = np.full(dt.size, np.nan)

    def channel(name: str) -> FloatArray:
        return ride.channels[name][inside].copy() if name in ride.channels else nothing.copy()

    power = channel("power")
    if run.kind is RunKind.COAST_DOWN:
        power = np.where(np.isfinite(power), power, 0.0)
    recorded = channel("speed")
    if not np.isfinite(recorded).any() and "distance" in ride.channels:
        recorded = np.diff(ride.channels["distance"][points]) / dt
    speed = recorded * factor
    if not np.isfinite(speed).any():
        speed = np.abs(np.diff(along)) / dt  # lap times alone: the same speed all round a lap
    position = 0.5 * (along[1:] + along[:-1])
    if lap is not None:
        position = position % lap
    heading = np.arctan2(
        np.sin(placed.heading[1:]) + np.sin(placed.heading[:-1]),
        np.cos(placed.heading[1:]) + np.cos(placed.heading[:-1]),
    )
    if session.venue and session.venue.kind is VenueKind.TRACK:
        heading = np.zeros(dt.size)  # the air moves round with the riders: along the path everywhere
    curve = np.nan_to_num(np.abs(placed.curvature))
    curve = np.where((curve > 1e-4) & (curve < SHARPEST_PATH), curve, 0.0)
    ends = speed_at_ends(speed)
    height = default("venue.mass_height")
    if session.venue and session.venue.mass_height is not None:
        height = session.venue.mass_height
    leaning = lean(np.maximum(ends, 0.0), 1.0 / np.maximum(curve, 1e-9), height, g)
    cos_lean = np.where(curve > 0, np.cos(leaning.angle), 1.0)
    ratio = np.where(curve > 0, leaning.mass_speed / np.maximum(ends, 0.1), 1.0)
    total = mass + setup.mass_change
    lean_power = -total * g * height * np.diff(cos_lean) / dt
    lean_power -= 0.5 * total * np.maximum(speed, 0.0) ** 2 * np.diff(ratio**2) / dt
    lean_power = np.nan_to_num(lean_power)
    middle = 0.5 * (time[1:] + time[:-1])
    air_speed = channel("air_speed")
    density = np.full(dt.size, air.density)
    if not np.isfinite(air_speed).any() and ride.has("dynamic_pressure"):
        air_speed = np.sqrt(2.0 * np.maximum(channel("dynamic_pressure"), 0.0) / density)
    usable = placed.valid[1:] & placed.valid[:-1]
    usable &= np.isfinite(power) & np.isfinite(speed) & np.isfinite(position)
    usable &= np.nan_to_num(speed) >= SLOWEST
    usable &= (dt > 0) & (dt <= LONGEST_INTERVAL)
    if run.kind is RunKind.PEDALLED:
        usable &= ~braking(power, speed, dt)
    return RunRecords(
        time=time[1:].copy(),
        interval=dt,
        power=power,
        speed=speed,
        start_speed=ends[:-1].copy(),
        end_speed=ends[1:].copy(),
        air_speed=air_speed,
        position=position,
        direction=placed.direction[1:].astype(float),
        heading=heading,
        density=density,
        load=0.5 * (1.0 / cos_lean[1:] + 1.0 / cos_lean[:-1]),
        path_ratio=0.5 * (ratio[1:] + ratio[:-1]),
        lean_power=lean_power,
        tyre_temperature=np.full(dt.size, air.temperature - default("tyres.reference_temperature")),
        warm_up=np.exp(-middle / priors.TYRE_WARM_UP_TIME),
        altitude=channel("altitude"),
        lap=placed.lap[1:].copy(),
        usable=usable,
    )


def braking(power: FloatArray, speed: FloatArray, interval: FloatArray) -> npt.NDArray[np.bool_]:
    """Return which records may hold braking: power drops away and the bike slows.

    How hard it slows does not tell: light braking before a corner is no harder than a gust on a rise. So every such
    span is left out, chosen by power first, which is an input, so that the choice does not lean on the drag sought.
    The whole span of low power is marked, with the records next to it.
    """
    known = power[np.isfinite(power)]
    usual = float(np.median(known)) if known.size else 0.0
    low = np.nan_to_num(power) < max(EASED_OFF * usual, COASTING_POWER)
    slowing = np.zeros(power.size)
    if power.size > 1:
        change = np.diff(np.nan_to_num(speed)) / np.maximum(interval[1:], 1e-6)
        slowing[1:] = -change
        slowing[:-1] = np.maximum(slowing[:-1], -change)
    hard = low & (slowing > SLOWING)
    marked = np.zeros(power.size, bool)
    edges = np.flatnonzero(np.diff(np.concatenate([[0], low.astype(np.int8), [0]])))
    for start, end in zip(edges[::2], edges[1::2], strict=True):
        if hard[start:end].any():
            marked[max(start - 1, 0) : end + 1] = True
    return marked


def _all_up_mass(session: Session) -> float:
    for key, value in (("rider.mass", session.rider.mass), ("bike.mass", session.bike.mass)):
        if value is None:
            raise SessionError('is needed to solve: add for example mass = "75.5 kg"', key=key)
    total = (session.rider.mass or 0.0) + (session.bike.mass or 0.0)
    if not LIGHTEST <= total <= HEAVIEST:
        raise SessionError(
            f"rider and bike together weigh {total:g} kg; {LIGHTEST:g} to {HEAVIEST:g} kg can be solved",
            key="rider.mass",
        )
    return total


def _efficiency(session: Session) -> tuple[float, float]:
    bike = session.bike
    value, sd = bike.drivetrain_efficiency, bike.drivetrain_efficiency_sd
    return (
        default("bike.drivetrain_efficiency") if value is None else value,
        default("bike.drivetrain_efficiency_sd") if sd is None else sd,
    )


def _gravity(rides: Mapping[str, Ride]) -> float:
    for ride in rides.values():
        if ride.has("latitude"):
            return float(gravity(float(np.nanmedian(ride.channels["latitude"]))))
    return 9.80665


def _ride_clock(session: Session, rides: Mapping[str, Ride]) -> dict[str, float]:
    """Return the time of day at each ride's first record, where known. [s]"""
    clock = {}
    for entry in session.rides:
        ride = rides.get(entry.id)
        start = entry.start or (ride.start if ride else None)
        if start is None:
            continue
        seconds = start.hour * 3600.0 + start.minute * 60.0 + start.second + start.microsecond * 1e-6
        offset = start.utcoffset()
        if offset is not None and session.utc_offset is not None:
            seconds += session.utc_offset - offset.total_seconds()
        clock[entry.id] = seconds % 86400.0
    return clock


def _offset(clock: Mapping[str, float], ride: str) -> float:
    return clock.get(ride, 0.0)


def _last(ride: Ride | None, start: float) -> float:
    return float(ride.time[-1]) if ride is not None and ride.time.size else start


def _unusable(run: Run, rides: Mapping[str, Ride], path: VenuePath) -> str:
    if run.excluded:
        return run.excluded
    if run.ride not in rides:
        return "its ride file is missing"
    ride = rides[run.ride]
    if run.kind is RunKind.PEDALLED and not ride.has("power"):
        return "its ride has no power"
    if not (ride.has("speed") or ride.has("distance") or ride.has("latitude") or run.laps):
        return "its ride has no speed, distance or position, and the run no lap times"
    if run.id not in path.runs:
        return "it could not be placed along the venue"
    return ""


def _later(run: DayRun, middle: float) -> DayRun:
    return replace(run, hour=run.hour - middle)


def _tyres(session: Session, name: str) -> DayTyres:
    known = next((t for t in session.tyres if t.id == name), None)
    coefficient = known.temperature_coefficient if known else None
    coefficient_sd = known.temperature_coefficient_sd if known else None
    return DayTyres(
        id=name,
        crr=known.crr if known else None,
        crr_sd=(known.crr_sd or 0.0) if known and known.crr is not None else None,
        temperature_coefficient=default("tyres.temperature_coefficient")
        if coefficient is None
        else coefficient,
        temperature_coefficient_sd=default("tyres.temperature_coefficient_sd")
        if coefficient_sd is None
        else coefficient_sd,
    )
