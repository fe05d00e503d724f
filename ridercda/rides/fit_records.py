"""Columns out of FIT record messages, with as little done per record as there can be.

Which fields of a message are wanted, and where in it they stand, is worked out once per message definition;
after that a record costs one list of values. The decoder takes most of the time, as
tests/benchmarks/bench_reading.py shows.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import TYPE_CHECKING

import numpy as np

from ridercda.errors import QuantityError, ReaderError
from ridercda.rides.format import CHANNEL_KINDS, plain_name
from ridercda.rides.ride import FloatArray
from ridercda.units import conversion

if TYPE_CHECKING:
    from fitdecode import FitDataMessage
    from fitdecode.types import FieldData

TIMESTAMP = "timestamp"
DEVELOPER = "developer:"

NATIVE_CHANNELS: Mapping[str, tuple[str, ...]] = MappingProxyType(
    {
        "power": ("power",),
        "speed": ("enhanced_speed", "speed"),
        "distance": ("distance",),
        "latitude": ("position_lat",),
        "longitude": ("position_long",),
        "altitude": ("enhanced_altitude", "altitude"),
        "cadence": ("cadence256", "cadence"),
        "heart_rate": ("heart_rate",),
        "temperature": ("temperature",),
    }
)
"""Fields of the FIT profile for each channel; where the first has no value the next is taken."""

PEDAL_FIELDS = (
    "left_right_balance",
    "left_torque_effectiveness",
    "right_torque_effectiveness",
    "left_pedal_smoothness",
    "right_pedal_smoothness",
)
"""Fields that tell on which side power was measured."""

_NATIVE_FIELDS = frozenset(
    (
        TIMESTAMP,
        "fractional_cadence",
        *PEDAL_FIELDS,
        *(name for names in NATIVE_CHANNELS.values() for name in names),
    )
)
_DEVELOPER_NAMES: Mapping[str, str] = MappingProxyType(
    {
        **{name: name for name in CHANNEL_KINDS},
        "airspeed": "air_speed",
        "dynamicpressure": "dynamic_pressure",
        "yaw_angle": "yaw",
        "heartrate": "heart_rate",
    }
)
# The decoder gives names to two values of the balance that are flags, not names, by the profile's own list.
_NAMED_BALANCES: Mapping[str, float] = MappingProxyType({"mask": 0x7F, "right": 0x80})
_NATIVE_UNITS: Mapping[str, tuple[float, float]] = MappingProxyType(
    {
        "semicircles": (np.pi / 2**31, 0.0),
        "rpm": (1.0 / 60.0, 0.0),
        "bpm": (1.0 / 60.0, 0.0),
        "C": (1.0, 273.15),
    }
)
"""Scale and offset to SI for the units of the FIT profile that are not SI."""


@dataclass(frozen=True, slots=True)
class FieldSource:
    """A column's unit as the file has it, and the profile field that a developer field stands for."""

    unit: str
    native_number: int | None = None


class _Plan:
    """Where the wanted fields stand in the messages of one definition, and the values gathered so far."""

    __slots__ = ("definition", "names", "order", "places", "rows")

    def __init__(
        self, message: FitDataMessage, wanted: frozenset[str], sources: dict[str, FieldSource]
    ) -> None:
        self.definition = message.def_mesg  # held, so that its id stays its own
        self.names: list[str] = []
        self.places: list[int] = []
        self.rows: list[list[object]] = []
        self.order: list[int] = []
        for place, field in enumerate(message.fields):
            name = _column_name(field)
            if name.startswith(DEVELOPER) or name in wanted:
                self.names.append(name)
                self.places.append(place)
                sources.setdefault(name, _source(field))

    def columns(self) -> Iterable[tuple[str, FloatArray]]:
        """Yield name and values; None and whatever is not a number are NaN."""
        try:
            table = np.array(self.rows, dtype=np.float64).reshape(len(self.rows), len(self.names))
        except (TypeError, ValueError, OverflowError):
            table = np.array([[_number(value) for value in row] for row in self.rows], dtype=np.float64)
            table = table.reshape(len(self.rows), len(self.names))
        return zip(self.names, table.T, strict=True)


class FitRecords:
    """Gathers record messages of one FIT file."""

    def __init__(self, asked: Iterable[str] = ()) -> None:
        self._wanted = _NATIVE_FIELDS | frozenset(asked)
        self._plans: dict[tuple[int, int], _Plan] = {}
        self._count = 0
        self.sources: dict[str, FieldSource] = {}

    def __len__(self) -> int:
        """Return the number of records."""
        return self._count

    def take(self, message: FitDataMessage) -> None:
        """Add one record."""
        fields = message.fields
        # A compressed timestamp adds a field to the messages of the same definition.
        key = (id(message.def_mesg), len(fields))
        plan = self._plans.get(key)
        if plan is None:
            plan = self._plans[key] = _Plan(message, self._wanted, self.sources)
        plan.rows.append([fields[place].value for place in plan.places])
        plan.order.append(self._count)
        self._count += 1

    def columns(self) -> dict[str, FloatArray]:
        """Return a column per field, shape (n,), in the file's own units; NaN where a record lacks it."""
        table: dict[str, FloatArray] = {}
        for plan in self._plans.values():
            for name, values in plan.columns():
                column = table.setdefault(name, np.full(self._count, np.nan))
                # A field that stands twice in a message (expanded from another) keeps the value there is.
                known = np.isfinite(values)
                column[np.asarray(plan.order)[known]] = values[known]
        return table


