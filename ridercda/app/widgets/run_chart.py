"""Every run through the day: its own figure with an interval, in its setup's letter, beside its repeats."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import QPointF, QRectF, QSize
from PySide6.QtGui import QColor, QPainter, QPen

from ridercda.app.colours import Chip
from ridercda.app.figures import clock
from ridercda.app.quantities import plain
from ridercda.app.theme import Theme, Type
from ridercda.app.widgets import drawing
from ridercda.app.widgets.chart import Chart, ChartTable, Mark
from ridercda.app.widgets.scale import Scale, decimals_of, padded, tick_step, ticks, time_step


@dataclass(frozen=True, slots=True)
class RunDot:
    """One run's figure."""

    key: str
    name: str
    chip: Chip
    letter: str
    moment: float  # middle of the run, seconds of the day
    value: float
    interval: tuple[float, float]
    excluded: str = ""
    picked: bool = False
    tip: str = ""


@dataclass(frozen=True, slots=True)
class Level:
    """The level of a setup through the day, drawn pale behind its runs."""

    chip: Chip
    value: float


class RunChart(Chart):
    """Runs along the time of day."""

    least = QSize(280, 150)

    def __init__(self, theme: Theme) -> None:
        super().__init__(theme)
        self._dots: tuple[RunDot, ...] = ()
        self._levels: tuple[Level, ...] = ()
        self._axis = ""

    def show_runs(self, dots: tuple[RunDot, ...], levels: tuple[Level, ...], axis: str) -> None:
        """Show other figures; `axis` names what runs up the side, with its unit."""
        if (dots, levels, axis) != (self._dots, self._levels, self._axis):
            self._dots, self._levels, self._axis = dots, levels, axis
            self.update()

    def table(self) -> ChartTable:
        """Return a row per run."""
        headers = (
            self.tr("Run"),
            self.tr("Setup"),
            self.tr("Time of day"),
            self._axis,
            self.tr("Low"),
            self.tr("High"),
            self.tr("Left out because"),
        )
        rows = tuple(
            (
                d.name,
                d.letter,
                clock(d.moment),
                f"{d.value:.6g}",
                f"{d.interval[0]:.6g}",
                f"{d.interval[1]:.6g}",
                d.excluded,
            )
            for d in self._dots
        )
        return ChartTable(headers, rows)

    def draw(self, painter: QPainter, area: QRectF) -> list[Mark]:
        """Draw grid, levels, whiskers, then chips."""
        theme, px = self.theme, self.theme.px
        if not self._dots:
            return []
        ends = [end for dot in self._dots for end in dot.interval]
        low, high = padded(min(ends), max(ends), 0.06)
        top, bottom = area.top() + px(22), area.bottom() - px(26)
        count = max(2, int((bottom - top) / px(26)))
        step = tick_step(low, high, count)
        labels = [plain(tick, decimals_of(step)) for tick in ticks(low, high, count)]
        gutter = max((drawing.width_of(theme.font(Type.AXIS), each) for each in labels), default=0)
        left, right = area.left() + gutter + px(14), area.right() - px(8)
        up = Scale(low, high, bottom, top)
        moments = [dot.moment for dot in self._dots]
        reach = px(18)
        along = Scale(min(moments), max(max(moments), min(moments) + 60), left + reach, right - reach)
        for tick, words in zip(ticks(low, high, count), labels, strict=True):
            y = up(tick)
            painter.setPen(QPen(theme.colour("hairline"), px(1)))
            painter.drawLine(QPointF(left, y), QPointF(right, y))
            drawing.label(painter, theme, left - px(8), y, words, drawing.RIGHT)
        drawing.label(painter, theme, area.left(), area.top() + px(7), self._axis, drawing.LEFT)
        self._draw_hours(painter, along, bottom, left, right)
        for level in self._levels:
            painter.setPen(QPen(theme.band(level.chip.fill, 0.6), px(1.5)))
            painter.drawLine(QPointF(left, up(level.value)), QPointF(right, up(level.value)))
        return self._draw_dots(painter, along, up)

    def _draw_hours(self, painter: QPainter, along: Scale, bottom: float, left: float, right: float) -> None:
        px = self.theme.px
        start, end = along.back(left), along.back(right)
        step = time_step(end - start, max(2, int((right - left) / px(72))))
        tick = -(-start // step) * step
        while tick <= end:
            x = along(tick)
            painter.setPen(QPen(self.theme.colour("axis"), px(1)))
            painter.drawLine(QPointF(x, bottom + px(2)), QPointF(x, bottom + px(6)))
            if left + px(10) <= x <= right - px(6):
                drawing.label(painter, self.theme, x, bottom + px(16), clock(tick))
            tick += step

    def _draw_dots(self, painter: QPainter, along: Scale, up: Scale) -> list[Mark]:
        theme, px = self.theme, self.theme.px
        pitch = (along.last - along.first) / max(1, len(self._dots) - 1)
        size = max(px(8), min(px(18), pitch * 0.82))
        lettered = size >= px(13)
        marks = []
        for dot in self._dots:
            centre = QPointF(along(dot.moment), up(dot.value))
            colour = theme.colour("axis") if dot.excluded else QColor(dot.chip.fill)
            painter.setPen(QPen(colour, px(1.6)))
            painter.drawLine(
                QPointF(centre.x(), up(dot.interval[0])), QPointF(centre.x(), up(dot.interval[1]))
            )
            rect = QRectF(centre.x() - size / 2, centre.y() - size / 2, size, size)
            if dot.picked:
                drawing.focus_frame(painter, theme, rect.adjusted(-px(4), -px(4), px(4), px(4)))
            if dot.excluded:
                painter.setBrush(theme.colour("card"))
                painter.setPen(QPen(colour, px(1.2)))
                painter.drawEllipse(rect)
                drawing.cross(painter, centre, colour, size * 0.5, px(1.4))
            elif lettered:
                drawing.dot(painter, theme, centre, dot.chip, size + px(1))
                font = theme.font(Type.AXIS, strong=True)
                font.setPixelSize(round(size * 0.66))
                drawing.text(painter, rect, dot.letter, font, QColor(dot.chip.text), drawing.CENTRE)
            else:
                drawing.dot(painter, theme, centre, dot.chip, size)
            marks.append(Mark(dot.key, rect.adjusted(-px(4), -px(4), px(4), px(4)), dot.tip))
        return marks
