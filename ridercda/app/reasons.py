"""The reasons for which a run is left out: the usual ones are one click, any other can be written."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import QCoreApplication
from PySide6.QtWidgets import QInputDialog, QMenu, QWidget


def _tr(text: str) -> str:
    return QCoreApplication.translate("Reasons", text)


def usual_reasons() -> tuple[str, ...]:
    """Return the usual reasons."""
    return (
        _tr("A vehicle passed"),
        _tr("Braked or stopped"),
        _tr("Did not hold the position"),
        _tr("Rode another line"),
        _tr("Equipment trouble"),
        _tr("Wind shifted"),
    )


def reason_menu(parent: QWidget, told: Callable[[str], None]) -> QMenu:
    """Return a menu of reasons; `told` hears the one chosen."""
    menu = QMenu(parent)
    for reason in usual_reasons():
        menu.addAction(reason, lambda words=reason: told(words))
    menu.addSeparator()
    menu.addAction(_tr("Another reason…"), lambda: _ask(parent, told))
    return menu


def _ask(parent: QWidget, told: Callable[[str], None]) -> None:
    words, taken = QInputDialog.getText(parent, _tr("Leave out"), _tr("Why is this run left out?"))
    if taken and words.strip():
        told(words.strip())
