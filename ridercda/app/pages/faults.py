"""The faults of a ride with their repair choices; choosing is an undoable edit."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import QModelIndex, QPersistentModelIndex, Qt
from PySide6.QtWidgets import QComboBox, QStyledItemDelegate, QStyleOptionViewItem, QVBoxLayout, QWidget

from ridercda.app.desk import Desk
from ridercda.app.figures import elapsed
from ridercda.app.widgets.table import RAW_ROLE, Column, TableModel, TableView
from ridercda.rides.ride import Fault
from ridercda.session import edits
from ridercda.session.document import RepairChoice

Index = QModelIndex | QPersistentModelIndex


@dataclass(frozen=True, slots=True, eq=False)
class FaultRow:
    """A fault in the table."""

    number: int
    ride: str
    fault: Fault


class FaultTable(QWidget):
    """Faults of the picked ride."""

    def __init__(self, desk: Desk) -> None:
        super().__init__()
        self._desk = desk
        self.model = TableModel[FaultRow](self._columns(), key=lambda row: (row.ride, row.number))
        self.view = TableView(desk.theme, self.model)
        self.view.setItemDelegateForColumn(3, _Choices(self.view))
        self.view.set_empty_text(self.tr("Nothing wrong was found in this ride."))
        self.view.keys_picked.connect(self._on_view_picked)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addWidget(self.view)

    def _columns(self) -> tuple[Column[FaultRow], ...]:
        return (
            Column(self.tr("What"), lambda r: r.fault.kind.value.replace("-", " ").capitalize()),
            Column(self.tr("Where"), lambda r: f"{elapsed(r.fault.start)} – {elapsed(r.fault.end)}", raw=lambda r: r.fault.start),
            Column(self.tr("Channel"), lambda r: r.fault.channel.replace("_", " ")),
            Column(self.tr("Repair"), lambda r: r.fault.repair or self.tr("left as recorded"), edit=self._choose,
                   header_tip=self.tr("Double-click, or press F2, to choose another")),  # fmt: skip
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


class _Choices(QStyledItemDelegate):
    """Edits a cell with the fault's choices."""

    def createEditor(self, parent: QWidget, option: QStyleOptionViewItem, index: Index) -> QWidget:
        """Return a box with what can be done about the fault."""
        box = QComboBox(parent)
        model = index.model()
        source = model.mapToSource(index) if hasattr(model, "mapToSource") else index
        table = model.sourceModel() if hasattr(model, "sourceModel") else model
        box.addItems(list(table.rows[source.row()].fault.choices))
        box.activated.connect(lambda: self.commitData.emit(box))
        box.activated.connect(lambda: self.closeEditor.emit(box))
        return box

    def setEditorData(self, editor: QWidget, index: Index) -> None:
        """Show the choice that holds."""
        if isinstance(editor, QComboBox):
            editor.setCurrentText(str(index.data(RAW_ROLE) or index.data(Qt.ItemDataRole.DisplayRole)))
            editor.showPopup()

    def setModelData(self, editor: QWidget, model: object, index: Index) -> None:
        """Push the choice."""
        if isinstance(editor, QComboBox):
            model.setData(index, editor.currentText())  # type: ignore[attr-defined]
