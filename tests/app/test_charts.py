from __future__ import annotations

import csv
import io
import xml.etree.ElementTree as ET
from pathlib import Path

import numpy as np
import pytest
from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QImage
from PySide6.QtTest import QTest
from pytestqt.qtbot import QtBot

from ridercda.app.desk import Desk
from ridercda.app.pages import drag_view
from ridercda.app.pages.venue_view import VenueMap, map_tracks
from ridercda.app.theme import Mode
from ridercda.app.widgets.card import ChartCard
from ridercda.app.widgets.chart import Chart
from ridercda.app.widgets.ellipse_chart import EllipseChart, ellipse
from ridercda.app.widgets.interval_chart import IntervalChart
from ridercda.app.widgets.line_chart import Curve, LineChart
from ridercda.app.widgets.run_chart import RunChart
from ridercda.app.widgets.share_chart import ShareChart

KINDS = ("intervals", "runs", "regions", "shares", "speed", "lines", "map")


def chart_of(kind: str, day: Desk) -> Chart:
    estimate = day.solving.estimate
    assert estimate is not None
    if kind == "intervals":
        intervals = IntervalChart(day.theme)
        intervals.show_picture(drag_view.interval_picture(day, estimate, "s0"))
        return intervals
    if kind == "runs":
        runs = RunChart(day.theme)
        runs.show_runs(*drag_view.run_dots(day, estimate), "CdA [m²]")
        return runs
    if kind == "regions":
        regions = EllipseChart(day.theme)
        regions.show_regions(drag_view.regions(day, estimate), "CdA [m²]", "Crr")
        return regions
    if kind == "shares":
        shares = ShareChart(day.theme)
        shares.show_shares(drag_view.shares(estimate.differences[0]))
        return shares
    if kind == "speed":
        trend = drag_view.trend_chart(day.theme)
        drag_view.show_speed_trend(day, estimate, trend)
        return trend
    if kind == "lines":
        lines = LineChart(day.theme)
        x = np.linspace(0.0, 2400.0, 50)
        y = np.sin(x / 300.0)
        y[20] = np.nan
        lines.show_curves(
            (Curve("one", x, y, "#3d71c0", label="one"),), "Along [m]", "Up [m]", with_zero=True
        )
        return lines
    venue = VenueMap(day)
    venue.show_tracks(map_tracks(day))
    return venue


def rows_of(path: Path) -> list[list[str]]:
    return list(csv.reader(io.StringIO(path.read_text(encoding="utf-8"))))


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("mode", [Mode.LIGHT, Mode.DARK])
def test_every_picture_is_drawn_and_saved(
    kind: str, mode: Mode, day: Desk, qtbot: QtBot, tmp_path: Path
) -> None:
    day.theme.set_mode(mode)
    chart = chart_of(kind, day)
    qtbot.addWidget(chart)
    chart.resize(520, 300)
    chart.save_png(tmp_path / "picture.png")
    image = QImage(str(tmp_path / "picture.png"))
    assert image.size() == chart.size() * 2
    ground = image.pixelColor(2, 2)
    drawn = sum(
        image.pixelColor(x, y) != ground
        for x in range(0, image.width(), 3)
        for y in range(0, image.height(), 3)
    )
    assert drawn > 100  # of some 69,000 looked at: something is there
    chart.save_svg(tmp_path / "picture.svg")
    root = ET.parse(tmp_path / "picture.svg").getroot()
    shapes = [
        each for each in root.iter() if each.tag.rpartition("}")[2] in ("path", "polyline", "text", "rect")
    ]
    assert len(shapes) > 5
    chart.save_csv(tmp_path / "data.csv")
    rows = rows_of(tmp_path / "data.csv")
    assert len(rows) > 1
    assert all(len(row) == len(rows[0]) for row in rows)


def test_the_data_of_the_intervals_are_the_estimates(day: Desk, qtbot: QtBot, tmp_path: Path) -> None:
    chart = chart_of("intervals", day)
    qtbot.addWidget(chart)
    chart.save_csv(tmp_path / "data.csv")
    header, *rows = rows_of(tmp_path / "data.csv")
    assert header[:2] == ["Setup", "Verdict"]
    estimate = day.solving.estimate
    assert estimate is not None
    by_setup = {row[0]: row for row in rows}
    for difference in estimate.differences:
        letter = day.badges()[difference.setup].letter
        assert difference.cda is not None
        assert float(by_setup[letter][2]) == pytest.approx(difference.cda.value, rel=1e-5)
        assert float(by_setup[letter][3]) == pytest.approx(difference.cda.interval[0], rel=1e-5)


