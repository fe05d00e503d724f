"""The picked setup: name, letter, tyres, mass, cost, and what is known of it from elsewhere."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from functools import partial

from PySide6.QtWidgets import QWidget

from ridercda.app.desk import Desk
from ridercda.app.letters import badges
from ridercda.app.run_edits import RunEdits
from ridercda.app.side.day_form import TyresForm
from ridercda.app.side.quantity_rows import Figure, FigureRows
from ridercda.app.widgets.field import TextField
from ridercda.app.widgets.form import Choice, Form
from ridercda.app.widgets.links import link, link_line
from ridercda.session import edits
from ridercda.session.document import Session, Setup
from ridercda.units import Kind


class SetupForm(Form):
    """Editors of one setup."""

    def __init__(self, desk: Desk, runs: RunEdits, parent: QWidget | None = None) -> None:
        super().__init__(desk.theme, parent)
        self._desk = desk
        self._rows = FigureRows(desk, self)
        self._head = self.heading("")
        self._texts = {}
        for name, words in (
            ("name", self.tr("Name")),
            ("letter", self.tr("Letter")),
            ("tyres", self.tr("Tyres")),
            ("notes", self.tr("Notes")),
        ):
            field = TextField(self.theme)
            field.committed.connect(
                lambda text, n=name, w=words: self._change(
                    self.tr("Set {}").format(w.lower()), lambda s: replace(s, **{n: text})
                )
            )
            self.row(words, field)
            self._texts[name] = field
        self._texts["letter"].setMaxLength(2)
        self._texts["tyres"].setPlaceholderText(self.tr("one set for all"))
        for words, kind, name, key in (
            (self.tr("Mass change"), Kind.MASS, "mass_change", ""),
            (self.tr("Costs the rider"), Kind.POWER, "power_cost", "setup.power_cost"),
            (self.tr("Held for"), Kind.RATIO, "held", "setup.held"),
        ):
            self._rows.add(
                Figure(
                    words,
                    kind,
                    "Setup",
                    name,
                    partial(self._get, name),
                    partial(self._put, name),
                    default_key=key,
                )
            )
        self._build_elsewhere()
        self._baseline = link(self.tr("Make baseline"))
        self._baseline.clicked.connect(self._on_baseline_clicked)
        self._remove = link(self.tr("Remove setup"))
        self._remove.clicked.connect(self._on_remove_clicked)
        self.line(link_line(self.theme, self._baseline, self._remove))
        self.widget(TyresForm(desk))
        self.stretch()
        desk.document.session_changed.connect(self.refresh)
        desk.selection.changed.connect(lambda: self.refresh(desk.session))
        self.refresh(desk.session)

    def _build_elsewhere(self) -> None:
        """Add what is known of a setup that was not tested today."""
        self.heading(self.tr("Known from elsewhere"))
        for words, name in (
            (self.tr("CdA"), "cda"),
            (self.tr("Its uncertainty (sd)"), "cda_sd"),
            (self.tr("or difference of CdA"), "cda_difference"),
            (self.tr("Its uncertainty (sd)"), "cda_difference_sd"),
        ):
            get, put = partial(self._get, name), partial(self._put, name)
            self._rows.add(Figure(words, Kind.AREA, "Setup", name, get, put))
        self._from = Choice(self.theme, (("", ""),))
        self._from.activated.connect(self._on_from_activated)
        self.row(self.tr("against"), self._from)

    def _on_from_activated(self) -> None:
        other = self._from.key
        self._change(
            self.tr("Set what the difference is against"), lambda s: replace(s, difference_from=other)
        )

    def _setup(self, session: Session) -> Setup | None:
        return next((s for s in session.setups if s.id == self._desk.selection.setup), None)

    def _get(self, name: str, session: Session) -> float | None:
        setup = self._setup(session)
        value = getattr(setup, name) if setup else None
        return None if name == "mass_change" and not value else value

    def _put(self, name: str, session: Session, value: float | None) -> Session:
        setup = session.setup(self._desk.selection.setup)
        new = 0.0 if value is None and name == "mass_change" else value
        return edits.change_setup(session, setup.id, replace(setup, **{name: new}))  # type: ignore[arg-type]

    def _change(self, text: str, change: Callable[[Setup], Setup]) -> None:
        setup_id = self._desk.selection.setup

        def edit(session: Session) -> Session:
            return edits.change_setup(session, setup_id, change(session.setup(setup_id)))

        if setup_id and not self._desk.document.edit(text, edit):
            self.refresh(self._desk.session)

    def _on_baseline_clicked(self) -> None:
        setup_id = self._desk.selection.setup
        self._desk.document.edit(self.tr("Set baseline"), lambda s: edits.set_baseline(s, setup_id))

    def _on_remove_clicked(self) -> None:
        setup_id = self._desk.selection.setup
        self._desk.document.edit(self.tr("Remove setup"), lambda s: edits.remove_setup(s, setup_id))

    def refresh(self, session: Session) -> None:
        """Show the picked setup."""
        setup = self._setup(session)
        self.setEnabled(setup is not None)
        if setup is None:
            self._head.setText(self.tr("No setup picked"))
            return
        badge = badges(session)[setup.id]
        self._head.setText(self.tr("Setup {}").format(badge.letter))
        for name, field in self._texts.items():
            field.set_value(getattr(setup, name))
        self._texts["letter"].setPlaceholderText(badge.letter)
        others = [(key, badge.name) for key, badge in badges(session).items() if key != setup.id]
        self._from.set_options((("", self.tr("not said")), *others), setup.difference_from)
        baseline = session.baseline
        self._baseline.setEnabled(baseline is None or baseline.id != setup.id)
        self._remove.setEnabled(not any(run.setup == setup.id for run in session.runs))
        self._remove.setToolTip(
            "" if self._remove.isEnabled() else self.tr("Its runs must be reassigned or removed first.")
        )
        self._rows.refresh(session)
