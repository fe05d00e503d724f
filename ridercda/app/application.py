"""The application object: fonts, palette and style sheet, kept in step with the theme."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import QObject, QPointF, Qt, QTemporaryDir
from PySide6.QtGui import QImage, QPainter, QPen
from PySide6.QtWidgets import QApplication, QStyleFactory

from ridercda.app.plurals import EnglishPlurals
from ridercda.app.stylesheet import stylesheet
from ridercda.app.theme import Theme, load_fonts


def application() -> QApplication:
    """Return the one application, made if there is none."""
    existing = QApplication.instance()
    app = existing if isinstance(existing, QApplication) else QApplication(["RiderCdA"])
    app.setApplicationName("RiderCdA")
    app.setOrganizationName("RiderCdA")
    app.setStyle(QStyleFactory.create("Fusion"))
    load_fonts()
    app.installTranslator(EnglishPlurals(app))
    return app


class Dress(QObject):
    """Gives the application the theme's colours and fonts."""

    def __init__(self, app: QApplication, theme: Theme, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._app, self._theme = app, theme
        self._pictures = QTemporaryDir()
        theme.dressing.connect(self.apply)
        self.apply()

    def apply(self) -> None:
        """Put it on."""
        self._app.setFont(self._theme.font())
        self._app.setPalette(self._theme.palette())
        self._app.setStyleSheet(stylesheet(self._theme, self._arrow()))

    def _arrow(self) -> str:
        """Return the path of a picture of an arrow down, in the quiet colour."""
        name = "arrow-dark.png" if self._theme.is_dark else "arrow-light.png"
        path = Path(self._pictures.filePath(name))
        if not path.exists():
            image = QImage(24, 24, QImage.Format.Format_ARGB32_Premultiplied)
            image.fill(Qt.GlobalColor.transparent)
            painter = QPainter(image)
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            painter.setPen(QPen(self._theme.colour("quiet"), 2.5))
            painter.drawPolyline([QPointF(6, 9), QPointF(12, 15), QPointF(18, 9)])
            painter.end()
            image.save(str(path))
        return path.as_posix()
