"""What every picture can do: be pointed at, walked by keyboard, saved as PNG, SVG or CSV, and read as a table."""

from __future__ import annotations

import csv
import io
from dataclasses import dataclass, field
from pathlib import Path

from PySide6.QtCore import QEvent, QPointF, QRectF, QSize, Qt, Signal
from PySide6.QtGui import (
    QFocusEvent,
    QGuiApplication,
    QHelpEvent,
    QImage,
    QImageWriter,
    QKeyEvent,
    QMouseEvent,
    QPainter,
    QPaintEvent,
)
from PySide6.QtSvg import QSvgGenerator
from PySide6.QtWidgets import QSizePolicy, QToolTip, QWidget

from ridercda.app.theme import Theme
from ridercda.app.widgets.drawing import focus_frame


@dataclass(frozen=True, slots=True)
class ChartTable:
    """The data behind a picture: what a screen reader reads and a CSV file holds."""

    headers: tuple[str, ...] = ()
    rows: tuple[tuple[str, ...], ...] = ()

    def csv(self) -> str:
        """Return the table as comma-separated text."""
        out = io.StringIO()
        writer = csv.writer(out, lineterminator="\n")
        writer.writerow(self.headers)
        writer.writerows(self.rows)
        return out.getvalue()

    def tabbed(self) -> str:
        """Return the table as tab-separated text, as spreadsheets paste it."""
        return "\n".join("\t".join(row) for row in (self.headers, *self.rows))


@dataclass(frozen=True, slots=True)
class Mark:
    """Something in a picture that can be pointed at or picked."""

    key: str
    rect: QRectF
    tip: str = ""


@dataclass(slots=True)
class _Keyboard:
    index: int = -1
    marks: list[Mark] = field(default_factory=list)


class Chart(QWidget):
    """A picture. Subclasses draw into a rectangle, so that screen, PNG and SVG are one drawing."""

    picked = Signal(str)  # key of the mark that was clicked or chosen by keyboard
    pointed = Signal(str)  # key of the mark under the pointer; empty for none
    title = ""
    least = QSize(240, 160)

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.theme = theme
        self._keys = _Keyboard()
        self._under = ""
        self.setMouseTracking(True)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Expanding)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        theme.changed.connect(self.update)

    # -- for subclasses ----------------------------------------------------------------------------------

    def draw(self, painter: QPainter, area: QRectF) -> list[Mark]:
        """Draw everything and return what can be pointed at."""
        raise NotImplementedError

    def table(self) -> ChartTable:
        """Return the data shown."""
        return ChartTable()

    # -- saving ------------------------------------------------------------------------------------------

    def save_png(self, path: Path, factor: float = 2.0) -> None:
        """Save as a PNG picture, `factor` times the size on screen."""
        image = QImage(self.size() * factor, QImage.Format.Format_ARGB32_Premultiplied)
        image.setDevicePixelRatio(factor)
        image.fill(self.theme.colour("card"))
        self._draw_on(image)
        writer = QImageWriter(str(path), b"png")
        if not writer.write(image):
            raise OSError(f"{path}: cannot be written: {writer.errorString()}")

    def save_svg(self, path: Path) -> None:
        """Save as an SVG picture."""
        generator = QSvgGenerator()
        generator.setFileName(str(path))
        generator.setSize(self.size())
        generator.setViewBox(self.rect())
        generator.setTitle(self.title)
        painter = QPainter()
        if not painter.begin(generator):
            raise OSError(f"{path}: cannot be written")
        painter.fillRect(self.rect(), self.theme.colour("card"))
        self.draw(painter, QRectF(self.rect()))
        painter.end()

    def save_csv(self, path: Path) -> None:
        """Save the data as CSV."""
        path.write_text(self.table().csv(), encoding="utf-8")

    def copy_picture(self) -> None:
        """Put the picture on the clipboard."""
        image = QImage(self.size() * 2, QImage.Format.Format_ARGB32_Premultiplied)
        image.setDevicePixelRatio(2.0)
        image.fill(self.theme.colour("card"))
        self._draw_on(image)
        QGuiApplication.clipboard().setImage(image)

    def _draw_on(self, image: QImage) -> None:
        painter = QPainter(image)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        self.draw(painter, QRectF(self.rect()))
        painter.end()

    # -- Qt ----------------------------------------------------------------------------------------------

    def sizeHint(self) -> QSize:
        """Ask for a little more than the least."""
        return self.minimumSizeHint()

    def minimumSizeHint(self) -> QSize:
        """Ask for enough to stay legible."""
        return QSize(self.theme.px(self.least.width()), self.theme.px(self.least.height()))

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw, and note what can be pointed at."""
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        self._keys.marks = self.draw(painter, QRectF(self.rect()))
        if self.hasFocus() and 0 <= self._keys.index < len(self._keys.marks):
            focus_frame(painter, self.theme, self._keys.marks[self._keys.index].rect)
        painter.end()

    def mark_at(self, where: QPointF) -> Mark | None:
        """Return the mark whose middle is nearest among those under a point."""
        hits = [mark for mark in self._keys.marks if mark.rect.contains(where)]
        return min(hits, key=lambda m: (m.rect.center() - where).manhattanLength(), default=None)

    def marks(self) -> tuple[Mark, ...]:
        """Return what can be pointed at in the last picture drawn."""
        return tuple(self._keys.marks)

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        """Tell which mark the pointer is on."""
        mark = self.mark_at(event.position())
        key = mark.key if mark else ""
        self.setCursor(Qt.CursorShape.PointingHandCursor if key else Qt.CursorShape.ArrowCursor)
        if key != self._under:
            self._under = key
            self.pointed.emit(key)

    def leaveEvent(self, event: QEvent) -> None:
        """Tell that the pointer is on no mark."""
        if self._under:
            self._under = ""
            self.pointed.emit("")

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Pick what is clicked."""
        if event.button() is Qt.MouseButton.LeftButton and (mark := self.mark_at(event.position())):
            self.picked.emit(mark.key)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Walk the marks with the arrows; Enter picks."""
        steps = {Qt.Key.Key_Right: 1, Qt.Key.Key_Down: 1, Qt.Key.Key_Left: -1, Qt.Key.Key_Up: -1}
        marks = self._keys.marks
        if marks and event.key() in steps:
            self._keys.index = (self._keys.index + steps[Qt.Key(event.key())]) % len(marks)
            self._tell()
            self.update()
        elif event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter, Qt.Key.Key_Space):
            if 0 <= self._keys.index < len(marks):
                self.picked.emit(marks[self._keys.index].key)
        else:
            super().keyPressEvent(event)

    def _tell(self) -> None:
        mark = self._keys.marks[self._keys.index]
        self.setAccessibleDescription(mark.tip)
        QToolTip.showText(self.mapToGlobal(mark.rect.bottomLeft().toPoint()), mark.tip, self)

    def focusInEvent(self, event: QFocusEvent) -> None:
        """Show where the keyboard is."""
        self.update()

    def focusOutEvent(self, event: QFocusEvent) -> None:
        """Hide where the keyboard was."""
        self.update()

    def event(self, event: QEvent) -> bool:
        """Answer tooltips from the marks."""
        if isinstance(event, QHelpEvent) and event.type() is QEvent.Type.ToolTip:
            mark = self.mark_at(QPointF(event.pos()))
            if mark and mark.tip:
                QToolTip.showText(event.globalPos(), mark.tip, self, mark.rect.toRect())
            else:
                QToolTip.hideText()
            return True
        return super().event(event)
