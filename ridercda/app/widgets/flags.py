"""Flags of a widget that the style sheet knows, such as quiet or bad."""

from __future__ import annotations

from PySide6.QtWidgets import QWidget


def set_flag(widget: QWidget, name: str, *, on: bool) -> None:
    """Set a flag and have the style sheet looked up anew, where it changes."""
    if bool(widget.property(name)) != on:
        font = widget.font()
        widget.setProperty(name, on)
        widget.style().unpolish(widget)
        widget.style().polish(widget)
        widget.setFont(font)  # looking up the sheet drops it
