"""The few dialogs: units per quantity, columns of a text file, keyboard, cautions, about."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtGui import QKeySequence
from PySide6.QtWidgets import (
    QDialog,
    QDialogButtonBox,
    QLabel,
    QMessageBox,
    QScrollArea,
    QVBoxLayout,
    QWidget,
)

import ridercda
from ridercda.app.cautions import caution_texts
from ridercda.app.desk import Desk
from ridercda.app.quantities import CHOOSABLE
from ridercda.app.theme import Type
from ridercda.app.widgets.field import TextField
from ridercda.app.widgets.form import Choice, Form
from ridercda.rides.ride import CHANNELS
from ridercda.session import edits
from ridercda.units import UnitSystem, kind_units

if TYPE_CHECKING:
    from ridercda.app.actions import Action


class _Framed(QDialog):
    def __init__(self, parent: QWidget, desk: Desk, title: str) -> None:
        super().__init__(parent)
        self.setWindowTitle(title)
        px = desk.theme.px
        self.column = QVBoxLayout(self)
        self.column.setContentsMargins(px(20), px(16), px(20), px(16))
        self.column.setSpacing(px(12))
        head = QLabel(title)
        head.setFont(desk.theme.font(Type.PAGE, strong=True))
        self.column.addWidget(head)

    def finish(self, buttons: QDialogButtonBox.StandardButton) -> None:
        box = QDialogButtonBox(buttons)
        box.accepted.connect(self.accept)
        box.rejected.connect(self.reject)
        self.column.addWidget(box)


class UnitsDialog(_Framed):
    """Metric or imperial, per quantity; what is chosen holds at once."""

    def __init__(self, parent: QWidget, desk: Desk) -> None:
        super().__init__(parent, desk, parent.tr("Units for each quantity"))
        form = Form(desk.theme)
        for kind in CHOOSABLE:
            units = kind_units(kind)
            options = (
                (UnitSystem.METRIC.value, units.metric[0]),
                (UnitSystem.IMPERIAL.value, units.imperial[0]),
            )
            choice = Choice(desk.theme, options)
            choice.set_key(desk.units.units.of(kind).value)
            choice.activated.connect(lambda _, k=kind, c=choice: desk.units.choose_for(k, UnitSystem(c.key)))
            form.row(kind.value.capitalize(), choice)
        self.column.addWidget(form)
        self.finish(QDialogButtonBox.StandardButton.Close)
        self.resize(desk.theme.px(360), self.sizeHint().height())


class ColumnsDialog(_Framed):
    """Which column of a text file holds which channel; empty where the file says so itself."""

    def __init__(self, parent: QWidget, desk: Desk, ride_id: str) -> None:
        super().__init__(parent, desk, parent.tr("Columns of {}").format(ride_id))
        self._desk, self._ride = desk, ride_id
        note = QLabel(
            self.tr(
                "Write the heading of the column as it stands in the file; a unit may follow in brackets, like Tempo [km/h]."
            )
        )
        note.setWordWrap(True)
        note.setProperty("quiet", True)
        self.column.addWidget(note)
        form = Form(desk.theme)
        entry = desk.session.ride(ride_id)
        self._fields = {}
        for channel in ("time", *CHANNELS, "lap"):
            field = TextField(desk.theme)
            field.set_value(entry.columns.get(channel, ""))
            form.row(channel.replace("_", " ").capitalize(), field)
            self._fields[channel] = field
        self.column.addWidget(form)
        self.finish(QDialogButtonBox.StandardButton.Ok | QDialogButtonBox.StandardButton.Cancel)
        self.resize(desk.theme.px(420), self.sizeHint().height())

    def accept(self) -> None:
        """Push the edit."""
        columns = {channel: text for channel, field in self._fields.items() if (text := field.text().strip())}
        if self._desk.document.edit(
            self.tr("Set columns of {}").format(self._ride),
            lambda s: edits.set_ride_columns(s, self._ride, columns),
        ) or columns == dict(self._desk.session.ride(self._ride).columns):
            super().accept()


def show_keys(parent: QWidget, actions: tuple[Action, ...]) -> None:
    """Show shortcuts and what the strip understands."""
    tr = parent.tr
    strip = (
        ("← →", tr("previous, next run (Shift: pick several)")),
        (
            "[  ]",
            tr("take the start, the end of the run; ← → then move it by 1 s, Shift by 10 s, Enter lets go"),
        ),
        ("A … Z", tr("say in which setup the picked runs were ridden; the next free letter makes a setup")),
        ("Ins", tr("new run after the picked one")),
        ("Del", tr("remove the picked runs")),
        ("+ − 0", tr("closer, wider, whole day")),
    )
    native = QKeySequence.SequenceFormat.NativeText
    menu = tuple((QKeySequence(a.shortcut).toString(native), a.text) for a in actions if a.shortcut)
    parts = ((tr("In the day strip"), strip), (tr("Everywhere"), menu))
    text = "".join(f"<h3>{title}</h3>{_key_table(rows)}" for title, rows in parts)
    _show_text(parent, tr("Keyboard"), text)


def _key_table(rows: tuple[tuple[str, str], ...]) -> str:
    cells = (
        f"<tr><td style='padding:2px 16px 2px 0'><b>{keys}</b></td><td>{words}</td></tr>"
        for keys, words in rows
    )
    return f"<table>{''.join(cells)}</table>"


def show_first_steps(parent: QWidget) -> None:
    """Show the way from ride files to figures, by mouse and by keyboard."""
    tr = parent.tr
    mouse = (
        tr("Drop the ride files of the day into the window, or press Add ride files… on the start page."),
        tr(
            "On Rides, fill in the mass of the rider with kit and of the bike with bottles: 75.5 kg, 165 lb, as you like."
        ),
        tr("On Runs, press Accept: the runs found in the rides stand dashed in the day strip."),
        tr("Write the order in which the setups were ridden, such as A B C C B A, and press Enter."),
        tr("On Drag, read the answer. It follows every further change by itself."),
    )
    keyboard = (
        tr("Ctrl+Shift+O, the names of the ride files, Enter."),
        tr("Ctrl+1, the rider's mass, Tab, the bike's mass, Enter."),
        tr("Ctrl+Shift+A accepts the proposed runs."),
        tr("F6 goes to the day strip: → and a letter for each run, such as → A → B → C."),
        tr("Ctrl+3 shows the answer; Ctrl+S saves."),
    )
    parts = ((tr("By mouse"), mouse), (tr("By keyboard alone"), keyboard))
    text = "".join(
        f"<h3>{title}</h3><ol>{''.join(f'<li>{step}</li>' for step in steps)}</ol>" for title, steps in parts
    )
    _show_text(parent, tr("First figures, step by step"), text)


def _show_text(parent: QWidget, title: str, text: str) -> None:
    dialog = QDialog(parent)
    dialog.setWindowTitle(title)
    label = QLabel(text)
    label.setTextFormat(Qt.TextFormat.RichText)
    label.setWordWrap(True)
    label.setContentsMargins(16, 8, 16, 8)
    area = QScrollArea()
    area.setWidgetResizable(True)
    area.setWidget(label)
    layout = QVBoxLayout(dialog)
    layout.addWidget(area)
    dialog.resize(560, 620)
    dialog.exec()


def show_cautions(parent: QWidget) -> None:
    """Show the cautions."""
    QMessageBox.information(parent, parent.tr("Cautions"), "\n\n".join(caution_texts()))


def show_about(parent: QWidget) -> None:
    """Say what this is, and under which licences its font comes."""
    text = parent.tr(
        "RiderCdA {version}\n\nDrag area and rolling resistance from ride files, with honest intervals, "
        "and what they are worth on a course.\n\n"
        "MIT licence. The typeface Source Sans Pro is under the SIL Open Font License 1.1."
    ).format(version=ridercda.__version__)
    QMessageBox.about(parent, parent.tr("About RiderCdA"), text)
