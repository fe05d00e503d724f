from __future__ import annotations

from typing import Any

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from pytestqt.qtbot import QtBot

from ridercda.app.desk import Desk
from ridercda.app.run_edits import RunEdits
from ridercda.app.side.day_form import DayForm
from ridercda.app.side.panel import SidePanel
from ridercda.app.side.run_facts import RunFacts
from ridercda.app.side.setup_form import SetupForm
from ridercda.app.widgets.field import Assumed, QuantityField, short_source
from ridercda.session.bounds import BOUNDS
from ridercda.session.defaults import DEFAULTS
from ridercda.units import Kind, UnitSystem


def field_of(desk: Desk, qtbot: QtBot, kind: Kind, owner: str = "", name: str = "") -> QuantityField:
    field = QuantityField(desk.theme, desk.units, kind, BOUNDS.get(owner, {}).get(name))
    qtbot.addWidget(field)
    field.show()
    return field


def typed(field: QuantityField, text: str) -> None:
    field.line.selectAll()
    QTest.keyClicks(field.line, text)


@pytest.mark.parametrize(
    ("kind", "text", "value"),
    [
        (Kind.MASS, "165 lb", 74.84274105),  # 1 lb = 0.45359237 kg by definition
        (Kind.MASS, "75,5", 75.5),
        (Kind.PRESSURE, "1008 hPa", 100800.0),
        (Kind.PRESSURE, "29.8 inHg", 100914.388),  # 1 inHg (0 °C) = 3386.389 Pa
        (Kind.TEMPERATURE, "18 C", 291.15),
        (Kind.TEMPERATURE, "64.4 F", 291.15),
        (Kind.ANGLE, "180", 3.141592653589793),
        (Kind.HUMIDITY, "55 %", 0.55),
        (Kind.LENGTH, "82.9 in", 2.10566),
        (Kind.DURATION, "1:05:10", 3910.0),
    ],
)
def test_any_unit_is_taken(desk: Desk, qtbot: QtBot, kind: Kind, text: str, value: float) -> None:
    field = field_of(desk, qtbot, kind)
    typed(field, text)
    with qtbot.waitSignal(field.committed) as committed:
        QTest.keyClick(field.line, Qt.Key.Key_Return)
    assert committed.args[0] == pytest.approx(value, rel=2e-6)


def test_what_is_wrong_is_said_while_typing_and_nothing_is_committed(desk: Desk, qtbot: QtBot) -> None:
    field = field_of(desk, qtbot, Kind.MASS, "Rider", "mass")
    field.set_value(75.5)
    typed(field, "75 parsecs")
    assert field.line.property("wrong") is True
    assert "75 parsecs" in field.line.accessibleDescription()
    with qtbot.assertNotEmitted(field.committed):
        QTest.keyClick(field.line, Qt.Key.Key_Return)
    typed(field, "900")
    assert "900 kg cannot be" in field.line.accessibleDescription()
    QTest.keyClick(field.line, Qt.Key.Key_Escape)
    assert field.line.text() == "75.5 kg"
    assert field.line.property("wrong") is False


def test_an_empty_field_shows_what_is_assumed_and_why(desk: Desk, qtbot: QtBot) -> None:
    field = field_of(desk, qtbot, Kind.RATIO)
    field.set_value(
        None, Assumed(0.977, "J. C. Martin et al., Validation of a model, J. Appl. Biomech. 14(3), 1998")
    )
    assert field.line.text() == ""
    assert field.line.placeholderText() == "97.7 %"
    assert field.line.accessibleDescription() == "assumed: J. C. Martin et al. 1998"


def test_every_default_has_a_source_short_enough_to_show() -> None:
    for row in DEFAULTS:
        assert 3 <= len(short_source(row.source)) <= 60, row.key


