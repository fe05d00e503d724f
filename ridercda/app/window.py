"""The main window: it wires the parts together and asks the questions that need a dialog."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import QSize
from PySide6.QtGui import QCloseEvent, QDragEnterEvent, QDropEvent
from PySide6.QtWidgets import QMainWindow, QStackedWidget, QVBoxLayout, QWidget

from ridercda.app.actions import all_actions
from ridercda.app.autosave import Autosave, Kept, drop, unsaved_work
from ridercda.app.desk import Desk
from ridercda.app.dialogs import ColumnsDialog
from ridercda.app.files import RIDE_SUFFIXES, SessionFiles
from ridercda.app.header import Header
from ridercda.app.menus import Menus
from ridercda.app.notice import Notice
from ridercda.app.pages import PAGES
from ridercda.app.pages.start import StartPage, is_session
from ridercda.app.palette import Palette
from ridercda.app.questions import Questions
from ridercda.app.reasons import reason_menu
from ridercda.app.run_edits import RunEdits
from ridercda.app.samples import Sample
from ridercda.app.side.panel import DAY, SETUP
from ridercda.app.strip.day_strip import DayStrip
from ridercda.app.theme import ZOOMS
from ridercda.app.workbench import Workbench


class MainWindow(QMainWindow):
    """One window, one session."""

    def __init__(self, desk: Desk, autosave_root: Path | None = None) -> None:
        super().__init__()
        self.desk = desk
        self._autosave_root = autosave_root
        self.autosave = Autosave(desk.document, autosave_root, self)
        self.files = SessionFiles(desk, self.autosave, self)
        self.questions = Questions(self, desk, self.files)
        self.runs = RunEdits(desk, self)
        self.notice = Notice(desk.theme)
        self.workbench = Workbench(desk, self.runs, self.notice)
        self.start = StartPage(desk)
        self.menus = Menus(self, all_actions(tuple((spec.id, spec.title()) for spec in PAGES)))
        self.header = Header(desk, self.menus)
        self._stack = QStackedWidget()
        self._stack.addWidget(self.start)
        self._stack.addWidget(self.workbench)
        middle = QWidget()
        self._column = QVBoxLayout(middle)
        self._column.addWidget(self.header)
        self._column.addWidget(self._stack, 1)
        self.setCentralWidget(middle)
        self.setAcceptDrops(True)
        self._connect()
        self._on_theme_changed()
        self.restore()

    def _connect(self) -> None:
        desk = self.desk
        desk.theme.changed.connect(self._on_theme_changed)
        desk.document.edit_refused.connect(self.notice.show_trouble)
        desk.document.session_changed.connect(self._name_window)
        desk.document.undo_stack.cleanChanged.connect(self._name_window)
        self.files.failed.connect(self._on_files_failed)
        self.files.opened.connect(self._on_files_opened)
        self.files.saved.connect(lambda: self.notice.show_news(self.tr("Saved.")))
        self.start.sample_chosen.connect(self.open_sample)
        self.start.recent_chosen.connect(self.open_session)
        self.start.open_asked.connect(self.questions.open)
        self.start.rides_asked.connect(self.questions.rides)
        self.start.new_asked.connect(self.new_session)
        self.strip.exclude_requested.connect(self.ask_reason)
        self.workbench.side.exclude_requested.connect(self.ask_reason)
        self.workbench.asked.connect(self._on_page_asked)

    @property
    def strip(self) -> DayStrip:
        """The day strip."""
        return self.workbench.strip

    @property
    def side_is_shown(self) -> bool:
        """Whether setups and details are seen."""
        return self.workbench.side_is_shown

    def _on_theme_changed(self) -> None:
        px = self.desk.theme.px
        self._column.setContentsMargins(px(16), px(8), px(16), px(12))
        self._column.setSpacing(px(6))
        self.menus.setFont(self.desk.theme.font())

    def _name_window(self) -> None:
        name = self.desk.session.name or "RiderCdA"
        mark = "" if self.desk.document.undo_stack.isClean() else " •"
        self.setWindowTitle(f"{name}{mark} – RiderCdA" if self.desk.document.is_open else "RiderCdA")

    # -- sessions ----------------------------------------------------------------------------------------

    def _on_files_opened(self) -> None:
        self.notice.hide()
        self._stack.setCurrentWidget(self.workbench)
        self.show_page("drag" if self.desk.session.runs else "rides")
        self._name_window()

    def _on_files_failed(self, words: str) -> None:
        self._stack.setCurrentWidget(self.workbench)  # where messages are shown
        self.notice.show_trouble(words)

    def offer_recovery(self) -> None:
        """Offer what an earlier start left unsaved."""
        if kept := next(iter(unsaved_work(self._autosave_root)), None):
            self._stack.setCurrentWidget(self.workbench)
            words = self.tr("Unsaved changes to “{}” were kept from an earlier start.").format(
                kept.session.name
            )
            recover = (self.tr("Recover"), lambda: self.files.recover(kept))
            self.notice.show_offer(words, recover, (self.tr("Discard"), lambda: self._discard(kept)))

    def _discard(self, kept: Kept) -> None:
        drop(kept)
        if not self.desk.document.is_open:
            self.show_start()

    def new_session(self) -> None:
        """Begin an empty session."""
        if self.questions.may_leave():
            self.files.new()

    def open_session(self, path: Path) -> None:
        """Open a session."""
        if self.questions.may_leave():
            self.files.open(path)

    def open_sample(self, sample: Sample) -> None:
        """Open a copy of a sample."""
        if self.questions.may_leave():
            self.files.open_sample(sample)

    def show_start(self) -> None:
        """Show the start page; the session stays open behind it."""
        self.start.refresh()
        self._stack.setCurrentWidget(self.start)

    # -- what pages and menus ask for --------------------------------------------------------------------

    def _on_page_asked(self, action: str, about: object) -> None:
        if action == "ride.columns":
            ColumnsDialog(self, self.desk, str(about)).exec()
        elif action == "ride.relocate":
            self.files.relocate(*about)  # type: ignore[misc]
        else:
            self.menus.made(action).trigger()

    def show_page(self, page: str) -> None:
        """Show a page."""
        self._stack.setCurrentWidget(self.workbench)
        self.workbench.show_page(page)
        self.workbench.pages[page].focus_first()

    def focus_strip(self) -> None:
        """Put the keyboard into the day strip."""
        self.strip.setFocus()

    def accept_proposed(self) -> None:
        """Take all proposed runs."""
        if runs := self.desk.proposals.runs:
            self.runs.accept(runs, self.desk.proposals.kind)

    def split_picked(self) -> None:
        """Split the picked run at the moment pointed at, else in the middle."""
        if run := self.strip.picture.run(self.desk.selection.run):
            self.runs.split(run.id, 0.5 * (run.start + run.end))

    def ask_reason(self, runs: tuple[str, ...]) -> None:
        """Ask why runs are left out: a menu of the usual reasons."""
        menu = reason_menu(self, lambda reason: self.runs.exclude(runs, reason))
        menu.popup(self.cursor().pos() if self.underMouse() else self.mapToGlobal(self.rect().center()))

    def toggle_side(self) -> None:
        """Show or hide setups and details."""
        self.workbench.toggle_side()

    def show_day_details(self) -> None:
        """Show the editors of the test day."""
        self.workbench.show_side()
        self.workbench.side.show_details(DAY)

    def show_setup_details(self) -> None:
        """Show the editors of the picked setup."""
        self.workbench.show_side()
        self.workbench.side.show_details(SETUP)

    def step_zoom(self, step: int) -> None:
        """Make everything larger or smaller."""
        place = ZOOMS.index(self.desk.theme.zoom) + step
        self.desk.theme.set_zoom(ZOOMS[max(0, min(place, len(ZOOMS) - 1))])

    def show_palette(self) -> None:
        """Show the command palette."""
        Palette(self, self.menus.actions_table).show()

    def quit(self) -> None:
        """Close the window."""
        self.close()

    # -- Qt ----------------------------------------------------------------------------------------------

    def restore(self) -> None:
        """Take the size and place of the last time."""
        if not self.restoreGeometry(self.desk.settings.state("window/geometry")):
            self.resize(QSize(1280, 800))

    def closeEvent(self, event: QCloseEvent) -> None:
        """Leave nothing unsaved without asking, then remember and tidy up."""
        if not self.questions.may_leave():
            event.ignore()
            return
        settings = self.desk.settings
        settings.set_state("window/geometry", self.saveGeometry())
        settings.keep_theme(self.desk.theme)
        settings.keep_units(self.desk.units)
        self.autosave.forget()
        self.desk.document.undo_stack.blockSignals(
            True
        )  # it clears itself when it goes, and nobody needs to hear
        self.desk.close()
        super().closeEvent(event)

    def dragEnterEvent(self, event: QDragEnterEvent) -> None:
        """Take files."""
        if event.mimeData().hasUrls():
            event.acceptProposedAction()

    def dropEvent(self, event: QDropEvent) -> None:
        """Open a dropped session, or add dropped ride files."""
        paths = [Path(url.toLocalFile()) for url in event.mimeData().urls() if url.isLocalFile()]
        session = next((path for path in paths if is_session(path)), None)
        if session is not None:
            self.open_session(session)
        else:
            files = [each for path in paths for each in (sorted(path.iterdir()) if path.is_dir() else [path])]
            self.files.add_rides([path for path in files if path.name.lower().endswith(RIDE_SUFFIXES)])
        event.acceptProposedAction()
