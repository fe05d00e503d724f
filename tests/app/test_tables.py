from __future__ import annotations

from typing import Any

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QWidget
from pytestqt.qtbot import QtBot

from ridercda.app.actions import all_actions
from ridercda.app.desk import Desk
from ridercda.app.letters import Badge
from ridercda.app.pages import PAGES
from ridercda.app.pages.drag import DragPage
from ridercda.app.pages.rides import RidesPage
from ridercda.app.pages.runs import RunsPage
from ridercda.app.palette import PaletteModel
from ridercda.app.run_edits import RunEdits
from ridercda.app.side.setup_list import SetupList, setup_lines
from ridercda.app.widgets.table import CHIP_ROLE, RAW_ROLE, Column, TableModel, TableView


def built(kind: Any, day: Desk, qtbot: QtBot) -> Any:
    page = kind(day, RunEdits(day))
    qtbot.addWidget(page)
    page.resize(1000, 600)
    page.show()
    page.refresh_now()
    return page


def test_the_runs_table(day: Desk, qtbot: QtBot, qtmodeltester: Any) -> None:
    page = built(RunsPage, day, qtbot)
    model = page._model
    qtmodeltester.check(model)
    qtmodeltester.check(page._table.model())
    assert model.rowCount() == 12
    assert model.index(3, 0).data() == "4 · Forearms level"
    assert model.index(3, 0).data(CHIP_ROLE) == Badge(2, "C", "Forearms level")
    headers = [model.headerData(c, Qt.Orientation.Horizontal) for c in range(model.columnCount())]
    power = headers.index("Power [W]")
    assert model.index(3, power).data() == "160"
    assert model.index(3, power).data(RAW_ROLE) == 160.0


def test_the_runs_table_follows_the_session_and_keeps_what_is_picked(day: Desk, qtbot: QtBot) -> None:
    page = built(RunsPage, day, qtbot)
    day.selection.pick_run("4")
    page.refresh_now()
    assert page._table.picked_keys() == ("4",)
    RunEdits(day).exclude(("4",), "A vehicle passed")
    page.refresh_now()
    row = next(row for row in page._model.rows if row.run.id == "4")
    assert row.run.excluded == "A vehicle passed"
    assert page._table.picked_keys() == ("4",)


def test_the_faults_table_offers_repairs(day: Desk, qtbot: QtBot, qtmodeltester: Any) -> None:
    day.selection.pick_ride("am")
    page = built(RidesPage, day, qtbot)
    model = page._faults.model
    qtmodeltester.check(model)
    qtmodeltester.check(page._model)
    assert model.rowCount() == 2
    repair = model.index(0, 2)
    assert model.flags(repair) & Qt.ItemFlag.ItemIsEditable
    assert not model.setData(repair, "no such repair")
    assert model.setData(repair, "leave")
    choice = day.session.ride("am").repairs[0]
    assert (choice.kind, choice.choice, choice.start) == ("power-dropout", "leave", 1210.0)
    day.document.undo_stack.undo()
    assert day.session.ride("am").repairs == ()


def test_the_table_of_influence(day: Desk, qtbot: QtBot, qtmodeltester: Any) -> None:
    page = built(DragPage, day, qtbot)
    qtmodeltester.check(page._influence)
    assert page._influence.rowCount() == 12
    assert page._influence.columnCount() == 4
    value = day.solving.estimate.runs[0].influence["s1"]  # type: ignore[union-attr]
    assert page._influence.index(0, 2).data(RAW_ROLE) == value


def test_the_list_of_setups(day: Desk, qtbot: QtBot, qtmodeltester: Any) -> None:
    view = SetupList(day)
    qtbot.addWidget(view)
    qtmodeltester.check(view.model())
    lines = setup_lines(day.session, day.badges(), day.solving.estimate, stale=False)
    assert [line.runs for line in lines] == [4, 4, 4]
    assert lines[0].is_baseline
    assert lines[0].difference == ""
    assert lines[2].difference.startswith("−0.01")
    day.selection.pick_setup("s1")
    assert view.currentIndex().row() == 1
    view.setCurrentIndex(view.model().index(2, 0))
    assert day.selection.setup == "s2"


def test_setups_without_figures_say_so(day: Desk) -> None:
    lines = setup_lines(day.session, day.badges(), None, stale=True)
    assert [line.cda for line in lines] == ["", "", ""]
    assert [line.short for line in lines] == ["–", "–", "–"]


def test_the_command_palette(qapp: object, qtmodeltester: Any) -> None:
    model = PaletteModel(all_actions(tuple((spec.id, spec.title()) for spec in PAGES)))
    qtmodeltester.check(model)
    everything = model.rowCount()
    model.narrow("merge")
    assert model.rowCount() == 1
    model.narrow("zz no such thing")
    assert model.rowCount() == 0
    model.narrow("")
    assert model.rowCount() == everything


@pytest.fixture
def plain_table(qtbot: QtBot, day: Desk) -> tuple[TableModel[tuple[str, float | None]], TableView]:
    name: Column[tuple[str, float | None]] = Column("Name", lambda row: row[0])
    value: Column[tuple[str, float | None]] = Column(
        "Value [W]", lambda row: "–" if row[1] is None else f"{row[1]:.0f}", raw=lambda row: row[1]
    )
    model = TableModel((name, value), key=lambda row: row[0])
    view = TableView(day.theme, model)
    qtbot.addWidget(view)
    model.set_rows((("b", 20.0), ("a", 100.0), ("c", None)))
    return model, view


def test_sorting_goes_by_value_and_nothing_comes_last(plain_table: Any, qtmodeltester: Any) -> None:
    model, view = plain_table
    qtmodeltester.check(model)
    for order, names in ((Qt.SortOrder.AscendingOrder, "bac"), (Qt.SortOrder.DescendingOrder, "abc")):
        view.sortByColumn(1, order)
        assert "".join(view.model().index(row, 0).data() for row in range(3)) == names


def test_a_table_copies_as_text(plain_table: Any) -> None:
    _, view = plain_table
    assert view.as_text() == "Name\tValue [W]\nb\t20\na\t100\nc\t–"
    view.show_keys(("a",))
    assert view.as_text() == "Name\tValue [W]\na\t100"


def test_an_empty_table_says_why(plain_table: Any, qtbot: QtBot) -> None:
    model, view = plain_table
    model.set_rows(())
    view.set_empty_text("Nothing here")
    with qtbot.waitExposed(view):
        view.show()
    assert isinstance(view, QWidget)
    assert view.model().rowCount() == 0
