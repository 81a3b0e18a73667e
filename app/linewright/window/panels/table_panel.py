"""A table with a filter row above it and a sentence in its place while it is empty."""

from __future__ import annotations

from PySide6.QtCore import Qt, QTimer, Signal
from PySide6.QtWidgets import (
    QAbstractItemView,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QSplitter,
    QStackedWidget,
    QTableView,
    QVBoxLayout,
    QWidget,
)

from .column_model import ColumnModel


class TablePanel(QWidget):
    """Table, filter row and empty sentence; ``acted`` when a row is chosen by a person.

    body: holds the table; what a panel adds stands beside it
    """

    acted = Signal(int)
    filtered = Signal()

    def __init__(self, name: str, model: ColumnModel, empty: str, parent=None):
        super().__init__(parent)
        self.model, self.table = model, _table(name, model)
        self.setAccessibleName(name)
        self.filters = QHBoxLayout()
        self.filters.setContentsMargins(6, 4, 6, 2)
        self.filters.setSpacing(6)
        self.empty = QLabel(empty, self)
        self.empty.setObjectName("emptyState")
        self.empty.setAlignment(Qt.AlignmentFlag.AlignCenter)
        self.empty.setWordWrap(True)
        self._stack, self.body = QStackedWidget(), QSplitter(Qt.Orientation.Horizontal)
        self._stack.addWidget(self.table)
        self._stack.addWidget(self.empty)
        self.body.setChildrenCollapsible(False)
        self.body.addWidget(self._stack)
        box = QVBoxLayout(self)
        box.setContentsMargins(0, 0, 0, 0)
        box.setSpacing(0)
        box.addLayout(self.filters)
        box.addWidget(self.body, 1)
        self._later = QTimer(self)
        self._later.setSingleShot(True)
        self._later.setInterval(120)
        self._later.timeout.connect(self.filtered)
        self._following = False
        self.table.selectionModel().currentRowChanged.connect(self._moved)

    def add_text_filter(self, hint: str, tip: str) -> QLineEdit:
        edit = QLineEdit(self)
        edit.setPlaceholderText(hint)
        edit.setToolTip(tip)
        edit.setAccessibleName(hint)
        edit.setClearButtonEnabled(True)
        edit.textChanged.connect(self.filter_soon)
        self.filters.addWidget(edit, 1)
        return edit

    def filter_soon(self, *_unused) -> None:
        """Filters when typing pauses."""
        self._later.start()

    def filter_now(self) -> None:
        self._later.stop()
        self.filtered.emit()

    def show_state(self, empty_text: str = "") -> None:
        """The table when it has rows, otherwise the sentence."""
        if empty_text:
            self.empty.setText(empty_text)
        columns = self.model.columns
        last_is_text = bool(columns) and not columns[-1].numeric
        self.table.horizontalHeader().setStretchLastSection(last_is_text)
        self._stack.setCurrentIndex(0 if self.model.rowCount() else 1)

    def follow(self, source: int | None) -> None:
        """Shows the row of a source row as current, without acting."""
        self._following = True
        try:
            row = -1 if source is None else self.model.row_showing(source)
            if row < 0:
                self.table.clearSelection()
                self.table.selectionModel().clearCurrentIndex()
            elif row != self.table.currentIndex().row():
                self.table.setCurrentIndex(self.model.index(row, 0))
                self._centre(row)
        finally:
            self._following = False

    def _centre(self, row: int) -> None:
        """Neighbours of the row stay in sight on both sides."""
        place = self.table.visualRect(self.model.index(row, 0))
        height = self.table.viewport().height()
        if place.top() < place.height() or place.bottom() > height - place.height():
            self.table.scrollTo(self.model.index(row, 0),
                                QAbstractItemView.ScrollHint.PositionAtCenter)

    def _moved(self, current, _previous) -> None:
        if current.isValid() and not self._following:
            self.acted.emit(self.model.source_row(current))


def _table(name: str, model: ColumnModel) -> QTableView:
    table = QTableView()
    table.setAccessibleName(f"{name} table")
    table.setModel(model)
    table.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
    table.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
    table.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
    table.setHorizontalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
    table.setAlternatingRowColors(True)
    table.setShowGrid(False)
    table.setWordWrap(False)
    table.setTabKeyNavigation(False)
    table.setSortingEnabled(True)
    table.horizontalHeader().setSortIndicator(-1, Qt.SortOrder.AscendingOrder)
    table.horizontalHeader().setSortIndicatorClearable(True)
    table.horizontalHeader().setHighlightSections(False)
    table.horizontalHeader().setStretchLastSection(True)
    rows = table.verticalHeader()
    rows.setVisible(False)
    rows.setSectionResizeMode(rows.ResizeMode.Fixed)
    rows.setDefaultSectionSize(table.fontMetrics().height() + 6)
    return table
