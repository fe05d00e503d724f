"""Curves over one axis, with bands, a zero line, direct labels and a moment that can be pointed at."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from PySide6.QtCore import QPointF, QRectF, QSize, Qt, Signal
from PySide6.QtGui import QColor, QMouseEvent, QPainter, QPen, QPolygonF

from ridercda.app.quantities import plain
from ridercda.app.theme import Theme, Type
from ridercda.app.widgets import drawing
from ridercda.app.widgets.chart import Chart, ChartTable, Mark
from ridercda.app.widgets.scale import Scale, decimals_of, padded, tick_step, ticks

FloatArray = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Curve:
    """One line; NaN breaks it."""

    key: str
    x: FloatArray
    y: FloatArray
    colour: str
    width: float = 1.4
    label: str = ""  # set at its right end
    low: FloatArray | None = None  # band
    high: FloatArray | None = None
    dots: bool = False  # single points instead of a line
    tip: str = ""


class LineChart(Chart):
    """Curves over a common axis."""

    hovered = Signal(float)  # value of the axis under the pointer; NaN when it leaves
    least = QSize(260, 110)

    def __init__(self, theme: Theme) -> None:
        super().__init__(theme)
        self._curves: tuple[Curve, ...] = ()
        self._axes = ("", "")
        self._pointer: float | None = None
        self._scale: Scale | None = None
        self._with_zero = False
        self._empty = ""

    def set_empty_text(self, words: str) -> None:
        """Say what stands in the picture while there is nothing to draw."""
        self._empty = words
        self.update()

    def show_curves(
        self, curves: tuple[Curve, ...], across: str, up: str, *, with_zero: bool = False
    ) -> None:
        """Show other curves; the axes are named with their units; `with_zero` draws the zero line."""
        self._curves, self._axes, self._with_zero = curves, (across, up), with_zero
        self.update()

    def point_at(self, x: float | None) -> None:
        """Show where on the axis something is pointed at."""
        if x != self._pointer:
            self._pointer = x
            self.update()

    def table(self) -> ChartTable:
        """Return every curve's points one below the other."""
        rows = []
        for curve in self._curves:
            name = curve.label or curve.key
            rows += [
                (name, f"{x:.6g}", f"{y:.6g}")
                for x, y in zip(curve.x, curve.y, strict=True)
                if np.isfinite(y)
            ]
        return ChartTable((self.tr("Line"), *self._axes), tuple(rows))

    def _ranges(self) -> tuple[tuple[float, float], tuple[float, float]]:
        xs = np.concatenate([c.x for c in self._curves])
        ys = np.concatenate([a for c in self._curves for a in (c.y, c.low, c.high) if a is not None])
        xs, ys = xs[np.isfinite(xs)], ys[np.isfinite(ys)]
        if not xs.size or not ys.size:
            return (0.0, 1.0), (0.0, 1.0)
        low, high = float(ys.min()), float(ys.max())
        if self._with_zero:
            low, high = min(low, 0.0), max(high, 0.0)
        return (float(xs.min()), float(xs.max())), padded(low, high, 0.06)

    def draw(self, painter: QPainter, area: QRectF) -> list[Mark]:
        """Draw grid, bands, lines, labels."""
        theme, px = self.theme, self.theme.px
        if not self._curves:
            drawing.text(painter, area, self._empty, theme.font(), theme.colour("quiet"), drawing.CENTRE)
            return []
        (x_low, x_high), (low, high) = self._ranges()
        top, bottom = area.top() + px(22), area.bottom() - px(40)
        count = max(2, int((bottom - top) / px(28)))
        step = tick_step(low, high, count)
        y_ticks = ticks(low, high, count)
        names = [plain(tick, decimals_of(step)) for tick in y_ticks]
        axis_font = theme.font(Type.AXIS)
        gutter = max((drawing.width_of(axis_font, name) for name in names), default=0)
        labels = max((drawing.width_of(axis_font, c.label) for c in self._curves if c.label), default=0)
        left = area.left() + gutter + px(12)
        right = area.right() - px(8) - (labels + px(8) if labels else 0)
        along, up = Scale(x_low, x_high, left, right), Scale(low, high, bottom, top)
        self._scale = along
        for tick, name in zip(y_ticks, names, strict=True):
            zero = self._with_zero and abs(tick) < step / 1e6
            painter.setPen(QPen(theme.colour("axis" if zero else "hairline"), px(1)))
            painter.drawLine(QPointF(left, up(tick)), QPointF(right, up(tick)))
            drawing.label(painter, theme, left - px(8), up(tick), name, drawing.RIGHT)
        x_count = max(2, int((right - left) / px(84)))
        x_step = tick_step(x_low, x_high, x_count)
        for tick in ticks(x_low, x_high, x_count):
            painter.setPen(QPen(theme.colour("axis"), px(1)))
            painter.drawLine(QPointF(along(tick), bottom), QPointF(along(tick), bottom + px(4)))
            drawing.label(painter, theme, along(tick), bottom + px(14), plain(tick, decimals_of(x_step)))
        drawing.label(painter, theme, area.left(), area.top() + px(7), self._axes[1], drawing.LEFT)
        drawing.label(painter, theme, right, bottom + px(30), self._axes[0], drawing.RIGHT)
        painter.save()
        painter.setClipRect(QRectF(left, top - px(4), right - left + px(2), bottom - top + px(8)))
        for curve in self._curves:
            self._draw_curve(painter, curve, along, up)
        if self._pointer is not None and x_low <= self._pointer <= x_high:
            painter.setPen(QPen(theme.colour("accent"), px(1)))
            painter.drawLine(QPointF(along(self._pointer), top), QPointF(along(self._pointer), bottom))
        painter.restore()
        return self._draw_labels(painter, up, right)

    def _draw_curve(self, painter: QPainter, curve: Curve, along: Scale, up: Scale) -> None:
        x = along.first + (curve.x - along.low) / ((along.high - along.low) or 1.0) * (
            along.last - along.first
        )
        to_y = (up.last - up.first) / ((up.high - up.low) or 1.0)
        if curve.low is not None and curve.high is not None:
            lows, highs = (up.first + (edge - up.low) * to_y for edge in (curve.low, curve.high))
            outline = [QPointF(a, b) for a, b in zip(x, lows, strict=True) if np.isfinite(b)]
            outline += [QPointF(a, b) for a, b in zip(x[::-1], highs[::-1], strict=True) if np.isfinite(b)]
            painter.setPen(Qt.PenStyle.NoPen)
            ground = QColor(curve.colour)
            ground.setAlphaF(0.18)
            painter.setBrush(ground)
            painter.drawPolygon(QPolygonF(outline))
        y = up.first + (curve.y - up.low) * to_y
        if curve.dots:
            size = self.theme.px(curve.width * 2)
            painter.setPen(Qt.PenStyle.NoPen)
            ground = QColor(curve.colour)
            ground.setAlphaF(0.7)
            painter.setBrush(ground)
            for a, b in zip(x, y, strict=True):
                if np.isfinite(b):
                    painter.drawEllipse(QPointF(a, b), size / 2, size / 2)
            return
        painter.setPen(QPen(QColor(curve.colour), self.theme.px(curve.width)))
        good = np.isfinite(x) & np.isfinite(y)
        edges = np.flatnonzero(np.diff(np.concatenate([[0], good.astype(np.int8), [0]])))
        for start, end in zip(edges[::2], edges[1::2], strict=True):
            painter.drawPolyline(
                QPolygonF([QPointF(a, b) for a, b in zip(x[start:end], y[start:end], strict=True)])
            )

    def _draw_labels(self, painter: QPainter, up: Scale, right: float) -> list[Mark]:
        ends = []
        for curve in self._curves:
            finite = curve.y[np.isfinite(curve.y)]
            if curve.label and finite.size:
                ends.append((up(float(finite[-1])), curve))
        ends.sort(key=lambda end: end[0])
        marks, above = [], -1e9
        for y, curve in ends:
            place = max(y, above + self.theme.px(15))
            above = place
            font = self.theme.font(Type.AXIS, strong=True)
            rect = QRectF(
                right + self.theme.px(8),
                place - self.theme.px(8),
                drawing.width_of(font, curve.label) + 2,
                self.theme.px(16),
            )
            drawing.text(painter, rect, curve.label, font, QColor(curve.colour))
            marks.append(Mark(curve.key, rect, curve.tip))
        return marks

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        """Tell where on the axis the pointer is."""
        super().mouseMoveEvent(event)
        if self._scale is not None:
            self.hovered.emit(self._scale.back(event.position().x()))

    def leaveEvent(self, event: object) -> None:
        """Tell that the pointer has left."""
        super().leaveEvent(event)  # type: ignore[arg-type]
        self.hovered.emit(float("nan"))
