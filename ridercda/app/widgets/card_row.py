"""Cards side by side where there is room, as tabs where there is not."""

from __future__ import annotations

from PySide6.QtGui import QResizeEvent
from PySide6.QtWidgets import QButtonGroup, QHBoxLayout, QPushButton, QSizePolicy, QVBoxLayout, QWidget

from ridercda.app.theme import Theme
from ridercda.app.widgets.card import Card


class CardRow(QWidget):
    """A row of cards; below `narrow` pixels of width one is shown at a time."""

    def __init__(self, theme: Theme, narrow: int = 760, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._theme = theme
        self._narrow = narrow
        self._cards: list[Card] = []
        self._buttons: list[QPushButton] = []
        self._group = QButtonGroup(self)
        self._group.idClicked.connect(lambda _: self._lay_out())
        self._tabs = QWidget()
        self._tab_line = QHBoxLayout(self._tabs)
        self._tab_line.setContentsMargins(0, 0, 0, 0)
        self._tab_line.setSpacing(0)
        self._tab_line.addStretch(1)
        self._line = QHBoxLayout()
        self._line.setSpacing(theme.px(12))
        outer = QVBoxLayout(self)
        outer.setContentsMargins(0, 0, 0, 0)
        outer.setSpacing(theme.px(4))
        outer.addWidget(self._tabs)
        outer.addLayout(self._line, 1)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Expanding)
        theme.changed.connect(self._lay_out)

    def add(self, card: Card, title: str, stretch: int = 1) -> None:
        """Add a card; its title names its tab."""
        button = QPushButton(title)
        button.setCheckable(True)
        button.setProperty("page", True)
        button.setFont(self._theme.font())
        self._group.addButton(button, len(self._cards))
        self._tab_line.insertWidget(len(self._cards), button)
        self._cards.append(card)
        self._buttons.append(button)
        self._line.addWidget(card, stretch)
        card.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Expanding)
        if len(self._cards) == 1:
            button.setChecked(True)
        self._lay_out()

    @property
    def is_narrow(self) -> bool:
        """Whether the cards are tabs."""
        return self.width() < self._theme.px(self._narrow)

    def _lay_out(self) -> None:
        narrow = self.is_narrow
        self._tabs.setVisible(narrow)
        for place, card in enumerate(self._cards):
            card.setVisible(not narrow or place == self._group.checkedId())
            self._buttons[place].setFont(self._theme.font())

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Change between row and tabs."""
        self._lay_out()
