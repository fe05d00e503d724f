"""The faults of a ride with their repair choices; choosing is an undoable edit."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtWidgets import QVBoxLayout, QWidget

from ridercda.app.desk import Desk
from ridercda.app.figures import elapsed
from ridercda.app.widgets.table import Column, TableModel, TableView
from ridercda.rides.ride import Fault
from ridercda.session import edits
from ridercda.session.document import RepairChoice


@dataclass(frozen=True, slots=True, eq=False)
class FaultRow:
    """A fault in the table."""

    number: int
    ride: str
    fault: Fault


def _what(fault: Fault) -> str:
    """Return the fault's name, with its channel where the name does not tell."""
    words = fault.kind.value.replace("-", " ")
    channel = fault.channel.replace("_", " ")
    return (f"{words}: {channel}" if channel and channel not in words else words).capitalize()


def _span(fault: Fault) -> str:
    start, end = elapsed(fault.start), elapsed(fault.end)
    return start if start == end else f"{start} – {end}"


class FaultTable(QWidget):
    """Faults of the picked ride."""

    def __init__(self, desk: Desk) -> None:
        super().__init__()
        self._desk = desk
        self.model = TableModel[FaultRow](self._columns(), key=lambda row: (row.ride, row.number))
        self.view = TableView(desk.theme, self.model)
        self.view.set_empty_text(self.tr("Nothing wrong was found in this ride."))
        self.view.keys_picked.connect(self._on_view_picked)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addWidget(self.view)

    def _columns(self) -> tuple[Column[FaultRow], ...]:
        return (
            Column(
                self.tr("What"), lambda r: _what(r.fault), tip=lambda r: r.fault.channel.replace("_", " ")
            ),
            Column(
                self.tr("Where"),
                lambda r: _span(r.fault),
                raw=lambda r: r.fault.start,
            ),
            Column(
                self.tr("Repair"),
                lambda r: r.fault.repair or self.tr("left as recorded"),
                edit=self._choose,
                choices=lambda r: r.fault.choices,
                header_tip=self.tr("Double-click, or press F2, to choose another"),
            ),
            Column(self.tr("Why"), lambda r: r.fault.cause, tip=lambda r: r.fault.cause),
        )

    def show_ride(self, ride_id: str) -> None:
        """Show the faults of a ride."""
        ride = self._desk.shelf.ride(ride_id)
        faults = ride.faults if ride is not None else ()
        self.model.set_rows(tuple(FaultRow(k, ride_id, fault) for k, fault in enumerate(faults)))

    def _choose(self, row: FaultRow, choice: str) -> bool:
        fault = row.fault
        if choice not in fault.choices:
            return False
        text = self.tr("Repair {}: {}").format(fault.kind.value.replace("-", " "), choice)
        repair = RepairChoice(fault.kind.value, choice, fault.start, fault.end)
        return self._desk.document.edit(text, lambda s: edits.choose_repair(s, row.ride, repair))

    def _on_view_picked(self, keys: tuple[tuple[str, int], ...]) -> None:
        if keys:
            ride, number = keys[-1]
            fault = next((row.fault for row in self.model.rows if row.number == number), None)
            if fault is not None:
                self._desk.selection.point_at(ride, 0.5 * (fault.start + fault.end))
