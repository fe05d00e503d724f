"""Every key of session.toml: its name, what it holds, and the field of the document it gives.

The unit beside a kind is the one a new value is written in; without one it is written as a bare SI number.
"""

from __future__ import annotations

from ridercda.session.document import (
    Air,
    AirReading,
    Bike,
    CourseEntry,
    CourseSegment,
    Exclusion,
    MeterLocation,
    MeterSides,
    PlanKind,
    PowerMeter,
    PowerPlan,
    RepairChoice,
    RideEntry,
    Rider,
    Run,
    RunKind,
    Session,
    Setup,
    Tyres,
    Venue,
    VenueKind,
)
from ridercda.session.forms import (
    Clock,
    ClockTimes,
    Date,
    Flag,
    Moment,
    Offset,
    Quantities,
    Quantity,
    SmallestWorthwhile,
    Text,
    TextMap,
    Texts,
    TimeOfDay,
    Whole,
    Word,
)
from ridercda.session.schema import Key, PowerCost, SubTable, Table
from ridercda.units import Kind

FORMAT = 1
"""The format number this program writes; older ones load for good."""

_MASS = Quantity(Kind.MASS, "kg")
_LENGTH = Quantity(Kind.LENGTH, "m")
_HEIGHT = Quantity(Kind.HEIGHT, "m")
_DISTANCE = Quantity(Kind.DISTANCE, "m")
_SPEED = Quantity(Kind.SPEED, "m/s")
_WIND_SPEED = Quantity(Kind.WIND_SPEED, "m/s")
_POWER = Quantity(Kind.POWER, "W")
_ENERGY = Quantity(Kind.ENERGY, "J")
_INERTIA = Quantity(Kind.INERTIA, "kg*m^2")
_TEMPERATURE = Quantity(Kind.TEMPERATURE, "degC")
_PRESSURE = Quantity(Kind.PRESSURE, "hPa")
_TYRE_PRESSURE = Quantity(Kind.TYRE_PRESSURE, "bar")
_ANGLE = Quantity(Kind.ANGLE)
_AREA = Quantity(Kind.AREA, "m^2")
_PLAIN_AREA = Quantity(Kind.AREA)
_HUMIDITY = Quantity(Kind.HUMIDITY)
_RATIO = Quantity(Kind.RATIO)
_GRADE = Quantity(Kind.GRADE)
_PER_KELVIN = Quantity(Kind.PER_KELVIN)
_CLOCK = Clock()
_TEXT = Text()

