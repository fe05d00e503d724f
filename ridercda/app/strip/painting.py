"""How the day strip is drawn: quiet traces, blocks in their setup's colour and letter, ticks, wind, clock."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPainterPath, QPen, QPolygonF

from ridercda.app.figures import clock, elapsed
from ridercda.app.quantities import plain
from ridercda.app.strip.picture import StripFault, StripPicture, StripRun, StripTrace
from ridercda.app.strip.view import Grip, StripView, block_extent
from ridercda.app.theme import Theme, Type
from ridercda.app.widgets import drawing
from ridercda.app.widgets.scale import time_step

FloatArray = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Bands:
    """Where the parts of the strip lie, top to bottom. [px]"""

    letters: QRectF
    traces: QRectF
    wind: QRectF
    faults: QRectF
    clock: QRectF
    map: QRectF
    gutter: float  # left of it stand the names of the lanes

    @classmethod
    def within(cls, theme: Theme, area: QRectF, names: tuple[str, ...], *, wind: bool, zoomed: bool) -> Bands:
        """Return the parts for an area."""
        px = theme.px
        gutter = (
            area.left()
            + px(12)
            + round(max(drawing.width_of(theme.font(Type.AXIS), name) for name in names) + px(10))
        )
        left, width = gutter, area.right() - px(10) - gutter
        foot = area.bottom() - px(4)
        map_height = px(8) if zoomed else 0
        map_rect = QRectF(left, foot - map_height, width, map_height)
        clock_rect = QRectF(left, map_rect.top() - px(18), width, px(18))
        faults = QRectF(left, clock_rect.top() - px(10), width, px(10))
        wind_height = px(16) if wind else 0
        wind_rect = QRectF(left, faults.top() - wind_height, width, wind_height)
        letters = QRectF(left, area.top() + px(10), width, px(18))
        traces = QRectF(left, letters.bottom() + px(2), width, wind_rect.top() - letters.bottom() - px(4))
        return cls(letters, traces, wind_rect, faults, clock_rect, map_rect, gutter)


def binned(along: FloatArray, values: FloatArray, view: StripView) -> tuple[FloatArray, FloatArray]:
    """Return places and means of what is seen, at most about two points a pixel; NaN breaks the line."""
    first = max(0, int(np.searchsorted(along, view.low)) - 1)
    last = min(along.size, int(np.searchsorted(along, view.high)) + 2)
    x, y = along[first:last], values[first:last]
    pixels = max(1, int(view.right - view.left))
    if x.size <= 2 * pixels:
        return x, y
    step = (view.high - view.low) / pixels
    bins = ((x - view.low) / step).astype(np.int64)
    starts = np.flatnonzero(np.concatenate([[True], np.diff(bins) != 0]))
    good = np.isfinite(y)
    sums = np.add.reduceat(np.where(good, y, 0.0), starts)
    counts = np.add.reduceat(good.astype(np.float64), starts)
    with np.errstate(invalid="ignore", divide="ignore"):
        return x[starts], np.where(counts > 0, sums / counts, np.nan)


def draw_traces(
    painter: QPainter, theme: Theme, picture: StripPicture, view: StripView, rect: QRectF
) -> None:
    """Draw power above and speed below, each over its own range."""
    for name, width in (("speed", 1.1), ("power", 1.2)):
        tops = [_top(getattr(trace, name)) for trace in picture.traces if getattr(trace, name) is not None]
        if not tops:
            continue
        lane = lanes(rect)[0 if name == "power" else 1]
        painter.setPen(QPen(theme.colour(name), theme.px(width)))
        for trace in picture.traces:
            _draw_trace(painter, trace, name, max(tops) * 1.05, view, lane)


def lanes(rect: QRectF) -> tuple[QRectF, QRectF]:
    """Return where power and speed are drawn."""
    split = rect.top() + 0.56 * rect.height()
    return (
        QRectF(rect.left(), rect.top(), rect.width(), split - rect.top()),
        QRectF(rect.left(), split + 2, rect.width(), rect.bottom() - split - 2),
    )


def _top(values: FloatArray) -> float:
    finite = values[np.isfinite(values)]
    return float(np.quantile(finite, 0.997)) if finite.size else 1.0


def _draw_trace(
    painter: QPainter, trace: StripTrace, name: str, top: float, view: StripView, rect: QRectF
) -> None:
    values = getattr(trace, name)
    if values is None or top <= 0:
        return
    along, means = binned(trace.along, values, view)
    x = view.left + (along - view.low) / (view.high - view.low) * (view.right - view.left)
    y = rect.bottom() - np.clip(means / top, 0.0, 1.0) * rect.height()
    good = np.isfinite(y)
    edges = np.flatnonzero(np.diff(np.concatenate([[0], good.astype(np.int8), [0]])))
    for start, end in zip(edges[::2], edges[1::2], strict=True):
        points = zip(x[start:end].tolist(), y[start:end].tolist(), strict=True)
        painter.drawPolyline(QPolygonF([QPointF(a, b) for a, b in points]))


def draw_ground(
    painter: QPainter, theme: Theme, picture: StripPicture, view: StripView, bands: Bands
) -> None:
    """Draw the pale ground of each block, under the traces."""
    for run in picture.runs:
        left, right = block_extent(view, run)
        if right < view.left or left > view.right:
            continue
        look = theme.chip(run.badge.index)
        rect = QRectF(
            left, bands.letters.bottom() - 4, right - left, bands.faults.top() - bands.letters.bottom() + 4
        )
        colour = theme.colour("hairline", 0.45) if run.excluded else theme.band(look.fill, 0.86)
        painter.fillRect(rect, colour)
        if look.hatched and not run.excluded:
            path = QPainterPath()
            path.addRect(rect)
            drawing.hatch(painter, path, theme.band(look.fill, 0.68), theme.px(8))
        for start, end in run.spans_out:
            path = QPainterPath()
            path.addRect(
                QRectF(view.x(start), rect.top(), max(2.0, view.x(end) - view.x(start)), rect.height())
            )
            drawing.hatch(painter, path, theme.colour("axis"), theme.px(5))


def draw_blocks(
    painter: QPainter, theme: Theme, picture: StripPicture, view: StripView, bands: Bands
) -> None:
    """Draw the heads of the blocks with their letters."""
    for run in picture.runs:
        left, right = block_extent(view, run)
        if right < view.left or left > view.right:
            continue
        left, right = max(left, view.left - 8), min(right, view.right + 8)  # the letter stays in sight
        gap = 0.5 if right - left > 4 else 0.0
        head = QRectF(left + gap, bands.letters.top(), right - left - 2 * gap, bands.letters.height())
        _draw_head(painter, theme, run, head)


def draw_proposals(
    painter: QPainter, theme: Theme, picture: StripPicture, view: StripView, bands: Bands
) -> None:
    """Draw dashed outlines of the runs that are only proposed."""
    painter.setPen(QPen(theme.colour("accent"), theme.px(1.2), Qt.PenStyle.DashLine))
    painter.setBrush(theme.colour("accent", 0.06))
    for run in picture.proposals:
        left, right = view.x(run.left), view.x(run.right)
        rect = QRectF(
            left + 1,
            bands.letters.top(),
            max(2.0, right - left - 2),
            bands.faults.top() - bands.letters.top(),
        )
        painter.drawRoundedRect(rect, theme.px(4), theme.px(4))


def _draw_head(painter: QPainter, theme: Theme, run: StripRun, head: QRectF) -> None:
    look = theme.chip(run.badge.index)
    font = theme.font(Type.AXIS, strong=True)
    fits = head.width() >= drawing.width_of(font, run.badge.letter) + theme.px(4)
    if not fits:
        font.setPixelSize(max(8, round(font.pixelSize() * 0.8)))
    letter = run.badge.letter if head.width() >= drawing.width_of(font, run.badge.letter) + 1 else ""
    if not run.excluded:
        drawing.chip(painter, theme, head, look, letter)
        return
    radius = min(theme.px(4), head.height() / 4)
    painter.setPen(QPen(theme.colour("axis"), theme.px(1), Qt.PenStyle.DashLine))
    painter.setBrush(theme.colour("card"))
    painter.drawRoundedRect(head.adjusted(0.5, 0.5, -0.5, -0.5), radius, radius)
    drawing.text(painter, head, letter, font, theme.colour("quiet"), drawing.CENTRE)
    if letter:
        width = drawing.width_of(font, letter) + theme.px(6)
        middle = head.center()
        painter.setPen(QPen(theme.colour("quiet"), theme.px(1.2)))
        painter.drawLine(
            QPointF(middle.x() - width / 2, middle.y()), QPointF(middle.x() + width / 2, middle.y())
        )


def draw_picked(
    painter: QPainter,
    theme: Theme,
    view: StripView,
    bands: Bands,
    run: StripRun,
    grip: Grip | None,
    *,
    focus: bool,
) -> None:
    """Draw the frame about a picked run, and the edge that the keyboard holds."""
    left, right = block_extent(view, run)
    rect = QRectF(
        left - 2, bands.letters.top() - 3, right - left + 4, bands.faults.top() - bands.letters.top() + 5
    )
    painter.setBrush(Qt.BrushStyle.NoBrush)
    painter.setPen(QPen(theme.colour("accent" if focus else "ink"), theme.px(1.8)))
    painter.drawRoundedRect(rect, theme.px(5), theme.px(5))
    if grip in (Grip.START, Grip.END):
        x = left if grip is Grip.START else right
        painter.setPen(
            QPen(theme.colour("accent"), theme.px(4), Qt.PenStyle.SolidLine, Qt.PenCapStyle.RoundCap)
        )
        painter.drawLine(QPointF(x, rect.top() + theme.px(4)), QPointF(x, rect.bottom() - theme.px(4)))


def draw_faults(
    painter: QPainter, theme: Theme, picture: StripPicture, view: StripView, rect: QRectF
) -> None:
    """Draw a tick per fault, its shape by kind."""
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(theme.colour("bad"))
    for fault in picture.faults:
        x = view.x(fault.along)
        if view.left - 4 <= x <= view.right + 4:
            painter.drawPath(fault_path(fault, QPointF(x, rect.center().y()), theme.px(7)))


def fault_path(fault: StripFault, centre: QPointF, size: float) -> QPainterPath:
    """Return the shape of a fault's tick."""
    path = QPainterPath()
    half = size / 2
    if fault.shape == "square":
        path.addRect(QRectF(centre.x() - half, centre.y() - half, size, size))
        return path
    if fault.shape == "disc":
        path.addEllipse(centre, half, half)
        return path
    corners = {
        "triangle": ((0, -half), (half, half), (-half, half)),
        "diamond": ((0, -half * 1.2), (half * 1.2, 0), (0, half * 1.2), (-half * 1.2, 0)),
    }[fault.shape]
    path.addPolygon(QPolygonF([centre + QPointF(*corner) for corner in corners]))
    path.closeSubpath()
    return path


