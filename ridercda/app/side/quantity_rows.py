"""Rows of a form that each stand for one figure of the session."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from ridercda.app.desk import Desk
from ridercda.app.widgets.field import Assumed, QuantityField
from ridercda.app.widgets.form import Form
from ridercda.session.bounds import BOUNDS
from ridercda.session.defaults import default_row
from ridercda.session.document import Session
from ridercda.units import Kind


@dataclass(frozen=True, slots=True)
class Figure:
    """One figure of the session: where it is, how it is changed, what holds without it."""

    words: str
    kind: Kind
    of_class: str  # in `BOUNDS`
    name: str
    get: Callable[[Session], float | None]
    put: Callable[[Session, float | None], Session]
    default_key: str = ""
    required: bool = False
    assumed: Assumed | None = None

    def assumption(self) -> Assumed | None:
        """Return what holds while the figure is not given."""
        if self.assumed is not None or not self.default_key:
            return self.assumed
        row = default_row(self.default_key)
        return Assumed(row.value, row.source) if not isinstance(row.value, str) else None


class FigureRows:
    """Adds figures to a form and keeps their fields in step with the session."""

    def __init__(self, desk: Desk, form: Form) -> None:
        self._desk, self._form = desk, form
        self._fields: list[tuple[Figure, QuantityField]] = []

    def add(self, figure: Figure) -> QuantityField:
        """Add a row."""
        bound = BOUNDS.get(figure.of_class, {}).get(figure.name)
        field = QuantityField(self._desk.theme, self._desk.units, figure.kind, bound)
        self._form.row(figure.words, field)
        self._fields.append((figure, field))
        field.committed.connect(lambda value: self._on_field_committed(figure, field, value))
        return field

    def _on_field_committed(self, figure: Figure, field: QuantityField, value: float | None) -> None:
        text = field.tr("Set {}").format(figure.words[:1].lower() + figure.words[1:])
        if not self._desk.document.edit(text, lambda session: figure.put(session, value)):
            field.restore()

    def refresh(self, session: Session) -> None:
        """Show what the session holds."""
        for figure, field in self._fields:
            field.set_value(figure.get(session), figure.assumption(), required=figure.required)
