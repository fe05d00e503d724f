"""The venue drawn from the track: runs in their setups' colours, the moment pointed at, a scale bar and north."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from PySide6.QtCore import QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QMouseEvent, QPainter, QPen, QPolygonF

from ridercda.app.desk import Desk
from ridercda.app.letters import Badge
from ridercda.app.widgets import drawing
from ridercda.app.widgets.chart import Chart, ChartTable, Mark
from ridercda.app.widgets.scale import step_for
from ridercda.physics.local_plane import LocalPlane
from ridercda.units import Kind

FloatArray = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Track:
    """A ride's or a run's way on the plane."""

    ride: str
    run: str  # empty for what lies between runs
    badge: Badge | None
    picked: bool
    time: FloatArray
    east: FloatArray
    north: FloatArray


def map_tracks(desk: Desk) -> tuple[Track, ...]:
    """Return the tracks of the rides that have positions, runs last."""
    rides = {key: ride for key, ride in desk.shelf.rides().items() if ride.has("latitude", "longitude")}
    if not rides:
        return ()
    first = next(iter(rides.values()))
    plane = LocalPlane(
        float(np.nanmedian(first.channels["latitude"])), float(np.nanmedian(first.channels["longitude"]))
    )
    badges = desk.badges()
    ways, runs = [], []
    for key, ride in rides.items():
        east, north = plane.project(ride.channels["latitude"], ride.channels["longitude"])
        ways.append(Track(key, "", None, False, ride.time, east, north))
        for run in desk.session.runs:
            if run.ride == key and not run.excluded:
                end = run.end if run.end is not None else float(ride.time[-1])
                inside = slice(int(ride.time.searchsorted(run.start)), int(ride.time.searchsorted(end)) + 1)
                picked = run.id in desk.selection.runs
                runs.append(
                    Track(
                        key, run.id, badges[run.setup], picked, ride.time[inside], east[inside], north[inside]
                    )
                )
    return (*ways, *sorted(runs, key=lambda track: track.picked))


class VenueMap(Chart):
    """A plan view; pointing at it points at the moment everywhere."""

    least = QSize(220, 200)

    def __init__(self, desk: Desk) -> None:
        super().__init__(desk.theme)
        self._desk = desk
        self._tracks: tuple[Track, ...] = ()
        self._frame: tuple[float, float, float, QPointF] | None = (
            None  # east, north of the middle, px per metre
        )
        desk.selection.moment_changed.connect(self.update)

    def show_tracks(self, tracks: tuple[Track, ...]) -> None:
        """Show other tracks."""
        self._tracks = tracks
        self.update()

    def table(self) -> ChartTable:
        """Return the runs' ways, one point every ten records."""
        rows = []
        for track in self._tracks:
            if track.run:
                for time, east, north in zip(
                    track.time[::10], track.east[::10], track.north[::10], strict=True
                ):
                    rows.append((track.run, f"{time:.1f}", f"{east:.1f}", f"{north:.1f}"))
        return ChartTable(
            (self.tr("Run"), self.tr("Time [s]"), self.tr("East [m]"), self.tr("North [m]")), tuple(rows)
        )

    def draw(self, painter: QPainter, area: QRectF) -> list[Mark]:
        """Draw ways, runs, the moment, scale and north."""
        theme, px = self.theme, self.theme.px
        good = [track for track in self._tracks if np.isfinite(track.east).any()]
        if not good:
            words = self.tr("These rides have no positions")
            drawing.text(painter, area, words, theme.font(), theme.colour("quiet"), drawing.CENTRE)
            return []
        shown = [track for track in good if track.run] or good
        east = np.concatenate([track.east for track in shown])
        north = np.concatenate([track.north for track in shown])
        low, high = (np.array([f(east), f(north)]) for f in (np.nanmin, np.nanmax))
        room = area.adjusted(px(12), px(12), -px(12), -px(36))
        factor = float(
            min(room.width() / max(high[0] - low[0], 1.0), room.height() / max(high[1] - low[1], 1.0))
        )
        middle = 0.5 * (low + high)
        self._frame = (float(middle[0]), float(middle[1]), factor, room.center())
        painter.save()
        painter.setClipRect(area)
        for track in good:
            self._draw_track(painter, track)
        painter.restore()
        self._draw_moment(painter)
        self._draw_scale(painter, area, factor)
        return []

    def _at(self, east: float, north: float) -> QPointF:
        middle_east, middle_north, factor, centre = self._frame or (0.0, 0.0, 1.0, QPointF())
        return QPointF(
            centre.x() + (east - middle_east) * factor, centre.y() - (north - middle_north) * factor
        )

    def _draw_track(self, painter: QPainter, track: Track) -> None:
        px = self.theme.px
        if track.badge is None:
            pen = QPen(self.theme.colour("hairline"), px(6))
        else:
            colour = QColor(self.theme.chip(track.badge.index).fill)
            colour.setAlphaF(1.0 if track.picked else 0.45)
            pen = QPen(colour, px(2.4) if track.picked else px(1.4))
        pen.setJoinStyle(Qt.PenJoinStyle.RoundJoin)
        pen.setCapStyle(Qt.PenCapStyle.RoundCap)
        painter.setPen(pen)
        every = max(1, track.east.size // 1500)
        points = [
            self._at(e, n)
            for e, n in zip(track.east[::every].tolist(), track.north[::every].tolist(), strict=True)
            if math.isfinite(e) and math.isfinite(n)
        ]
        painter.drawPolyline(QPolygonF(points))

    def _draw_moment(self, painter: QPainter) -> None:
        moment = self._desk.selection.moment
        if moment is None:
            return
        track = next((t for t in self._tracks if t.ride == moment[0] and not t.run), None)
        if track is None or not track.time.size:
            return
        index = min(int(track.time.searchsorted(moment[1])), track.time.size - 1)
        east, north = float(track.east[index]), float(track.north[index])
        if math.isfinite(east) and math.isfinite(north):
            painter.setPen(QPen(self.theme.colour("card"), self.theme.px(2)))
            painter.setBrush(self.theme.colour("accent"))
            painter.drawEllipse(self._at(east, north), self.theme.px(6), self.theme.px(6))

    def _draw_scale(self, painter: QPainter, area: QRectF, factor: float) -> None:
        theme, px = self.theme, self.theme.px
        units = self._desk.units
        per_unit = units.scale(Kind.HEIGHT)
        length = step_for(px(130) / factor * per_unit, 1)
        length = length if length / per_unit * factor <= px(150) else step_for(px(60) / factor * per_unit, 1)
        width = length / per_unit * factor
        y = area.bottom() - px(10)
        left = area.left() + px(6)
        painter.setPen(QPen(theme.colour("axis"), px(1.5)))
        painter.drawLine(QPointF(left, y), QPointF(left + width, y))
        for x in (left, left + width):
            painter.drawLine(QPointF(x, y - px(4)), QPointF(x, y))
        drawing.label(
            painter,
            theme,
            left + width + px(8),
            y - px(2),
            f"{length:g} {units.symbol(Kind.HEIGHT)}",
            drawing.LEFT,
        )
        tip = QPointF(area.right() - px(12), area.bottom() - px(26))
        painter.setPen(QPen(theme.colour("axis"), px(1.5)))
        painter.drawLine(tip, tip + QPointF(0, px(20)))
        painter.drawLine(tip, tip + QPointF(-px(4), px(6)))
        painter.drawLine(tip, tip + QPointF(px(4), px(6)))
        drawing.label(painter, theme, tip.x() - px(10), tip.y() + px(12), self.tr("N"), drawing.RIGHT)

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        """Point at the moment nearest to the pointer, of the picked run if it is near."""
        if self._frame is None:
            return
        best = None
        for track in self._tracks:
            if not track.run and any(each.run for each in self._tracks):
                continue
            east, north, factor, centre = self._frame
            x = centre.x() + (track.east - east) * factor - event.position().x()
            y = centre.y() - (track.north - north) * factor - event.position().y()
            away = np.hypot(x, y) - (6.0 if track.picked else 0.0)
            if np.isfinite(away).any():
                index = int(np.nanargmin(away))
                if best is None or away[index] < best[0]:
                    best = (float(away[index]), track.ride, float(track.time[index]))
        if best is not None and best[0] < self.theme.px(24):
            self._desk.selection.point_at(best[1], best[2])
        else:
            self._desk.selection.point_away()
