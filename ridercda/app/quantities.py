"""Units as the user has chosen them, for showing: metric or imperial, per quantity."""

from __future__ import annotations

import math
from dataclasses import replace
from types import MappingProxyType

from PySide6.QtCore import QObject, Signal

from ridercda.units import (
    DisplayUnits,
    Kind,
    UnitSystem,
    display_symbol,
    format_number,
    format_quantity,
    kind_units,
    to_display,
)

_NEVER_SHOWN = (Kind.ACCELERATION, Kind.FORCE, Kind.TEMPERATURE_DIFFERENCE)
CHOOSABLE = tuple(
    kind
    for kind in Kind
    if kind not in _NEVER_SHOWN and kind_units(kind).metric[0] != kind_units(kind).imperial[0]
)
"""The quantities for which the two systems differ."""


class UnitChoice(QObject):
    """Which system each quantity is shown in."""

    changed = Signal()

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._units = DisplayUnits()

    @property
    def units(self) -> DisplayUnits:
        """The choice."""
        return self._units

    def choose(self, units: DisplayUnits) -> None:
        """Take another choice."""
        if units != self._units:
            self._units = units
            self.changed.emit()

    def choose_system(self, system: UnitSystem) -> None:
        """Show every quantity in one system."""
        self.choose(DisplayUnits(system))

    def choose_for(self, kind: Kind, system: UnitSystem) -> None:
        """Show one quantity in another system than the rest."""
        others = {each: choice for each, choice in self._units.by_kind.items() if each is not kind}
        if system is not self._units.system:
            others[kind] = system
        self.choose(replace(self._units, by_kind=MappingProxyType(others)))

    def symbol(self, kind: Kind) -> str:
        """Return the unit a quantity is shown in; empty for a plain number."""
        symbol = display_symbol(kind, self._units.of(kind))
        return "" if symbol == "1" else symbol

    def scale(self, kind: Kind) -> float:
        """Return how many shown units one SI unit is (for differences: without the offset of temperature)."""
        low, high = to_display([0.0, 1.0], kind, self._units.of(kind))
        return float(high - low)

    def shown(self, value: float, kind: Kind) -> float:
        """Return an SI value in the unit shown."""
        return float(to_display(value, kind, self._units.of(kind)))

    def text(self, value: float | None, kind: Kind, digits: int | None = None) -> str:
        """Return an SI value with its unit; a dash where there is none."""
        return format_quantity(value, kind, self._units.of(kind), digits=digits).replace(" ", "\u00a0")

    def number(self, value: float | None, kind: Kind, digits: int | None = None) -> str:
        """Return an SI value as a number without its unit; a dash where there is none."""
        if value is None or not math.isfinite(value):
            return "–"
        units = kind_units(kind)
        usual = (units.imperial if self._units.of(kind) is UnitSystem.IMPERIAL else units.metric)[1]
        return format_number(self.shown(value, kind), usual if digits is None else digits)


def plain(value: float, decimals: int, *, signed: bool = False) -> str:
    """Return a number with a true minus sign and thousands set off by a thin space."""
    sign = format_number(value, decimals, plus="+" if signed else "")[:1]
    sign = sign if sign in "+−" else ""
    return sign + f"{abs(value):,.{decimals}f}".replace(",", "\u2009") if math.isfinite(value) else "–"
