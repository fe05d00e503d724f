"""The sample sessions: four invented days, each with a seed, a place and something to learn from it."""

from __future__ import annotations

import datetime as dt
import math
from dataclasses import dataclass
from enum import StrEnum

from ridercda.synthetic.faults import FaultSpec, InjectedFault
from ridercda.synthetic.rider import RiderSpec
from ridercda.synthetic.sensors import PowerAveraging, PowerSpec, SensorSpec, SpeedSpec
from ridercda.synthetic.spec import AirSpec, DaySpec, SetupSpec, TyreSpec
from ridercda.synthetic.venue import LoopVenue, OutAndBackVenue, RoadVenue, TrackVenue
from ridercda.synthetic.wind import STILL, GustSpec, WeatherReport, WindSpec


class RideFormat(StrEnum):
    """What the head unit of a sample day wrote."""

    FIT = "fit"
    TEXT = "csv"


@dataclass(frozen=True, slots=True)
class SampleRide:
    """One ride file of a sample: its id, and before which run it ends (0: with the day)."""

    id: str
    before_run: int = 0


@dataclass(frozen=True, slots=True)
class SampleDay:
    """A sample session: what to invent, and how its rider keeps the books.

    Parameters
    ----------
    folder : str
    seed : int
    spec : DaySpec
    rides : tuple of SampleRide
        The day's record is cut into these.
    format : RideFormat
    introduction : str
        Comment at the head of session.toml.
    setups : str
        The `[[setup]]` and `[[tyres]]` tables as the rider wrote them.
    courses : str
        The `[[course]]` tables.
    course_files : mapping of file name to the road on it
        Each as (venue, seed, name).
    notes : mapping of run id to a remark
    """

    folder: str
    seed: int
    spec: DaySpec
    rides: tuple[SampleRide, ...]
    format: RideFormat
    introduction: str
    setups: str
    courses: str
    course_files: tuple[tuple[str, RoadVenue, int, str], ...] = ()
    notes: tuple[tuple[str, str], ...] = ()


_ROAD_RIDER = RiderSpec(wobble=0.05, grade_response=1.5, run_spread=0.005, within_run=0.004)
_CRANK = PowerSpec(noise=0.02, averaging=PowerAveraging.REVOLUTION, resolution=1.0, scale_sd=0.010)
_WHEEL = SpeedSpec(noise=0.015, resolution=0.001)
_SENSORS = SensorSpec(power=_CRANK, speed=_WHEEL)

QUARRY_LOOP = SampleDay(
    folder="quarry-loop",
    seed=20260509,
    spec=DaySpec(
        name="Quarry loop, morning",
        venue=LoopVenue(length=2400.0, rises=(2.4, 1.2, 0.8, 0.4, 0.2, 0.0, 0.1), shape_seed=41),
        wind=WindSpec(
            speed=0.8,
            blows_from=math.radians(235),
            turn=math.radians(25),
            growth=0.4,
            gusts=GustSpec(0.3, 11.0),
        ),
        rider=_ROAD_RIDER,
        tyres=(TyreSpec("25 mm clincher", 0.0042, warm_up=0.04, warm_up_time=400.0),),
        setups=(
            SetupSpec("base", 0.2560, "A", "Road helmet", "25 mm clincher"),
            SetupSpec("long-tail", 0.2515, "B", "Long-tail helmet", "25 mm clincher", mass_change=0.1),
            SetupSpec("low-pads", 0.2430, "C", "Low, narrow pads", "25 mm clincher"),
        ),
        order="ABCCBAABCCBA",
        laps=2,
        targets=(160.0, 220.0, 290.0),
        sensors=_SENSORS,
        air=AirSpec(
            temperature=290.4, pressure=99100.0, humidity=0.58, warming_per_hour=1.6, readings=(0.0, 1.0, 2.0)
        ),
        warm_up=240.0,
        faults=(
            FaultSpec(InjectedFault.POWER_ZERO, 3205.0, 6.0),
            FaultSpec(InjectedFault.GAP, 4300.0, 8.0),
            FaultSpec(InjectedFault.POWER_SPIKE, 5409.0, 1.0),
        ),
    ),
    rides=(SampleRide("morning"),),
    format=RideFormat.FIT,
    introduction="""\
# Quarry loop: three setups, four runs of two laps each, in the order A B C C B A A B C C B A, so that no
# setup has the best of the day. Powers of 160, 220 and 290 W take turns: without different speeds, drag area
# and rolling resistance cannot be told apart.""",
    setups="""\
[[setup]]
id = "base"
letter = "A"
name = "Road helmet"
baseline = true
tyres = "25 mm clincher"

[[setup]]
id = "long-tail"
letter = "B"
name = "Long-tail helmet"
tyres = "25 mm clincher"
mass_change = "+0.1 kg"

[[setup]]
id = "low-pads"
letter = "C"
name = "Low, narrow pads"
tyres = "25 mm clincher"
power_cost = "4 W"                 # from two sessions on the trainer
power_cost_sd = "3 W"
measurements = {pad_stack = "615 mm", pad_width = "190 mm"}
notes = "Holds it for an hour; looks up the road less."

# No [[tyres]] table: nothing is known of these beforehand, so Crr comes from the day alone.
""",
    courses="""\
[[course]]
id = "ridge-road-tt"
name = "Ridge Road time trial"
file = "courses/ridge-road-tt.gpx"
power = "265 W"
power_sd = "5 W"
wind_speed_sd = "0.8 m/s"

[course.air]
temperature = "21 degC"
wind_speed = "3 m/s"               # forecast, at 10 m
wind_from = 250
""",
    course_files=(
        (
            "ridge-road-tt.gpx",
            RoadVenue(stretch=38_800.0, runs=0, rises=(45.0, 22.0, 9.0, 3.0, 1.0)),
            7,
            "Ridge Road time trial",
        ),
    ),
    notes=(("5", "Head unit lost the power meter for some seconds."),),
)

