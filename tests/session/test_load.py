from __future__ import annotations

import math
from pathlib import Path

import pytest

from ridercda.errors import SessionError
from ridercda.session.document import Air, PlanKind, Session, VenueKind, Worthwhile
from ridercda.session.load import session_from_text

PATH = Path("day/session.toml")
HAND_WRITTEN = (Path(__file__).parent / "hand_written.toml").read_bytes().decode()
RIDE = '[[ride]]\nid = "am"\nfile = "am.csv"\n'
SETUP = '[[setup]]\nid = "base"\n'


def read(text: str) -> Session:
    return session_from_text("format = 1\n" + text, PATH, "folder")


def test_the_example_of_the_format_reads_in_si_units() -> None:
    day = session_from_text(HAND_WRITTEN, PATH, "folder")
    assert day.name == "Quarry loop, morning"
    assert day.rider.mass == pytest.approx(165 * 0.45359237)
    assert day.utc_offset == 7200.0
    assert day.smallest_worthwhile == Worthwhile(cda=0.002)
    assert day.air.wind_from == pytest.approx(math.radians(240.0))
    assert day.air.temperature == pytest.approx(291.15)
    assert day.air.readings[0].time == 9.5 * 3600
    assert day.venue is not None
    assert day.venue.kind is VenueKind.LOOP
    assert day.setup("low").power_cost_share == pytest.approx(0.015)
    assert day.setup("tunnel").yaw == pytest.approx((0.0, math.radians(5), math.radians(10)))
    run = day.run("1")
    assert (run.start, run.end, run.laps) == (310.0, 782.0, (310.0, 400.5, 782.0))
    assert run.air.temperature == pytest.approx((64 - 32) / 1.8 + 273.15)
    assert day.course("hill-tt").plan.kind is PlanKind.BEST
    assert day.course("hill-tt").air == Air(wind_speed=2.0)


def test_tables_may_be_written_inline_or_dotted() -> None:
    day = read('rider = {mass = "75 kg"}\nair.humidity = 0.4\nride = [{id = "am", file = "x"}]\n')
    assert (day.rider.mass, day.air.humidity, day.ride("am").file) == (75.0, 0.4, "x")


