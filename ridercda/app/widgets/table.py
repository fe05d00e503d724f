"""Tables over frozen rows: text and unit to show, raw value to sort by, a chip where a setup stands, copy as text."""

from __future__ import annotations

from collections.abc import Callable, Hashable
from dataclasses import dataclass
from typing import Generic, TypeVar

from PySide6.QtCore import (
    QAbstractItemModel,
    QAbstractTableModel,
    QItemSelectionModel,
    QModelIndex,
    QPersistentModelIndex,
    QRectF,
    QSize,
    QSortFilterProxyModel,
    Qt,
    Signal,
)
from PySide6.QtGui import QColor, QGuiApplication, QKeyEvent, QKeySequence, QPainter, QPaintEvent
from PySide6.QtWidgets import (
    QAbstractItemView,
    QComboBox,
    QHeaderView,
    QStyledItemDelegate,
    QStyleOptionViewItem,
    QTableView,
    QWidget,
)

from ridercda.app.letters import Badge
from ridercda.app.theme import Theme, Type
from ridercda.app.widgets import drawing

Row = TypeVar("Row")
Index = QModelIndex | QPersistentModelIndex

RAW_ROLE = Qt.ItemDataRole.UserRole  # SI value, for sorting
CHIP_ROLE = Qt.ItemDataRole.UserRole + 1  # a Badge
QUIET_ROLE = Qt.ItemDataRole.UserRole + 2  # whether the row steps back
KEY_ROLE = Qt.ItemDataRole.UserRole + 3
CHOICES_ROLE = Qt.ItemDataRole.UserRole + 4

_NO_INDEX = QModelIndex()
_INDENT = "\u2003"


@dataclass(frozen=True, slots=True)
class Column(Generic[Row]):
    """One column: how a row is shown, sorted and edited."""

    header: str
    text: Callable[[Row], str]
    raw: Callable[[Row], float | str | None] | None = None  # None: sorted by its text, left-aligned
    chip: Callable[[Row], Badge | None] | None = None
    tip: Callable[[Row], str] | None = None
    edit: Callable[[Row, str], bool] | None = None  # pushes an edit; False refuses
    width: int = 0  # px at zoom 1; 0: as wide as its content
    header_tip: str = ""
    choices: Callable[[Row], tuple[str, ...]] | None = None  # edited by choosing one of these

    @property
    def is_number(self) -> bool:
        """Whether it is set to the right."""
        return self.raw is not None and self.chip is None


class TableModel(QAbstractTableModel, Generic[Row]):
    """A table over a tuple of rows; it holds what it was last given and nothing else."""

    def __init__(
        self,
        columns: tuple[Column[Row], ...],
        key: Callable[[Row], Hashable] = lambda row: id(row),
        quiet: Callable[[Row], bool] = lambda row: False,
    ) -> None:
        super().__init__()
        self._columns = columns
        self._key = key
        self._quiet = quiet
        self._rows: tuple[Row, ...] = ()

    @property
    def rows(self) -> tuple[Row, ...]:
        """The rows shown, unsorted."""
        return self._rows

    def set_columns(self, columns: tuple[Column[Row], ...]) -> None:
        """Take other columns, e.g. after a change of units."""
        if [c.header for c in columns] == [c.header for c in self._columns]:
            self._columns = columns
            if self._rows and columns:
                self.dataChanged.emit(self.index(0, 0), self.index(len(self._rows) - 1, len(columns) - 1))
            return
        self.beginResetModel()
        self._columns = columns
        self.endResetModel()

    def set_rows(self, rows: tuple[Row, ...]) -> None:
        """Take other rows; where they are the same things, only what they say changes."""
        if [self._key(row) for row in rows] == [self._key(row) for row in self._rows]:
            self._rows = rows
            if rows and self._columns:
                self.dataChanged.emit(self.index(0, 0), self.index(len(rows) - 1, len(self._columns) - 1))
            return
        self.beginResetModel()
        self._rows = rows
        self.endResetModel()

    def rowCount(self, parent: Index = _NO_INDEX) -> int:
        """Return how many rows there are."""
        return 0 if parent.isValid() else len(self._rows)

    def columnCount(self, parent: Index = _NO_INDEX) -> int:
        """Return how many columns there are."""
        return 0 if parent.isValid() else len(self._columns)

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        """Return what is shown, sorted by or told of a cell."""
        if not index.isValid() or index.row() >= len(self._rows) or index.column() >= len(self._columns):
            return None
        row, column = self._rows[index.row()], self._columns[index.column()]
        if role in (Qt.ItemDataRole.DisplayRole, Qt.ItemDataRole.EditRole):
            return column.text(row)
        if role == RAW_ROLE:
            return column.raw(row) if column.raw else column.text(row)
        if role == CHIP_ROLE:
            return column.chip(row) if column.chip else None
        if role == QUIET_ROLE:
            return self._quiet(row)
        if role == KEY_ROLE:
            return self._key(row)
        if role == CHOICES_ROLE:
            return column.choices(row) if column.choices else None
        if role == Qt.ItemDataRole.ToolTipRole:
            return column.tip(row) if column.tip else None
        if role == Qt.ItemDataRole.TextAlignmentRole:
            return drawing.RIGHT if column.is_number else drawing.LEFT
        return None

    def headerData(
        self, section: int, orientation: Qt.Orientation, role: int = Qt.ItemDataRole.DisplayRole
    ) -> object:
        """Return a column's header."""
        if orientation is not Qt.Orientation.Horizontal or not 0 <= section < len(self._columns):
            return None
        column = self._columns[section]
        if role == Qt.ItemDataRole.DisplayRole:
            return _INDENT + column.header if section and not column.is_number else column.header
        if role == Qt.ItemDataRole.ToolTipRole:
            return column.header_tip or None
        if role == Qt.ItemDataRole.TextAlignmentRole:
            return drawing.RIGHT if column.is_number else drawing.LEFT
        return None

    def flags(self, index: Index) -> Qt.ItemFlag:
        """Return whether a cell can be edited."""
        flags = super().flags(index)
        if index.isValid() and self._columns[index.column()].edit:
            flags |= Qt.ItemFlag.ItemIsEditable
        return flags

    def setData(self, index: Index, value: object, role: int = Qt.ItemDataRole.EditRole) -> bool:
        """Push the edit of a cell; the new value comes back by way of the document."""
        if role != Qt.ItemDataRole.EditRole or not index.isValid():
            return False
        edit = self._columns[index.column()].edit
        return edit(self._rows[index.row()], str(value)) if edit else False


