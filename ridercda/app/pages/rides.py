"""Rides: the files of the day, what was recorded, what is wrong with it and what was done about it."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import numpy as np
from PySide6.QtWidgets import QFileDialog, QHBoxLayout, QLabel, QVBoxLayout, QWidget

from ridercda.app.desk import Desk
from ridercda.app.figures import clock, duration
from ridercda.app.pages.faults import FaultTable
from ridercda.app.pages.needs import NeedsCard
from ridercda.app.pages.page import Blank, Page
from ridercda.app.pages.venue_view import VenueMap, map_tracks
from ridercda.app.run_edits import RunEdits
from ridercda.app.shelf import ShelfItem, Shelved
from ridercda.app.theme import Type
from ridercda.app.widgets.card import Card, ChartCard
from ridercda.app.widgets.links import link, link_line
from ridercda.app.widgets.table import Column, TableModel, TableView
from ridercda.session import edits


@dataclass(frozen=True, slots=True)
class RideRow:
    """A ride of the session in the table."""

    id: str
    file: str
    start: float | None  # seconds of the day
    length: float | None  # [s]
    every: float | None  # median record interval [s]
    channels: str
    faults: int
    state: str


class RidesPage(Page):
    """Table of rides, faults of the picked one, and the map of the venue."""

    def __init__(self, desk: Desk, runs: RunEdits) -> None:
        super().__init__(desk, runs)
        px = self.theme.px
        self._model = TableModel[RideRow](self._columns(), key=lambda row: row.id)
        self._table = TableView(self.theme, self._model)
        self._table.keys_picked.connect(lambda keys: desk.selection.pick_ride(keys[-1]) if keys else None)
        self._rides = Card(self.theme, self.tr("Rides of the day"))
        self._rides.body.addWidget(self._table)
        add = link(self.tr("Add ride files…"))
        add.clicked.connect(lambda: self.asked.emit("ride.add", None))
        self._columns_button = link(self.tr("Columns…"))
        self._columns_button.setToolTip(self.tr("Say which column of a text file is which channel"))
        self._columns_button.clicked.connect(lambda: self.asked.emit("ride.columns", desk.selection.ride))
        self._find = link(self.tr("Find the file…"))
        self._find.clicked.connect(self._on_find_clicked)
        self._again = link(self.tr("Read again"))
        self._again.clicked.connect(lambda: desk.shelf.read_again(desk.selection.ride))
        self._remove = link(self.tr("Remove ride"))
        self._remove.clicked.connect(self._on_remove_clicked)
        self._buttons = (add, self._columns_button, self._find, self._again, self._remove)
        self._rides.body.addLayout(link_line(self.theme, *self._buttons))
        self._message = QLabel()
        self._message.setWordWrap(True)
        self._message.setProperty("bad", True)
        self._rides.body.addWidget(self._message)
        self._faults = FaultTable(desk)
        self._faults_card = Card(self.theme, self.tr("Faults and repairs"))
        self._faults_card.body.addWidget(self._faults)
        self._map = VenueMap(desk)
        self._map_card = ChartCard(self.theme, self.tr("The venue, from the track"), self._map)
        left = QVBoxLayout()
        left.setSpacing(px(12))
        self._needs = NeedsCard(desk)
        left.addWidget(self._needs)
        left.addWidget(self._rides, 3)
        left.addWidget(self._faults_card, 6)
        layout = QHBoxLayout(self.content)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(px(12))
        layout.addLayout(left, 7)
        layout.addWidget(self._map_card, 3)
        self.follow(desk.shelf.progressed)

    def _columns(self) -> tuple[Column[RideRow], ...]:
        return (
            Column(self.tr("Ride"), lambda r: r.id),
            Column(
                self.tr("Starts"), lambda r: "–" if r.start is None else clock(r.start), raw=lambda r: r.start
            ),
            Column(
                self.tr("Length"),
                lambda r: "–" if r.length is None else duration(r.length),
                raw=lambda r: r.length,
            ),
            Column(
                self.tr("Every"),
                lambda r: "–" if r.every is None else f"{r.every:g}\u00a0s",
                raw=lambda r: r.every,
            ),
            Column(self.tr("Faults"), lambda r: str(r.faults), raw=lambda r: float(r.faults)),
            Column(self.tr("State"), lambda r: r.state),
            Column(self.tr("File"), lambda r: Path(r.file).name, tip=lambda r: r.file),
            Column(self.tr("Channels"), lambda r: r.channels, tip=lambda r: r.channels),
        )

    def _first(self) -> QWidget:
        return self._table if self._needs.isHidden() else self._needs.first

    def blank(self) -> Blank | None:
        """Say how to begin."""
        if self.desk.session.rides:
            return None
        return Blank(
            self.tr("Add the rides of the test day"),
            self.tr(
                "Drop ride files anywhere in the window: FIT, TCX, GPX or delimited text, one or many at once."
            ),
            "ride.add",
            self.tr("Add ride files…"),
        )

    def refresh(self) -> None:
        """Show rides, faults and map."""
        desk = self.desk
        for button in self._buttons:
            button.setFont(self.theme.font())
        rows = tuple(self._row(item) for entry in desk.session.rides if (item := desk.shelf.item(entry.id)))
        self._model.set_rows(rows)
        picked = desk.selection.ride
        self._table.show_keys((picked,) if picked else ())
        item = desk.shelf.item(picked) if picked else None
        self._find.setVisible(item is not None and item.state in (Shelved.MISSING, Shelved.FAILED))
        self._again.setVisible(item is not None and item.state is Shelved.FAILED)
        self._columns_button.setVisible(item is not None and _is_text(item))
        self._remove.setEnabled(item is not None)
        self._message.setFont(self.theme.font(Type.AXIS))
        self._message.setText(item.message if item else "")
        self._message.setVisible(bool(item and item.message))
        self._faults.show_ride(picked)
        count = len(item.ride.faults) if item and item.ride else 0
        self._faults_card.set_note(self.tr("%n fault(s) in {}", "", count).format(picked) if count else "")
        self._needs.refresh()
        self._map.show_tracks(map_tracks(desk))
        self._map_card.refresh_table()

    def _row(self, item: ShelfItem) -> RideRow:
        ride = item.ride
        words = {
            Shelved.READING: self.tr("reading, {} %").format(round(100 * item.progress)),
            Shelved.READY: self.tr("read"),
            Shelved.MISSING: self.tr("file missing"),
            Shelved.FAILED: self.tr("not read"),
        }
        if ride is None or not ride.time.size:
            return RideRow(item.entry.id, item.entry.file, None, None, None, "", 0, words[item.state])
        start = item.entry.start or ride.start
        second = start.hour * 3600 + start.minute * 60 + start.second if start else None
        every = float(np.median(np.diff(ride.time))) if ride.time.size > 1 else None
        names = ", ".join(name.replace("_", " ") for name in ride.channels if ride.has(name))
        return RideRow(
            item.entry.id,
            item.entry.file,
            second,
            ride.duration,
            every,
            names,
            len(ride.faults),
            words[item.state],
        )

    def _on_find_clicked(self) -> None:
        ride_id = self.desk.selection.ride
        name, _ = QFileDialog.getOpenFileName(self, self.tr("Where is the file of {}?").format(ride_id))
        if name:
            self.asked.emit("ride.relocate", (ride_id, Path(name)))

    def _on_remove_clicked(self) -> None:
        ride_id = self.desk.selection.ride
        self.desk.document.edit(
            self.tr("Remove ride {} and its runs").format(ride_id),
            lambda s: edits.remove_ride_with_runs(s, ride_id),
        )


def _is_text(item: ShelfItem) -> bool:
    return (item.ride is not None and item.ride.source == "text") or item.entry.file.lower().endswith(
        (".csv", ".txt", ".tsv", ".csv.gz")
    )