def test_a_number_without_unit_is_si_and_an_angle_in_degrees() -> None:
    day = read("[rider]\nmass = 75\n[air]\nwind_from = 90\n")
    assert day.rider.mass == 75.0
    assert day.air.wind_from == pytest.approx(math.pi / 2)


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("[rider]\nmas = 75\n", r"rider\.mas: is not a key known here; did you mean 'mass'\?"),
        ("[riders]\n", r"riders: is not a key known here; did you mean 'rider'\?"),
        (
            '[rider]\nmass = "75 bar"\n',
            r"rider\.mass: '75 bar': 'bar' is not a unit of mass; .*\(units: kg, g, lb",
        ),
        ("[rider]\nmass = true\n", r"rider\.mass: True: this is not a mass"),
        ("[air]\ntemperature = 18\n", r"air\.temperature: 18: a temperature needs its unit; write it like"),
        ("[air]\nhumidity = 55\n", r"air\.humidity: 55: a humidity is 0 to 1, or 0 to 100 with a % sign"),
        ("[rider]\nmass = inf\n", r"rider\.mass: inf: this number is not finite"),
        ("rider = 75\n", r"rider: is not a table; write it as \[rider\]"),
        ("[ride]\nid = 'am'\n", r"ride: is one table where there may be several; write \[\[ride\]\]"),
        ("[[ride]]\nid = 'am'\n", r"ride\[am\]\.file: is missing; every ride\[am\] needs it"),
        ("[[ride]]\nfile = 'am'\n", r"ride\[#1\]\.id: is missing"),
        (RIDE + RIDE, r"ride\[am\]\.id: the id 'am' is used twice"),
        ("[venue]\nkind = 'lop'\n", r'venue\.kind: "lop" is not known here; did you mean \'loop\'\?'),
        ("[venue]\nid = 'x'\n", r"venue\.kind: is missing"),
        ("[venue]\nkind = 'track'\n", r"venue\.lap_length: is missing; a track needs the length of its lap"),
        (
            "[venue]\nkind = 'track'\nlap_length = 250\nbend_radius = 40\n",
            r"venue\.bend_radius: two half circles of 40 m radius are 251\.3 m long",
        ),
        (
            "smallest_worthwhile = '2 kg'\n",
            r"smallest_worthwhile: '2 kg': 'kg' is not a unit of area .* or power",
        ),
        ("date = 'May 9'\n", r'date: "May 9" is not a date; write year-month-day'),
        ("timezone = '2'\n", r'timezone: "2" is not an offset from UTC'),
        (
            "[[ride]]\nid = 'a'\nfile = 'a'\nstart = 'x'\n",
            r"ride\[a\]\.start: \"x\" is not a date with a time",
        ),
        ("[[ride]]\nid = 'a'\nfile = 'a'\ncolumns = 3\n", r"ride\[a\]\.columns: 3 is not a table"),
        (
            "[[ride]]\nid = 'a'\nfile = 'a'\ncolumns = {pwr = 'W'}\n",
            r"ride\[a\]\.columns: there is no channel 'pwr': did you mean 'power'\?",
        ),
        (SETUP + "baseline = 'yes'\n", r'setup\[base\]\.baseline: "yes" is neither true nor false'),
        (
            SETUP + "baseline = true\n[[setup]]\nid = 'b'\nbaseline = true\n",
            r"setup\[b\]\.baseline: there are 2 baselines \(base, b\)",
        ),
        (
            SETUP + "fallback = 'bse'\n",
            r"setup\[base\]\.fallback: there is no setup 'bse': did you mean 'base'\?",
        ),
        (SETUP + "fallback = 'base'\n", r"setup\[base\]\.fallback: names the setup itself"),
        (SETUP + "held = 0.5\n", r"setup\[base\]\.fallback: is missing; held is 0\.5"),
        (
            SETUP + "cda = 0.3\ncda_sd = 0\nyaw_deg = [0]\ncxa = [0.3]\n",
            r"setup\[base\]\.cxa: stands beside cda",
        ),
        (SETUP + "cda = 0.3\n", r"setup\[base\]\.cda_sd: is missing"),
        (SETUP + "cda_sd = 0.3\n", r"setup\[base\]\.cda_sd: is given without cda"),
        (SETUP + "cda_difference = 0.01\n", r"setup\[base\]\.difference_from: is missing"),
        (
            SETUP + "yaw_deg = [0, 5]\ncxa = [0.3]\n",
            r"setup\[base\]\.cxa: has 1 values for 2 angles in yaw_deg",
        ),
        (
            SETUP + "yaw_deg = [5, 0]\ncxa = [0.3, 0.3]\n",
            r"setup\[base\]\.yaw_deg: the angles do not increase",
        ),
        (SETUP + "power_cost = '4 kg'\n", r"setup\[base\]\.power_cost: '4 kg': 'kg' is not a unit of power"),
        (
            SETUP + "power_cost = '4 W'\npower_cost_sd = '1 %'\n",
            r"setup\[base\]\.power_cost_sd: 1 % is not in the unit of power_cost, 4 W",
        ),
        (SETUP + "power_cost_sd = 1\n", r"setup\[base\]\.power_cost_sd: is given without power_cost"),
        (SETUP + "photos = 'x'\n", r"setup\[base\]\.photos: \"x\" is not a list of texts"),
        (SETUP + "name = 3\n", r"setup\[base\]\.name: 3 is not a text"),
        (SETUP + "[[tyres]]\nid = 't'\ncrr_sd = 0.001\n", r"tyres\[t\]\.crr_sd: is given without crr"),
        (
            SETUP + RIDE + "[[run]]\nid = '1'\nride = 'am'\nsetup = 'base'\nstart = '5:70'\n",
            r"run\[1\]\.start: '5:70': minutes and seconds go to 59",
        ),
        (
            SETUP + RIDE + "[[run]]\nid = '1'\nride = 'am'\nsetup = 'base'\nstart = -5\n",
            r"run\[1\]\.start: -5: a time cannot be negative",
        ),
        (
            SETUP + RIDE + "[[run]]\nid = '1'\nride = 'am'\nsetup = 'base'\nstart = 10\nend = 5\n",
            r"run\[1\]\.end: 5 s is not after the start, 10 s",
        ),
        (
            SETUP + RIDE + "[[run]]\nid = '1'\nride = 'pm'\nsetup = 'base'\nstart = 10\n",
            r"run\[1\]\.ride: there is no ride 'pm': known: 'am'",
        ),
        (
            SETUP + RIDE + "[[run]]\nid = '1'\nride = 'am'\nsetup = 'xyz'\nstart = 10\n",
            r"run\[1\]\.setup: there is no setup 'xyz': known: 'base'",
        ),
        (
            SETUP + RIDE + "[[run]]\nid = '1'\nride = 'am'\nsetup = 'base'\nstart = 10\nlaps = [5]\n",
            r"run\[1\]\.laps: 5 s lies outside the run",
        ),
        ("[[course]]\nid = 'c'\n", r"course\[c\]: has none: a course comes from one of file"),
        (
            "[[course]]\nid = 'c'\ntrack_laps = 16\n",
            r"course\[c\]\.track_laps: needs a \[venue\] with lap_length",
        ),
        ("[[course]]\nid = 'c'\nfile = 'c'\nlaps = 1.5\n", r"course\[c\]\.laps: 1\.5 is not a whole number"),
        (
            "[[course]]\nid = 'c'\nfile = 'c'\npower = 28500\n",
            r"course\[c\]\.power: 28500 W cannot be: it must lie",
        ),
        (
            "[[course]]\nid = 'c'\nfile = 'c'\n[course.plan]\nkind = 'file'\n",
            r"course\[c\]\.plan\.file: is missing",
        ),
        (
            "[air]\npressure = '1008 Pa'\n",
            r"air\.pressure: 10\.08 hPa cannot be: it must lie between 600 and 1100 hPa",
        ),
        (
            "[air]\npressure = '1008 hPa'\nsea_level_pressure = '1013 hPa'\n",
            r"air\.pressure: stands beside sea_lev",
        ),
        (
            "[[air.reading]]\ntime = 10:00:00\n[[air.reading]]\ntime = '9:00'\n",
            r"air\.reading: the times of the readings do not increase",
        ),
        (
            "[[air.reading]]\ntime = '25:00'\n",
            r"air\.reading\[#1\]\.time: '25:00': this is not a time of day",
        ),
    ],
)
def test_one_clear_message_with_file_key_value_and_what_to_do(text: str, message: str) -> None:
    with pytest.raises(SessionError, match=message) as refusal:
        read(text)
    assert str(refusal.value).startswith(f"{PATH}: ")
    assert "\n" not in str(refusal.value)


def test_a_circle_of_references_is_broken_by_name() -> None:
    setups = "".join(
        f"[[setup]]\nid = '{a}'\nfallback = '{b}'\n"
        for a, b in (("a", "b"), ("b", "c"), ("c", "a"), ("d", "a"))
    )
    with pytest.raises(
        SessionError, match=r"setup\[a\]\.fallback: goes round in a circle \(a -> b -> c -> a\)"
    ):
        read(setups)