def channels_of(
    columns: Mapping[str, FloatArray], sources: Mapping[str, FieldSource], names: Mapping[str, str]
) -> tuple[dict[str, FloatArray], dict[str, str]]:
    """Return the channels of a ride and notes on where they came from.

    Parameters
    ----------
    columns : mapping of str to ndarray, shape (n,)
        From `FitRecords.columns`.
    sources : mapping of str to FieldSource
        Of the same columns.
    names : mapping of str to str
        Fields the user has named for a channel.

    Raises
    ------
    ReaderError
        If a field the user named is not in the file, or its unit does not fit the channel.
    """
    channels: dict[str, FloatArray] = {}
    notes: dict[str, str] = {}
    for channel in CHANNEL_KINDS:
        if channel in names:
            field = _field_named(names[channel], channel, columns)
            channels[channel] = _in_si(columns[field], sources[field].unit, channel, field)
            notes[channel] = f"from the field {names[channel]!r}, as asked"
            continue
        values = _native(channel, columns, sources)
        if values is None:
            developer = _developer_field(channel, columns, sources)
            if developer is None:
                continue
            try:
                values = _in_si(columns[developer], sources[developer].unit, channel, developer)
            except ReaderError:
                continue
            notes[channel] = f"from the developer field {developer.removeprefix(DEVELOPER)!r}"
        channels[channel] = values
    others = [
        name.removeprefix(DEVELOPER)
        for name in columns
        if name.startswith(DEVELOPER) and "power" in name.lower()
    ]
    if "power" in channels and "power" not in notes and others:
        notes["power"] = (
            f"there is other power too: {', '.join(sorted(others))}; name one as the power channel to use it"
        )
    return channels, notes


def _column_name(field: FieldData) -> str:
    name = field.name
    is_developer = field.field_def is not None and field.field_def.is_dev
    return f"{DEVELOPER}{name}" if is_developer else str(name)


def _source(field: FieldData) -> FieldSource:
    number = getattr(field.field, "native_field_num", None)
    return FieldSource(
        str(field.units) if isinstance(field.units, str) else "", number if isinstance(number, int) else None
    )


def _number(value: object) -> float:
    if isinstance(value, str):
        return _NAMED_BALANCES.get(value, np.nan)
    return float(value) if isinstance(value, int | float) and abs(value) < 1e300 else np.nan


def _native(
    channel: str, columns: Mapping[str, FloatArray], sources: Mapping[str, FieldSource]
) -> FloatArray | None:
    present = [name for name in NATIVE_CHANNELS.get(channel, ()) if name in columns]
    present = [name for name in present if np.isfinite(columns[name]).any()]
    if not present:
        return None
    values = columns[present[0]].copy()
    for name in present[1:]:
        values = np.where(np.isnan(values), columns[name], values)
    if channel == "cadence" and present[0] == "cadence" and "fractional_cadence" in columns:
        values = values + np.nan_to_num(columns["fractional_cadence"])
    scale, offset = _NATIVE_UNITS.get(sources[present[0]].unit, (1.0, 0.0))
    return np.asarray(values * scale + offset)


def _developer_field(
    channel: str, columns: Mapping[str, FloatArray], sources: Mapping[str, FieldSource]
) -> str | None:
    numbers = {
        7: "power",
        6: "speed",
        73: "speed",
        5: "distance",
        3: "heart_rate",
        4: "cadence",
        13: "temperature",
    }
    numbers |= {2: "altitude", 78: "altitude"}
    candidates = [name for name in columns if name.startswith(DEVELOPER) and np.isfinite(columns[name]).any()]
    for name in candidates:
        number = sources[name].native_number
        if number is not None and numbers.get(number) == channel:
            return name
    for name in candidates:
        if _DEVELOPER_NAMES.get(plain_name(name.removeprefix(DEVELOPER))) == channel:
            return name
    return None


def _field_named(wanted: str, channel: str, columns: Mapping[str, FloatArray]) -> str:
    known = [name for name in columns if name != TIMESTAMP]
    for same in (
        lambda name: name == wanted,
        lambda name: name == DEVELOPER + wanted,
        lambda name: plain_name(name.removeprefix(DEVELOPER)) == plain_name(wanted),
    ):
        found = next(filter(same, known), None)
        if found is not None:
            return found
    raise ReaderError(
        f"there is no field {wanted!r} to take as {channel}; its records hold {', '.join(sorted(known))}"
    )


def _in_si(values: FloatArray, unit: str, channel: str, field: str) -> FloatArray:
    if unit in _NATIVE_UNITS:
        scale, offset = _NATIVE_UNITS[unit]
        return np.asarray(values * scale + offset)
    if not unit:
        return values.copy()
    try:
        return conversion(unit, CHANNEL_KINDS[channel]).to_si(values)
    except QuantityError as error:
        raise ReaderError(
            f"the field {field.removeprefix(DEVELOPER)!r} cannot be {channel}: {error}"
        ) from error
