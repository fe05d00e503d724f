"""Buttons that look like words: they stand in line with the text above them."""

from __future__ import annotations

from PySide6.QtWidgets import QHBoxLayout, QPushButton

from ridercda.app.theme import Theme


def link(words: str) -> QPushButton:
    """Return a button that is words in the accent colour."""
    button = QPushButton(words)
    button.setProperty("flush", True)
    return button


def link_line(theme: Theme, *buttons: QPushButton) -> QHBoxLayout:
    """Return a line of such buttons."""
    line = QHBoxLayout()
    line.setContentsMargins(0, 0, 0, 0)
    line.setSpacing(theme.px(20))
    for button in buttons:
        button.setFont(theme.font())
        line.addWidget(button)
    line.addStretch(1)
    return line
