"""Small pieces that every picture is made of: text, chips, dots, rings, bands, hatches."""

from __future__ import annotations

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QFont, QFontMetricsF, QPainter, QPainterPath, QPen, QPolygonF

from ridercda.app.colours import Chip
from ridercda.app.theme import Theme, Type

LEFT = Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter
RIGHT = Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter
CENTRE = Qt.AlignmentFlag.AlignCenter


def text(
    painter: QPainter, rect: QRectF, words: str, font: QFont, colour: QColor, align: Qt.AlignmentFlag = LEFT
) -> None:
    """Write one line into a rectangle; what does not fit ends in an ellipsis."""
    painter.setFont(font)
    painter.setPen(colour)
    shown = QFontMetricsF(font).elidedText(words, Qt.TextElideMode.ElideRight, rect.width() + 0.5)
    painter.drawText(rect, int(align) | int(Qt.TextFlag.TextSingleLine), shown)


def label(
    painter: QPainter,
    theme: Theme,
    x: float,
    y: float,
    words: str,
    align: Qt.AlignmentFlag = CENTRE,
    *,
    role: str = "quiet",
    strong: bool = False,
) -> QRectF:
    """Write an axis label about a point: centred on it, or to its right (LEFT) or left (RIGHT)."""
    font = theme.font(Type.AXIS, strong=strong)
    metrics = QFontMetricsF(font)
    width, height = metrics.horizontalAdvance(words) + 2, metrics.height()
    left = x if align == LEFT else x - width if align == RIGHT else x - width / 2
    rect = QRectF(left, y - height / 2, width, height)
    text(painter, rect, words, font, theme.colour(role), align)
    return rect


def width_of(font: QFont, words: str) -> float:
    """Return how wide a line is."""
    return QFontMetricsF(font).horizontalAdvance(words)


def hatch(painter: QPainter, path: QPainterPath, colour: QColor, spacing: float = 6.0) -> None:
    """Lay thin slanted lines over a shape."""
    box = path.boundingRect()
    painter.save()
    painter.setClipPath(path, Qt.ClipOperation.IntersectClip)
    painter.setPen(QPen(colour, 1.2))
    x = box.left() - box.height()
    while x < box.right():
        painter.drawLine(QPointF(x, box.bottom()), QPointF(x + box.height(), box.top()))
        x += spacing
    painter.restore()


def chip(painter: QPainter, theme: Theme, rect: QRectF, look: Chip, letter: str) -> None:
    """Draw a setup's filled chip with its letter."""
    path = QPainterPath()
    radius = min(theme.px(4), rect.height() / 4)
    path.addRoundedRect(rect, radius, radius)
    painter.fillPath(path, QColor(look.fill))
    if look.hatched:
        edge = QColor(look.text)
        edge.setAlphaF(0.35)
        hatch(painter, path, edge, spacing=max(4.0, rect.height() / 4))
    if letter:
        font = theme.font(Type.AXIS, strong=True)
        font.setPixelSize(max(8, min(font.pixelSize(), round(rect.height() * 0.72))))
        if look.hatched:  # the letter keeps its contrast on plain ground
            width = min(rect.width(), width_of(font, letter) + theme.px(4))
            inner = QRectF(rect.center().x() - width / 2, rect.top(), width, rect.height())
            painter.save()
            painter.setClipPath(path, Qt.ClipOperation.IntersectClip)
            painter.fillRect(inner, QColor(look.fill))
            painter.restore()
        text(painter, rect, letter, font, QColor(look.text), CENTRE)


def dot(painter: QPainter, theme: Theme, centre: QPointF, look: Chip, size: float) -> None:
    """Draw an estimate: a filled circle, or a diamond for the second six setups."""
    painter.setPen(QPen(theme.colour("card"), theme.px(1.5)))
    painter.setBrush(QColor(look.fill))
    painter.drawPath(_mark(centre, look, size))


def ring(painter: QPainter, theme: Theme, centre: QPointF, look: Chip, size: float) -> None:
    """Draw a single run: a small open circle, or an open diamond for the second six setups."""
    painter.setPen(QPen(QColor(look.fill), theme.px(1.6)))
    painter.setBrush(theme.colour("card"))
    painter.drawPath(_mark(centre, look, size))


def cross(painter: QPainter, centre: QPointF, colour: QColor, size: float, width: float) -> None:
    """Draw something left out: a small cross."""
    painter.setPen(QPen(colour, width))
    half = size / 2
    painter.drawLine(centre + QPointF(-half, -half), centre + QPointF(half, half))
    painter.drawLine(centre + QPointF(-half, half), centre + QPointF(half, -half))


def _mark(centre: QPointF, look: Chip, size: float) -> QPainterPath:
    path = QPainterPath()
    if look.hatched:
        reach = size * 0.66
        corners = [centre + QPointF(*step) for step in ((0, -reach), (reach, 0), (0, reach), (-reach, 0))]
        path.addPolygon(QPolygonF(corners))
        path.closeSubpath()
    else:
        path.addEllipse(centre, size / 2, size / 2)
    return path


def band(painter: QPainter, theme: Theme, rect: QRectF, look: Chip) -> None:
    """Draw an interval: a pale pill with a line through its middle."""
    path = QPainterPath()
    radius = rect.height() / 2
    path.addRoundedRect(rect, min(radius, rect.width() / 2), radius)
    painter.fillPath(path, theme.band(look.fill))
    if look.hatched:
        hatch(painter, path, theme.band(look.fill, 0.45))
    painter.setPen(QPen(QColor(look.fill), theme.px(2)))
    middle = rect.center().y()
    painter.drawLine(QPointF(rect.left(), middle), QPointF(rect.right(), middle))


def focus_frame(painter: QPainter, theme: Theme, rect: QRectF) -> None:
    """Draw where the keyboard is."""
    painter.setPen(QPen(theme.colour("accent"), theme.px(1.5)))
    painter.setBrush(Qt.BrushStyle.NoBrush)
    painter.drawRoundedRect(rect, theme.px(4), theme.px(4))
