"""Quantities at the border: text and display units on one side, SI floats and radians on the other."""

from ridercda.units.conversion import Conversion, conversion, from_si, to_si
from ridercda.units.display import (
    TRUE_MINUS,
    DisplayUnits,
    UnitSystem,
    digits_for,
    display_symbol,
    format_interval,
    format_number,
    format_quantity,
    from_display,
    to_display,
)
from ridercda.units.durations import format_duration, parse_time_of_day
from ridercda.units.kinds import Kind, Unit, find_unit, kind_units
from ridercda.units.quantity import parse_duration, parse_either, parse_quantity, quantity_text, unit_symbol

__all__ = [
    "TRUE_MINUS",
    "Conversion",
    "DisplayUnits",
    "Kind",
    "Unit",
    "UnitSystem",
    "conversion",
    "digits_for",
    "display_symbol",
    "find_unit",
    "format_duration",
    "format_interval",
    "format_number",
    "format_quantity",
    "from_display",
    "from_si",
    "kind_units",
    "parse_duration",
    "parse_either",
    "parse_quantity",
    "parse_time_of_day",
    "quantity_text",
    "to_display",
    "to_si",
    "unit_symbol",
]
