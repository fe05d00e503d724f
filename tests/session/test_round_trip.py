"""Whatever session there is, saved over whatever file, reads back as it was."""

from __future__ import annotations

import dataclasses
import datetime as dt
from pathlib import Path
from types import MappingProxyType
from typing import Any

from hypothesis import HealthCheck, Phase, given, settings
from hypothesis import strategies as st

from ridercda.rides.ride import FaultKind
from ridercda.session.bounds import BOUNDS
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
    Worthwhile,
)
from ridercda.session.load import session_from_text
from ridercda.session.save import text_of_edited, text_of_new
from ridercda.session.validate import validate

texts = st.text(st.characters(exclude_categories=["Cs"]), max_size=6)
names = st.text(st.characters(exclude_categories=["Cs"]), min_size=1, max_size=6)
texts_map = st.dictionaries(names, texts, max_size=2).map(MappingProxyType)


def figure(part: str, field: str, *, rounded: bool = False) -> st.SearchStrategy[float]:
    """A figure within its bound, sometimes a round one as people write them."""
    bound = BOUNDS[part][field]
    return (
        st.floats(bound.low, bound.high, allow_subnormal=False)
        .map(lambda x: round(x, 3) if rounded else x)
        .filter(lambda x: bound.low <= x <= bound.high)
    )


def figures(part: str, *fields: str) -> dict[str, st.SearchStrategy[float | None]]:
    return {field: st.none() | figure(part, field) | figure(part, field, rounded=True) for field in fields}


@st.composite
def airs(draw: st.DrawFn, *, day: bool = False) -> Air:
    fields = {name: draw(each) for name, each in figures("Air", *BOUNDS["Air"]).items()}
    fields[draw(st.sampled_from(["pressure", "sea_level_pressure"]))] = None
    times = sorted(draw(st.sets(st.integers(0, 86399), max_size=3))) if day else []
    names = [name for name in BOUNDS["AirReading"] if name != "time"]
    readings = tuple(
        AirReading(time=float(time), **{k: draw(v) for k, v in figures("AirReading", *names).items()})
        for time in times
    )
    return Air(**fields, readings=readings)


@st.composite
def setups(draw: st.DrawFn, setup_id: str, others: list[str], *, baseline: bool) -> Setup:
    fields: dict[str, Any] = {
        "letter": draw(texts),
        "name": draw(texts),
        "tyres": draw(texts),
        "notes": draw(texts),
        "mass_change": draw(figure("Setup", "mass_change")),
        "photos": tuple(draw(st.lists(texts, max_size=2))),
        "measurements": draw(texts_map),
    }
    cost = draw(st.sampled_from(["", "power_cost", "power_cost_share"]))
    if cost:
        fields[cost] = draw(figure("Setup", cost, rounded=True))
        fields["power_cost_sd"] = draw(st.none() | st.floats(0.0, 10.0))
    if others:
        fields["fallback"] = draw(st.sampled_from(others))
        fields["held"] = draw(st.none() | figure("Setup", "held"))
    known = draw(st.sampled_from(["", "cda", "cda_difference", "cxa"]))
    if known == "cda" or (known == "cda_difference" and others):
        fields[known] = draw(figure("Setup", known))
        fields[f"{known}_sd"] = draw(figure("Setup", f"{known}_sd"))
        if known == "cda_difference":
            fields["difference_from"] = draw(st.sampled_from(others))
    elif known == "cxa":
        yaw = sorted(draw(st.sets(figure("Setup", "yaw"), min_size=1, max_size=3)))
        fields["yaw"] = tuple(yaw)
        fields["cxa"] = tuple(draw(figure("Setup", "cxa")) for _ in yaw)
    return Setup(id=setup_id, baseline=baseline, **fields)


