"""Two figures at once: regions that hold the pair with the stated confidence."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from PySide6.QtCore import QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QPainter, QPainterPath, QPen, QPolygonF

from ridercda.app.colours import Chip
from ridercda.app.quantities import plain
from ridercda.app.theme import Theme, Type
from ridercda.app.widgets import drawing
from ridercda.app.widgets.chart import Chart, ChartTable, Mark
from ridercda.app.widgets.scale import Scale, decimals_of, padded, tick_step, ticks

FloatArray = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Region:
    """A region in the plane of two figures."""

    key: str
    name: str
    chip: Chip
    letter: str
    centre: tuple[float, float]
    outline: FloatArray  # shape (n, 2), closed


class EllipseChart(Chart):
    """Regions, the ones to compare on top of each other."""

    least = QSize(220, 150)

    def __init__(self, theme: Theme) -> None:
        super().__init__(theme)
        self._regions: tuple[Region, ...] = ()
        self._axes = ("", "")

    def show_regions(self, regions: tuple[Region, ...], across: str, up: str) -> None:
        """Show other regions; the axes are named with their units."""
        self._regions, self._axes = regions, (across, up)
        self.update()

    def table(self) -> ChartTable:
        """Return centre and extent of each region."""
        headers = (
            self.tr("Setup"),
            self._axes[0],
            self.tr("Low"),
            self.tr("High"),
            self._axes[1],
            self.tr("Low"),
            self.tr("High"),
        )
        rows = []
        for region in self._regions:
            low, high = region.outline.min(axis=0), region.outline.max(axis=0)
            cells = (region.centre[0], low[0], high[0], region.centre[1], low[1], high[1])
            rows.append((region.letter, *(f"{cell:.6g}" for cell in cells)))
        return ChartTable(headers, tuple(rows))

    def draw(self, painter: QPainter, area: QRectF) -> list[Mark]:
        """Draw axes, then regions."""
        theme, px = self.theme, self.theme.px
        if not self._regions:
            return []
        points = np.vstack([region.outline for region in self._regions])
        x_range, y_range = (
            padded(float(points[:, k].min()), float(points[:, k].max()), 0.06) for k in (0, 1)
        )
        top, bottom = area.top() + px(22), area.bottom() - px(42)
        y_count = max(2, int((bottom - top) / px(48)))
        y_ticks = ticks(*y_range, y_count)
        y_step = tick_step(*y_range, y_count)
        labels = [plain(tick, decimals_of(y_step)) for tick in y_ticks]
        gutter = max((drawing.width_of(theme.font(Type.AXIS), each) for each in labels), default=0)
        left, right = area.left() + gutter + px(14), area.right() - px(8)
        along, up = Scale(*x_range, left, right), Scale(*y_range, bottom, top)
        painter.setPen(QPen(theme.colour("axis"), px(1)))
        painter.drawPolyline(QPolygonF([QPointF(left, top), QPointF(left, bottom), QPointF(right, bottom)]))
        for tick, words in zip(y_ticks, labels, strict=True):
            drawing.label(painter, theme, left - px(8), up(tick), words, drawing.RIGHT)
            painter.setPen(QPen(theme.colour("axis"), px(1)))
            painter.drawLine(QPointF(left - px(4), up(tick)), QPointF(left, up(tick)))
        x_count = max(2, int((right - left) / px(72)))
        x_step = tick_step(*x_range, x_count)
        for tick in ticks(*x_range, x_count):
            painter.setPen(QPen(theme.colour("axis"), px(1)))
            painter.drawLine(QPointF(along(tick), bottom), QPointF(along(tick), bottom + px(4)))
            drawing.label(painter, theme, along(tick), bottom + px(14), plain(tick, decimals_of(x_step)))
        drawing.label(painter, theme, area.left(), area.top() + px(7), self._axes[1], drawing.LEFT)
        drawing.label(painter, theme, right, bottom + px(32), self._axes[0], drawing.RIGHT)
        return [self._draw_region(painter, region, along, up) for region in self._regions]

    def _draw_region(self, painter: QPainter, region: Region, along: Scale, up: Scale) -> Mark:
        theme, px = self.theme, self.theme.px
        path = QPainterPath()
        path.addPolygon(QPolygonF([QPointF(along(x), up(y)) for x, y in region.outline]))
        path.closeSubpath()
        ground = QColor(region.chip.fill)
        ground.setAlphaF(0.16)
        painter.fillPath(path, ground)
        if region.chip.hatched:
            ground.setAlphaF(0.35)
            drawing.hatch(painter, path, ground)
        painter.setPen(QPen(QColor(region.chip.fill), px(1.4)))
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.drawPath(path)
        centre = QPointF(along(region.centre[0]), up(region.centre[1]))
        side = px(16)
        rect = QRectF(centre.x() - side / 2, centre.y() - side / 2, side, side)
        drawing.chip(painter, theme, rect, region.chip, region.letter)
        return Mark(region.key, path.boundingRect(), region.name)


def ellipse(
    centre: tuple[float, float], covariance: FloatArray, radius: float, points: int = 96
) -> FloatArray:
    """Return the outline of {x: (x - centre)' covariance^-1 (x - centre) <= radius^2}, shape (points, 2)."""
    values, vectors = np.linalg.eigh(covariance)
    angle = np.linspace(0.0, 2 * np.pi, points)
    circle = np.stack([np.cos(angle), np.sin(angle)])
    axes = vectors * np.sqrt(np.maximum(values, 0.0))
    outline: FloatArray = np.asarray(centre) + radius * (axes @ circle).T
    return outline
