"""The test day: session, rider, bike, power meter, air, venue and tyres."""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable
from dataclasses import replace
from functools import partial
from typing import Any

from PySide6.QtCore import QCoreApplication
from PySide6.QtWidgets import QWidget

from ridercda.app.desk import Desk
from ridercda.app.side.quantity_rows import Figure, FigureRows
from ridercda.app.widgets.field import Assumed, TextField
from ridercda.app.widgets.form import Choice, Form
from ridercda.errors import SessionError
from ridercda.session import edits
from ridercda.session.document import (
    MeterLocation,
    MeterSides,
    Session,
    Tyres,
    Venue,
    VenueKind,
    Worthwhile,
)
from ridercda.units import Kind


def _tr(text: str) -> str:
    return QCoreApplication.translate("DayForm", text)


def _part(part: str, name: str, put: Callable[[Session, Any], Session]) -> dict[str, Any]:
    """Return how one figure of a part of the session (rider, bike ...) is read and set."""
    return {
        "of_class": {"rider": "Rider", "bike": "Bike", "power_meter": "PowerMeter", "air": "Air"}[part],
        "name": name,
        "get": lambda session: getattr(getattr(session, part), name),
        "put": lambda session, value: put(session, replace(getattr(session, part), **{name: value})),
    }


def _get_venue(name: str) -> Callable[[Session], float | None]:
    def get(session: Session) -> float | None:
        return getattr(session.venue, name) if session.venue else None

    return get


def _put_venue(name: str) -> Callable[[Session, float | None], Session]:
    def put(session: Session, value: float | None) -> Session:
        venue = session.venue or Venue(VenueKind.LOOP)
        return edits.set_venue(session, replace(venue, **{name: value}))  # type: ignore[arg-type]

    return put


