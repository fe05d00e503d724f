from __future__ import annotations

from importlib.resources import files

import pytest
from PySide6.QtCore import QTranslator
from PySide6.QtGui import QFontInfo, QFontMetricsF
from PySide6.QtWidgets import QApplication
from pytestqt.qtbot import QtBot

from ridercda.app.application import Dress
from ridercda.app.plurals import EnglishPlurals
from ridercda.app.quantities import UnitChoice
from ridercda.app.settings import Settings
from ridercda.app.stylesheet import stylesheet
from ridercda.app.theme import FAMILY, FONT_FILES, ZOOMS, Mode, Theme, Type
from ridercda.units import Kind, UnitSystem


def test_the_family_ships_with_its_licence(qapp: QApplication) -> None:
    folder = files("ridercda.app") / "fonts"
    for name in FONT_FILES:
        assert (folder / name).is_file()
    licence = (folder / "SourceSansPro-OFL.txt").read_text(encoding="utf-8")
    assert "SIL OPEN FONT LICENSE" in licence.upper()
    assert QFontInfo(Theme().font()).family() == FAMILY


@pytest.mark.parametrize("kind", Type)
@pytest.mark.parametrize("strong", [False, True])
def test_figures_have_one_width(qapp: QApplication, kind: Type, strong: bool) -> None:
    metrics = QFontMetricsF(Theme().font(kind, strong=strong))
    widths = {metrics.horizontalAdvance(digit * 4) for digit in "0123456789"}
    assert len(widths) == 1


def test_the_scale_has_four_sizes_in_order(qapp: QApplication) -> None:
    theme = Theme()
    sizes = [theme.font(kind).pixelSize() for kind in (Type.SENTENCE, Type.PAGE, Type.TEXT, Type.AXIS)]
    assert sizes == sorted(set(sizes), reverse=True)
    theme.set_zoom(1.5)
    assert theme.font(Type.TEXT).pixelSize() == pytest.approx(1.5 * sizes[2], abs=1)
    assert theme.px(8) == 12
    theme.set_zoom(7.0)
    assert theme.zoom == ZOOMS[-1]


def test_a_change_is_told_once_after_the_dressing(qapp: QApplication, qtbot: QtBot) -> None:
    theme = Theme(Mode.LIGHT)
    order: list[str] = []
    theme.changed.connect(lambda: order.append("changed"))
    theme.dressing.connect(lambda: order.append("dressing"))
    theme.set_mode(Mode.DARK)
    assert order == ["dressing", "changed"]
    theme.set_mode(Mode.DARK)
    assert len(order) == 2
    assert theme.roles.paper != Theme(Mode.LIGHT).roles.paper


def test_the_style_sheet_is_complete_and_understood(qapp: QApplication, qtbot: QtBot) -> None:
    before = qapp.styleSheet()
    for mode in (Mode.LIGHT, Mode.DARK):
        sheet = stylesheet(Theme(mode), "arrow.png")
        assert "$" not in sheet
        assert sheet.count("{") == sheet.count("}")
    with qtbot.captureExceptions():
        dress = Dress(qapp, Theme(Mode.DARK))
    assert "#14181d" in qapp.styleSheet()
    dress.deleteLater()
    qapp.setStyleSheet(before)


def test_english_counts_in_words(qapp: QApplication) -> None:
    plurals = EnglishPlurals()
    assert isinstance(plurals, QTranslator)
    assert plurals.translate("x", "%n run(s)", None, 1) == "%n run"
    assert plurals.translate("x", "%n run(s)", None, 0) == "%n runs"
    assert plurals.translate("x", "f(s) stays", None, -1) == "f(s) stays"


def test_units_are_remembered(settings: Settings) -> None:
    units = UnitChoice()
    units.choose_system(UnitSystem.IMPERIAL)
    units.choose_for(Kind.MASS, UnitSystem.METRIC)
    settings.keep_units(units)
    again = UnitChoice()
    settings.restore_units(again)
    assert again.symbol(Kind.SPEED) == "mph"
    assert again.symbol(Kind.MASS) == "kg"


def test_settings_that_cannot_be_read_count_as_not_set(settings: Settings) -> None:
    settings.set_text("recent", "{broken")
    settings.set_text("theme/zoom", "very large")
    settings.set_text("theme/mode", "purple")
    settings.set_text("units/system", "cubits")
    theme, units = Theme(), UnitChoice()
    settings.restore_theme(theme)
    settings.restore_units(units)
    assert settings.recent == ()
    assert theme.zoom == 1.0
    assert units.symbol(Kind.MASS) == "kg"
