"""Shares of a whole as bars."""

from __future__ import annotations

from PySide6.QtCore import QRectF, QSize
from PySide6.QtGui import QColor, QPainter, QPainterPath

from ridercda.app.colours import mixed
from ridercda.app.quantities import plain
from ridercda.app.theme import Theme
from ridercda.app.widgets import drawing
from ridercda.app.widgets.chart import Chart, ChartTable, Mark


class ShareChart(Chart):
    """A bar per share, with its name and percentage."""

    least = QSize(180, 60)

    def __init__(self, theme: Theme) -> None:
        super().__init__(theme)
        self._shares: tuple[tuple[str, float, str], ...] = ()

    def show_shares(self, shares: tuple[tuple[str, float, str], ...]) -> None:
        """Show other shares: name, share of one, and what it means."""
        if shares != self._shares:
            self._shares = shares
            self.updateGeometry()
            self.update()

    def sizeHint(self) -> QSize:
        """Ask for a line per share."""
        return QSize(self.theme.px(240), self.theme.px(4 + 22 * max(1, len(self._shares))))

    def minimumSizeHint(self) -> QSize:
        """Ask for a tight line per share."""
        return QSize(self.theme.px(self.least.width()), self.theme.px(4 + 20 * max(1, len(self._shares))))

    def table(self) -> ChartTable:
        """Return name and percentage."""
        rows = tuple((name, f"{100 * share:.1f}") for name, share, _ in self._shares)
        return ChartTable((self.tr("Cause"), self.tr("Share [%]")), rows)

    def draw(self, painter: QPainter, area: QRectF) -> list[Mark]:
        """Draw a bar per share."""
        if not self._shares:
            return []
        theme, px = self.theme, self.theme.px
        font, strong = theme.font(), theme.font(strong=True)
        names = min(max(drawing.width_of(font, name) for name, _, _ in self._shares), area.width() * 0.5)
        number = drawing.width_of(strong, "100\u00a0%")
        pitch = min(px(28), area.height() / len(self._shares))
        left, right = area.left() + names + px(12), area.right() - number - px(8)
        largest = max(share for _, share, _ in self._shares) or 1.0
        marks = []
        for index, (name, share, tip) in enumerate(self._shares):
            line = QRectF(area.left(), area.top() + index * pitch, area.width(), pitch)
            drawing.text(
                painter,
                QRectF(line.left(), line.top(), names + px(4), pitch),
                name,
                font,
                theme.colour("ink"),
            )
            thick = min(px(14), pitch * 0.55)
            width = max(px(2), (right - left) * share / largest)
            path = QPainterPath()
            path.addRoundedRect(QRectF(left, line.center().y() - thick / 2, width, thick), px(2), px(2))
            shade = mixed(theme.roles.accent, theme.roles.card, min(0.72, 0.24 * index))
            painter.fillPath(path, QColor(shade))
            words = f"{plain(100 * share, 0)}\u00a0%"
            rect = QRectF(right, line.top(), area.right() - right, pitch)
            drawing.text(painter, rect, words, font, theme.colour("quiet"), drawing.RIGHT)
            marks.append(Mark(name, line, tip))
        return marks