def test_the_table_beside_a_picture_reads_the_same(day: Desk, qtbot: QtBot) -> None:
    card = ChartCard(day.theme, "Differences", chart_of("intervals", day))
    qtbot.addWidget(card)
    card.as_table.setChecked(True)
    model = card._table.model()
    table = card.chart.table()
    assert model.rowCount() == len(table.rows)
    assert tuple(model.index(0, c).data() for c in range(model.columnCount())) == table.rows[0]
    assert card._stack.currentWidget() is card._table


def test_pictures_are_walked_by_keyboard_and_picked(day: Desk, qtbot: QtBot) -> None:
    chart = chart_of("runs", day)
    qtbot.addWidget(chart)
    chart.resize(520, 300)
    with qtbot.waitExposed(chart):
        chart.show()
    chart.repaint()
    assert len(chart.marks()) == 12
    QTest.keyClick(chart, Qt.Key.Key_Right)
    QTest.keyClick(chart, Qt.Key.Key_Right)
    assert "Run 2" in chart.accessibleDescription()
    with qtbot.waitSignal(chart.picked) as picked:
        QTest.keyClick(chart, Qt.Key.Key_Return)
    assert picked.args == ["2"]
    with qtbot.waitSignal(chart.picked) as picked:
        QTest.mouseClick(
            chart,
            Qt.MouseButton.LeftButton,
            Qt.KeyboardModifier.NoModifier,
            chart.marks()[6].rect.center().toPoint(),
        )
    assert picked.args == ["7"]


def test_labels_of_axes_stay_inside_the_picture(
    day: Desk, qtbot: QtBot, monkeypatch: pytest.MonkeyPatch
) -> None:
    from ridercda.app.widgets import drawing

    seen: list[QRectF] = []
    original = drawing.label

    def noted(*args: object, **kwargs: object) -> QRectF:
        rect = original(*args, **kwargs)  # type: ignore[arg-type]
        seen.append(rect)
        return rect

    monkeypatch.setattr(drawing, "label", noted)
    for kind in ("intervals", "runs", "regions", "speed", "lines"):
        seen.clear()
        chart = chart_of(kind, day)
        qtbot.addWidget(chart)
        chart.resize(chart.minimumSizeHint())
        chart.grab()
        assert seen, kind
        area = QRectF(chart.rect()).adjusted(-3, -3, 3, 3)
        outside = [rect for rect in seen if not area.contains(rect)]
        assert not outside, (kind, outside)


def test_an_ellipse_reaches_the_radius_along_its_axes() -> None:
    covariance = np.array([[4.0, 0.0], [0.0, 1.0]])
    outline = ellipse((1.0, 2.0), covariance, 3.0, points=721)
    assert outline[:, 0].max() == pytest.approx(1.0 + 6.0)
    assert outline[:, 1].min() == pytest.approx(2.0 - 3.0)
    inverse = np.linalg.inv(covariance)
    away = outline - np.array([1.0, 2.0])
    assert np.einsum("ij,jk,ik->i", away, inverse, away) == pytest.approx(9.0)


def test_the_joint_radius_is_that_of_fishers_f() -> None:
    from scipy.special import chdtri, fdtri

    for freedom in (3.0, 8.3, 60.0):
        expected = np.sqrt(2.0 * fdtri(2.0, freedom, 0.95))
        assert drag_view.joint_radius(freedom, 0.95) == pytest.approx(expected, rel=1e-9)
    assert drag_view.joint_radius(float("inf"), 0.95) == pytest.approx(np.sqrt(chdtri(2.0, 0.05)), rel=1e-9)


def test_watts_are_those_at_the_power_meter(day: Desk) -> None:
    estimate = day.solving.estimate
    assert estimate is not None
    assert estimate.air_density is not None
    assert estimate.reference_speed is not None
    # Closed form, Martin et al. 1998: half rho v^3 per square metre, over the efficiency of the drivetrain.
    expected = 0.5 * estimate.air_density * estimate.reference_speed**3 / 0.977
    assert drag_view.watts_per_area(day.session, estimate) == pytest.approx(expected, rel=1e-9)
