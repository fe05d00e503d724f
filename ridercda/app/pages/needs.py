"""What is still needed for a first figure, asked where the rides are: masses and the kind of venue."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from PySide6.QtWidgets import QGridLayout, QLabel, QSizePolicy, QWidget

from ridercda.app.desk import Desk
from ridercda.app.theme import Type
from ridercda.app.widgets.card import Card
from ridercda.app.widgets.field import QuantityField
from ridercda.app.widgets.form import Choice
from ridercda.session import edits
from ridercda.session.bounds import BOUNDS
from ridercda.session.document import Session, Venue, VenueKind
from ridercda.units import Kind


class NeedsCard(Card):
    """Shown while something without a sensible default is missing."""

    def __init__(self, desk: Desk) -> None:
        super().__init__(desk.theme, "")
        self.set_title(self.tr("Needed for a first figure"))
        self._desk = desk
        self._rider = QuantityField(desk.theme, desk.units, Kind.MASS, BOUNDS["Rider"]["mass"])
        self._bike = QuantityField(desk.theme, desk.units, Kind.MASS, BOUNDS["Bike"]["mass"])
        kinds = (
            ("", self.tr("choose…")),
            ("loop", self.tr("Loop")),
            ("out-and-back", self.tr("Out and back")),
            ("track", self.tr("Indoor track")),
            ("road", self.tr("Road, nothing repeats")),
        )
        self._venue = Choice(desk.theme, kinds)
        self._lap = QuantityField(desk.theme, desk.units, Kind.HEIGHT, BOUNDS["Venue"]["lap_length"])
        grid = QGridLayout()
        grid.setHorizontalSpacing(desk.theme.px(16))
        grid.setVerticalSpacing(desk.theme.px(2))
        self._labels = []
        parts: tuple[tuple[str, QWidget], ...] = (
            (self.tr("Rider with kit"), self._rider),
            (self.tr("Bike with bottles"), self._bike),
            (self.tr("Venue"), self._venue),
            (self.tr("Lap length of the track"), self._lap),
        )
        for column, (words, field) in enumerate(parts):
            label = QLabel(words)
            label.setProperty("quiet", True)
            label.setBuddy(field)
            field.setAccessibleName(words)
            field.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Preferred)
            grid.addWidget(label, 0, column)
            grid.addWidget(field, 1, column)
            grid.setColumnStretch(column, 1)
            self._labels.append(label)
        self.body.addLayout(grid)
        self._rider.committed.connect(self._on_rider_committed)
        self._bike.committed.connect(self._on_bike_committed)
        self._venue.activated.connect(self._on_venue_activated)
        self._lap.committed.connect(self._on_lap_committed)

    @property
    def first(self) -> QWidget:
        """The first field that is still empty."""
        fields = (self._rider, self._bike)
        return next((field for field in fields if field.value is None), self._venue)

    def _edit(self, words: str, change: Callable[[Session], Session]) -> None:
        if not self._desk.document.edit(words, change):
            self.refresh()

    def _on_rider_committed(self, mass: float | None) -> None:
        self._edit(self.tr("Set rider mass"), lambda s: edits.set_rider(s, replace(s.rider, mass=mass)))

    def _on_bike_committed(self, mass: float | None) -> None:
        self._edit(self.tr("Set bike mass"), lambda s: edits.set_bike(s, replace(s.bike, mass=mass)))

    def _on_venue_activated(self) -> None:
        if key := self._venue.key:
            lap = self._lap.value

            def change(session: Session) -> Session:
                return edits.set_venue(session, Venue(VenueKind(key), lap_length=lap))

            self._edit(self.tr("Set venue"), change)

    def _on_lap_committed(self, length: float | None) -> None:
        venue = self._desk.session.venue
        if venue is not None:
            self._edit(
                self.tr("Set lap length"), lambda s: edits.set_venue(s, replace(venue, lap_length=length))
            )

    def refresh(self) -> None:
        """Show what is missing, or nothing."""
        session = self._desk.session
        is_track = session.venue is not None and session.venue.kind is VenueKind.TRACK
        lap = session.venue.lap_length if session.venue else None
        missing = (
            session.rider.mass is None
            or session.bike.mass is None
            or session.venue is None
            or (is_track and lap is None)
        )
        self.setVisible(missing)
        self._rider.set_value(session.rider.mass)
        self._bike.set_value(session.bike.mass)
        self._venue.set_key(session.venue.kind.value if session.venue else "")
        self._lap.set_value(lap)
        self._lap.setVisible(is_track)
        self._labels[-1].setVisible(is_track)
        for label in self._labels:
            label.setFont(self.theme.font(Type.AXIS))
