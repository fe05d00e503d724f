"""The setups with their figures: slim rows, the picked one open."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import (
    QAbstractListModel,
    QModelIndex,
    QPersistentModelIndex,
    QRectF,
    QSize,
    Qt,
    Signal,
)
from PySide6.QtGui import QPainter, QPaintEvent
from PySide6.QtWidgets import (
    QAbstractItemView,
    QFrame,
    QListView,
    QStyle,
    QStyledItemDelegate,
    QStyleOptionViewItem,
)

from ridercda.app.desk import Desk
from ridercda.app.drag_words import difference_from_baseline
from ridercda.app.figures import decimals_for, half_width, plus_minus, value_text
from ridercda.app.letters import Badge
from ridercda.app.quantities import plain
from ridercda.app.theme import Theme, Type
from ridercda.app.widgets import drawing
from ridercda.drag.estimate import Estimate
from ridercda.session.document import Session

Index = QModelIndex | QPersistentModelIndex
LINE_ROLE = Qt.ItemDataRole.UserRole
_NO_INDEX = QModelIndex()


@dataclass(frozen=True, slots=True)
class SetupLine:
    """What a row says."""

    id: str
    badge: Badge
    runs: int
    is_baseline: bool
    cda: str  # "0.2470", with as many digits as its interval allows; empty without
    within: str  # "± 0.0034 m²"
    difference: str  # against the baseline, "−0.0131 ± 0.0038"; empty for the baseline or without
    short: str  # what stands at the right of a slim row
    stale: bool


def setup_lines(
    session: Session, badges: dict[str, Badge], estimate: Estimate | None, *, stale: bool
) -> tuple[SetupLine, ...]:
    """Return a row per setup."""
    figures = {s.id: s for s in estimate.setups} if estimate else {}
    baseline = session.baseline
    lines = []
    for setup in session.setups:
        runs = sum(run.setup == setup.id and not run.excluded for run in session.runs)
        figure = figures[setup.id].cda if setup.id in figures else None
        difference = difference_from_baseline(estimate, setup.id, baseline.id if baseline else "")
        is_baseline = baseline is not None and setup.id == baseline.id
        short = "–"
        if is_baseline:
            short = value_text(figure) if figure else "–"
        elif difference:
            decimals = max(3, decimals_for(half_width(difference.interval)))
            short = plain(difference.value, decimals, signed=True)
        lines.append(
            SetupLine(
                setup.id,
                badges[setup.id],
                runs,
                is_baseline,
                value_text(figure) if figure else "",
                f"{plus_minus(figure)}\u00a0m²" if figure else "",
                f"{value_text(difference, signed=True)} {plus_minus(difference)}" if difference else "",
                short,
                stale,
            )
        )
    return tuple(lines)


class SetupModel(QAbstractListModel):
    """The rows as a list."""

    def __init__(self) -> None:
        super().__init__()
        self._lines: tuple[SetupLine, ...] = ()

    @property
    def lines(self) -> tuple[SetupLine, ...]:
        """The rows."""
        return self._lines

    def set_lines(self, lines: tuple[SetupLine, ...]) -> None:
        """Take other rows."""
        if [line.id for line in lines] == [line.id for line in self._lines]:
            changed = [k for k, line in enumerate(lines) if line != self._lines[k]]
            self._lines = lines
            for row in changed:
                self.dataChanged.emit(self.index(row), self.index(row))
            return
        self.beginResetModel()
        self._lines = lines
        self.endResetModel()

    def rowCount(self, parent: Index = _NO_INDEX) -> int:
        """Return how many setups there are."""
        return 0 if parent.isValid() else len(self._lines)

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        """Return what is read out, or the row itself to be drawn."""
        if not index.isValid() or index.row() >= len(self._lines):
            return None
        line = self._lines[index.row()]
        if role == LINE_ROLE:
            return line
        if role == Qt.ItemDataRole.DisplayRole:
            return f"{line.badge.letter} {line.badge.name}"
        if role == Qt.ItemDataRole.AccessibleDescriptionRole:
            return " ".join(part for part in (line.cda, line.within, line.difference) if part)
        return None


class _Rows(QStyledItemDelegate):
    def __init__(self, theme: Theme, parent: QListView) -> None:
        super().__init__(parent)
        self._theme = theme

    def _is_open(self, option: QStyleOptionViewItem, index: Index) -> bool:
        view = self.parent()
        return isinstance(view, QListView) and view.currentIndex().row() == index.row()

    def sizeHint(self, option: QStyleOptionViewItem, index: Index) -> QSize:
        """Ask for a slim row, or an open one."""
        return QSize(self._theme.px(120), self._theme.px(76 if self._is_open(option, index) else 28))

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: Index) -> None:
        """Draw a row."""
        line = index.data(LINE_ROLE)
        if not isinstance(line, SetupLine):
            return
        theme, px = self._theme, self._theme.px
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        rect = QRectF(option.rect).adjusted(px(1), px(1), -px(1), -px(1))
        is_open = self._is_open(option, index)
        if is_open:
            painter.setBrush(theme.colour("card"))
            painter.setPen(theme.colour("ink"))
            painter.drawRoundedRect(rect, px(8), px(8))
        elif option.state & QStyle.StateFlag.State_MouseOver:
            painter.setBrush(theme.colour("hover"))
            painter.setPen(Qt.PenStyle.NoPen)
            painter.drawRoundedRect(rect, px(6), px(6))
        if is_open and option.state & QStyle.StateFlag.State_HasFocus:
            drawing.focus_frame(painter, theme, rect)
        head = QRectF(rect.left() + px(8), rect.top(), rect.width() - px(16), px(26 if not is_open else 32))
        side = px(18)
        chip = QRectF(head.left(), head.center().y() - side / 2, side, side)
        drawing.chip(painter, theme, chip, theme.chip(line.badge.index), line.badge.letter)
        right = 0.0
        if not is_open:
            font = theme.font(Type.AXIS)
            right = drawing.width_of(font, line.short) + px(8)
            place = QRectF(head.right() - right, head.top(), right, head.height())
            drawing.text(painter, place, line.short, font, theme.colour("quiet"), drawing.RIGHT)
        name = QRectF(
            chip.right() + px(8), head.top(), head.right() - chip.right() - px(8) - right, head.height()
        )
        drawing.text(painter, name, line.badge.name, theme.font(strong=is_open), theme.colour("ink"))
        if is_open:
            self._paint_open(
                painter, line, QRectF(name.left(), head.bottom() - px(4), head.right() - name.left(), px(44))
            )
        painter.restore()

    def _paint_open(self, painter: QPainter, line: SetupLine, rect: QRectF) -> None:
        theme, px = self._theme, self._theme.px
        strong = theme.font(Type.PAGE, strong=True)
        axis = theme.font(Type.AXIS)
        upper = QRectF(rect.left(), rect.top(), rect.width(), px(22))
        lower = QRectF(rect.left(), rect.top() + px(21), rect.width(), px(18))
        role = "quiet" if line.stale else "ink"
        value = line.cda or self.tr("no figure yet")
        font = strong if line.cda else axis
        drawing.text(painter, upper, value, font, theme.colour(role if line.cda else "quiet"))
        width = drawing.width_of(font, value) + px(6)
        drawing.text(painter, upper.adjusted(width, px(1), 0, 0), line.within, axis, theme.colour("quiet"))
        runs = self.tr("%n run(s)", "", line.runs)
        parts = [self.tr("baseline") if line.is_baseline else line.difference, runs]
        drawing.text(painter, lower, " · ".join(part for part in parts if part), axis, theme.colour("quiet"))


class SetupList(QListView):
    """The list; it follows the selection and sets it."""

    edit_requested = Signal(str)

    def __init__(self, desk: Desk) -> None:
        super().__init__()
        self._desk = desk
        self._model = SetupModel()
        self.setModel(self._model)
        self.setItemDelegate(_Rows(desk.theme, self))
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setMouseTracking(True)
        self.setVerticalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.setAccessibleName(self.tr("Setups"))
        self.setStyleSheet("QListView { background: transparent; }")
        self._quiet = False
        self.selectionModel().currentChanged.connect(self._on_current_changed)
        self.doubleClicked.connect(lambda index: self.edit_requested.emit(index.data(LINE_ROLE).id))
        for signal in (
            desk.document.session_changed,
            desk.solving.changed,
            desk.selection.changed,
            desk.theme.changed,
        ):
            signal.connect(self.refresh)
        self.refresh()

    def refresh(self) -> None:
        """Show what holds now."""
        desk = self._desk
        lines = setup_lines(desk.session, desk.badges(), desk.solving.estimate, stale=desk.solving.is_stale)
        self._quiet = True
        self._model.set_lines(lines)
        row = next((k for k, line in enumerate(lines) if line.id == desk.selection.setup), -1)
        self.setCurrentIndex(self._model.index(row) if row >= 0 else QModelIndex())
        self._quiet = False
        self.doItemsLayout()
        self.updateGeometry()

    def sizeHint(self) -> QSize:
        """Ask for all rows."""
        px = self._desk.theme.px
        rows = self._model.rowCount()
        return QSize(px(240), px(28) * max(rows, 1) + px(50) * self.currentIndex().isValid() + px(4))

    def minimumSizeHint(self) -> QSize:
        """Ask for four rows."""
        return QSize(self._desk.theme.px(160), self._desk.theme.px(28 * 4))

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw the rows, or say how the first comes to be."""
        super().paintEvent(event)
        if not self._model.rowCount():
            painter = QPainter(self.viewport())
            theme = self._desk.theme
            painter.setFont(theme.font(Type.AXIS))
            painter.setPen(theme.colour("quiet"))
            words = self.tr("None yet. The first run brings one; the letter keys make more.")
            flags = Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignTop | Qt.TextFlag.TextWordWrap
            painter.drawText(self.viewport().rect().adjusted(0, theme.px(4), 0, 0), int(flags), words)
            painter.end()

    def _on_current_changed(self, current: QModelIndex) -> None:
        if not self._quiet and current.isValid():
            self._desk.selection.pick_setup(current.data(LINE_ROLE).id)
