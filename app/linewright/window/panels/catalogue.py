"""The Catalogue: every line known, searched in plain words, and the page of the one chosen."""

from __future__ import annotations

import numpy as np
from PySide6.QtCore import QStringListModel, Qt
from PySide6.QtWidgets import QCompleter, QLabel, QLineEdit

from ...errors import LinewrightError
from ...job.view_line_page import page_for
from ...job.view_line_words import EXAMPLES, Places, as_words, asked
from ...job.view_lines import Order, at_rest, lines_found
from ...spectra.medium import to_medium
from ..coalesced import Coalesced
from .catalogue_model import CatalogueModel, catalogue_columns
from .line_page import LinePageView
from .plain_cells import PlainCells
from .table_panel import TablePanel

LOADING = "The catalogue of lines is being read."
NO_MATCH = ("No catalogue line fits. Without a range only the spectrum's own is searched: type "
            "'all', or clear a field to see more.")
FIELDS = (
    ("range", "range: view, here, all", "Laboratory wavelengths such as 5160:5200; 'view' follows "
     "the view, 'here' is about the selected feature, 'all' shows every line, empty means the "
     "spectrum's own range", 130),
    ("species", "species", "Only these species, such as Fe I, Ti II; an element means all its "
     "ions", 96),
    ("e_low", "E_low < eV", "Energy of the lower level: 3 (up to), 2:3 (between) or >5", 76),
    ("loggf", "log gf >", "Only lines of at least this log gf, such as −1", 70),
    ("depth", "depth >", "Only lines predicted deeper than this at the present temperature, "
     "such as 0.05", 70),
)


