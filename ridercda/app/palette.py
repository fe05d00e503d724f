"""The command palette: type a few letters of what you want, Enter does it."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QAbstractListModel, QModelIndex, QObject, QPersistentModelIndex, QSize, Qt
from PySide6.QtGui import QKeyEvent, QKeySequence, QPainter
from PySide6.QtWidgets import (
    QDialog,
    QLineEdit,
    QListView,
    QStyle,
    QStyledItemDelegate,
    QStyleOptionViewItem,
    QVBoxLayout,
)

from ridercda.app.actions import Action, menu_titles
from ridercda.app.theme import Theme
from ridercda.app.widgets import drawing

if TYPE_CHECKING:
    from ridercda.app.window import MainWindow

Index = QModelIndex | QPersistentModelIndex
ACTION_ROLE = Qt.ItemDataRole.UserRole
_NO_INDEX = QModelIndex()


def matches(words: str, text: str) -> int | None:
    """Return how well typed words match a text, the lower the better; None where they do not.

    Every word must stand in the text; at the start of a word it counts more than within one.
    """
    score, folded = 0, text.casefold()
    for word in words.casefold().split():
        place = folded.find(word)
        if place < 0:
            return None
        score += 0 if place == 0 else 1 if not folded[place - 1].isalnum() else 4
    return score * 100 + len(folded)


class PaletteModel(QAbstractListModel):
    """The actions that match what was typed, the best first."""

    def __init__(self, actions: tuple[Action, ...], parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._all = actions
        self._titles = {key: title.replace("&", "") for key, title in menu_titles().items()}
        self._shown = actions

    def narrow(self, words: str) -> None:
        """Show what matches."""
        self.beginResetModel()
        found = [
            (score, action)
            for action in self._all
            if (score := matches(words, self._said(action))) is not None
        ]
        self._shown = (
            tuple(action for _, action in sorted(found, key=lambda pair: pair[0]))
            if words.strip()
            else self._all
        )
        self.endResetModel()

    def _said(self, action: Action) -> str:
        return f"{action.text} {self._titles[action.menu]}"

    def rowCount(self, parent: Index = _NO_INDEX) -> int:
        """Return how many match."""
        return 0 if parent.isValid() else len(self._shown)

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        """Return an action or what it says."""
        if not index.isValid() or index.row() >= len(self._shown):
            return None
        action = self._shown[index.row()]
        if role == Qt.ItemDataRole.DisplayRole:
            return action.text
        if role == ACTION_ROLE:
            return action
        return None


class _Rows(QStyledItemDelegate):
    def __init__(self, theme: Theme, parent: QObject) -> None:
        super().__init__(parent)
        self._theme = theme

    def sizeHint(self, option: QStyleOptionViewItem, index: Index) -> QSize:
        """Ask for a slim row."""
        return QSize(100, self._theme.px(30))

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: Index) -> None:
        """Draw words at the left, the shortcut at the right."""
        action = index.data(ACTION_ROLE)
        if not isinstance(action, Action):
            return
        theme = self._theme
        rect = option.rect
        if option.state & QStyle.StateFlag.State_Selected:
            painter.fillRect(rect, theme.colour("chosen"))
        area = rect.adjusted(theme.px(12), 0, -theme.px(12), 0).toRectF()
        drawing.text(painter, area, action.text, theme.font(), theme.colour("ink"))
        keys = QKeySequence(action.shortcut).toString(QKeySequence.SequenceFormat.NativeText)
        drawing.text(painter, area, keys, theme.font(), theme.colour("quiet"), drawing.RIGHT)


class Palette(QDialog):
    """A field and a list under it."""

    def __init__(self, window: MainWindow, actions: tuple[Action, ...]) -> None:
        super().__init__(window, Qt.WindowType.Popup | Qt.WindowType.FramelessWindowHint)
        self._window = window
        theme = window.desk.theme
        self.field = QLineEdit()
        self.field.setFont(theme.font())
        self.field.setPlaceholderText(self.tr("What do you want to do?"))
        self.field.setAccessibleName(self.field.placeholderText())
        self._model = PaletteModel(tuple(action for action in actions if action.can(window)), self)
        self._list = QListView()
        self._list.setModel(self._model)
        self._list.setItemDelegate(_Rows(theme, self._list))
        self._list.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self._list.setCurrentIndex(self._model.index(0))
        layout = QVBoxLayout(self)
        layout.setContentsMargins(theme.px(8), theme.px(8), theme.px(8), theme.px(8))
        layout.addWidget(self.field)
        layout.addWidget(self._list)
        self.field.textChanged.connect(self._on_field_changed)
        self.field.returnPressed.connect(self._on_chosen)
        self._list.clicked.connect(self._on_chosen)
        self.resize(theme.px(460), theme.px(360))
        corner = window.mapToGlobal(window.rect().center())
        self.move(
            corner.x() - self.width() // 2, window.mapToGlobal(window.rect().topLeft()).y() + theme.px(80)
        )

    def _on_field_changed(self, words: str) -> None:
        self._model.narrow(words)
        self._list.setCurrentIndex(self._model.index(0))

    def _on_chosen(self) -> None:
        action = self._list.currentIndex().data(ACTION_ROLE)
        self.close()
        if isinstance(action, Action):
            action.do(self._window)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Move in the list with the arrows."""
        step = {Qt.Key.Key_Down: 1, Qt.Key.Key_Up: -1}.get(Qt.Key(event.key()))
        if step:
            row = self._list.currentIndex().row() + step
            self._list.setCurrentIndex(self._model.index(max(0, min(row, self._model.rowCount() - 1))))
        else:
            super().keyPressEvent(event)