RIDGE_OUT_AND_BACK = SampleDay(
    folder="ridge-out-and-back",
    seed=20260523,
    spec=DaySpec(
        name="Ridge road, out and back in the wind",
        venue=OutAndBackVenue(length=1600.0, rises=(3.0, 1.6, 0.8, 0.3), shape_seed=12),
        wind=WindSpec(
            speed=3.0,
            blows_from=math.radians(290),
            turn=math.radians(20),
            gusts=GustSpec(0.9, 11.0),
            report=WeatherReport(speed_error=0.15, from_error=math.radians(12)),
        ),
        rider=_ROAD_RIDER,
        tyres=(TyreSpec("race", 0.0038),),
        setups=(
            SetupSpec("round-bottle", 0.2480, "A", "Round bottle", "race"),
            SetupSpec("behind-saddle", 0.2425, "B", "Rear bottle", "race"),
        ),
        order="ABBAABBA",
        laps=2,
        targets=(180.0, 250.0, 310.0),
        sensors=_SENSORS,
        air=AirSpec(temperature=287.2, pressure=98700.0, humidity=0.66),
        date=dt.date(2026, 5, 23),
        warm_up=180.0,
        start_of_day=14.5 * 3600.0,
        faults=(FaultSpec(InjectedFault.POWER_DROPOUT, 1405.0, 5.0),),
    ),
    rides=(SampleRide("first", 5), SampleRide("second")),
    format=RideFormat.TEXT,
    introduction="""\
# A road ridden out and back on a windy afternoon, two setups, four runs each. The wind is the trouble of this
# day: the weather report below is taken as weak evidence, the two directions as strong. The head unit was
# stopped half-way, so there are two rides.""",
    setups="""\
[[setup]]
id = "round-bottle"
letter = "A"
name = "Round bottle"
baseline = true
tyres = "race"

[[setup]]
id = "behind-saddle"
letter = "B"
name = "Rear bottle"
tyres = "race"

[[tyres]]
id = "race"
crr = 0.0039                       # from a test on a drum, times the ratio seen on this road before
crr_sd = 0.0004
""",
    courses="""\
[[course]]
id = "club-20"
name = "Club 20 km, out and back"
power = "255 W"

[[course.segment]]
length = "5 km"
grade = 0.004
heading = 80

[[course.segment]]
length = "5 km"
grade = -0.002
heading = 95

[[course.segment]]
length = "5 km"
grade = 0.002
heading = 275

[[course.segment]]
length = "5 km"
grade = -0.004
heading = 260
""",
    notes=(("3", "A squall on the way back."),),
)

