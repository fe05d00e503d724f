"""What the rider of an invented day would write down: its session document."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from ridercda.session.document import (
    Air,
    AirReading,
    Bike,
    MeterLocation,
    MeterSides,
    PowerMeter,
    RideEntry,
    Rider,
    Run,
    Session,
    Setup,
    Tyres,
    Venue,
)
from ridercda.synthetic.spec import DaySpec, LapTimes, SetupSpec
from ridercda.synthetic.wind import WeatherReport

FloatArray = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Crossings:
    """When the line was crossed, and when the button was pressed for it; shape (runs, laps + 1). [s]"""

    exact: FloatArray
    pressed: FloatArray

    @property
    def of_laps(self) -> tuple[float, ...]:
        """The presses of a rider who marks every lap, the start of the ride first."""
        return (0.0, *(float(t) for t in self.pressed.ravel()))

    @property
    def of_runs(self) -> tuple[float, ...]:
        """The presses of a rider who marks where runs begin and end, the start of the ride first."""
        return (0.0, *(float(t) for t in self.pressed[:, [0, -1]].ravel()))


def session_document(
    spec: DaySpec,
    venue: Venue,
    setups: tuple[SetupSpec, ...],
    crossings: Crossings,
    *,
    ride_id: str,
    start: dt.datetime,
    duration: float,
    report: tuple[float, float] | None,
) -> Session:
    """Return the session document of a day.

    Parameters
    ----------
    spec : DaySpec
    venue : Venue
    setups : tuple of SetupSpec
        That of each run.
    crossings : Crossings
    ride_id : str
    start : datetime
        Of the ride, with its offset from UTC.
    duration : float
        [s]
    report : (float, float) or None
        Speed and direction of the weather report. [m/s, rad]
    """
    times = {LapTimes.EXACT: crossings.exact, LapTimes.PRESSED: crossings.pressed}.get(spec.lap_times)
    offset = start.utcoffset()
    return Session(
        name=spec.name,
        venue=venue,
        date=start.date(),
        utc_offset=offset.total_seconds() if offset is not None else None,
        rider=Rider(mass=spec.rider.mass),
        bike=Bike(
            mass=spec.bike_mass,
            wheel_inertia=spec.wheel_inertia,
            wheel_circumference=spec.wheel_circumference,
            drivetrain_efficiency=0.977,
        ),
        power_meter=PowerMeter(MeterLocation.CRANK, MeterSides.BOTH, scale_sd=0.015),
        air=_air(spec, duration, report),
        rides=(RideEntry(ride_id, f"rides/{ride_id}.csv"),),
        setups=tuple(
            Setup(
                s.id,
                letter=s.letter,
                name=s.name,
                baseline=k == 0,
                tyres=s.tyres,
                mass_change=s.mass_change,
            )
            for k, s in enumerate(spec.setups)
        ),
        tyres=tuple(Tyres(t.id, crr=t.stated_crr, crr_sd=t.stated_crr_sd) for t in spec.tyres),
        runs=tuple(
            Run(
                id=str(r + 1),
                ride=ride_id,
                setup=setup.id,
                start=float(crossings.exact[r, 0]),
                end=float(crossings.exact[r, -1]),
                laps=tuple(float(t) for t in times[r]) if times is not None else (),
            )
            for r, setup in enumerate(setups)
        ),
    )


def _air(spec: DaySpec, duration: float, report: tuple[float, float] | None) -> Air:
    hourly = spec.air.warming_per_hour
    middle = 0.5 * duration / 3600.0
    given = spec.wind.report or WeatherReport()
    return Air(
        temperature=spec.air.temperature,
        pressure=spec.air.pressure,
        humidity=spec.air.humidity,
        wind_speed=report[0] if report else None,
        wind_from=report[1] if report else None,
        wind_height=given.height if report else None,
        roughness=given.roughness if report else None,
        readings=tuple(
            AirReading(
                time=spec.start_of_day + 3600.0 * hour,
                temperature=spec.air.temperature + hourly * (hour - middle),
            )
            for hour in spec.air.readings
        ),
    )
