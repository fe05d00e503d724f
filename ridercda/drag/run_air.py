"""The air of one run: day, readings and the run's own overlay, down to density and wind at the rider's height."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from ridercda.drag import priors
from ridercda.physics.air import air_density, pressure_from_sea_level
from ridercda.physics.wind import log_profile
from ridercda.rides.ride import Ride
from ridercda.session.defaults import default
from ridercda.session.document import Air, Run, Session


@dataclass(frozen=True, slots=True)
class RunAir:
    """What the air of a run comes down to."""

    temperature: float  # [K]
    density: float  # [kg/m^3]
    wind: tuple[float, float] | None  # components it comes from, east and north, at the rider [m/s]
    wind_sd: float  # of each component [m/s]
    notes: tuple[tuple[str, str], ...]


def air_of_run(session: Session, run: Run, ride: Ride, ride_clock: float | None) -> RunAir:
    """Return the air of a run.

    Parameters
    ----------
    session : Session
    run : Run
        Its air lies over the day's, key by key.
    ride : Ride
        Its temperature and altitude stand in where the session gives none.
    ride_clock : float or None
        Time of day at the ride's first record; None: readings through the day are averaged. [s]
    """
    end = run.end if run.end is not None else float(ride.time[-1])
    when = None if ride_clock is None else ride_clock + 0.5 * (run.start + end)
    day = _at_time(session.air, when)
    air = run.air.over(day)
    notes: list[tuple[str, str]] = []
    temperature = air.temperature
    if temperature is None and ride.has("temperature"):
        inside = (ride.time >= run.start) & (ride.time <= end)
        seen = ride.channels["temperature"][inside]
        seen = seen[np.isfinite(seen)]
        if seen.size:
            temperature = float(np.median(seen))
            notes.append(
                (
                    "air-assumed",
                    "Air temperature is the head unit's: it reads high in the sun, 3 K make 1 % of CdA.",
                )
            )
    if temperature is None:
        temperature = default("air.temperature")
        notes.append(
            (
                "air-assumed",
                f"No air temperature is given; {temperature - 273.15:.0f} °C is assumed. 3 K make 1 % of CdA.",
            )
        )
    pressure = air.pressure
    if pressure is None:
        altitude = air.altitude
        if altitude is None and ride.has("altitude"):
            altitude = float(np.nanmedian(ride.channels["altitude"]))
        sea_level = air.sea_level_pressure
        if sea_level is None:
            sea_level = default("air.sea_level_pressure")
            notes.append(
                (
                    "air-assumed",
                    "No air pressure is given; the standard one at the venue's altitude is assumed. 10 hPa make 1 % of CdA.",
                )
            )
        if altitude is None:
            altitude = default("air.altitude")
        pressure = float(pressure_from_sea_level(sea_level, altitude, temperature))
    humidity = default("air.humidity") if air.humidity is None else air.humidity
    density = float(air_density(temperature, pressure, humidity))
    if air.wind_speed is None:
        return RunAir(temperature, density, None, 0.0, tuple(notes))
    height = default("air.wind_height") if air.wind_height is None else air.wind_height
    roughness = default("air.roughness") if air.roughness is None else air.roughness
    down = float(log_profile(default("air.rider_height"), height, roughness))
    speed = air.wind_speed * down
    sd = (
        air.wind_sd * down
        if air.wind_sd is not None
        else priors.WIND_REPORT_SD + priors.WIND_REPORT_SHARE * speed
    )
    if air.wind_from is None:  # strength without direction: no more than a bound
        return RunAir(temperature, density, (0.0, 0.0), max(speed, sd), tuple(notes))
    wind = (speed * float(np.sin(air.wind_from)), speed * float(np.cos(air.wind_from)))
    return RunAir(temperature, density, wind, sd, tuple(notes))


def _at_time(air: Air, when: float | None) -> Air:
    """Return the day's air with its readings interpolated to a time of day; held beyond the first and last."""
    if not air.readings:
        return air
    found: dict[str, float] = {}
    for name in ("temperature", "pressure", "humidity"):
        known = [(r.time, getattr(r, name)) for r in air.readings if getattr(r, name) is not None]
        if known:
            time, value = np.array(sorted(known)).T
            found[name] = float(value.mean() if when is None else np.interp(when, time, value))
    windy = [r for r in air.readings if r.wind_speed is not None and r.wind_from is not None]
    if windy:  # as a vector: directions on either side of north do not average to south
        time = np.array([r.time for r in windy])
        order = np.argsort(time)
        east = np.array([(r.wind_speed or 0.0) * np.sin(r.wind_from or 0.0) for r in windy])[order]
        north = np.array([(r.wind_speed or 0.0) * np.cos(r.wind_from or 0.0) for r in windy])[order]
        e = float(east.mean() if when is None else np.interp(when, time[order], east))
        n = float(north.mean() if when is None else np.interp(when, time[order], north))
        found["wind_speed"] = float(np.hypot(e, n))
        found["wind_from"] = float(np.arctan2(e, n) % (2.0 * np.pi))
    return replace(
        air,
        temperature=found.get("temperature", air.temperature),
        pressure=found.get("pressure", air.pressure),
        humidity=found.get("humidity", air.humidity),
        wind_speed=found.get("wind_speed", air.wind_speed),
        wind_from=found.get("wind_from", air.wind_from),
        readings=(),
    )
