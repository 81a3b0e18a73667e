"""The Catalogue's columns: texts are made for the rows on the screen only."""

from __future__ import annotations

import numpy as np
from PySide6.QtCore import Qt, Signal

from ...lines.catalogue import GRADES, ORIGINS, LineCatalogue
from ...spectra.medium import to_medium
from . import words
from .column_model import Column, ColumnModel

KEYS = ("wave", "species", "e_low", "loggf", "grade", "depth", "origin", "source")


class CatalogueModel(ColumnModel):
    """Rows by index from the arrays of the catalogue; the order is made beside the window."""

    orderAsked = Signal()

    def __init__(self, parent=None):
        super().__init__(parent)
        self.by, self.down = "wave", False

    def show_found(self, columns: list[Column], rows: np.ndarray) -> None:
        """Source rows in the order to be shown."""
        self.beginResetModel()
        self.columns, self.shown = columns, rows
        self.endResetModel()

    def sort(self, column: int, order: Qt.SortOrder = Qt.SortOrder.AscendingOrder) -> None:
        """Asks for another order; a million rows would hold the window too long here."""
        wanted = ("wave" if column < 0 else KEYS[column],
                  column >= 0 and order == Qt.SortOrder.DescendingOrder)
        if wanted != (self.by, self.down):
            self.by, self.down = wanted
            self.orderAsked.emit()

    def decoration(self, row: int, column: Column, role: int):
        if role == Qt.ItemDataRole.ToolTipRole and column.title == "grade":
            return words.grade(column.text(row)) or None
        return None


def catalogue_columns(c: LineCatalogue, depth, medium: str) -> list[Column]:
    """laboratory, species, E_low, log gf, grade, predicted depth, origin, source"""
    def column(title, tip, text, numeric, width):
        return Column(title, tip, text, _no_keys, numeric, width)

    return [
        column(f"laboratory ({medium}, Å)",
               "Laboratory wavelength and its error, in the spectrum's own medium",
               lambda i: words.with_error(float(to_medium(c.wave[i], medium)), c.wave_err[i], 4),
               True, 168),
        column("species", "Ion or molecule", lambda i: c.species_of(i), False, 84),
        column("E_low (eV)", "Energy of the lower level",
               lambda i: words.number(c.e_low[i], 3), True, 84),
        column("log gf", "Statistical weight times oscillator strength, dex",
               lambda i: words.number(c.loggf[i], 2, True), True, 66),
        column("grade", words.GRADE_TIP, lambda i: GRADES[int(c.grade[i])], False, 56),
        column("predicted depth", "At the present temperature and electron pressure",
               lambda i: "" if depth is None else words.number(depth[i], 3), True, 112),
        column("origin", "Where such lines arise", lambda i: ORIGINS[int(c.origin[i])], False, 84),
        column("source", "Bibliographic key of the values",
               lambda i: c.source_keys[int(c.source[i])] if c.source_keys else "", False, 120),
    ]


def _no_keys() -> np.ndarray:
    raise NotImplementedError("the Catalogue is put in order beside the window")
