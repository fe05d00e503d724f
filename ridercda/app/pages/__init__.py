"""The pages, in the order of work."""

from __future__ import annotations

from PySide6.QtCore import QCoreApplication

from ridercda.app.pages.drag import DragPage
from ridercda.app.pages.page import PageSpec
from ridercda.app.pages.rides import RidesPage
from ridercda.app.pages.runs import RunsPage

PAGES: tuple[PageSpec, ...] = (
    PageSpec("rides", lambda: QCoreApplication.translate("Pages", "Rides"), RidesPage),
    PageSpec("runs", lambda: QCoreApplication.translate("Pages", "Runs"), RunsPage),
    PageSpec("drag", lambda: QCoreApplication.translate("Pages", "Drag"), DragPage),
)