@st.composite
def runs_of(draw: st.DrawFn, ride: str, setup_ids: list[str], taken: int) -> tuple[Run, ...]:
    times = sorted(draw(st.sets(st.floats(0.0, 36000.0) | st.integers(0, 36000).map(float), max_size=5)))
    result = []
    for i, (start, end) in enumerate(zip(times[::2], times[1::2], strict=False)):
        inside = st.floats(start, end)
        exclusions = [
            sorted(draw(st.sets(inside, min_size=2, max_size=2))) for _ in range(draw(st.integers(0, 1)))
        ]
        result.append(
            Run(
                id=str(taken + i),
                ride=ride,
                setup=draw(st.sampled_from(setup_ids)),
                start=start,
                end=draw(st.just(end)) if 2 * i + 2 < len(times) - 1 else draw(st.sampled_from([end, None])),
                excluded=draw(texts),
                note=draw(texts),
                laps=tuple(sorted(draw(st.sets(inside, max_size=3)))),
                kind=draw(st.sampled_from(RunKind)),
                exclusions=tuple(Exclusion(a, b, draw(names)) for a, b in exclusions),
                air=draw(airs() | st.just(Air())),
            )
        )
    return tuple(result)


@st.composite
def courses(draw: st.DrawFn, course_id: str, *, track: bool) -> CourseEntry:
    way = draw(st.sampled_from(["file", "segments", "track_laps"] if track else ["file", "segments"]))
    optional = ["critical_power", "w_prime"]
    plan = draw(
        st.builds(PowerPlan, kind=st.sampled_from(PlanKind), file=names, **figures("PowerPlan", *optional))
    )
    skipped = {"track_laps", "laps", "weight"}
    fields: dict[str, Any] = {
        name: draw(each)
        for name, each in figures("CourseEntry", *(set(BOUNDS["CourseEntry"]) - skipped)).items()
    }
    if way == "file":
        fields["file"] = draw(names)
    elif way == "track_laps":
        fields["track_laps"] = draw(figure("CourseEntry", "track_laps"))
    else:
        segment = st.builds(
            CourseSegment,
            length=figure("CourseSegment", "length"),
            grade=figure("CourseSegment", "grade"),
            heading=figure("CourseSegment", "heading"),
            **figures("CourseSegment", "crr_factor", "shelter", "speed_limit"),
        )
        fields["segments"] = tuple(draw(st.lists(segment, min_size=1, max_size=3)))
    return CourseEntry(
        id=course_id,
        name=draw(texts),
        sha256=draw(texts),
        laps=draw(st.integers(1, 20)),
        standing_start=draw(st.booleans()),
        weight=draw(figure("CourseEntry", "weight")),
        air=draw(airs() | st.just(Air())),
        plan=plan,
        **fields,
    )


_moments = st.datetimes(
    dt.datetime(1990, 1, 1),
    timezones=st.none() | st.integers(-720, 840).map(lambda m: dt.timezone(dt.timedelta(minutes=m))),
)