def test_a_value_is_shown_as_typed_whatever_the_unit(desk: Desk, qtbot: QtBot) -> None:
    field = field_of(desk, qtbot, Kind.MASS)
    field.set_value(74.84274105)
    desk.units.choose_system(UnitSystem.IMPERIAL)
    assert field.line.text() == "165 lb"
    with qtbot.assertNotEmitted(field.committed):
        QTest.keyClick(field.line, Qt.Key.Key_Return)
    typed(field, "170")  # without a unit: the one that is shown
    with qtbot.waitSignal(field.committed) as committed:
        QTest.keyClick(field.line, Qt.Key.Key_Return)
    assert committed.args[0] == pytest.approx(170 * 0.45359237)


def fields_of(form: Any) -> dict[str, QuantityField]:
    return {field.accessibleName(): field for field in form.findChildren(QuantityField)}


def test_the_test_day_is_edited_undoably(day: Desk, qtbot: QtBot) -> None:
    form = DayForm(day)
    qtbot.addWidget(form)
    form.show()
    mass = fields_of(form)["Mass with kit"]
    assert mass.line.text() == "75.5 kg"
    typed(mass, "165 lb")
    QTest.keyClick(mass.line, Qt.Key.Key_Return)
    assert day.session.rider.mass == pytest.approx(74.84274105)
    assert day.document.undo_stack.undoText() == "Set mass with kit"
    day.document.undo_stack.undo()
    assert mass.line.text() == "75.5 kg"
    form._kind.setCurrentIndex(form._kind.findData("track"))
    form._kind.activated.emit(3)
    assert day.session.venue is not None
    assert day.session.venue.kind == "track"


def test_a_date_that_is_none_is_refused(day: Desk, qtbot: QtBot) -> None:
    form = DayForm(day)
    qtbot.addWidget(form)
    before = day.session
    with qtbot.waitSignal(day.document.edit_refused) as refused:
        form._date.committed.emit("yesterday")
    assert "yesterday" in refused.args[0]
    assert day.session is before
    form._date.committed.emit("1 June 2026")
    assert day.session.date is not None
    assert day.session.date.isoformat() == "2026-06-01"


def test_the_picked_setup_is_edited(day: Desk, qtbot: QtBot) -> None:
    form = SetupForm(day, RunEdits(day))
    qtbot.addWidget(form)
    form.show()
    assert not form.isEnabled()
    day.selection.pick_setup("s2")
    assert form.isEnabled()
    fields = fields_of(form)
    typed(fields["Costs the rider"], "4 W")
    QTest.keyClick(fields["Costs the rider"].line, Qt.Key.Key_Return)
    assert day.session.setup("s2").power_cost == 4.0
    typed(fields["Crr at 20 °C"], "0.0040")
    QTest.keyClick(fields["Crr at 20 °C"].line, Qt.Key.Key_Return)
    assert day.session.tyres[0].id == "25 mm clincher"
    assert day.session.tyres[0].crr == 0.004
    form._baseline.click()
    assert day.session.baseline is not None
    assert day.session.baseline.id == "s2"


def test_the_picked_run_tells_its_figures_and_can_be_trimmed(day: Desk, qtbot: QtBot) -> None:
    facts = RunFacts(day, RunEdits(day))
    qtbot.addWidget(facts)
    facts.show()
    day.selection.pick_run("4")
    assert facts._title.text() == "Run 4"
    assert facts._facts["power"].text() == "160\u00a0W"
    start = fields_of(facts)["Starts"]
    assert start.line.text() == "33:30"
    typed(start, "33:40")
    QTest.keyClick(start.line, Qt.Key.Key_Return)
    assert day.session.run("4").start == 2020.0


def test_details_follow_what_is_picked(day: Desk, qtbot: QtBot) -> None:
    panel = SidePanel(day, RunEdits(day))
    qtbot.addWidget(panel)
    panel.show()
    day.selection.pick_setup("s1")
    assert panel._stack.currentIndex() == 1
    day.selection.pick_run("4")
    assert panel._stack.currentIndex() == 0
    with qtbot.waitSignal(panel.exclude_requested) as asked:
        panel.facts._leave_out.click()
    assert asked.args[0] == ("4",)