def draw_wind(
    painter: QPainter, theme: Theme, picture: StripPicture, view: StripView, rect: QRectF, scale: float
) -> None:
    """Draw per run an arrow the way the wind blows, north up, and its speed where there is room."""
    font = theme.font(Type.AXIS)
    colour = theme.colour("quiet")
    for run in picture.runs:
        if run.wind_speed is None:
            continue
        left, right = block_extent(view, run)
        words = plain(run.wind_speed * scale, 1)
        width = drawing.width_of(font, words)
        size = theme.px(10)
        middle = QPointF((left + right) / 2, rect.center().y())
        wide = right - left >= width + size + theme.px(8)
        if right - left < size:
            continue
        if wide:
            middle.setX(middle.x() - (width + theme.px(4)) / 2)
        if run.wind_from is not None:
            _draw_arrow(painter, middle, run.wind_from + math.pi, size, QPen(colour, theme.px(1.3)))
        if wide:
            place = QRectF(middle.x() + size / 2 + theme.px(4), rect.top(), width + 2, rect.height())
            drawing.text(painter, place, words, font, colour)


def _draw_arrow(painter: QPainter, centre: QPointF, bearing: float, size: float, pen: QPen) -> None:
    painter.setPen(pen)
    along = QPointF(math.sin(bearing), -math.cos(bearing)) * (size / 2)
    side = QPointF(-along.y(), along.x()) * 0.6
    tip = centre + along
    painter.drawLine(centre - along, tip)
    painter.drawLine(tip, tip - along * 0.7 + side)
    painter.drawLine(tip, tip - along * 0.7 - side)


