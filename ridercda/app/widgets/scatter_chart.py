"""Single runs against something else, about a zero line."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import QPointF, QRectF, QSize
from PySide6.QtGui import QColor, QPainter, QPen

from ridercda.app.colours import Chip
from ridercda.app.quantities import plain
from ridercda.app.theme import Theme, Type
from ridercda.app.widgets import drawing
from ridercda.app.widgets.chart import Chart, ChartTable, Mark
from ridercda.app.widgets.scale import Scale, decimals_of, padded, tick_step, ticks


@dataclass(frozen=True, slots=True)
class Point:
    """One run."""

    key: str
    chip: Chip
    letter: str
    x: float
    y: float
    picked: bool
    tip: str


class ScatterChart(Chart):
    """Points; what their intervals have in common would hide how they differ, so none is drawn."""

    least = QSize(220, 150)

    def __init__(self, theme: Theme) -> None:
        super().__init__(theme)
        self._points: tuple[Point, ...] = ()
        self._axes = ("", "")

    def show_points(self, points: tuple[Point, ...], across: str, up: str) -> None:
        """Show other points; the axes are named with their units."""
        if (points, (across, up)) != (self._points, self._axes):
            self._points, self._axes = points, (across, up)
            self.update()

    def table(self) -> ChartTable:
        """Return a row per run."""
        rows = tuple((p.key, p.letter, f"{p.x:.6g}", f"{p.y:.6g}") for p in self._points)
        return ChartTable((self.tr("Run"), self.tr("Setup"), *self._axes), rows)

    def draw(self, painter: QPainter, area: QRectF) -> list[Mark]:
        """Draw grid, zero line, whiskers and chips."""
        theme, px = self.theme, self.theme.px
        if not self._points:
            drawing.text(
                painter,
                area,
                self.tr("Not known for these runs"),
                theme.font(),
                theme.colour("quiet"),
                drawing.CENTRE,
            )
            return []
        heights = [0.0, *(p.y for p in self._points)]
        low, high = padded(min(heights), max(heights), 0.15)
        x_low, x_high = padded(min(p.x for p in self._points), max(p.x for p in self._points))
        top, bottom = area.top() + px(22), area.bottom() - px(42)
        count = max(2, int((bottom - top) / px(44)))
        step = tick_step(low, high, count)
        y_ticks = ticks(low, high, count)
        names = [
            plain(tick, decimals_of(step), signed=True) if abs(tick) > step / 1e6 else "0" for tick in y_ticks
        ]
        gutter = max((drawing.width_of(theme.font(Type.AXIS), name) for name in names), default=0)
        left, right = area.left() + gutter + px(14), area.right() - px(8)
        along, up = Scale(x_low, x_high, left, right), Scale(low, high, bottom, top)
        for tick, name in zip(y_ticks, names, strict=True):
            painter.setPen(QPen(theme.colour("axis" if name == "0" else "hairline"), px(1)))
            painter.drawLine(QPointF(left, up(tick)), QPointF(right, up(tick)))
            drawing.label(painter, theme, left - px(8), up(tick), name, drawing.RIGHT)
        x_count = max(2, int((right - left) / px(72)))
        x_step = tick_step(x_low, x_high, x_count)
        for tick in ticks(x_low, x_high, x_count):
            painter.setPen(QPen(theme.colour("axis"), px(1)))
            painter.drawLine(QPointF(along(tick), bottom), QPointF(along(tick), bottom + px(4)))
            drawing.label(painter, theme, along(tick), bottom + px(14), plain(tick, decimals_of(x_step)))
        drawing.label(painter, theme, area.left(), area.top() + px(7), self._axes[1], drawing.LEFT)
        drawing.label(painter, theme, right, bottom + px(32), self._axes[0], drawing.RIGHT)
        return [self._draw_point(painter, point, along, up) for point in self._points]

    def _draw_point(self, painter: QPainter, point: Point, along: Scale, up: Scale) -> Mark:
        theme, px = self.theme, self.theme.px
        size = px(15)
        centre = QPointF(along(point.x), up(point.y))
        rect = QRectF(centre.x() - size / 2, centre.y() - size / 2, size, size)
        if point.picked:
            drawing.focus_frame(painter, theme, rect.adjusted(-px(4), -px(4), px(4), px(4)))
        drawing.dot(painter, theme, centre, point.chip, size + px(1))
        font = theme.font(Type.AXIS, strong=True)
        font.setPixelSize(round(size * 0.66))
        drawing.text(painter, rect, point.letter, font, QColor(point.chip.text), drawing.CENTRE)
        return Mark(point.key, rect.adjusted(-px(4), -px(4), px(4), px(4)), point.tip)
