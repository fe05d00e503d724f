from __future__ import annotations

from pathlib import Path

import pytest
from invented import opened
from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication, QComboBox, QDialog, QLabel, QLineEdit
from pytestqt.qtbot import QtBot

from ridercda.app.desk import Desk
from ridercda.app.dialogs import ColumnsDialog, UnitsDialog
from ridercda.app.window import MainWindow
from ridercda.units import Kind


@pytest.fixture
def window(desk: Desk, tmp_path: Path, qtbot: QtBot) -> MainWindow:
    made = MainWindow(desk, tmp_path / "unsaved")
    qtbot.addWidget(made, before_close_func=lambda each: each.desk.document.undo_stack.setClean())
    opened(desk)
    made.show()
    return made


@pytest.mark.parametrize(
    ("action", "words"),
    [
        ("help.first_steps", "By keyboard alone"),
        ("help.keys", "Ctrl+Shift+A"),
        ("help.cautions", "a low head is not a test condition worth a crash"),
        ("help.about", "SIL Open Font License"),
        ("units.each", "Mass"),
    ],
)
def test_what_the_menu_explains_is_shown(window: MainWindow, action: str, words: str) -> None:
    seen: list[str] = []

    def look() -> None:
        dialog = QApplication.activeModalWidget()
        assert dialog is not None
        seen.extend(label.text() for label in dialog.findChildren(QLabel))
        dialog.close()

    QTimer.singleShot(0, look)
    window.menus.made(action).trigger()
    assert any(words in text for text in seen), seen


def test_units_are_chosen_one_by_one(window: MainWindow, qtbot: QtBot) -> None:
    dialog = UnitsDialog(window, window.desk)
    qtbot.addWidget(dialog)
    speed = next(box for box in dialog.findChildren(QComboBox) if box.accessibleName() == "Speed")
    speed.setCurrentIndex(1)
    speed.activated.emit(1)
    assert window.desk.units.text(10.0, Kind.SPEED) == "22.4\u00a0mph"
    assert window.desk.units.symbol(Kind.MASS) == "kg"


def test_columns_of_a_text_file_are_named_undoably(window: MainWindow, qtbot: QtBot) -> None:
    dialog = ColumnsDialog(window, window.desk, "am")
    qtbot.addWidget(dialog)
    field = next(line for line in dialog.findChildren(QLineEdit) if line.accessibleName() == "Power")
    field.setText("Watts [W]")
    dialog.accept()
    assert dialog.result() == QDialog.DialogCode.Accepted
    assert dict(window.desk.session.ride("am").columns) == {"power": "Watts [W]"}
    window.desk.document.undo_stack.undo()
    assert dict(window.desk.session.ride("am").columns) == {}
