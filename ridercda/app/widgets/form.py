"""Rows of labels and fields under headings; the label stands left, the field right."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QComboBox, QGridLayout, QLabel, QLayout, QSizePolicy, QVBoxLayout, QWidget

from ridercda.app.theme import Theme, Type


class Form(QWidget):
    """A column of sections; rows can be hidden."""

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.theme = theme
        self._outer = QVBoxLayout(self)
        self._outer.setContentsMargins(0, 0, 0, 0)
        self._outer.setSpacing(theme.px(6))
        self._grid: QGridLayout | None = None
        self._labels: dict[QWidget, QLabel] = {}
        self._headings: list[QLabel] = []
        theme.changed.connect(self._on_theme_changed)

    def heading(self, words: str) -> QLabel:
        """Begin a section."""
        label = QLabel(words)
        label.setFont(self.theme.font(strong=True))
        if self._headings:
            label.setContentsMargins(0, self.theme.px(10), 0, 0)
        self._headings.append(label)
        self._outer.addWidget(label)
        self._grid = None
        return label

    def row(self, words: str, field: QWidget) -> QWidget:
        """Add a row."""
        if self._grid is None:
            self._grid = QGridLayout()
            self._grid.setHorizontalSpacing(self.theme.px(8))
            self._grid.setVerticalSpacing(self.theme.px(6))
            self._grid.setColumnStretch(0, 2)
            self._grid.setColumnStretch(1, 3)
            self._outer.addLayout(self._grid)
        label = QLabel(words)
        label.setProperty("quiet", True)
        label.setBuddy(field)
        label.setWordWrap(True)
        label.setFont(self.theme.font())
        label.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
        field.setAccessibleName(words)
        field.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
        place = self._grid.rowCount()
        self._grid.addWidget(label, place, 0, Qt.AlignmentFlag.AlignTop)
        self._grid.addWidget(field, place, 1, Qt.AlignmentFlag.AlignTop)
        label.setMinimumHeight(field.sizeHint().height())
        self._labels[field] = label
        return field

    def note(self, words: str) -> QLabel:
        """Add a quiet line across."""
        label = QLabel(words)
        label.setProperty("quiet", True)
        label.setWordWrap(True)
        label.setFont(self.theme.font(Type.AXIS))
        self._outer.addWidget(label)
        self._grid = None
        return label

    def widget(self, widget: QWidget) -> QWidget:
        """Add anything across."""
        self._outer.addWidget(widget)
        self._grid = None
        return widget

    def line(self, layout: QLayout) -> None:
        """Add a line of anything across."""
        self._outer.addLayout(layout)
        self._grid = None

    def stretch(self) -> None:
        """Keep the rows at the top."""
        self._outer.addStretch(1)

    def show_row(self, field: QWidget, *, shown: bool) -> None:
        """Show or hide a row."""
        field.setVisible(shown)
        self._labels[field].setVisible(shown)

    def label_of(self, field: QWidget) -> QLabel:
        """Return the label of a row."""
        return self._labels[field]

    def _on_theme_changed(self) -> None:
        for label in self._labels.values():
            label.setFont(self.theme.font())
        for label in self._headings:
            label.setFont(self.theme.font(strong=True))


class Choice(QComboBox):
    """One of a few words; the wheel scrolls the form, not the choice."""

    def __init__(self, theme: Theme, options: tuple[tuple[str, str], ...]) -> None:
        super().__init__()
        for key, words in options:
            self.addItem(words, key)
        self.setFont(theme.font())
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setSizeAdjustPolicy(QComboBox.SizeAdjustPolicy.AdjustToMinimumContentsLengthWithIcon)
        theme.changed.connect(lambda: self.setFont(theme.font()))

    def set_options(self, options: tuple[tuple[str, str], ...], key: str) -> None:
        """Offer other choices, and show one, without telling anybody."""
        blocked = self.blockSignals(True)
        if options != tuple((self.itemData(k), self.itemText(k)) for k in range(self.count())):
            self.clear()
            for each, words in options:
                self.addItem(words, each)
        self.setCurrentIndex(max(0, self.findData(key)))
        self.blockSignals(blocked)

    def set_key(self, key: str) -> None:
        """Show a choice without telling anybody."""
        blocked = self.blockSignals(True)
        self.setCurrentIndex(max(0, self.findData(key)))
        self.blockSignals(blocked)

    @property
    def key(self) -> str:
        """The choice shown."""
        return str(self.currentData() or "")

    def wheelEvent(self, event: object) -> None:
        """Leave the wheel to the form."""
        event.ignore()  # type: ignore[attr-defined]
