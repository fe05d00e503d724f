"""English plurals: ``%n run(s)`` reads "1 run" or "12 runs"; another language brings its own translator."""

from __future__ import annotations

import re

from PySide6.QtCore import QTranslator

_OPTIONAL = re.compile(r"\(s\)")


class EnglishPlurals(QTranslator):
    """Chooses between singular and plural where a text counts something."""

    def translate(self, context: str, text: str, note: str | None = None, n: int = -1) -> str:
        """Return the text with its optional endings settled."""
        return text if n < 0 else _OPTIONAL.sub("" if n == 1 else "s", text)

    def isEmpty(self) -> bool:
        """Say that there is something in it."""
        return False