def draw_clock(painter: QPainter, theme: Theme, picture: StripPicture, view: StripView, rect: QRectF) -> None:
    """Draw the time of day along the foot, and where idle time is folded."""
    axis = picture.axis
    span = view.high - view.low
    step = time_step(span, max(2, int(rect.width() / theme.px(78))))
    painter.setPen(QPen(theme.colour("hairline"), theme.px(1)))
    painter.drawLine(QPointF(rect.left(), rect.top()), QPointF(rect.right(), rect.top()))
    last = -1e9
    tick = math.ceil(axis.day_at(view.low) / step) * step
    stop = axis.day_at(view.high)
    while tick <= stop:
        if not any(start < tick < end for start, end in axis.folds):
            x = view.x(axis.of_day(tick))
            painter.setPen(QPen(theme.colour("axis"), theme.px(1)))
            painter.drawLine(QPointF(x, rect.top()), QPointF(x, rect.top() + theme.px(4)))
            words = clock(tick, with_seconds=step < 60) if axis.dated else elapsed(tick)
            half = drawing.width_of(theme.font(Type.AXIS), words) / 2 + theme.px(6)
            if x - half > last and x + half < rect.right() + theme.px(10):
                drawing.label(painter, theme, x, rect.top() + theme.px(11), words)
                last = x + half
        tick += step
    for start, end in axis.folds:
        x = view.x(0.5 * (axis.of_day(start) + axis.of_day(end)))
        if rect.left() < x < rect.right():
            _draw_fold(painter, theme, x, rect)


