"""The one theme: colours by role, type scale, spacing, letter chips; light, dark or as the system has it."""

from __future__ import annotations

from enum import Enum, StrEnum
from importlib.resources import as_file, files

from PySide6.QtCore import QObject, Qt, Signal
from PySide6.QtGui import QColor, QFont, QFontDatabase, QFontInfo, QGuiApplication, QPalette

from ridercda.app.colours import DARK, DARK_CHIPS, LIGHT, LIGHT_CHIPS, Chip, Roles, mixed

FAMILY = "Source Sans Pro"
FONT_FILES = ("SourceSansPro-Regular.ttf", "SourceSansPro-Semibold.ttf")
ZOOMS = (1.0, 1.1, 1.25, 1.5, 1.75)
_TABULAR = "tnum"


class Mode(StrEnum):
    """Which of the two sets of colours is shown."""

    SYSTEM = "system"
    LIGHT = "light"
    DARK = "dark"


class Type(Enum):
    """The type scale, as a share of the text size."""

    SENTENCE = 1.46
    PAGE = 1.15
    TEXT = 1.0
    AXIS = 0.88


def load_fonts() -> None:
    """Make the family that ships with the program known to Qt; without it the system's sans serves."""
    for name in FONT_FILES:
        with as_file(files("ridercda.app") / "fonts" / name) as path:
            QFontDatabase.addApplicationFont(str(path))


class Theme(QObject):
    """Colours, fonts and sizes now in force; views ask it when they paint, so a change needs no rebuilding."""

    dressing = Signal()  # the application's own look changes first, because that drops the fonts of its parts
    changed = Signal()

    def __init__(self, mode: Mode = Mode.SYSTEM, zoom: float = 1.0, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._mode = mode
        self._zoom = zoom
        self._fonts: dict[tuple[Type, bool, float], QFont] = {}
        self._system_size = float(
            QFontInfo(QFontDatabase.systemFont(QFontDatabase.SystemFont.GeneralFont)).pixelSize()
        )
        self._roles = DARK if self.is_dark else LIGHT
        QGuiApplication.styleHints().colorSchemeChanged.connect(self._on_system_scheme_changed)

    @property
    def mode(self) -> Mode:
        """The mode as chosen."""
        return self._mode

    @property
    def zoom(self) -> float:
        """Size of everything, 1.0 to 1.75."""
        return self._zoom

    @property
    def is_dark(self) -> bool:
        """Whether the dark colours are shown."""
        if self._mode is Mode.SYSTEM:
            return QGuiApplication.styleHints().colorScheme() is Qt.ColorScheme.Dark
        return self._mode is Mode.DARK

    @property
    def roles(self) -> Roles:
        """The colours now in force."""
        return self._roles

    def set_mode(self, mode: Mode) -> None:
        """Choose light, dark or the system's."""
        if mode is not self._mode:
            self._mode = mode
            self._take_roles()

    def set_zoom(self, zoom: float) -> None:
        """Choose the size of everything, one of `ZOOMS`."""
        zoom = min(ZOOMS, key=lambda each: abs(each - zoom))
        if zoom != self._zoom:
            self._zoom = zoom
            self._tell()

    def _on_system_scheme_changed(self) -> None:
        if self._mode is Mode.SYSTEM:
            self._take_roles()

    def _take_roles(self) -> None:
        self._roles = DARK if self.is_dark else LIGHT
        self._tell()

    def _tell(self) -> None:
        self.dressing.emit()
        self.changed.emit()

    def colour(self, role: str, alpha: float = 1.0) -> QColor:
        """Return a role's colour, by the name of its field in `Roles`."""
        colour = QColor(getattr(self.roles, role))
        colour.setAlphaF(alpha)
        return colour

    def chip(self, index: int) -> Chip:
        """Return the chip of the setup at this place in the session."""
        chips = DARK_CHIPS if self._roles is DARK else LIGHT_CHIPS
        return chips[index % len(chips)]

    def band(self, colour: str, share: float = 0.78) -> QColor:
        """Return a colour paled towards the card, opaque so that grid lines end at the band."""
        return QColor(mixed(colour, self.roles.card, share))

    def px(self, size: float) -> int:
        """Return a length in pixels at the present zoom."""
        return round(size * self._zoom)

    @property
    def text_size(self) -> float:
        """Size of running text: the system's own, a little up because this family runs small. [px]"""
        return max(13.0, min(20.0, self._system_size * 1.12)) * self._zoom

    def font(self, kind: Type = Type.TEXT, *, strong: bool = False) -> QFont:
        """Return a font of the scale, with figures of one width."""
        key = (kind, strong, self._zoom)
        if key not in self._fonts:
            self._fonts[key] = self._made_font(kind, strong=strong)
        return QFont(self._fonts[key])

    def _made_font(self, kind: Type, *, strong: bool) -> QFont:
        font = QFont(FAMILY)
        font.setStyleHint(QFont.StyleHint.SansSerif)
        font.setPixelSize(round(self.text_size * kind.value))
        font.setWeight(QFont.Weight.DemiBold if strong else QFont.Weight.Normal)
        font.setFeature(QFont.Tag(_TABULAR), 1)
        font.setHintingPreference(QFont.HintingPreference.PreferNoHinting)
        return font

    def palette(self) -> QPalette:
        """Return the colours for the toolkit's own widgets."""
        roles = self.roles
        palette = QPalette()
        pairs = {
            QPalette.ColorRole.Window: roles.paper,
            QPalette.ColorRole.WindowText: roles.ink,
            QPalette.ColorRole.Base: roles.field,
            QPalette.ColorRole.AlternateBase: roles.hover,
            QPalette.ColorRole.Text: roles.ink,
            QPalette.ColorRole.Button: roles.card,
            QPalette.ColorRole.ButtonText: roles.ink,
            QPalette.ColorRole.BrightText: roles.bad,
            QPalette.ColorRole.Highlight: roles.chosen,
            QPalette.ColorRole.HighlightedText: roles.ink,
            QPalette.ColorRole.Link: roles.accent,
            QPalette.ColorRole.LinkVisited: roles.accent,
            QPalette.ColorRole.ToolTipBase: roles.card,
            QPalette.ColorRole.ToolTipText: roles.ink,
            QPalette.ColorRole.PlaceholderText: roles.quiet,
            QPalette.ColorRole.Accent: roles.accent,
            QPalette.ColorRole.Mid: roles.hairline,
            QPalette.ColorRole.Dark: roles.axis,
        }
        for role, colour in pairs.items():
            palette.setColor(role, QColor(colour))
        for role in (
            QPalette.ColorRole.Text,
            QPalette.ColorRole.WindowText,
            QPalette.ColorRole.ButtonText,
        ):
            palette.setColor(QPalette.ColorGroup.Disabled, role, QColor(mixed(roles.quiet, roles.card, 0.35)))
        return palette
