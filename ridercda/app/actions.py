"""Everything that can be done, as data: one table feeds menus, shortcuts and the command palette."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING

from PySide6.QtCore import QCoreApplication

from ridercda.app.dialogs import UnitsDialog, show_about, show_cautions, show_first_steps, show_keys
from ridercda.app.theme import ZOOMS, Mode
from ridercda.units import UnitSystem

if TYPE_CHECKING:
    from ridercda.app.window import MainWindow

FILE, EDIT, RUN, VIEW, HELP = "file", "edit", "run", "view", "help"


def _tr(text: str) -> str:
    return QCoreApplication.translate("Actions", text)


def _always(_: MainWindow) -> bool:
    return True


def _open(window: MainWindow) -> bool:
    return window.desk.document.is_open


def _picked(window: MainWindow) -> bool:
    return bool(window.desk.selection.runs)


def _several(window: MainWindow) -> bool:
    return len(window.desk.selection.runs) > 1


def _excluded(window: MainWindow) -> bool:
    known = {run.id: run for run in window.desk.session.runs}
    return any(known[run].excluded for run in window.desk.selection.runs if run in known)


@dataclass(frozen=True, slots=True)
class Action:
    """One thing that can be done."""

    id: str
    text: str
    menu: str
    do: Callable[[MainWindow], object]
    shortcut: str = ""
    can: Callable[[MainWindow], bool] = _always
    is_on: Callable[[MainWindow], bool] | None = None
    starts_group: bool = False


def menu_titles() -> dict[str, str]:
    """Return the menus in order."""
    return {FILE: _tr("&File"), EDIT: _tr("&Edit"), RUN: _tr("&Runs"), VIEW: _tr("&View"), HELP: _tr("&Help")}


def file_actions() -> tuple[Action, ...]:
    """Return what concerns files."""
    return (
        Action("session.new", _tr("New session"), FILE, lambda w: w.new_session(), "Ctrl+N"),
        Action("session.open", _tr("Open session…"), FILE, lambda w: w.questions.open(), "Ctrl+O"),
        Action("session.start", _tr("Start page"), FILE, lambda w: w.show_start()),
        Action(
            "ride.add",
            _tr("Add ride files…"),
            FILE,
            lambda w: w.questions.rides(),
            "Ctrl+Shift+O",
            starts_group=True,
        ),
        Action(
            "session.save",
            _tr("Save"),
            FILE,
            lambda w: w.questions.save(),
            "Ctrl+S",
            _open,
            starts_group=True,
        ),
        Action(
            "session.save_as", _tr("Save as…"), FILE, lambda w: w.questions.save_as(), "Ctrl+Shift+S", _open
        ),
        Action("window.quit", _tr("Quit"), FILE, lambda w: w.quit(), "Ctrl+Q", starts_group=True),
    )


def edit_actions() -> tuple[Action, ...]:
    """Return what undoes and redoes; menus name the steps."""
    return (
        Action(
            "edit.undo",
            _tr("Undo"),
            EDIT,
            lambda w: w.desk.document.undo_stack.undo(),
            "Ctrl+Z",
            lambda w: w.desk.document.undo_stack.canUndo(),
        ),
        Action(
            "edit.redo",
            _tr("Redo"),
            EDIT,
            lambda w: w.desk.document.undo_stack.redo(),
            "Ctrl+Shift+Z",
            lambda w: w.desk.document.undo_stack.canRedo(),
        ),
        Action(
            "setup.new",
            _tr("New setup"),
            EDIT,
            lambda w: w.runs.add_setup(),
            "Ctrl+Shift+N",
            _open,
            starts_group=True,
        ),
        Action(
            "details.day", _tr("Edit the test day"), EDIT, lambda w: w.show_day_details(), "Ctrl+D", _open
        ),
        Action(
            "details.setup",
            _tr("Edit the picked setup"),
            EDIT,
            lambda w: w.show_setup_details(),
            "Ctrl+E",
            _open,
        ),
        Action(
            "solve.again",
            _tr("Work the estimate out again"),
            EDIT,
            lambda w: w.desk.solving.solve_again(),
            "F5",
            _open,
            starts_group=True,
        ),
    )


def run_actions() -> tuple[Action, ...]:
    """Return what concerns runs; letters and arrows work in the strip itself."""
    return (
        Action(
            "run.accept",
            _tr("Accept proposed runs"),
            RUN,
            lambda w: w.accept_proposed(),
            "Ctrl+Shift+A",
            _open,
        ),
        Action("run.strip", _tr("Go to the day strip"), RUN, lambda w: w.focus_strip(), "F6", _open),
        Action(
            "run.split",
            _tr("Split in the middle"),
            RUN,
            lambda w: w.split_picked(),
            "Ctrl+/",
            _picked,
            starts_group=True,
        ),
        Action(
            "run.merge", _tr("Merge"), RUN, lambda w: w.runs.merge(w.desk.selection.runs), "Ctrl+M", _several
        ),
        Action(
            "run.leave_out",
            _tr("Leave out…"),
            RUN,
            lambda w: w.ask_reason(w.desk.selection.runs),
            "Ctrl+L",
            _picked,
            starts_group=True,
        ),
        Action(
            "run.count",
            _tr("Count again"),
            RUN,
            lambda w: w.runs.include(w.desk.selection.runs),
            "Ctrl+Shift+L",
            _excluded,
        ),
        Action(
            "run.remove",
            _tr("Remove"),
            RUN,
            lambda w: w.runs.remove(w.desk.selection.runs),
            "Ctrl+Del",
            _picked,
        ),
    )


def view_actions() -> tuple[Action, ...]:
    """Return what concerns the window."""
    modes = (
        (Mode.SYSTEM, _tr("Colours: as the system")),
        (Mode.LIGHT, _tr("Colours: light")),
        (Mode.DARK, _tr("Colours: dark")),
    )
    systems = ((UnitSystem.METRIC, _tr("Units: metric")), (UnitSystem.IMPERIAL, _tr("Units: imperial")))
    return (
        Action("palette", _tr("Find a command…"), VIEW, lambda w: w.show_palette(), "Ctrl+K"),
        Action(
            "side",
            _tr("Setups and details"),
            VIEW,
            lambda w: w.toggle_side(),
            "F9",
            _open,
            lambda w: w.side_is_shown,
        ),
        Action(
            "strip.closer",
            _tr("Day strip: closer"),
            VIEW,
            lambda w: w.strip.zoom(1.5),
            "Ctrl+Alt+Up",
            _open,
            starts_group=True,
        ),
        Action(
            "strip.wider",
            _tr("Day strip: wider"),
            VIEW,
            lambda w: w.strip.zoom(1 / 1.5),
            "Ctrl+Alt+Down",
            _open,
        ),
        Action(
            "strip.picked",
            _tr("Day strip: picked runs"),
            VIEW,
            lambda w: w.strip.zoom_to_picked(),
            "Ctrl+Alt+Right",
            _picked,
        ),
        Action(
            "strip.day",
            _tr("Day strip: whole day"),
            VIEW,
            lambda w: w.strip.zoom_to_day(),
            "Ctrl+Alt+Left",
            _open,
        ),
        Action(
            "size.larger",
            _tr("Larger"),
            VIEW,
            lambda w: w.step_zoom(1),
            "Ctrl+=",
            lambda w: w.desk.theme.zoom < ZOOMS[-1],
            starts_group=True,
        ),
        Action(
            "size.smaller",
            _tr("Smaller"),
            VIEW,
            lambda w: w.step_zoom(-1),
            "Ctrl+-",
            lambda w: w.desk.theme.zoom > ZOOMS[0],
        ),
        *(_mode_action(mode, words) for mode, words in modes),
        *(_units_action(system, words) for system, words in systems),
        Action("units.each", _tr("Units for each quantity…"), VIEW, lambda w: UnitsDialog(w, w.desk).exec()),
    )


def help_actions() -> tuple[Action, ...]:
    """Return what explains."""
    return (
        Action("help.first_steps", _tr("First figures, step by step"), HELP, lambda w: show_first_steps(w)),
        Action("help.keys", _tr("Keyboard"), HELP, lambda w: show_keys(w, w.menus.actions_table), "F1"),
        Action("help.cautions", _tr("Cautions"), HELP, lambda w: show_cautions(w)),
        Action("help.about", _tr("About RiderCdA"), HELP, lambda w: show_about(w)),
    )


def page_actions(pages: tuple[tuple[str, str], ...]) -> tuple[Action, ...]:
    """Return an action per page, ids and titles given in order."""
    return tuple(_page_action(place, page, title) for place, (page, title) in enumerate(pages, start=1))


def _page_action(place: int, page: str, title: str) -> Action:
    def do(window: MainWindow) -> None:
        window.show_page(page)

    words = _tr("Page: {}").format(title)
    return Action(f"page.{page}", words, VIEW, do, f"Ctrl+{place}", _open, starts_group=place == 1)


def _mode_action(mode: Mode, words: str) -> Action:
    def do(window: MainWindow) -> None:
        window.desk.theme.set_mode(mode)

    def is_on(window: MainWindow) -> bool:
        return window.desk.theme.mode is mode

    return Action(f"mode.{mode.value}", words, VIEW, do, is_on=is_on, starts_group=mode is Mode.SYSTEM)


def _units_action(system: UnitSystem, words: str) -> Action:
    def do(window: MainWindow) -> None:
        window.desk.units.choose_system(system)

    def is_on(window: MainWindow) -> bool:
        units = window.desk.units.units
        return units.system is system and not units.by_kind

    return Action(
        f"units.{system.value}", words, VIEW, do, is_on=is_on, starts_group=system is UnitSystem.METRIC
    )


def all_actions(pages: tuple[tuple[str, str], ...]) -> tuple[Action, ...]:
    """Return every action; ids and shortcuts are unique."""
    actions = (
        *file_actions(),
        *edit_actions(),
        *run_actions(),
        *page_actions(pages),
        *view_actions(),
        *help_actions(),
    )
    for what in ("id", "shortcut"):
        values = [getattr(action, what) for action in actions if getattr(action, what)]
        twice = {value for value in values if values.count(value) > 1}
        if twice:
            raise ValueError(f"two actions have the same {what}: {', '.join(sorted(twice))}")
    return actions
