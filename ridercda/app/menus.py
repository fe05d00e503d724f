"""Menus and shortcuts from the table of actions."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtGui import QAction, QKeySequence
from PySide6.QtWidgets import QMenu, QMenuBar

from ridercda.app.actions import Action, menu_titles

if TYPE_CHECKING:
    from ridercda.app.window import MainWindow


class Menus(QMenuBar):
    """The menu bar; what can be done is asked when a menu opens."""

    def __init__(self, window: MainWindow, actions: tuple[Action, ...]) -> None:
        super().__init__()
        self._window = window
        self._made: list[tuple[Action, QAction]] = []
        menus = {key: self.addMenu(title) for key, title in menu_titles().items()}
        for menu in menus.values():
            menu.aboutToShow.connect(self.refresh)
            menu.aboutToHide.connect(self._free_shortcuts)
        for action in actions:
            menu = menus[action.menu]
            if action.starts_group:
                menu.addSeparator()
            made = QAction(action.text, window)
            made.setObjectName(action.id)
            made.setCheckable(action.is_on is not None)
            if action.shortcut:
                made.setShortcut(QKeySequence(action.shortcut))
            made.triggered.connect(lambda _=False, a=action: self.trigger(a))
            menu.addAction(made)
            window.addAction(made)
            self._made.append((action, made))
        self.recent = QMenu(self.tr("Open recent"))
        file_menu = menus["file"]
        file_menu.insertMenu(self.made("session.start"), self.recent)
        self.recent.aboutToShow.connect(self._fill_recent)
        for signal in (window.desk.document.session_changed, window.desk.document.undo_stack.indexChanged):
            signal.connect(self._name_steps)

    @property
    def actions_table(self) -> tuple[Action, ...]:
        """The table the menus were made from."""
        return tuple(action for action, _ in self._made)

    def made(self, action_id: str) -> QAction:
        """Return the toolkit's action of an id."""
        return next(made for action, made in self._made if action.id == action_id)

    def trigger(self, action: Action) -> None:
        """Do it, if it can be done now."""
        if action.can(self._window):
            action.do(self._window)

    def refresh(self) -> None:
        """Ask every action whether it can be done and is on."""
        for action, made in self._made:
            made.setEnabled(action.can(self._window))
            if action.is_on is not None:
                made.setChecked(action.is_on(self._window))
        self._name_steps()

    def _free_shortcuts(self) -> None:
        """Enable everything while no menu is open: a shortcut asks when it is pressed."""
        for _, made in self._made:
            made.setEnabled(True)

    def _name_steps(self) -> None:
        stack = self._window.desk.document.undo_stack
        for action_id, words, step in (
            ("edit.undo", self.tr("Undo"), stack.undoText()),
            ("edit.redo", self.tr("Redo"), stack.redoText()),
        ):
            made = self.made(action_id)
            made.setText(f"{words}: {step}" if step else words)

    def _fill_recent(self) -> None:
        self.recent.clear()
        folders = self._window.desk.settings.recent
        for folder in folders:
            self.recent.addAction(folder.name, lambda f=folder: self._window.open_session(f)).setToolTip(
                str(folder)
            )
        if not folders:
            self.recent.addAction(self.tr("none yet")).setEnabled(False)
