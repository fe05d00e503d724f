"""What is remembered between starts, where the platform keeps such things."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path
from types import MappingProxyType

from PySide6.QtCore import QByteArray, QObject, QSettings

from ridercda.app.quantities import CHOOSABLE, UnitChoice
from ridercda.app.theme import Mode, Theme
from ridercda.units import DisplayUnits, UnitSystem

ORGANISATION = "RiderCdA"
APPLICATION = "RiderCdA"
RECENT_LIMIT = 8


class Settings(QObject):
    """Theme, size, units, window state and recent sessions; values that cannot be read count as not set."""

    def __init__(self, store: QSettings | None = None, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._store = store or QSettings(
            QSettings.Format.IniFormat, QSettings.Scope.UserScope, ORGANISATION, APPLICATION
        )

    def text(self, key: str, default: str = "") -> str:
        """Return a remembered text."""
        value = self._store.value(key, default)
        return value if isinstance(value, str) else default

    def set_text(self, key: str, value: str) -> None:
        """Remember a text."""
        self._store.setValue(key, value)

    def state(self, key: str) -> QByteArray:
        """Return remembered window geometry; empty where there is none."""
        value = self._store.value(key)
        return value if isinstance(value, QByteArray) else QByteArray()

    def set_state(self, key: str, value: QByteArray) -> None:
        """Remember window geometry."""
        self._store.setValue(key, value)

    @property
    def recent(self) -> tuple[Path, ...]:
        """Folders of recent sessions that are still there, the latest first."""
        return tuple(path for path in map(Path, self._texts("recent")) if path.exists())

    def add_recent(self, folder: Path) -> None:
        """Put a session at the top of the recent ones."""
        folders = [str(folder), *(each for each in self._texts("recent") if each != str(folder))]
        self._store.setValue("recent", json.dumps(folders[:RECENT_LIMIT]))

    def forget_recent(self) -> None:
        """Forget the recent sessions."""
        self._store.remove("recent")

    def _texts(self, key: str) -> list[str]:
        try:
            values = json.loads(self.text(key, "[]"))
        except json.JSONDecodeError:
            return []
        return [value for value in values if isinstance(value, str)] if isinstance(values, list) else []

    def restore_theme(self, theme: Theme) -> None:
        """Set the theme as remembered."""
        if (mode := self.text("theme/mode")) in tuple(Mode):
            theme.set_mode(Mode(mode))
        try:
            theme.set_zoom(float(self.text("theme/zoom", "1")))
        except ValueError:
            theme.set_zoom(1.0)

    def keep_theme(self, theme: Theme) -> None:
        """Remember the theme."""
        self.set_text("theme/mode", theme.mode.value)
        self.set_text("theme/zoom", f"{theme.zoom:g}")

    def restore_units(self, units: UnitChoice) -> None:
        """Set the units as remembered."""
        system = self.text("units/system")
        chosen = DisplayUnits(UnitSystem(system) if system in tuple(UnitSystem) else UnitSystem.METRIC)
        kept = {kind: self.text(f"units/{kind.name}") for kind in CHOOSABLE}
        by_kind = {kind: UnitSystem(word) for kind, word in kept.items() if word in tuple(UnitSystem)}
        units.choose(replace(chosen, by_kind=MappingProxyType(by_kind)))

    def keep_units(self, units: UnitChoice) -> None:
        """Remember the units."""
        self.set_text("units/system", units.units.system.value)
        for kind in CHOOSABLE:
            choice = units.units.by_kind.get(kind)
            self.set_text(f"units/{kind.name}", choice.value if choice else "")
