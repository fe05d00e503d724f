"""Units as the user has chosen them, for showing: metric or imperial, per quantity (no Qt but the signal)."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

from PySide6.QtCore import QObject, Signal


@dataclass(frozen=True, slots=True)
class DisplayUnit:
    """A unit to show: shown = SI * scale + offset."""

    symbol: str
    scale: float = 1.0
    offset: float = 0.0
    decimals: int = 1
    typed: str = ""  # as `ridercda.units` reads it, where that is not the symbol

    def shown(self, value: float) -> float:
        """Return an SI value in this unit."""
        return value * self.scale + self.offset

    def si(self, shown: float) -> float:
        """Return a value in this unit in SI."""
        return (shown - self.offset) / self.scale


METRIC, IMPERIAL = "metric", "imperial"
_DEG = 180 / math.pi

# What can be chosen for each quantity: the metric default first, then the imperial default, then others.
DISPLAY: Mapping[str, tuple[DisplayUnit, ...]] = MappingProxyType(
    {
        "speed": (
            DisplayUnit("km/h", 3.6),
            DisplayUnit("mph", 1 / 0.44704, typed="mi/h"),
            DisplayUnit("m/s", decimals=2),
        ),
        "wind": (DisplayUnit("m/s"), DisplayUnit("mph", 1 / 0.44704, typed="mi/h"), DisplayUnit("km/h", 3.6)),
        "distance": (DisplayUnit("km", 1e-3, decimals=2), DisplayUnit("mi", 1 / 1609.344, decimals=2)),
        "length": (DisplayUnit("m", decimals=0), DisplayUnit("ft", 1 / 0.3048, decimals=0)),
        "short_length": (DisplayUnit("m", decimals=3), DisplayUnit("in", 1 / 0.0254, decimals=2)),
        "mass": (DisplayUnit("kg"), DisplayUnit("lb", 1 / 0.45359237)),
        "temperature": (
            DisplayUnit("°C", offset=-273.15, typed="degC"),
            DisplayUnit("°F", 1.8, -459.67, typed="degF"),
        ),
        "pressure": (
            DisplayUnit("hPa", 0.01),
            DisplayUnit("inHg", 1 / 3386.389, decimals=2),
            DisplayUnit("mbar", 0.01),
        ),
        "tyre_pressure": (
            DisplayUnit("bar", 1e-5, decimals=2),
            DisplayUnit("psi", 1 / 6894.757293168),
        ),
        "power": (DisplayUnit("W", decimals=0),),
        "energy": (DisplayUnit("kJ", 1e-3, decimals=1),),
        "angle": (DisplayUnit("°", _DEG, decimals=0, typed="deg"),),
        "area": (DisplayUnit("m²", decimals=4, typed="m^2"),),
        "density": (DisplayUnit("kg/m³", decimals=3, typed="kg/m^3"),),
        "inertia": (DisplayUnit("kg m²", decimals=3, typed="kg*m^2"),),
        "fraction": (DisplayUnit("%", 100.0, decimals=1),),
        "ratio": (DisplayUnit("", decimals=4),),
        "time": (DisplayUnit("s", decimals=0),),
        "altitude": (DisplayUnit("m", decimals=0), DisplayUnit("ft", 1 / 0.3048, decimals=0)),
    }
)


class UnitChoice(QObject):
    """Which unit each quantity is shown in."""

    changed = Signal()

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._chosen: dict[str, int] = {}

    def unit(self, quantity: str) -> DisplayUnit:
        """Return the unit a quantity is shown in."""
        return DISPLAY[quantity][self._chosen.get(quantity, 0)]

    def choose(self, quantity: str, symbol: str) -> None:
        """Show one quantity in another unit."""
        symbols = [unit.symbol for unit in DISPLAY[quantity]]
        if symbol in symbols and symbols.index(symbol) != self._chosen.get(quantity, 0):
            self._chosen[quantity] = symbols.index(symbol)
            self.changed.emit()

    def choose_system(self, system: str) -> None:
        """Show every quantity in metric or in imperial units."""
        column = 1 if system == IMPERIAL else 0
        chosen = {quantity: min(column, len(units) - 1) for quantity, units in DISPLAY.items()}
        if chosen != self._chosen:
            self._chosen = chosen
            self.changed.emit()

    def chosen(self) -> dict[str, str]:
        """Return the symbol chosen for each quantity, for the settings."""
        return {quantity: self.unit(quantity).symbol for quantity in DISPLAY}

    def number(self, value: float | None, quantity: str, decimals: int | None = None) -> str:
        """Return an SI value as a number in the chosen unit, without the unit; a dash where there is none."""
        if value is None or not math.isfinite(value):
            return "–"
        unit = self.unit(quantity)
        return plain(unit.shown(value), unit.decimals if decimals is None else decimals)

    def text(self, value: float | None, quantity: str, decimals: int | None = None) -> str:
        """Return an SI value with its unit, a no-break space between; a dash where there is none."""
        number = self.number(value, quantity, decimals)
        symbol = self.unit(quantity).symbol
        if number == "–" or not symbol:
            return number
        return f"{number}{symbol}" if symbol == "°" else f"{number}\u00a0{symbol}"


def plain(value: float, decimals: int, *, signed: bool = False) -> str:
    """Return a number with a true minus sign, thousands set off by a thin space, and no negative zero."""
    if not math.isfinite(value):
        return "–"
    text = f"{abs(value):,.{decimals}f}".replace(",", "\u2009")
    is_zero = not any(c in "123456789" for c in text)
    sign = "" if is_zero else "\u2212" if value < 0 else "+" if signed else ""
    return sign + text
