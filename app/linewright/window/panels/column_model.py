"""A table model over arrays: rows are fetched by index, filter and order are index arrays."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from PySide6.QtCore import QAbstractTableModel, QModelIndex, Qt

LONG = 40  # letters: longer texts are told in the tip too
RIGHT = Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter
LEFT = Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter


@dataclass(frozen=True)
class Column:
    """text(row): what is shown; keys(): the array rows are ordered by."""

    title: str
    tip: str
    text: Callable[[int], str]
    keys: Callable[[], np.ndarray]
    numeric: bool = True
    width: int = 90


class ColumnModel(QAbstractTableModel):
    """Shows ``shown`` (source rows in display order); 250,000 rows cost nothing to scroll."""

    def __init__(self, parent=None):
        super().__init__(parent)
        self.columns: list[Column] = []
        self.shown = np.zeros(0, dtype=np.int64)
        self._keep = np.zeros(0, dtype=np.int64)
        self._order: tuple[int, Qt.SortOrder] | None = None

    def show_rows(self, columns: list[Column], rows: np.ndarray) -> None:
        """New contents: ``rows`` are the source rows that pass the filter, ascending."""
        self.beginResetModel()
        self.columns, self._keep = columns, np.asarray(rows, dtype=np.int64)
        self.shown = self._ordered()
        self.endResetModel()

    def _ordered(self) -> np.ndarray:
        if self._order is None or self._order[0] >= len(self.columns) or not len(self._keep):
            return self._keep
        column, direction = self._order
        keys = self.columns[column].keys()[self._keep]
        order = np.argsort(keys, kind="stable")
        if direction == Qt.SortOrder.DescendingOrder:
            order = order[::-1]
        if np.issubdtype(keys.dtype, np.floating):  # absent values last, either way
            absent = np.isnan(keys[order])
            order = np.concatenate([order[~absent], order[absent]])
        return self._keep[order]

    @property
    def is_sorted(self) -> bool:
        return self._order is not None

    def repaint_rows(self, sources) -> None:
        """Source rows whose texts changed while their place did not."""
        for source in sources:
            row = self.row_showing(int(source))
            if row >= 0:
                self.dataChanged.emit(
                    self.index(row, 0), self.index(row, max(len(self.columns) - 1, 0)))

    def source_row(self, index: QModelIndex) -> int:
        return int(self.shown[index.row()])

    def row_showing(self, source: int) -> int:
        """Display row of a source row, -1 when the filter hides it."""
        at = np.nonzero(self.shown == source)[0]
        return int(at[0]) if len(at) else -1

    def rowCount(self, parent: QModelIndex = QModelIndex()) -> int:  # noqa: B008
        return 0 if parent.isValid() else len(self.shown)

    def columnCount(self, parent: QModelIndex = QModelIndex()) -> int:  # noqa: B008
        return 0 if parent.isValid() else len(self.columns)

    def data(self, index: QModelIndex, role: int = Qt.ItemDataRole.DisplayRole):
        if not index.isValid():
            return None
        column = self.columns[index.column()]
        if role == Qt.ItemDataRole.DisplayRole:
            return column.text(self.source_row(index))
        if role == Qt.ItemDataRole.TextAlignmentRole:
            return RIGHT if column.numeric else LEFT
        return self.decoration(self.source_row(index), column, role)

    def decoration(self, row: int, column: Column, role: int):
        """Colour, font or tool tip of a cell; words that may be cut off stand in the tip."""
        if role == Qt.ItemDataRole.ToolTipRole and not column.numeric:
            words = column.text(row)
            return words if len(words) > LONG else None
        return None

    def headerData(self, section, orientation, role=Qt.ItemDataRole.DisplayRole):
        if orientation != Qt.Orientation.Horizontal or section >= len(self.columns):
            return None
        column = self.columns[section]
        if role == Qt.ItemDataRole.DisplayRole:
            return column.title
        if role == Qt.ItemDataRole.ToolTipRole:
            return column.tip
        if role == Qt.ItemDataRole.TextAlignmentRole:
            return RIGHT if column.numeric else LEFT
        return None

    def sort(self, column: int, order: Qt.SortOrder = Qt.SortOrder.AscendingOrder) -> None:
        self.layoutAboutToBeChanged.emit()
        old = self.persistentIndexList()
        sources = [(self.source_row(i), i.column()) for i in old]
        self._order = None if column < 0 else (column, order)
        self.shown = self._ordered()
        place = {int(source): row for row, source in enumerate(self.shown)} if old else {}
        new = [self.index(place[s], c) if s in place else QModelIndex() for s, c in sources]
        self.changePersistentIndexList(old, new)
        self.layoutChanged.emit()
