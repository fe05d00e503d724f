"""The style sheet of the toolkit's own widgets, written from the theme; fonts are set by code, headers of tables aside."""

from __future__ import annotations

from string import Template

from ridercda.app.colours import mixed
from ridercda.app.theme import Theme, Type

_SHEET = Template("""
QMainWindow, QDialog { background: $paper; }
QToolTip { background: $card; color: $ink; border: 1px solid $hairline; padding: ${s4}px ${s8}px; }
QMenuBar { background: transparent; color: $quiet; border: 0; padding: 0; }
QMenuBar::item { background: transparent; padding: ${s4}px ${s8}px; border-radius: ${s4}px; }
QMenuBar::item:selected { background: $hover; color: $ink; }
QMenu { background: $card; color: $ink; border: 1px solid $hairline; padding: ${s4}px; }
QMenu::item { padding: ${s6}px ${s24}px ${s6}px ${s12}px; border-radius: ${s4}px; }
QMenu::item:selected { background: $chosen; }
QMenu::item:disabled { color: $disabled; }
QMenu::separator { height: 1px; background: $hairline; margin: ${s4}px ${s8}px; }
QFrame#card { background: $card; border: 1px solid $hairline; border-radius: ${s8}px; }
QFrame#rule { background: $hairline; border: 0; max-height: 1px; min-height: 1px; }
QFrame#notice { background: $caution_ground; border: 1px solid $caution; border-radius: ${s8}px; }
QFrame#notice[bad="true"] { background: $bad_ground; border: 1px solid $bad; }
QLabel { background: transparent; color: $ink; }
QLabel[quiet="true"] { color: $quiet; }
QLabel[bad="true"] { color: $bad; }
QLabel[caution="true"] { color: $caution; }
QPushButton { background: transparent; color: $accent; border: 1px solid transparent; border-radius: ${s6}px;
  padding: ${s4}px ${s8}px; text-align: center; }
QPushButton:hover { background: $hover; }
QPushButton:pressed { background: $chosen; }
QPushButton:focus { border: 1px solid $accent; }
QPushButton:disabled { color: $disabled; }
QPushButton[main="true"] { background: $accent; color: $on_accent; padding: ${s6}px ${s16}px; }
QPushButton[main="true"]:hover { background: $accent_hover; }
QPushButton[main="true"]:focus { border: 1px solid $ink; }
QPushButton[main="true"]:disabled { background: $hairline; color: $quiet; }
QPushButton[flush="true"] { padding: ${s4}px 0; border: 0; }
QPushButton[dropdown="true"] { padding: ${s4}px ${s16}px ${s4}px 0; }
QPushButton::menu-indicator { image: url($arrow); width: ${s12}px; height: ${s12}px;
  subcontrol-origin: padding; subcontrol-position: right center; }
QPushButton[flush="true"]:hover { background: transparent; color: $ink; }
QPushButton[flush="true"]:focus { color: $ink; }
QPushButton[framed="true"] { border: 1px solid $hairline; background: $card; }
QPushButton[framed="true"]:focus { border: 1px solid $accent; }
QPushButton[page="true"] { color: $quiet; border: 0; border-bottom: ${s2}px solid transparent; border-radius: 0;
  padding: ${s6}px ${s2}px; margin-right: ${s20}px; text-align: left; }
QPushButton[page="true"]:hover { color: $ink; background: transparent; }
QPushButton[page="true"]:checked { color: $ink; border-bottom: ${s2}px solid $accent; }
QPushButton[page="true"]:focus { color: $accent; }
QPushButton[page="true"]:disabled { color: $disabled; }
QPushButton[row="true"] { color: $ink; text-align: left; border-radius: ${s6}px; padding: ${s8}px ${s12}px; }
QPushButton[row="true"]:hover { background: $hover; }
QToolButton { background: transparent; border: 1px solid transparent; border-radius: ${s4}px; color: $quiet;
  padding: ${s2}px ${s6}px; }
QToolButton:hover { background: $hover; color: $ink; }
QToolButton:focus { border: 1px solid $accent; }
QToolButton::menu-indicator { image: none; }
QLineEdit, QPlainTextEdit, QComboBox { background: $field; color: $ink; border: 1px solid $hairline;
  border-radius: ${s4}px; padding: ${s2}px ${s6}px; selection-background-color: $accent; selection-color: $on_accent; }
QLineEdit:hover, QComboBox:hover { border: 1px solid $axis; }
QLineEdit:focus, QPlainTextEdit:focus, QComboBox:focus { border: 1px solid $accent; }
QLineEdit[wrong="true"] { border: 1px solid $bad; }
QLineEdit:disabled, QComboBox:disabled { color: $quiet; background: $paper; }
QComboBox::drop-down { border: 0; width: ${s20}px; }
QComboBox::down-arrow { image: url($arrow); width: ${s12}px; height: ${s12}px; }
QComboBox QAbstractItemView { background: $card; color: $ink; border: 1px solid $hairline; outline: 0;
  selection-background-color: $chosen; selection-color: $ink; padding: ${s4}px; }
QTableView, QListView, QTreeView { background: transparent; border: 0; color: $ink; outline: 0; gridline-color: $hairline;
  selection-background-color: $chosen; selection-color: $ink; alternate-background-color: transparent; }
QTableView::item, QListView::item { padding: 0 ${s2}px; border: 0; }
QTableView::item { border-bottom: 1px solid $hairline; }
QTableView::item:hover, QListView::item:hover { background: $hover; }
QTableView::item:selected, QListView::item:selected { background: $chosen; color: $ink; }
QHeaderView { background: transparent; border: 0; font-size: ${small}px; }
QHeaderView::section { background: $card; color: $quiet; border: 0; border-bottom: 1px solid $hairline;
  padding: ${s4}px ${s5}px; font-size: ${small}px; }
QHeaderView::up-arrow, QHeaderView::down-arrow { image: url($arrow); width: ${s8}px; height: ${s8}px;
  subcontrol-origin: margin; subcontrol-position: bottom center; }
QAbstractScrollArea::corner { background: transparent; border: 0; }
QTableCornerButton::section { background: transparent; border: 0; }
QScrollArea { background: transparent; border: 0; }
QScrollArea > QWidget > QWidget { background: transparent; }
QScrollBar:vertical { background: transparent; width: ${s8}px; margin: 0; }
QScrollBar:horizontal { background: transparent; height: ${s8}px; margin: 0; }
QScrollBar::handle { background: $hairline; border-radius: ${s2}px; margin: ${s2}px; }
QScrollBar::handle:vertical { min-height: ${s24}px; } QScrollBar::handle:horizontal { min-width: ${s24}px; }
QScrollBar::handle:hover { background: $axis; }
QScrollBar::add-line, QScrollBar::sub-line { width: 0; height: 0; }
QScrollBar::add-page, QScrollBar::sub-page { background: transparent; }
QProgressBar { background: $hairline; border: 0; border-radius: ${s2}px; max-height: ${s4}px; min-height: ${s4}px; }
QProgressBar::chunk { background: $accent; border-radius: ${s2}px; }
QSlider::groove:horizontal { background: $hairline; height: ${s4}px; border-radius: ${s2}px; }
QSlider::handle:horizontal { background: $card; border: ${s2}px solid $accent; width: ${s12}px; height: ${s12}px;
  margin: -${s6}px 0; border-radius: ${s8}px; }
QSlider::handle:horizontal:focus { background: $accent; }
QSplitter::handle { background: transparent; }
QCheckBox, QRadioButton { color: $ink; spacing: ${s8}px; }
QCheckBox:focus, QRadioButton:focus { color: $accent; }
""")


def stylesheet(theme: Theme, arrow: str) -> str:
    """Return the style sheet for a theme.

    Parameters
    ----------
    theme : Theme
        The theme in force.
    arrow : str
        Path of the picture of a drop-down arrow.
    """
    roles = theme.roles
    names = {name: getattr(roles, name) for name in roles.__slots__}
    sizes = {f"s{size}": str(theme.px(size)) for size in (2, 4, 5, 6, 8, 10, 12, 16, 20, 24)}
    return _SHEET.substitute(
        names,
        **sizes,
        arrow=arrow,
        small=theme.font(Type.AXIS).pixelSize(),
        disabled=mixed(roles.quiet, roles.card, 0.35),
        accent_hover=mixed(roles.accent, roles.ink, 0.18),
    )
