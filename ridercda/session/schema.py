"""What a table of session.toml is made of: keys, and the fields of the document they stand for."""

from __future__ import annotations

import dataclasses
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Protocol

from ridercda.errors import QuantityError
from ridercda.session.forms import Form, Quantity, Where
from ridercda.session.toml_patch import TomlTable, TomlValue
from ridercda.units import Kind, parse_either, unit_symbol


class Entry(Protocol):
    """Keys of a table that belong together, mostly one."""

    @property
    def names(self) -> tuple[str, ...]:
        """The keys."""

    @property
    def fields(self) -> tuple[str, ...]:
        """The fields of the document that they give."""

    def read(self, table: TomlTable, where: Where) -> Mapping[str, object]:
        """Return the fields that the table gives; raises SessionError."""

    def write(self, part: object, hints: TomlTable) -> Mapping[str, TomlValue | None]:
        """Return for each key its value, None where the key shall not be there.

        At least one of the fields is given.
        """


@dataclass(frozen=True, slots=True)
class Key:
    """One key that gives one field."""

    name: str
    form: Form
    field: str = ""  # "": called like the key

    @property
    def names(self) -> tuple[str, ...]:
        """The key."""
        return (self.name,)

    @property
    def fields(self) -> tuple[str, ...]:
        """The field."""
        return (self.field or self.name,)

    def read(self, table: TomlTable, where: Where) -> Mapping[str, object]:
        """Return the field, if the key is there."""
        if self.name not in table:
            return {}
        return {self.fields[0]: self.form.read(table[self.name], where.at(self.name))}

    def write(self, part: object, hints: TomlTable) -> Mapping[str, TomlValue | None]:
        """Return the key's value."""
        return {self.name: self.form.write(getattr(part, self.fields[0]), hints.get(self.name))}


@dataclass(frozen=True, slots=True)
class PowerCost:
    """``power_cost`` in watts or as a share, with ``power_cost_sd`` in the same unit."""

    @property
    def names(self) -> tuple[str, ...]:
        """The keys."""
        return ("power_cost", "power_cost_sd")

    @property
    def fields(self) -> tuple[str, ...]:
        """The fields."""
        return ("power_cost", "power_cost_share", "power_cost_sd")

    def read(self, table: TomlTable, where: Where) -> Mapping[str, object]:
        """Return the cost and its standard deviation."""
        found: dict[str, object] = {}
        kinds: dict[str, Kind] = {}
        for name in self.names:
            if name in table:
                try:
                    kinds[name], found[name] = parse_either(table[name], (Kind.POWER, Kind.RATIO))
                except QuantityError as error:
                    raise where.at(name).error(str(error)) from error
        if len(set(kinds.values())) > 1:
            cost, sd = (table[name] for name in self.names)
            raise where.at("power_cost_sd").error(
                f"{sd} is not in the unit of power_cost, {cost}; give both in W or both in %"
            )
        if kinds.get("power_cost") is Kind.RATIO:
            found["power_cost_share"] = found.pop("power_cost")
        return found

    def write(self, part: object, hints: TomlTable) -> Mapping[str, TomlValue | None]:
        """Return the cost and its standard deviation."""
        watts, share, sd = (getattr(part, name) for name in self.fields)
        form = Quantity(Kind.POWER, "W") if share is None else Quantity(Kind.RATIO, "%")
        cost = watts if share is None else share
        result: dict[str, TomlValue | None] = {}
        for name, value in zip(self.names, (cost, sd), strict=True):
            hint = hints.get(name)
            bare_watts = isinstance(hint, float | int) and form.kind is Kind.POWER
            fits = bare_watts or unit_symbol(hint, form.kind) is not None
            text = None if value is None else form.write(value, hint if fits else None)
            if isinstance(text, str) and form.kind is Kind.RATIO and unit_symbol(text, Kind.RATIO) is None:
                text = f"{text} fraction"  # a bare number would be watts
            result[name] = text
        return result


@dataclass(frozen=True, slots=True)
class SubTable:
    """A table below another: one, or an array of tables."""

    name: str
    field: str
    table: Table
    many: bool = False


@dataclass(frozen=True, slots=True)
class Table:
    """A table of session.toml and the class of the document that it gives."""

    make: type
    entries: tuple[Entry, ...]
    tables: tuple[SubTable, ...] = ()

    @property
    def names(self) -> tuple[str, ...]:
        """Every key and table that may stand in it."""
        keys = tuple(name for entry in self.entries for name in entry.names)
        return keys + tuple(sub.name for sub in self.tables)

    def required(self) -> tuple[str, ...]:
        """Return the names without which there is no such part."""
        bare = {
            each.name
            for each in dataclasses.fields(self.make)
            if each.default is dataclasses.MISSING and each.default_factory is dataclasses.MISSING
        }
        return tuple(name for entry in self.entries if bare & set(entry.fields) for name in entry.names)

    def blank(self, field: str) -> object:
        """Return what a field is when nothing is given; None for one that must be given."""
        for each in dataclasses.fields(self.make):
            if each.name == field:
                if each.default_factory is not dataclasses.MISSING:
                    return each.default_factory()
                return None if each.default is dataclasses.MISSING else each.default
        raise KeyError(field)
