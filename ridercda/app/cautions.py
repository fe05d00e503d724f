"""The cautions of the report, in the user's language."""

from __future__ import annotations

from PySide6.QtCore import QCoreApplication

from ridercda.report.cautions import CAUTIONS


def caution_texts() -> tuple[str, ...]:
    """Return the cautions, a sentence or two each."""
    return tuple(QCoreApplication.translate("Cautions", text) for text in CAUTIONS)
