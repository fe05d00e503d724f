"""A field for one quantity: takes any unit, says what is wrong as you type, and shows what is assumed without it."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QLabel, QLineEdit, QSizePolicy, QVBoxLayout, QWidget

from ridercda.app.quantities import UnitChoice
from ridercda.app.theme import Theme, Type
from ridercda.app.widgets.flags import set_flag
from ridercda.errors import QuantityError
from ridercda.session.bounds import Bound
from ridercda.units import Kind, format_duration, parse_duration, parse_quantity


@dataclass(frozen=True, slots=True)
class Assumed:
    """What holds while a field is empty, and where that comes from."""

    value: float | None
    source: str


class _Line(QLineEdit):
    """A line that can be given up with Escape."""

    given_up = Signal()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Escape gives up what was typed."""
        if event.key() == Qt.Key.Key_Escape and self.isModified():
            self.given_up.emit()
        else:
            super().keyPressEvent(event)


class QuantityField(QWidget):
    """A line of text that is a quantity; empty means "not given"."""

    committed = Signal(object)  # float in SI, or None
    edited = Signal()

    def __init__(self, theme: Theme, units: UnitChoice, kind: Kind, bound: Bound | None = None) -> None:
        super().__init__()
        self._theme, self._units, self._kind, self._bound = theme, units, kind, bound
        self._value: float | None = None
        self._assumed: Assumed | None = None
        self._required = False
        self._is_shown = False
        self.line = _Line()
        self.line.given_up.connect(self.restore)
        self.line.textEdited.connect(self._on_line_edited)
        self.line.editingFinished.connect(self._on_line_finished)
        self._words = QLabel()
        self._words.setWordWrap(True)
        self._words.setVisible(False)
        self._words.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Minimum)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(theme.px(2))
        layout.addWidget(self.line)
        layout.addWidget(self._words)
        self.setFocusProxy(self.line)
        units.changed.connect(self.restore)
        theme.changed.connect(self._on_theme_changed)
        self._on_theme_changed()

    def _on_theme_changed(self) -> None:
        self.line.setFont(self._theme.font())
        self._words.setFont(self._theme.font(Type.AXIS))

    def set_value(
        self, value: float | None, assumed: Assumed | None = None, *, required: bool = False
    ) -> None:
        """Show a value, or what is assumed without one; what is being typed is left alone."""
        if self._is_shown and (value, assumed, required) == (self._value, self._assumed, self._required):
            return
        self._value, self._assumed, self._required = value, assumed, required
        self._is_shown = True
        self.restore()

    @property
    def value(self) -> float | None:
        """The value last shown or committed, in SI."""
        return self._value

    def text_of(self, value: float) -> str:
        """Return a value as the field shows it."""
        if self._kind is Kind.DURATION:
            return format_duration(value, 0 if value == round(value) else 1)
        return (
            self._units.text(value, self._kind, self._digits(value)).replace("\u00a0", " ").replace("−", "-")
        )

    def _digits(self, value: float) -> int | None:
        """Return decimals enough that a typed value is shown as typed, to five figures."""
        text = f"{self._units.shown(value, self._kind):.5g}"
        return len(text.partition(".")[2]) if "e" not in text else None

    def read(self, text: str) -> tuple[float | None, str]:
        """Return the value of a text and what is wrong with it, empty where nothing is."""
        if not text.strip():
            return None, self.tr("This is needed.") if self._required else ""
        try:
            if self._kind is Kind.DURATION:
                value = parse_duration(text)
            else:
                value = parse_quantity(text, self._kind, bare_unit=self._bare_unit())
        except QuantityError as error:
            return None, str(error)
        trouble = self._bound.trouble(value) if self._bound else ""
        return value, trouble[:1].upper() + trouble[1:]

    def _bare_unit(self) -> str | None:
        # A plain number is a share where shares are written plainly: 0.977, not 0.977 %.
        if self._kind in (Kind.RATIO, Kind.GRADE, Kind.HUMIDITY):
            return None
        return self._units.symbol(self._kind) or None

    def restore(self) -> None:
        """Show the value that holds, whatever was typed."""
        self.line.setText("" if self._value is None else self.text_of(self._value))
        self.line.setCursorPosition(0)
        self.line.setModified(False)
        placeholder = ""
        if self._assumed is not None and self._assumed.value is not None:
            placeholder = self.text_of(self._assumed.value)
        self.line.setPlaceholderText(placeholder)
        self._say("", wrong=False)

    def _say(self, trouble: str, *, wrong: bool) -> None:
        words = trouble
        if not words and self._value is None and self._assumed is not None and not self.line.text():
            source = short_source(self._assumed.source)
            words = self.tr("assumed") if source == "definition" else self.tr("assumed: {}").format(source)
            self._words.setToolTip(self._assumed.source)
        else:
            self._words.setToolTip("")
        set_flag(self.line, "wrong", on=wrong)
        set_flag(self._words, "bad", on=wrong)
        set_flag(self._words, "quiet", on=not wrong)
        self._words.setText(words)
        self._words.setVisible(bool(words))
        self.line.setAccessibleDescription(words)

    def _on_line_edited(self, text: str) -> None:
        _, trouble = self.read(text)
        self._say(trouble, wrong=bool(trouble))
        self.edited.emit()

    def _on_line_finished(self) -> None:
        if not self.line.isModified():
            return
        value, trouble = self.read(self.line.text())
        if trouble:
            return
        self.line.setModified(False)
        if value == self._value:
            self.restore()
        else:
            self.committed.emit(value)


def short_source(source: str) -> str:
    """Return a source short enough to stand under a field: its first words, and the year where it has one."""
    head = source.split(":")[0].split(",")[0]
    year = next(
        (
            word.strip("().,")
            for word in source.replace(",", " ").split()
            if word.strip("().,").isdigit() and len(word.strip("().,")) == 4
        ),
        "",
    )
    return f"{head} {year}".strip() if year and year not in head else head


class TextField(QLineEdit):
    """A line of plain text that commits when it is left or Enter is pressed."""

    committed = Signal(str)

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self._theme = theme
        self._shown = ""
        self.editingFinished.connect(self._on_finished)
        theme.changed.connect(lambda: self.setFont(theme.font()))
        self.setFont(theme.font())

    def set_value(self, text: str) -> None:
        """Show a text; what is being typed is left alone."""
        if text != self._shown or not self.isModified():
            self._shown = text
            self.setText(text)
            self.setCursorPosition(0)
            self.setModified(False)

    def _on_finished(self) -> None:
        if self.isModified() and self.text().strip() != self._shown:
            self.setModified(False)
            self.committed.emit(self.text().strip())

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Escape gives up what was typed."""
        if event.key() == Qt.Key.Key_Escape and self.isModified():
            self.setText(self._shown)
            self.setModified(False)
        else:
            super().keyPressEvent(event)