class DayForm(Form):
    """Editors of everything that holds for the whole day."""

    def __init__(self, desk: Desk, parent: QWidget | None = None) -> None:
        super().__init__(desk.theme, parent)
        self._desk = desk
        self._rows = FigureRows(desk, self)
        self._tyre_fields: list[QWidget] = []
        self._build_session()
        self._build_rider_and_bike()
        self._build_meter()
        self._build_air()
        self._build_venue()
        self._build_result()
        self.stretch()
        desk.document.session_changed.connect(self.refresh)
        self.refresh(desk.session)

    def _edit(self, text: str, change: Callable[[Session], Session]) -> None:
        if not self._desk.document.edit(text, change):
            self.refresh(self._desk.session)

    def _build_session(self) -> None:
        self.heading(self.tr("Session"))
        self._name = TextField(self.theme)
        self._name.committed.connect(
            lambda text: self._edit(self.tr("Rename session"), lambda s: edits.set_name(s, text))
        )
        self.row(self.tr("Name"), self._name)
        self._date = TextField(self.theme)
        self._date.setPlaceholderText(self.tr("from the rides"))
        self._date.committed.connect(self._on_date_committed)
        self.row(self.tr("Date"), self._date)

    def _on_date_committed(self, text: str) -> None:
        def change(session: Session) -> Session:
            return edits.set_date(session, _date_of(text), session.utc_offset)

        self._edit(self.tr("Set date"), change)

    def _build_rider_and_bike(self) -> None:
        add = self._rows.add
        self.heading(self.tr("Rider, all up"))
        add(Figure(self.tr("Mass with kit"), Kind.MASS, **_part("rider", "mass", edits.set_rider)))
        add(
            Figure(self.tr("Critical power"), Kind.POWER, **_part("rider", "critical_power", edits.set_rider))
        )
        add(Figure(self.tr("W′"), Kind.ENERGY, **_part("rider", "w_prime", edits.set_rider)))
        self.heading(self.tr("Bike, with bottles"))
        add(Figure(self.tr("Mass"), Kind.MASS, **_part("bike", "mass", edits.set_bike)))
        for words, kind, name in (
            (self.tr("Wheel inertia, both"), Kind.INERTIA, "wheel_inertia"),
            (self.tr("Roll-out"), Kind.LENGTH, "wheel_circumference"),
            (self.tr("Drivetrain efficiency"), Kind.RATIO, "drivetrain_efficiency"),
            (self.tr("Its uncertainty (sd)"), Kind.RATIO, "drivetrain_efficiency_sd"),
        ):
            add(Figure(words, kind, **_part("bike", name, edits.set_bike), default_key=f"bike.{name}"))

    def _build_meter(self) -> None:
        self.heading(self.tr("Power meter"))
        places = {
            "": self.tr("Crank (assumed)"),
            "crank": self.tr("Crank"),
            "pedals": self.tr("Pedals"),
            "hub": self.tr("Hub"),
        }
        self._place = Choice(self.theme, tuple(places.items()))
        self._place.activated.connect(self._on_place_activated)
        self.row(self.tr("Measures at"), self._place)
        sides = {
            "": self.tr("Both (assumed)"),
            "both": self.tr("Both"),
            "left": self.tr("Left only"),
            "right": self.tr("Right only"),
        }
        self._sides = Choice(self.theme, tuple(sides.items()))
        self._sides.activated.connect(self._on_sides_activated)
        self.row(self.tr("Legs measured"), self._sides)
        part = _part("power_meter", "scale_sd", edits.set_power_meter)
        self._rows.add(
            Figure(self.tr("Scale uncertainty (sd)"), Kind.RATIO, **part, default_key="power_meter.scale_sd")
        )

    def _on_place_activated(self) -> None:
        place = MeterLocation(self._place.key) if self._place.key else None
        self._edit(
            self.tr("Set power meter"),
            lambda s: edits.set_power_meter(s, replace(s.power_meter, location=place)),
        )

    def _on_sides_activated(self) -> None:
        sides = MeterSides(self._sides.key) if self._sides.key else None
        self._edit(
            self.tr("Set legs measured"),
            lambda s: edits.set_power_meter(s, replace(s.power_meter, sides=sides)),
        )

    def _build_air(self) -> None:
        self.heading(self.tr("Air of the day"))
        for words, kind, name, key in (
            (self.tr("Temperature"), Kind.TEMPERATURE, "temperature", "air.temperature"),
            (self.tr("Pressure at the venue"), Kind.PRESSURE, "pressure", ""),
            (self.tr("or at sea level"), Kind.PRESSURE, "sea_level_pressure", "air.sea_level_pressure"),
            (self.tr("Altitude"), Kind.HEIGHT, "altitude", "air.altitude"),
            (self.tr("Humidity"), Kind.HUMIDITY, "humidity", "air.humidity"),
            (self.tr("Wind speed"), Kind.WIND_SPEED, "wind_speed", ""),
            (self.tr("Wind from"), Kind.ANGLE, "wind_from", ""),
            (self.tr("Measured at height"), Kind.HEIGHT, "wind_height", "air.wind_height"),
            (self.tr("Wind uncertainty (sd)"), Kind.WIND_SPEED, "wind_sd", ""),
        ):
            self._rows.add(Figure(words, kind, **_part("air", name, edits.set_air), default_key=key))

    def _build_venue(self) -> None:
        self.heading(self.tr("Venue"))
        kinds = {
            "": self.tr("not said yet"),
            "loop": self.tr("Loop"),
            "out-and-back": self.tr("Out and back"),
            "track": self.tr("Indoor track"),
            "road": self.tr("Road, nothing repeats"),
        }
        self._kind = Choice(self.theme, tuple(kinds.items()))
        self._kind.activated.connect(self._on_kind_activated)
        self.row(self.tr("Kind"), self._kind)
        found = Assumed(None, self.tr("found from the laps"))
        self._track_fields = []
        for words, kind, name, key in (
            (self.tr("Lap length"), Kind.HEIGHT, "lap_length", ""),
            (self.tr("Bend radius"), Kind.HEIGHT, "bend_radius", ""),
            (self.tr("Transition length"), Kind.HEIGHT, "transition_length", ""),
            (self.tr("Height of mass"), Kind.HEIGHT, "mass_height", "venue.mass_height"),
        ):
            field = self._rows.add(
                Figure(
                    words,
                    kind,
                    "Venue",
                    name,
                    _get_venue(name),
                    _put_venue(name),
                    default_key=key,
                    assumed=found if name == "lap_length" else None,
                )
            )
            if name != "lap_length":
                self._track_fields.append(field)

    def _on_kind_activated(self) -> None:
        key = self._kind.key
        venue = self._desk.session.venue

        def change(session: Session) -> Session:
            new = None if not key else replace(venue, kind=VenueKind(key)) if venue else Venue(VenueKind(key))
            return edits.set_venue(session, new)

        self._edit(self.tr("Set venue"), change)

    def _build_result(self) -> None:
        self.heading(self.tr("What counts"))
        self._rows.add(
            Figure(
                self.tr("Smallest worthwhile difference"),
                Kind.AREA,
                "Worthwhile",
                "cda",
                lambda s: s.smallest_worthwhile.cda,
                lambda s, value: edits.set_smallest_worthwhile(s, Worthwhile(cda=value)),
            )
        )
        self._rows.add(
            Figure(
                self.tr("CdA is told at"),
                Kind.SPEED,
                "Session",
                "reference_speed",
                lambda s: s.reference_speed,
                edits.set_reference_speed,
                assumed=Assumed(None, self.tr("mean speed of the runs")),
            )
        )

    def refresh(self, session: Session) -> None:
        """Show what the session holds."""
        self._name.set_value(session.name)
        self._date.set_value(session.date.isoformat() if session.date else "")
        self._place.set_key(session.power_meter.location.value if session.power_meter.location else "")
        self._sides.set_key(session.power_meter.sides.value if session.power_meter.sides else "")
        self._kind.set_key(session.venue.kind.value if session.venue else "")
        is_track = session.venue is not None and session.venue.kind is VenueKind.TRACK
        for field in self._track_fields:
            self.show_row(field, shown=is_track)
        self._rows.refresh(session)


