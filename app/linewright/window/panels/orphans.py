"""The Orphans: significant features that no catalogue line explains."""

from __future__ import annotations

import numpy as np
from PySide6.QtWidgets import QLabel

from ...spectra.medium import to_medium
from ..typeset import typeset
from . import words
from .column_model import Column, ColumnModel
from .table_panel import TablePanel

EMPTY = (
    "Orphans are significant features that no catalogue line explains. One that returns at the "
    "same rest wavelength in other spectra may be an unlisted line.\n"
    "Press F5 to solve the spectrum."
)
NONE = "No orphans: every significant feature has a catalogue line that may explain it."


class OrphansPanel(TablePanel):
    """Follows and sets the selection, as the Ledger does."""

    def __init__(self, workbench, parent=None):
        super().__init__("Orphans", ColumnModel(), EMPTY, parent)
        self._workbench, self._session, self._rows = workbench, None, ()
        self.text = self.add_text_filter(
            "Filter: wavelength, nearest line or reason", "Shows orphans containing this text")
        self.count = QLabel(self)
        self.filters.addWidget(self.count)
        self.filtered.connect(self.refresh)
        self.acted.connect(lambda row: workbench.view.select(self._rows[row].feature))

    def show_session(self, session) -> None:
        first = not self._rows
        old = self._session
        if old is not None and session is not None and (
                session.orphans is old.orphans and session.features is old.features
                and session.spectrum is old.spectrum):
            self._session = session
            return
        self._session = session
        self._rows = () if session is None else session.orphans
        self.refresh()
        if first and self._rows:
            for i, column in enumerate(self.model.columns):
                self.table.setColumnWidth(i, column.width)

    def refresh(self) -> None:
        columns, wave = self._columns()
        text = self.text.text().strip().lower()
        keep = [i for i, said in enumerate(f"{o.nearest} {o.why}" for o in self._rows)
                if not text or text in f"{wave[i]:.3f} {said} {typeset(said)}".lower()]
        self.model.show_rows(columns, np.array(keep, dtype=int))
        solved = self._session is not None and len(self._session.roll_call) > 0
        if self._rows:
            self.show_state("No orphan passes this filter.")
        else:
            self.show_state(NONE if solved else EMPTY)
        self.show_selection(self._workbench.view.now.selected)

    def _columns(self) -> tuple[list[Column], np.ndarray]:
        rows, session = self._rows, self._session
        if not rows:
            return [], np.zeros(0)
        f = session.features
        row_of = {int(n): i for i, n in enumerate(f.number)}
        at = np.array([row_of[o.feature] for o in rows], dtype=int)
        wave = to_medium(f.wave[at], session.spectrum.medium)
        chance = np.array([o.p_unlisted for o in rows], dtype=float)
        return [
            Column("wavelength (Å)", "Fitted centre in the spectrum's own medium",
                   lambda i: words.with_error(wave[i], f.wave_err[at[i]], 3), lambda: wave,
                   True, 136),
            Column("significance", "Matched-filter signal-to-noise of the feature",
                   lambda i: words.number(f.significance[at[i]], 1),
                   lambda: f.significance[at], True, 96),
            Column("depth", "(continuum − flux)/continuum at the centre",
                   lambda i: words.depth(f.depth[at[i]]), lambda: f.depth[at], True, 70),
            Column("unlisted", "Probability that no catalogue line made it",
                   lambda i: words.probability(chance[i]), lambda: chance, True, 80),
            Column("nearest", "The nearest catalogue line", lambda i: typeset(rows[i].nearest),
                   lambda: np.array([o.nearest for o in rows], dtype=str), False, 230),
            Column("why", "What it is not, and why", lambda i: typeset(rows[i].why),
                   lambda: np.array([o.why for o in rows], dtype=str), False, 320),
        ], wave

    def show_selection(self, number: int | None) -> None:
        at = [i for i, o in enumerate(self._rows) if o.feature == number]
        self.follow(at[0] if at else None)