class CataloguePanel(TablePanel):
    """A chosen line is shown in the spectrum, on the rake and on its page."""

    def __init__(self, workbench, parent=None):
        super().__init__("Catalogue", CatalogueModel(), LOADING, parent)
        self._workbench, self._seen, self._names = workbench, None, QStringListModel(self)
        self.table.setItemDelegate(PlainCells(self.table))
        self.text = self._field(f"Search: {EXAMPLES[9:]}", "Every word must fit: species, range, "
                                "energy, strength, grade, origin, term, source or wavelength; "
                                f"{EXAMPLES}", (160, 600), 4)
        self.fields = {name: self._field(hint, tip, (width // 2, width + 40), 1)
                       for name, hint, tip, width in FIELDS}
        self.count = QLabel(self)
        self.filters.addWidget(self.count)
        self._rake_field()
        self.page = LinePageView(workbench)
        self.body.addWidget(self.page)
        self.body.setStretchFactor(0, 5)
        self.body.setStretchFactor(1, 4)
        self.body.setSizes([500, 400])
        self._searching = Coalesced(workbench.tasks, "lines", "Searching lines", self._failed)
        self._paging = Coalesced(workbench.tasks, "line page", "Reading a line", self._failed)
        self.filtered.connect(self.refresh)
        self.model.orderAsked.connect(self.refresh)
        self.acted.connect(workbench.look_at_line)
        self.page.lineAsked.connect(workbench.look_at_line)
        self.table.doubleClicked.connect(lambda _index: workbench.run("line.rake"))

    def _field(self, hint: str, tip: str, widths, share: int) -> QLineEdit:
        edit = QLineEdit(self)
        edit.setPlaceholderText(hint)
        edit.setToolTip(tip)
        edit.setAccessibleName(hint)
        edit.setClearButtonEnabled(True)
        edit.setMinimumWidth(widths[0])
        edit.setMaximumWidth(widths[1])
        edit.textChanged.connect(self.filter_soon)
        self.filters.addWidget(edit, share)
        return edit

    def _rake_field(self) -> None:
        self.rake = QLineEdit(self)
        self.rake.setPlaceholderText("automatic")
        self.rake.setToolTip("Species on the rake, separated by commas; empty shows the most "
                             "claimed ones in view")
        self.rake.setAccessibleName("Species on the rake")
        self.rake.setClearButtonEnabled(True)
        self.rake.setMaximumWidth(180)
        self.rake.editingFinished.connect(
            lambda: self._workbench.name_rake(self.rake.text()))
        completer = QCompleter(self._names, self)
        completer.setCaseSensitivity(Qt.CaseSensitivity.CaseInsensitive)
        self.rake.setCompleter(completer)
        label = QLabel("&On the rake", self)
        label.setBuddy(self.rake)
        for widget in (label, self.rake):
            self.filters.addWidget(widget)

    def show_catalogue(self) -> None:
        """New catalogue, medium or temperature."""
        bench = self._workbench
        if bench.catalogue is not None:
            self._names.setStringList(sorted(bench.catalogue.species_names))
        self._seen = None
        self.refresh()
        self.show_line(bench.view.now.line)

    def refresh(self) -> None:
        """Asks for the lines that fit what is typed now; they are shown when found."""
        bench = self._workbench
        catalogue, depth = bench.catalogue, bench.depth
        if catalogue is None:
            self.model.show_found([], np.zeros(0, dtype=int))
            self.show_state(LOADING)
            return
        try:
            wanted = asked(self._words(), catalogue.species_names, self._places())
        except LinewrightError as refusal:
            self._failed(refusal)
            return
        order = Order(self.model.by, self.model.down)
        seen = (wanted, order, id(catalogue), id(depth))
        if seen == self._seen:
            return
        self._seen = seen
        medium = bench.medium
        self._searching.ask(
            lambda: lines_found(catalogue, depth, wanted, order),
            lambda rows: self._show(rows, (catalogue, depth, medium)))

    def _words(self) -> str:
        fields = {name: edit.text() for name, edit in self.fields.items()}
        return f"{self.text.text()} {as_words(fields)}"

    def _places(self) -> Places:
        bench = self._workbench
        velocity = bench.view.now.velocity
        whole = bench.drawn.own_range() if bench.drawn is not None else None
        return Places(bench.medium, at_rest(whole, velocity), at_rest(bench.view.now.span, velocity),
                      at_rest(bench.about_selected(), velocity), bench.view.now.line)

    def _show(self, rows, made_of) -> None:
        catalogue, depth, medium = made_of
        if catalogue is not self._workbench.catalogue:
            return
        first = not self.model.columns
        self.model.show_found(catalogue_columns(catalogue, depth, medium), rows)
        self.count.setText(f"{len(rows):,} lines")
        self.show_state(NO_MATCH)
        if first:
            for i, column in enumerate(self.model.columns):
                self.table.setColumnWidth(i, column.width)
        self.follow(self._workbench.view.now.line)

    def _failed(self, error: Exception) -> None:
        """Half a word typed is no reason for a notice: said in the table's place."""
        self._seen = None
        if not isinstance(error, LinewrightError):
            self._workbench.window.report_unexpected(error)
            return
        self.model.show_found(self.model.columns, np.zeros(0, dtype=int))
        self.count.clear()
        self.show_state(str(error))

    def follow_view(self) -> None:
        self._follow_word("view")

    def follow_selection(self) -> None:
        self._follow_word("here")
        self.page.refresh()

    def _follow_word(self, word: str) -> None:
        if word in self._words().lower().split():
            self.filter_soon()

    def show_line(self, row: int | None) -> None:
        """The page of a line; its row is marked where the table shows it."""
        bench = self._workbench
        catalogue, session = bench.catalogue, bench.session
        if row is None or catalogue is None or row >= len(catalogue):
            self.page.show_page(None)
            return
        self.follow(row)
        span = bench.vacuum_range()
        wave = float(to_medium(catalogue.wave[row], bench.medium))
        title = f"{catalogue.species_of(row)} {wave:.3f}"
        self._paging.ask(lambda: page_for(catalogue, row, session, span),
                         lambda page: self.page.show_page(page, title))

    def show_rake(self, species: tuple[str, ...] | None) -> None:
        if not self.rake.hasFocus():
            self.rake.setText(", ".join(species or ()))

    def show_theme(self) -> None:
        self.page.show_theme()