INDOOR_TRACK = SampleDay(
    folder="indoor-track",
    seed=20260606,
    spec=DaySpec(
        name="Indoor track, evening",
        venue=TrackVenue(bend_radius=23.0, transition_length=20.0, dragged_air=0.25),
        wind=STILL,
        rider=RiderSpec(mass=71.0, wobble=0.03, run_spread=0.004, within_run=0.003),
        tyres=(TyreSpec("track tubular", 0.0023),),
        setups=(
            SetupSpec("base", 0.2080, "A", "Base suit", "track tubular"),
            SetupSpec("ribbed-suit", 0.2035, "B", "Ribbed suit", "track tubular"),
            SetupSpec("ribbed-covers", 0.2015, "C", "Suit and covers", "track tubular"),
        ),
        order="ABCCBAABCCBA",
        laps=16,
        targets=(220.0, 290.0, 360.0),
        sensors=SensorSpec(power=_CRANK, speed=_WHEEL, position=None, barometer=None),
        air=AirSpec(temperature=299.2, pressure=100600.0, humidity=0.45),
        bike_mass=7.8,
        wheel_circumference=2.096,
        wheel_inertia=0.16,
        easy_time=110.0,
        date=dt.date(2026, 6, 6),
        warm_up=300.0,
        start_of_day=19.0 * 3600.0,
    ),
    rides=(SampleRide("evening"),),
    format=RideFormat.FIT,
    introduction="""\
# An indoor track of 250 m: no GPS, no wind, and a rider who leans. Laps are found from the wheel's distance
# and the length of the track; the button was pressed only where a run of 16 laps began and ended.""",
    setups="""\
[[setup]]
id = "base"
letter = "A"
name = "Base suit"
baseline = true
tyres = "track tubular"

[[setup]]
id = "ribbed-suit"
letter = "B"
name = "Ribbed suit"
tyres = "track tubular"

[[setup]]
id = "ribbed-covers"
letter = "C"
name = "Suit and covers"
tyres = "track tubular"
""",
    courses="""\
[[course]]
id = "pursuit"
name = "4 km pursuit"
track_laps = 16
power = "420 W"
""",
)

ONE_SPEED = SampleDay(
    folder="one-speed",
    seed=20260613,
    spec=DaySpec(
        name="One speed all day",
        venue=LoopVenue(length=2000.0, rises=(0.5, 0.2, 0.1), corners=7, shape_seed=3),
        wind=WindSpec(speed=0.5, blows_from=math.radians(120), gusts=GustSpec(0.2, 11.0)),
        rider=RiderSpec(wobble=0.03, run_spread=0.004),
        tyres=(TyreSpec("28 mm", 0.0045),),
        setups=(
            SetupSpec("base", 0.2700, "A", "Loose jersey", "28 mm"),
            SetupSpec("skinsuit", 0.2610, "B", "Skinsuit", "28 mm"),
        ),
        order="ABBAABBA",
        laps=3,
        targets=(230.0,),
        sensors=_SENSORS,
        air=AirSpec(temperature=292.0, pressure=100100.0, humidity=0.6),
        date=dt.date(2026, 6, 13),
        warm_up=180.0,
        start_of_day=7.5 * 3600.0,
    ),
    rides=(SampleRide("early"),),
    format=RideFormat.FIT,
    introduction="""\
# Every run at 230 W on a flat loop: one speed. Such a day cannot tell drag area from rolling resistance, so
# neither can be had alone; the difference between the two setups can, because they share their tyres.""",
    setups="""\
[[setup]]
id = "base"
letter = "A"
name = "Loose jersey"
baseline = true
tyres = "28 mm"

[[setup]]
id = "skinsuit"
letter = "B"
name = "Skinsuit"
tyres = "28 mm"
""",
    courses="""\
[[course]]
id = "flat-40"
name = "Flat 40 km"
power = "230 W"

[[course.segment]]
length = "20 km"
heading = 10

[[course.segment]]
length = "20 km"
heading = 190
""",
)

SAMPLES = (QUARRY_LOOP, RIDGE_OUT_AND_BACK, INDOOR_TRACK, ONE_SPEED)
