"""The cautions shown to users, short."""

from __future__ import annotations

from PySide6.QtCore import QCoreApplication


def _tr(text: str) -> str:
    return QCoreApplication.translate("Cautions", text)


def caution_texts() -> tuple[str, ...]:
    """Return the cautions, one sentence or two each."""
    return (
        _tr("Test on closed or quiet roads, obey traffic law and look where you are going: a low head is not a test condition worth a crash."),
        _tr("Change a position in small steps, and with a qualified fitter or clinician where there is pain or numbness."),
        _tr("A position that wins seconds may break the event's technical rules: check the organiser's current rules."),
        _tr("An estimate is not a guarantee."),
    )
