"""The Ledger: one row a feature component, with filter by text, standing and species."""

from __future__ import annotations

import numpy as np
from PySide6.QtCore import Qt
from PySide6.QtGui import QBrush, QColor, QFont
from PySide6.QtWidgets import QComboBox, QLabel

from ...session.model import STANDINGS, Session
from . import words
from .column_model import Column, ColumnModel
from .ledger_columns import LedgerArrays, ledger_columns
from .plain_cells import PlainCells
from .table_panel import TablePanel

EMPTY = (
    "The Ledger lists every feature: where it is, what made it, how sure we are.\n"
    "Press F5 to solve the spectrum, or click a trough or peak in it to measure one."
)
NO_MATCH = "No feature passes this filter. Clear the filter to see all of them."


class LedgerModel(ColumnModel):
    """A person's rows are bold, set-aside rows struck out: seen without colour."""

    def __init__(self, parent=None):
        super().__init__(parent)
        self.arrays: LedgerArrays | None = None
        self.quiet = QBrush(QColor("#808080"))
        self._bold, self._struck = QFont(), QFont()
        self._bold.setBold(True)
        self._struck.setStrikeOut(True)

    def decoration(self, row: int, column: Column, role: int):
        claim = self.arrays.claims[row]
        if role == Qt.ItemDataRole.FontRole:
            if claim.standing == "set aside":
                return self._struck if column.title != "standing" else None
            return self._bold if claim.by == "person" else None
        if role == Qt.ItemDataRole.ForegroundRole and claim.standing == "unclaimed":
            return self.quiet
        if role == Qt.ItemDataRole.ToolTipRole:
            said = words.flags(self.arrays.flags(row))
            return (said if column.title == "flags" else claim.note or said) or None
        return None


class LedgerPanel(TablePanel):
    """Follows the session and the selection of the workbench."""

    def __init__(self, workbench, parent=None):
        super().__init__("Ledger", LedgerModel(), EMPTY, parent)
        self._workbench, self._session = workbench, None
        self.table.setItemDelegate(PlainCells(self.table, decorated=True))
        self.text = self.add_text_filter(
            "Filter: species, wavelength, flag or note",
            "Shows rows whose claim, wavelength, flags or note contain this text (Ctrl+F)",
        )
        self.standing = self._choice("any standing", "Only rows of this standing")
        self.standing.addItems([words.standing(s) for s in STANDINGS])
        self.species = self._choice("any species", "Only rows claimed for this species")
        self.count = QLabel(self)
        self.filters.addWidget(self.count)
        self.filtered.connect(self.refresh)
        self.acted.connect(self._select)

    def _choice(self, all_text: str, tip: str) -> QComboBox:
        box = QComboBox(self)
        box.addItem(all_text)
        box.setToolTip(tip)
        box.setAccessibleName(tip)
        box.setSizeAdjustPolicy(QComboBox.SizeAdjustPolicy.AdjustToContents)
        box.currentIndexChanged.connect(self.filter_now)
        self.filters.addWidget(box)
        return box

    def show_session(self, session: Session | None) -> None:
        first = self._session is None
        if self._took_claims(session):
            return
        self._session = session
        self.model.arrays = LedgerArrays(session) if session is not None else None
        self._fill_species()
        self.refresh()
        if first and self.model.columns:
            for i, column in enumerate(self.model.columns):
                self.table.setColumnWidth(i, column.width)

    def _took_claims(self, session: Session | None) -> bool:
        """A few changed claims are repainted where they stand, unless they move the rows."""
        if session is None or self.model.arrays is None:
            return False
        if session.spectrum.medium != self._session.spectrum.medium:
            return False
        rows = self.model.arrays.take_claims(session)
        if rows is None:
            return False
        self._session = session
        self._fill_species()
        if self._narrowed() or self.model.is_sorted:
            self.refresh()
        else:
            self.model.repaint_rows(rows)
        return True

    def _narrowed(self) -> bool:
        return bool(self.text.text().strip() or self.standing.currentIndex() > 0
                    or self.species.currentIndex() > 0)

    def _fill_species(self) -> None:
        names = sorted({c.species for c in self._session.claims if c.species}) if (
            self._session is not None) else []
        if names == [self.species.itemText(k) for k in range(1, self.species.count())]:
            return
        chosen = self.species.currentText()
        self.species.blockSignals(True)
        self.species.clear()
        self.species.addItems(["any species", *names])
        self.species.setCurrentIndex(max(self.species.findText(chosen), 0))
        self.species.blockSignals(False)

    def show_theme(self, theme) -> None:
        self.model.quiet = QBrush(QColor(theme.muted))
        self.table.viewport().update()

    def refresh(self) -> None:
        a = self.model.arrays
        if a is None:
            self.model.show_rows([], np.zeros(0, dtype=int))
            self.count.clear()
            self.show_state(EMPTY)
            return
        rows = np.nonzero(self._passing(a))[0]
        self.model.show_rows(ledger_columns(a), rows)
        total = len(a.wave)
        self.count.setText("" if len(rows) == total else f"{len(rows):,} of {total:,}")
        self.show_state(NO_MATCH if total else EMPTY)
        self.show_selection(self._workbench.view.now.selected)

    def _passing(self, a: LedgerArrays) -> np.ndarray:
        keep = np.ones(len(a.wave), dtype=bool)
        if self.standing.currentIndex() > 0:
            keep &= a.standing == self.standing.currentIndex() - 1
        if self.species.currentIndex() > 0:
            wanted = self.species.currentText()
            keep &= np.array([c.species == wanted for c in a.claims], dtype=bool)
        text = self.text.text().strip().lower()
        if text:
            keep &= np.array(
                [text in f"{s} {w:.3f} {a.flags(i)} {n}".lower() for i, (s, w, n) in
                 enumerate(zip(a.species, a.wave, a.note, strict=True))], dtype=bool)
        return keep

    def show_selection(self, number: int | None) -> None:
        if self._session is None or number is None:
            self.follow(None)
            return
        at = np.nonzero(self._session.features.number == number)[0]
        self.follow(int(at[0]) if len(at) else None)

    def _select(self, row: int) -> None:
        self._workbench.view.select(int(self._session.features.number[row]))
