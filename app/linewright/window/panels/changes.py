"""Changes: the claims that a person's word changes, before and after."""

from __future__ import annotations

import numpy as np
from PySide6.QtWidgets import QLabel, QPushButton

from ...spectra.medium import to_medium
from . import words
from .column_model import Column, ColumnModel
from .table_panel import TablePanel

EMPTY = "Claim or set aside a feature: what that changes elsewhere is listed here."


class ChangesPanel(TablePanel):
    """Choosing a row selects its feature; 'Re-weigh' makes the changes."""

    def __init__(self, workbench, parent=None):
        super().__init__("Changes", ColumnModel(), EMPTY, parent)
        self._workbench, self._weighed, self._rows = workbench, None, []
        self.text = self.add_text_filter(
            "Filter: species, standing or wavelength", "Shows changes containing this text")
        self.count = QLabel(self)
        self.filters.addWidget(self.count)
        command = workbench.commands["claim.reweigh"]
        self.button = QPushButton(command.short)
        self.button.setToolTip(command.full_tip)
        self.button.setAccessibleName(command.title)
        self.button.clicked.connect(lambda: workbench.run("claim.reweigh"))
        self.filters.addWidget(self.button)
        self.filtered.connect(self.refresh)
        self.acted.connect(lambda row: workbench.view.select(self._rows[row][0].feature))

    def show_weighed(self, weighed) -> None:
        """What was found, or None for nothing."""
        fresh = weighed is not self._weighed
        self._weighed = weighed
        self._say()
        if not fresh:
            return
        self._rows = [] if weighed is None else _rows(weighed)
        first = not self.model.columns
        self.refresh()
        if first and self._rows:
            for i, column in enumerate(self.model.columns):
                self.table.setColumnWidth(i, column.width)

    def _say(self) -> None:
        if self._weighed is None or self._workbench.session is None:
            self.count.clear()
            return
        state = self._weighed.state(self._workbench.session)
        self.count.setText(f"{len(self._weighed.changes):,} {state}")
        self.button.setEnabled(state != "changed" and self._workbench.allows("claim.reweigh"))

    def refresh(self) -> None:
        wanted = self.text.text().strip().lower()
        columns = _columns(self._rows)
        keep = [i for i in range(len(self._rows))
                if wanted in " ".join(c.text(i) for c in columns).lower()]
        self.model.show_rows(columns, np.array(keep, dtype=int))
        self.show_state("No change passes this filter." if self._rows else EMPTY)

    def show_selection(self, number: int | None) -> None:
        at = [i for i, row in enumerate(self._rows) if row[0].feature == number]
        self.follow(at[0] if at else None)


def _rows(weighed) -> list[tuple]:
    """(change, own-medium wavelength, probability before, after) of each."""
    f = weighed.before.features
    at = {int(n): i for i, n in enumerate(f.number)}
    wave = to_medium(f.wave, weighed.before.spectrum.medium)
    return [(c, float(wave[at[c.feature]]), weighed.before.claims[at[c.feature]].probability,
             weighed.after.claims[at[c.feature]].probability) for c in weighed.changes]


def _said(pair) -> str:
    species, standing = pair
    return f"{words.standing(standing)}  {species}".rstrip()


def _columns(rows) -> list[Column]:
    def texts(of):
        return lambda: np.array([of(i) for i in range(len(rows))], dtype=str)

    def was(i):
        return _said(rows[i][0].before)

    def becomes(i):
        return _said(rows[i][0].after)

    return [
        Column("wavelength (Å)", "Fitted centre in the spectrum's own medium",
               lambda i: words.number(rows[i][1], 3), lambda: np.array([r[1] for r in rows]),
               True, 120),
        Column("before", "Standing and species as claimed before", was, texts(was), False, 200),
        Column("after", "Standing and species in the light of what you said", becomes,
               texts(becomes), False, 200),
        Column("probability before", "That the species was the main contributor",
               lambda i: words.number(rows[i][2], 3),
               lambda: np.array([r[2] for r in rows], dtype=float), True, 130),
        Column("after ", "The probability now", lambda i: words.number(rows[i][3], 3),
               lambda: np.array([r[3] for r in rows], dtype=float), True, 90),
        Column("", "", lambda i: "", texts(lambda i: ""), False, 40),
    ]