class TyresForm(Form):
    """What is known beforehand of the tyre set that the picked setup rides on."""

    def __init__(self, desk: Desk, parent: QWidget | None = None) -> None:
        super().__init__(desk.theme, parent)
        self._desk = desk
        self._rows = FigureRows(desk, self)
        self._head = self.heading(self.tr("Tyres"))
        for words, kind, name, key in (
            (self.tr("Crr at 20 °C"), Kind.RATIO, "crr", ""),
            (self.tr("Its uncertainty (sd)"), Kind.RATIO, "crr_sd", ""),
            (self.tr("Pressure"), Kind.TYRE_PRESSURE, "pressure", ""),
            (self.tr("Roll-out"), Kind.LENGTH, "wheel_circumference", ""),
            (
                self.tr("Change of Crr"),
                Kind.PER_KELVIN,
                "temperature_coefficient",
                "tyres.temperature_coefficient",
            ),
        ):
            found = Assumed(None, self.tr("found from the runs")) if name == "crr" else None
            self._rows.add(
                Figure(
                    words,
                    kind,
                    "Tyres",
                    name,
                    partial(self._get, name),
                    partial(self._put, name),
                    default_key=key,
                    assumed=found,
                )
            )
        desk.document.session_changed.connect(self.refresh)
        desk.selection.changed.connect(lambda: self.refresh(desk.session))
        self.refresh(desk.session)

    def _tyres_id(self, session: Session) -> str:
        setup = next((s for s in session.setups if s.id == self._desk.selection.setup), None)
        return setup.tyres if setup else ""

    def _get(self, name: str, session: Session) -> float | None:
        tyres = next((t for t in session.tyres if t.id == self._tyres_id(session)), None)
        return getattr(tyres, name) if tyres else None

    def _put(self, name: str, session: Session, value: float | None) -> Session:
        tyres_id = self._tyres_id(session)
        if not tyres_id:
            raise SessionError(self.tr("give the tyres a name first"), key="setup.tyres")
        tyres = next((t for t in session.tyres if t.id == tyres_id), Tyres(tyres_id))
        return edits.set_tyres(session, replace(tyres, **{name: value}))  # type: ignore[arg-type]

    def refresh(self, session: Session) -> None:
        """Show the tyre set of the picked setup."""
        tyres_id = self._tyres_id(session)
        self._head.setText(self.tr("Tyres: {}").format(tyres_id) if tyres_id else self.tr("Tyres"))
        self._rows.refresh(session)


def _date_of(text: str) -> dt.date | None:
    if not text:
        return None
    for pattern in ("%Y-%m-%d", "%d.%m.%Y", "%d %B %Y", "%d %b %Y"):
        try:
            return dt.datetime.strptime(text, pattern).date()
        except ValueError:
            continue
    raise SessionError(_tr("'{}' is not a date; write it like 2026-05-09").format(text), key="date")