def _draw_fold(painter: QPainter, theme: Theme, x: float, rect: QRectF) -> None:
    px = theme.px
    painter.fillRect(QRectF(x - px(3), rect.top() - px(3), px(6), px(6)), theme.colour("card"))
    painter.setPen(QPen(theme.colour("axis"), px(1.2)))
    for shift in (-3, 1):
        painter.drawLine(
            QPointF(x + px(shift), rect.top() + px(4)), QPointF(x + px(shift + 3), rect.top() - px(4))
        )


def draw_map(painter: QPainter, theme: Theme, picture: StripPicture, view: StripView, rect: QRectF) -> None:
    """Draw the whole day small, with the part that is seen."""
    whole = StripView(0.0, picture.axis.length, rect.left(), rect.right())
    painter.fillRect(QRectF(rect.left(), rect.center().y() - 1, rect.width(), 2), theme.colour("hairline"))
    for run in picture.runs:
        left, right = block_extent(whole, run)
        colour = theme.colour("axis") if run.excluded else QColor(theme.chip(run.badge.index).fill)
        painter.fillRect(QRectF(left, rect.center().y() - 2, max(1.0, right - left - 0.5), 4), colour)
    painter.setPen(QPen(theme.colour("ink"), theme.px(1.2)))
    painter.setBrush(Qt.BrushStyle.NoBrush)
    left, right = whole.x(view.low), whole.x(view.high)
    painter.drawRoundedRect(QRectF(left, rect.top(), right - left, rect.height()), 3, 3)
