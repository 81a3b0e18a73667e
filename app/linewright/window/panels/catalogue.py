"""The Catalogue: every line known, filtered by species, range, text and predicted depth."""

from __future__ import annotations

import numpy as np
from PySide6.QtCore import QStringListModel, Qt
from PySide6.QtWidgets import QCompleter, QLabel, QLineEdit, QPushButton

from .catalogue_filter import CatalogueFilter, passing, ranges_of
from .catalogue_model import CatalogueModel, catalogue_columns
from .table_panel import TablePanel

LOADING = "The catalogue of lines is being read."
NO_MATCH = "No catalogue line passes this filter. Clear a field to see more."


class CataloguePanel(TablePanel):
    """A chosen line is shown in the spectrum; its species can go on the rake."""

    def __init__(self, workbench, parent=None):
        super().__init__("Catalogue", CatalogueModel(), LOADING, parent)
        self._workbench, self._seen, self._names = workbench, None, QStringListModel(self)
        self.species = self._field("species, such as Fe I, Ti II", "Only these species", 150)
        self.range = self._field("range, such as 5160:5200",
                                 "Wavelength range in the spectrum's own medium; empty means the spectrum's, "
                                 "'view' follows the view, 'all' shows every line", 200)
        self.depth = self._field("depth above", "Only lines predicted deeper than this at the "
                                 "present temperature, such as 0.05", 90)
        self.text = self._field("text in source or origin", "Only lines whose source, origin or "
                                "wavelength contains this text", 130)
        self.count = QLabel(self)
        self.filters.addWidget(self.count)
        self.filters.addStretch(1)
        self._rake_fields()
        self.filtered.connect(self.refresh)
        self.acted.connect(self._look)
        self.table.doubleClicked.connect(lambda _index: self._to_rake())

    def _field(self, hint: str, tip: str, width: int) -> QLineEdit:
        edit = QLineEdit(self)
        edit.setPlaceholderText(hint)
        edit.setToolTip(tip)
        edit.setAccessibleName(tip)
        edit.setClearButtonEnabled(True)
        edit.setMinimumWidth(width // 2)
        edit.setMaximumWidth(width + 60)
        edit.textChanged.connect(self.filter_soon)
        self.filters.addWidget(edit, 2)
        return edit

    def _rake_fields(self) -> None:
        self.rake = QLineEdit(self)
        self.rake.setPlaceholderText("automatic")
        self.rake.setToolTip("Species on the rake, separated by commas; empty shows the most "
                             "claimed ones in view")
        self.rake.setAccessibleName("Species on the rake")
        self.rake.setClearButtonEnabled(True)
        self.rake.setMaximumWidth(220)
        self.rake.editingFinished.connect(self._name_rake)
        completer = QCompleter(self._names, self)
        completer.setCaseSensitivity(Qt.CaseSensitivity.CaseInsensitive)
        self.rake.setCompleter(completer)
        label = QLabel("&On the rake", self)
        label.setBuddy(self.rake)
        self.to_rake = QPushButton("Put on rake", self)
        self.to_rake.setToolTip("Put the species of the chosen line on the rake (double click)")
        self.to_rake.clicked.connect(self._to_rake)
        for widget in (label, self.rake, self.to_rake):
            self.filters.addWidget(widget)

    def show_catalogue(self) -> None:
        """New catalogue, medium or temperature."""
        bench = self._workbench
        if bench.catalogue is not None:
            self._names.setStringList(sorted(bench.catalogue.species_names))
        self._seen = None
        self.refresh()

    def refresh(self) -> None:
        bench = self._workbench
        if bench.catalogue is None:
            self.model.show_rows([], np.zeros(0, dtype=int))
            self.show_state(LOADING)
            return
        first = not self.model.columns
        wanted = self._filter()
        if (wanted, id(bench.depth)) == self._seen:
            return
        self._seen = (wanted, id(bench.depth))
        rows = passing(bench.catalogue, bench.depth, wanted)
        self.model.show_rows(catalogue_columns(bench.catalogue, bench.depth, wanted.medium), rows)
        self.count.setText(f"{len(rows):,} lines")
        self.show_state(NO_MATCH)
        if first:
            for i, column in enumerate(self.model.columns):
                self.table.setColumnWidth(i, column.width)

    def _filter(self) -> CatalogueFilter:
        bench = self._workbench
        own = bench.drawn.own_range() if bench.drawn is not None else None
        low, high = ranges_of(self.range.text(), own, bench.view.now.span)
        names = tuple(n.strip().lower() for n in self.species.text().split(",") if n.strip())
        return CatalogueFilter(names, low, high, self.text.text().strip().lower(),
                               _number(self.depth.text()), bench.medium)

    def follow_view(self) -> None:
        if self.range.text().strip().lower() == "view":
            self.filter_soon()

    def show_rake(self, species: tuple[str, ...] | None) -> None:
        if not self.rake.hasFocus():
            self.rake.setText(", ".join(species or ()))

    def _look(self, row: int) -> None:
        self._workbench.look_at_line(row)

    def _to_rake(self) -> None:
        index = self.table.currentIndex()
        if index.isValid():
            row = self.model.source_row(index)
            self._workbench.show_on_rake(self._workbench.catalogue.species_of(row))

    def _name_rake(self) -> None:
        self._workbench.name_rake(self.rake.text())


def _number(text: str) -> float:
    try:
        return float(text.replace(",", "."))
    except ValueError:
        return 0.0