AIR_READING = Table(
    AirReading,
    (
        Key("time", TimeOfDay()),
        Key("temperature", _TEMPERATURE),
        Key("pressure", _PRESSURE),
        Key("humidity", _HUMIDITY),
        Key("wind_speed", _WIND_SPEED),
        Key("wind_from", _ANGLE),
    ),
)
AIR = Table(
    Air,
    (
        Key("temperature", _TEMPERATURE),
        Key("pressure", _PRESSURE),
        Key("sea_level_pressure", _PRESSURE),
        Key("altitude", _HEIGHT),
        Key("humidity", _HUMIDITY),
        Key("wind_speed", _WIND_SPEED),
        Key("wind_from", _ANGLE),
        Key("wind_height", _HEIGHT),
        Key("wind_sd", _WIND_SPEED),
        Key("roughness", _HEIGHT),
    ),
    (SubTable("reading", "readings", AIR_READING, many=True),),
)
RIDER = Table(
    Rider,
    (
        Key("id", _TEXT),
        Key("mass", _MASS),
        Key("critical_power", _POWER),
        Key("w_prime", _ENERGY),
    ),
)
BIKE = Table(
    Bike,
    (
        Key("mass", _MASS),
        Key("wheel_inertia", _INERTIA),
        Key("wheel_circumference", _LENGTH),
        Key("drivetrain_efficiency", _RATIO),
        Key("drivetrain_efficiency_sd", _RATIO),
    ),
)
POWER_METER = Table(
    PowerMeter,
    (
        Key("location", Word(MeterLocation)),
        Key("sides", Word(MeterSides)),
        Key("scale_sd", _RATIO),
    ),
)
VENUE = Table(
    Venue,
    (
        Key("id", _TEXT),
        Key("kind", Word(VenueKind)),
        Key("lap_length", _DISTANCE),
        Key("bend_radius", _HEIGHT),
        Key("transition_length", _DISTANCE),
        Key("mass_height", _HEIGHT),
    ),
)
REPAIR = Table(
    RepairChoice,
    (
        Key("kind", _TEXT),
        Key("choice", _TEXT),
        Key("start", _CLOCK),
        Key("end", _CLOCK),
        Key("value", _RATIO),
    ),
)
RIDE = Table(
    RideEntry,
    (
        Key("id", _TEXT),
        Key("file", _TEXT),
        Key("sha256", _TEXT),
        Key("start", Moment()),
        Key("columns", TextMap()),
        Key("wheel_circumference", _LENGTH),
        Key("power_channel", _TEXT),
    ),
    (SubTable("repair", "repairs", REPAIR, many=True),),
)
SETUP = Table(
    Setup,
    (
        Key("id", _TEXT),
        Key("letter", _TEXT),
        Key("name", _TEXT),
        Key("baseline", Flag()),
        Key("tyres", _TEXT),
        Key("mass_change", _MASS),
        PowerCost(),
        Key("held", _RATIO),
        Key("fallback", _TEXT),
        Key("notes", _TEXT),
        Key("photos", Texts()),
        Key("measurements", TextMap()),
        Key("cda", _AREA),
        Key("cda_sd", _AREA),
        Key("cda_difference", _AREA),
        Key("cda_difference_sd", _AREA),
        Key("difference_from", _TEXT),
        Key("yaw_deg", Quantities(_ANGLE), "yaw"),
        Key("cxa", Quantities(_PLAIN_AREA)),
    ),
)
TYRES = Table(
    Tyres,
    (
        Key("id", _TEXT),
        Key("crr", _RATIO),
        Key("crr_sd", _RATIO),
        Key("temperature_coefficient", _PER_KELVIN),
        Key("temperature_coefficient_sd", _PER_KELVIN),
        Key("pressure", _TYRE_PRESSURE),
        Key("wheel_circumference", _LENGTH),
    ),
)
EXCLUSION = Table(
    Exclusion,
    (
        Key("start", _CLOCK),
        Key("end", _CLOCK),
        Key("reason", _TEXT),
    ),
)
RUN = Table(
    Run,
    (
        Key("id", _TEXT),
        Key("ride", _TEXT),
        Key("start", _CLOCK),
        Key("end", _CLOCK),
        Key("setup", _TEXT),
        Key("excluded", _TEXT),
        Key("note", _TEXT),
        Key("laps", ClockTimes()),
        Key("kind", Word(RunKind)),
    ),
    (
        SubTable("exclude", "exclusions", EXCLUSION, many=True),
        SubTable("air", "air", AIR),
    ),
)
COURSE_SEGMENT = Table(
    CourseSegment,
    (
        Key("length", _DISTANCE),
        Key("grade", _GRADE),
        Key("heading", _ANGLE),
        Key("crr_factor", _RATIO),
        Key("shelter", _RATIO),
        Key("speed_limit", _SPEED),
    ),
)
POWER_PLAN = Table(
    PowerPlan,
    (
        Key("kind", Word(PlanKind)),
        Key("critical_power", _POWER),
        Key("w_prime", _ENERGY),
        Key("max_power", _POWER),
        Key("min_power", _POWER),
        Key("file", _TEXT),
    ),
)
COURSE = Table(
    CourseEntry,
    (
        Key("id", _TEXT),
        Key("name", _TEXT),
        Key("file", _TEXT),
        Key("sha256", _TEXT),
        Key("track_laps", _RATIO),
        Key("power", _POWER),
        Key("power_sd", _POWER),
        Key("wind_speed_sd", _WIND_SPEED),
        Key("shelter", _RATIO),
        Key("crr_factor", _RATIO),
        Key("corner_grip", _RATIO),
        Key("laps", Whole()),
        Key("standing_start", Flag()),
        Key("max_speed", _SPEED),
        Key("weight", _RATIO),
    ),
    (
        SubTable("segment", "segments", COURSE_SEGMENT, many=True),
        SubTable("air", "air", AIR),
        SubTable("plan", "plan", POWER_PLAN),
    ),
)
SESSION = Table(
    Session,
    (
        Key("name", _TEXT),
        Key("date", Date()),
        Key("timezone", Offset(), "utc_offset"),
        Key("smallest_worthwhile", SmallestWorthwhile()),
        Key("reference_speed", _SPEED),
    ),
    (
        SubTable("rider", "rider", RIDER),
        SubTable("bike", "bike", BIKE),
        SubTable("power_meter", "power_meter", POWER_METER),
        SubTable("air", "air", AIR),
        SubTable("venue", "venue", VENUE),
        SubTable("ride", "rides", RIDE, many=True),
        SubTable("setup", "setups", SETUP, many=True),
        SubTable("tyres", "tyres", TYRES, many=True),
        SubTable("run", "runs", RUN, many=True),
        SubTable("course", "courses", COURSE, many=True),
    ),
)
"""The whole file, but for its format number."""
