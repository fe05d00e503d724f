"""Differences with their intervals: a dot, a pale band, small rings for single runs, and a zero line."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QPainter, QPen

from ridercda.app.colours import Chip
from ridercda.app.quantities import plain
from ridercda.app.theme import Theme, Type
from ridercda.app.widgets import drawing
from ridercda.app.widgets.chart import Chart, ChartTable, Mark
from ridercda.app.widgets.scale import Scale, decimals_of, padded, tick_step, ticks


@dataclass(frozen=True, slots=True)
class IntervalRow:
    """One line of the chart."""

    key: str
    chip: Chip
    letter: str
    words: str  # beside the chip: what can be said
    value: float | None
    interval: tuple[float, float] | None
    singles: tuple[float, ...] = ()  # single runs
    tip: str = ""
    columns: tuple[str, ...] = ()  # texts set to the right, under `IntervalPicture.columns`
    picked: bool = False
    note: str = ""  # under the words, where there is room


@dataclass(frozen=True, slots=True)
class SecondAxis:
    """A second scale along the top: its value is `factor` times that of the first."""

    factor: float
    unit: str
    caption: str  # stands at its left end, e.g. "at 45 km/h"


@dataclass(frozen=True, slots=True)
class IntervalPicture:
    """Everything an interval chart shows."""

    rows: tuple[IntervalRow, ...] = ()
    axis: str = ""  # what runs along the bottom, with its unit
    second: SecondAxis | None = None
    columns: tuple[str, ...] = ()
    worthwhile: float | None = None  # half-width of the zone of no use about zero
    value_header: str = ""


class IntervalChart(Chart):
    """A row per setup about a zero line."""

    least = QSize(380, 120)

    def __init__(self, theme: Theme) -> None:
        super().__init__(theme)
        self._picture = IntervalPicture()

    def show_picture(self, picture: IntervalPicture) -> None:
        """Show other figures."""
        if picture != self._picture:
            self._picture = picture
            self.setMaximumHeight(self.theme.px(60 + max(3, len(picture.rows)) * 76))
            self.updateGeometry()
            self.update()

    def sizeHint(self) -> QSize:
        """Ask for a line per row, slim enough that a page seldom scrolls; what room there is gets used."""
        rows = max(2, len(self._picture.rows))
        return QSize(self.theme.px(560), self.theme.px(56 + rows * 34))

    def minimumSizeHint(self) -> QSize:
        """Ask for lines that still stand apart."""
        rows = max(2, len(self._picture.rows))
        return QSize(self.theme.px(self.least.width()), self.theme.px(56 + rows * 20))

    def table(self) -> ChartTable:
        """Return setup, words, difference and interval as rows."""
        picture = self._picture
        headers = (
            self.tr("Setup"),
            self.tr("Verdict"),
            picture.value_header or picture.axis,
            self.tr("Low"),
            self.tr("High"),
            *picture.columns,
        )
        rows = []
        for row in picture.rows:
            value = "" if row.value is None else f"{row.value:.6g}"
            low, high = ("", "") if row.interval is None else (f"{end:.6g}" for end in row.interval)
            rows.append((row.letter, row.words, value, low, high, *row.columns))
        return ChartTable(headers, tuple(rows))

    def draw(self, painter: QPainter, area: QRectF) -> list[Mark]:
        """Draw axes, then a line per row."""
        picture, px = self._picture, self.theme.px
        if not picture.rows:
            return []
        strong, small = self.theme.font(Type.TEXT, strong=True), self.theme.font(Type.AXIS)
        words_width = max(
            max(drawing.width_of(strong, row.words), min(drawing.width_of(small, row.note), px(190)))
            for row in picture.rows
        )
        column_width = px(84)
        axis_width = drawing.width_of(small, picture.axis) + px(44)  # stands left of the first tick
        left = area.left() + max(px(36) + min(words_width + px(24), area.width() * 0.32), axis_width)
        right = area.right() - px(24) - column_width * len(picture.columns)
        top = area.top() + (px(32) if picture.second or picture.columns else px(8))
        bottom = area.bottom() - px(24)
        low, high = self._range()
        across = Scale(low, high, left, right)
        pitch = (bottom - top) / len(picture.rows)
        for index, row in enumerate(picture.rows):
            if row.picked:
                ground = QRectF(area.left(), top + pitch * index + 1, area.width(), pitch - 2)
                painter.setPen(Qt.PenStyle.NoPen)
                painter.setBrush(self.theme.colour("hover"))
                painter.drawRoundedRect(ground, px(6), px(6))
        self._draw_axes(painter, across, top, bottom, area)
        marks = []
        for index, row in enumerate(picture.rows):
            middle = top + pitch * (index + 0.5)
            rect = QRectF(area.left(), middle - pitch / 2, area.width(), pitch)
            self._draw_row(painter, row, across, middle, pitch, area, left, right, column_width)
            marks.append(Mark(row.key, rect, row.tip))
        for place, header in enumerate(picture.columns):
            x = right + px(24) + column_width * (place + 0.5)
            drawing.label(painter, self.theme, x, area.top() + px(12), header)
        return marks

    def _range(self) -> tuple[float, float]:
        values = [0.0]
        for row in self._picture.rows:
            values += [v for v in (row.value, *(row.interval or ()), *row.singles) if v is not None]
        return padded(min(values), max(values))

    def _draw_axes(self, painter: QPainter, across: Scale, top: float, bottom: float, area: QRectF) -> None:
        picture, theme, px = self._picture, self.theme, self.theme.px
        count = max(2, int((across.last - across.first) / px(110)))
        step = tick_step(across.low, across.high, count)
        if picture.worthwhile:
            ends = (
                across(max(-picture.worthwhile, across.low)),
                across(min(picture.worthwhile, across.high)),
            )
            painter.fillRect(
                QRectF(ends[0], top, ends[1] - ends[0], bottom - top), theme.colour("hairline", 0.35)
            )
        for tick in ticks(across.low, across.high, count):
            x = across(tick)
            zero = abs(tick) < step / 1e6
            painter.setPen(QPen(theme.colour("axis" if zero else "hairline"), px(1.5) if zero else px(1)))
            painter.drawLine(QPointF(x, top), QPointF(x, bottom))
            words = "0" if zero else plain(tick, decimals_of(step), signed=True)
            drawing.label(painter, theme, x, bottom + px(12), words)
        drawing.label(painter, theme, area.left(), bottom + px(12), picture.axis, drawing.LEFT)
        if picture.second:
            second = picture.second
            low, high = sorted((across.low * second.factor, across.high * second.factor))
            step2 = tick_step(low, high, count)
            painter.setPen(QPen(theme.colour("axis"), px(1)))
            for tick in ticks(low, high, count):
                x = across(tick / second.factor)
                number = plain(tick, decimals_of(step2), signed=True) if abs(tick) > step2 / 1e6 else "0"
                painter.setPen(QPen(theme.colour("axis"), px(1)))
                painter.drawLine(QPointF(x, top - px(4)), QPointF(x, top))
                drawing.label(painter, theme, x, top - px(16), f"{number}\u00a0{second.unit}")
            drawing.label(painter, theme, area.left(), top - px(16), second.caption, drawing.LEFT)

    def _draw_row(
        self,
        painter: QPainter,
        row: IntervalRow,
        across: Scale,
        middle: float,
        pitch: float,
        area: QRectF,
        left: float,
        right: float,
        column_width: float,
    ) -> None:
        theme, px = self.theme, self.theme.px
        side = min(px(22), pitch * 0.8)
        lift = px(7) if pitch > px(44) else 0
        line = middle - lift
        chip_rect = QRectF(area.left() + px(4), line - side / 2, side, side)
        drawing.chip(painter, theme, chip_rect, row.chip, row.letter)
        words = QRectF(chip_rect.right() + px(10), line - px(12), left - chip_rect.right() - px(20), px(24))
        strong = theme.font(Type.TEXT, strong=True)
        drawing.text(painter, words, row.words, strong, theme.colour("ink"))
        if row.note and pitch > px(44):
            under = words.translated(0, px(18))
            drawing.text(painter, under, row.note, theme.font(Type.AXIS), theme.colour("quiet"))
        if row.interval:
            thick = min(px(18), pitch * 0.5)
            ends = [across(end) for end in row.interval]
            drawing.band(
                painter, theme, QRectF(ends[0], line - thick / 2, ends[1] - ends[0], thick), row.chip
            )
        if row.value is not None:
            drawing.dot(painter, theme, QPointF(across(row.value), line), row.chip, min(px(13), pitch * 0.42))
        if pitch > px(24):
            below = line + min(px(20), pitch * 0.4)
            for single in row.singles:
                drawing.ring(painter, theme, QPointF(across(single), below), row.chip, px(6.5))
        for place, words_ in enumerate(row.columns):
            x = right + px(24) + column_width * (place + 0.5)
            rect = QRectF(x - column_width / 2, line - px(12), column_width, px(24))
            drawing.text(painter, rect, words_, strong, theme.colour("ink"), drawing.CENTRE)