@st.composite
def sessions(draw: st.DrawFn) -> Session:
    track = draw(st.booleans())
    lap = draw(figure("Venue", "lap_length"))
    venue = Venue(
        kind=VenueKind.TRACK
        if track
        else draw(st.sampled_from(VenueKind).filter(lambda k: k is not VenueKind.TRACK)),
        id=draw(texts),
        lap_length=lap,
        mass_height=draw(st.none() | figure("Venue", "mass_height")),
    )
    ride_ids = draw(st.lists(names, unique=True, max_size=3))
    repair = st.builds(
        RepairChoice,
        kind=st.sampled_from([kind.value for kind in FaultKind]),
        choice=names,
        start=st.none() | st.floats(0.0, 100.0),
        end=st.none() | st.floats(101.0, 1000.0),
        value=st.none() | figure("RepairChoice", "value"),
    )
    rides = tuple(
        RideEntry(
            id=ride_id,
            file=draw(names),
            sha256=draw(texts),
            start=draw(st.none() | _moments),
            columns=MappingProxyType(draw(st.dictionaries(st.sampled_from(["power", "time", "lap"]), texts))),
            wheel_circumference=draw(st.none() | figure("RideEntry", "wheel_circumference")),
            power_channel=draw(texts),
            repairs=tuple(draw(st.lists(repair, max_size=2))),
        )
        for ride_id in ride_ids
    )
    setup_ids = draw(st.lists(names, unique=True, min_size=1, max_size=4))
    marked = draw(st.none() | st.sampled_from(setup_ids))
    all_setups = tuple(
        draw(setups(each, setup_ids[:i], baseline=each == marked)) for i, each in enumerate(setup_ids)
    )
    tyre_ids = draw(st.lists(names, unique=True, max_size=2))
    tyres = tuple(
        draw(
            st.builds(
                Tyres,
                id=st.just(each),
                crr=figure("Tyres", "crr"),
                temperature_coefficient=figure("Tyres", "temperature_coefficient"),
                **figures("Tyres", "crr_sd", "temperature_coefficient_sd", "pressure", "wheel_circumference"),
            )
        )
        for each in tyre_ids
    )
    runs: tuple[Run, ...] = ()
    for ride_id in ride_ids:
        runs += draw(runs_of(ride_id, setup_ids, len(runs)))
    course_ids = draw(st.lists(names, unique=True, max_size=2))
    return Session(
        name=draw(names),
        venue=venue if track else draw(st.none() | st.just(venue)),
        date=draw(st.none() | st.dates()),
        utc_offset=draw(st.none() | st.integers(-1080, 1080).map(lambda m: m * 60.0)),
        smallest_worthwhile=draw(
            st.just(Worthwhile())
            | st.builds(Worthwhile, cda=figure("Worthwhile", "cda"))
            | st.builds(Worthwhile, power=figure("Worthwhile", "power"))
        ),
        reference_speed=draw(st.none() | figure("Session", "reference_speed")),
        rider=draw(st.builds(Rider, id=texts, **figures("Rider", "mass", "critical_power", "w_prime"))),
        bike=draw(st.builds(Bike, **figures("Bike", *BOUNDS["Bike"]))),
        power_meter=draw(
            st.builds(
                PowerMeter,
                location=st.none() | st.sampled_from(MeterLocation),
                sides=st.none() | st.sampled_from(MeterSides),
                scale_sd=st.none() | figure("PowerMeter", "scale_sd"),
            )
        ),
        air=draw(airs(day=True)),
        rides=rides,
        setups=all_setups,
        tyres=tyres,
        runs=runs,
        courses=tuple(draw(courses(each, track=track)) for each in course_ids),
    )


PATH = Path("session.toml")
HAND_WRITTEN = (Path(__file__).parent / "hand_written.toml").read_bytes().decode()
TEXTS = [HAND_WRITTEN, HAND_WRITTEN.replace("\n", "\r\n"), "\ufeff" + HAND_WRITTEN]
SLOW = [HealthCheck.too_slow, HealthCheck.large_base_example, HealthCheck.data_too_large]
round_trip = settings(
    max_examples=40, deadline=None, suppress_health_check=SLOW, phases=[Phase.explicit, Phase.generate]
)


@given(sessions())
@round_trip
def test_a_new_session_reads_back_as_it_was(session: Session) -> None:
    validate(session)
    assert session_from_text(text_of_new(session), PATH, "folder") == session


@given(sessions(), st.sampled_from(TEXTS))
@round_trip
def test_a_session_saved_over_a_hand_written_one_reads_back_as_it_was(session: Session, text: str) -> None:
    before = session_from_text(text, PATH, "folder")
    after = text_of_edited(text, before, session, PATH, "folder")
    assert session_from_text(after, PATH, "folder") == session
    assert ("\r\n" in after) == ("\r\n" in text)
    assert text_of_edited(after, session, before, PATH, "folder").startswith(text[:10])


@given(sessions(), st.data())
@round_trip
def test_an_edit_of_one_part_leaves_the_others_as_they_were_written(
    session: Session, data: st.DataObject
) -> None:
    before = session_from_text(HAND_WRITTEN, PATH, "folder")
    part = data.draw(st.sampled_from(["rider", "bike", "power_meter", "air", "tyres", "courses", "name"]))
    if part == "courses" and any(course.track_laps for course in session.courses):
        return
    edited = dataclasses.replace(before, **{part: getattr(session, part)})
    after = text_of_edited(HAND_WRITTEN, before, edited, PATH, "folder")
    assert session_from_text(after, PATH, "folder") == edited
    if part != "name":
        for table in {"[rider]", "[bike]", "[power_meter]", "[venue]", "[[ride]]", "[[setup]]", "[[run]]"}:
            section = HAND_WRITTEN[HAND_WRITTEN.index(table) :].partition("\n[")[0]
            assert table == f"[{part}]" or section in after
