"""A card: what is read stands on one, with a title and, where it holds a picture, the ways to take it along."""

from __future__ import annotations

from operator import itemgetter
from pathlib import Path

from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QGuiApplication, QPainter, QPixmap
from PySide6.QtWidgets import (
    QFileDialog,
    QFrame,
    QHBoxLayout,
    QLabel,
    QMenu,
    QSizePolicy,
    QStackedWidget,
    QToolButton,
    QVBoxLayout,
    QWidget,
)

from ridercda.app.theme import Theme, Type
from ridercda.app.widgets.chart import Chart
from ridercda.app.widgets.drawing import chip
from ridercda.app.widgets.table import Column, TableModel, TableView


class Card(QFrame):
    """A card with a title line and a body."""

    def __init__(self, theme: Theme, title: str = "", parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.theme = theme
        self.setObjectName("card")
        self._title = QLabel(title)
        self._note = QLabel()
        self._note.setProperty("quiet", True)
        self._note.setAlignment(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
        self._note.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
        self.header = QHBoxLayout()
        self.header.addWidget(self._title)
        self.header.addWidget(self._note, 1)
        self.body = QVBoxLayout()
        self._outer = QVBoxLayout(self)
        self._outer.addLayout(self.header)
        self._outer.addLayout(self.body, 1)
        self._on_theme_changed()
        theme.changed.connect(self._on_theme_changed)
        self.set_title(title)

    def set_title(self, title: str) -> None:
        """Set the title; an empty one takes no room."""
        self._title.setText(title)
        self._title.setVisible(bool(title))
        self.setAccessibleName(title)

    def set_note(self, note: str) -> None:
        """Set the quiet words at the right of the title."""
        self._note.setText(note)

    def _on_theme_changed(self) -> None:
        px = self.theme.px
        self._outer.setContentsMargins(px(16), px(12), px(16), px(12))
        self._outer.setSpacing(px(8))
        self.body.setSpacing(px(8))
        self.header.setSpacing(px(8))
        self._title.setFont(self.theme.font(Type.TEXT, strong=True))
        self._title.setMinimumHeight(px(26))  # as high as with a button beside it
        self._note.setFont(self.theme.font(Type.AXIS))


class ChartCard(Card):
    """A card with a picture that can be saved, copied and read as a table."""

    def __init__(self, theme: Theme, title: str, chart: Chart, parent: QWidget | None = None) -> None:
        super().__init__(theme, title, parent)
        self.chart = chart
        chart.title = title
        chart.setAccessibleName(title)
        self._model: TableModel[tuple[str, ...]] = TableModel(())
        self._table = TableView(theme, self._model)
        self._table.setSizePolicy(
            QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Ignored
        )  # the picture sets the size
        self._stack = QStackedWidget()
        self._stack.addWidget(chart)
        self._stack.addWidget(self._table)
        self.body.addWidget(self._stack, 1)
        self._button = QToolButton()
        self._button.setText("⋯")
        self._button.setToolTip(self.tr("Save, copy, or show as a table"))
        self._button.setAccessibleName(self.tr("More for this picture"))
        self._button.setPopupMode(QToolButton.ToolButtonPopupMode.InstantPopup)
        self._button.setMenu(self._filled_menu())
        self.header.addWidget(self._button)

    def _filled_menu(self) -> QMenu:
        menu = QMenu(self)
        self.as_table = menu.addAction(self.tr("Show as a table"))
        self.as_table.setCheckable(True)
        self.as_table.toggled.connect(self._on_as_table_toggled)
        menu.addSeparator()
        menu.addAction(self.tr("Save picture…"), self._on_save_picture)
        menu.addAction(self.tr("Save data as CSV…"), self._on_save_data)
        menu.addAction(self.tr("Copy picture"), self.chart.copy_picture)
        menu.addAction(self.tr("Copy data"), self._on_copy_data)
        self.chart.setContextMenuPolicy(Qt.ContextMenuPolicy.CustomContextMenu)
        self.chart.customContextMenuRequested.connect(lambda at: menu.popup(self.chart.mapToGlobal(at)))
        return menu

    def refresh_table(self) -> None:
        """Bring the table in step with the picture, where it is shown."""
        if not self.as_table.isChecked():
            return
        table = self.chart.table()
        columns: tuple[Column[tuple[str, ...]], ...] = tuple(
            Column(header, itemgetter(place)) for place, header in enumerate(table.headers)
        )
        self._model.set_columns(columns)
        self._model.set_rows(table.rows)

    def _on_as_table_toggled(self) -> None:
        self.refresh_table()
        self._stack.setCurrentIndex(1 if self.as_table.isChecked() else 0)

    def _on_save_picture(self) -> None:
        name, _ = QFileDialog.getSaveFileName(
            self,
            self.tr("Save picture"),
            f"{_file_name(self.chart.title)}.png",
            self.tr("PNG picture (*.png);;SVG picture (*.svg)"),
        )
        if name.lower().endswith(".svg"):
            self.chart.save_svg(Path(name))
        elif name:
            self.chart.save_png(Path(name if name.lower().endswith(".png") else f"{name}.png"))

    def _on_save_data(self) -> None:
        name, _ = QFileDialog.getSaveFileName(
            self, self.tr("Save data"), f"{_file_name(self.chart.title)}.csv", self.tr("CSV file (*.csv)")
        )
        if name:
            self.chart.save_csv(Path(name))

    def _on_copy_data(self) -> None:
        QGuiApplication.clipboard().setText(self.chart.table().tabbed())


def _file_name(title: str) -> str:
    return "-".join("".join(c if c.isalnum() else " " for c in title.lower()).split()) or "picture"


def rule() -> QFrame:
    """Return a hairline."""
    line = QFrame()
    line.setObjectName("rule")
    return line


def chip_pixmap(theme: Theme, index: int, letter: str, ratio: float, size: float = 20) -> QPixmap:
    """Return a setup's chip as a picture, for menus and lists."""
    side = theme.px(size)
    pixmap = QPixmap(round(side * ratio), round(side * ratio))
    pixmap.setDevicePixelRatio(ratio)
    pixmap.fill(Qt.GlobalColor.transparent)
    painter = QPainter(pixmap)
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    chip(painter, theme, QRectF(0, 0, side, side), theme.chip(index), letter)
    painter.end()
    return pixmap