class _ByRaw(QSortFilterProxyModel):
    """Sorts by raw value; what has none comes last either way."""

    def lessThan(self, left: Index, right: Index) -> bool:
        """Compare raw values."""
        one, other = left.data(RAW_ROLE), right.data(RAW_ROLE)
        if one is None or other is None:
            return (other is None) == (self.sortOrder() is Qt.SortOrder.AscendingOrder) and one is not other
        if isinstance(one, str) or isinstance(other, str):
            return str(one).casefold() < str(other).casefold()
        return bool(one < other)


class _Cells(QStyledItemDelegate):
    """Draws chips before text, and steps back what is left out."""

    def __init__(self, theme: Theme, parent: QWidget) -> None:
        super().__init__(parent)
        self._theme = theme

    def initStyleOption(self, option: QStyleOptionViewItem, index: Index) -> None:
        """Set quiet text and room for the chip."""
        super().initStyleOption(option, index)
        if index.column() and not index.data(Qt.ItemDataRole.TextAlignmentRole) & Qt.AlignmentFlag.AlignRight:
            option.text = _INDENT + option.text  # apart from the figures set to the right before it
        if index.data(QUIET_ROLE):
            option.palette.setColor(option.palette.ColorRole.Text, self._theme.colour("quiet"))

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: Index) -> None:
        """Draw the chip, then the text beside it."""
        badge = index.data(CHIP_ROLE)
        if not isinstance(badge, Badge):
            super().paint(painter, option, index)
            return
        words = index.data(Qt.ItemDataRole.DisplayRole) or ""
        plain = QStyleOptionViewItem(option)
        self.initStyleOption(plain, index)
        plain.text = ""
        style = option.widget.style() if option.widget else None
        if style:
            style.drawControl(style.ControlElement.CE_ItemViewItem, plain, painter, option.widget)
        side = self._theme.px(18)
        box = QRectF(option.rect)
        left = box.left() + self._theme.px(6)
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        chip = QRectF(left, box.center().y() - side / 2, side, side)
        drawing.chip(painter, self._theme, chip, self._theme.chip(badge.index), badge.letter)
        rest = QRectF(
            chip.right() + self._theme.px(8),
            box.top(),
            box.right() - chip.right() - self._theme.px(10),
            box.height(),
        )
        role = "quiet" if index.data(QUIET_ROLE) else "ink"
        drawing.text(painter, rest, str(words), self._theme.font(), QColor(self._theme.colour(role)))
        painter.restore()

    def createEditor(self, parent: QWidget, option: QStyleOptionViewItem, index: Index) -> QWidget:
        """Return a box where a cell is one of a few choices, else a line of text."""
        choices = index.data(CHOICES_ROLE)
        if not choices:
            return super().createEditor(parent, option, index)
        box = QComboBox(parent)
        box.addItems(list(choices))
        box.activated.connect(lambda: self.commitData.emit(box))
        box.activated.connect(lambda: self.closeEditor.emit(box))
        return box

    def setEditorData(self, editor: QWidget, index: Index) -> None:
        """Show what holds."""
        if isinstance(editor, QComboBox):
            editor.setCurrentText(str(index.data()))
            editor.showPopup()
        else:
            super().setEditorData(editor, index)

    def setModelData(self, editor: QWidget, model: QAbstractItemModel, index: Index) -> None:
        """Push the edit."""
        if isinstance(editor, QComboBox):
            model.setData(index, editor.currentText())
        else:
            super().setModelData(editor, model, index)

    def sizeHint(self, option: QStyleOptionViewItem, index: Index) -> QSize:
        """Make room for the chip."""
        size = super().sizeHint(option, index)
        wider = self._theme.px(26) if isinstance(index.data(CHIP_ROLE), Badge) else 0
        return QSize(size.width() + wider + self._theme.px(2), size.height())


class TableView(QTableView):
    """A calm table: whole rows, no boxes, sorting by header, Ctrl+C copies what is picked as text."""

    keys_picked = Signal(object)  # tuple of the keys of the picked rows
    row_entered = Signal(object)  # key under the pointer

    def __init__(self, theme: Theme, model: TableModel[Row], parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._theme = theme
        self._proxy = _ByRaw()
        self._proxy.setSourceModel(model)
        self.setModel(self._proxy)
        self.setSortingEnabled(True)
        self.sortByColumn(-1, Qt.SortOrder.AscendingOrder)
        self.setShowGrid(False)
        self.setWordWrap(False)
        self.setMouseTracking(True)
        self.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.setSelectionMode(QAbstractItemView.SelectionMode.ExtendedSelection)
        self.setEditTriggers(
            QAbstractItemView.EditTrigger.DoubleClicked | QAbstractItemView.EditTrigger.EditKeyPressed
        )
        self.setHorizontalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
        self.setTabKeyNavigation(False)
        self.verticalHeader().hide()
        header = self.horizontalHeader()
        header.setHighlightSections(False)
        header.setMinimumSectionSize(theme.px(36))
        self.setItemDelegate(_Cells(theme, self))
        self._quiet_selection = False
        self._empty = ""
        self._kept: tuple[Hashable, ...] = ()
        self.selectionModel().selectionChanged.connect(self._on_selection_changed)
        self.entered.connect(lambda index: self.row_entered.emit(index.data(KEY_ROLE)))
        self._proxy.modelReset.connect(self._on_model_reset)
        theme.changed.connect(self._on_theme_changed)
        self._on_theme_changed()
        self._on_model_reset()

    def _on_model_reset(self) -> None:
        header = self.horizontalHeader()
        last = self._proxy.columnCount() - 1
        for column in range(last + 1):
            mode = (
                QHeaderView.ResizeMode.Stretch if column == last else QHeaderView.ResizeMode.ResizeToContents
            )
            header.setSectionResizeMode(column, mode)
        self.show_keys(self._kept)

    def _on_theme_changed(self) -> None:
        self.setFont(self._theme.font())
        self.horizontalHeader().setFont(self._theme.font(Type.AXIS))
        self.verticalHeader().setDefaultSectionSize(self._theme.px(28))
        self.verticalHeader().setMinimumSectionSize(self._theme.px(20))

    def show_keys(self, keys: tuple[Hashable, ...]) -> None:
        """Show rows as picked, without telling anybody."""
        self._kept = keys
        if set(keys) == set(self.picked_keys()):
            return
        self._quiet_selection = True
        model = self.selectionModel()
        model.clearSelection()
        last = None
        for row in range(self._proxy.rowCount()):
            index = self._proxy.index(row, 0)
            if index.data(KEY_ROLE) in keys:
                model.select(
                    index, QItemSelectionModel.SelectionFlag.Select | QItemSelectionModel.SelectionFlag.Rows
                )
                last = index
        if last is not None:
            model.setCurrentIndex(last, QItemSelectionModel.SelectionFlag.NoUpdate)
            self.scrollTo(last)
        self._quiet_selection = False

    def set_empty_text(self, words: str) -> None:
        """Say what stands in the table while it has no rows."""
        self._empty = words

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw the rows, or say why there are none."""
        super().paintEvent(event)
        if self._empty and not self._proxy.rowCount():
            painter = QPainter(self.viewport())
            area = QRectF(self.viewport().rect())
            drawing.text(
                painter, area, self._empty, self._theme.font(), self._theme.colour("quiet"), drawing.CENTRE
            )
            painter.end()

    def picked_keys(self) -> tuple[Hashable, ...]:
        """Return the keys of the picked rows."""
        rows = sorted(index.row() for index in self.selectionModel().selectedRows())
        return tuple(self._proxy.index(row, 0).data(KEY_ROLE) for row in rows)

    def _on_selection_changed(self) -> None:
        if not self._quiet_selection:
            self._kept = self.picked_keys()
            self.keys_picked.emit(self._kept)

    def as_text(self) -> str:
        """Return the picked rows, or all where none is picked, as tab-separated text with headers."""
        model: QAbstractItemModel = self._proxy
        rows = sorted(index.row() for index in self.selectionModel().selectedRows()) or range(
            model.rowCount()
        )
        columns = range(model.columnCount())
        lines = [
            "\t".join(str(model.headerData(c, Qt.Orientation.Horizontal) or "").strip() for c in columns)
        ]
        for row in rows:
            cells = []
            for column in columns:
                index = model.index(row, column)
                badge, words = index.data(CHIP_ROLE), str(index.data() or "")
                cells.append(f"{badge.letter} {words}".strip() if isinstance(badge, Badge) else words)
            lines.append("\t".join(cells))
        return "\n".join(lines).replace("\u00a0", " ")

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Copy as text."""
        if event.matches(QKeySequence.StandardKey.Copy):
            QGuiApplication.clipboard().setText(self.as_text())
        else:
            super().keyPressEvent(event)
