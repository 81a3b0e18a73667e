"""The Roll call: which species are there, by lines expected, seen and missing."""

from __future__ import annotations

import numpy as np
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QFrame, QLabel, QScrollArea

from ...job.view_roll import verdict_words
from ...spectra.medium import to_medium
from . import words
from .column_model import Column, ColumnModel
from .table_panel import TablePanel

EMPTY = (
    "The Roll call counts, species by species, the lines that ought to be seen, those that "
    "are, and how likely chance alone would do as well.\nPress F5 to solve the spectrum."
)
CHOOSE = "Choose a species: its verdict stands here in words, and its lines go on the rake."
VERDICTS = {"present": "● present", "possible": "◑ possible", "absent": "⊗ absent",
            "not testable": "○ not testable"}
_ORDER = tuple(VERDICTS)


class RollCallPanel(TablePanel):
    """Choosing a species puts it on the rake."""

    def __init__(self, workbench, parent=None):
        super().__init__("Roll call", ColumnModel(), EMPTY, parent)
        self._workbench, self._rows = workbench, ()
        self._followed: str | None = None
        self.text = self.add_text_filter(
            "Filter: species or verdict", "Shows species or verdicts containing this text")
        self.words = QLabel(CHOOSE)
        self.words.setWordWrap(True)
        self.words.setTextFormat(Qt.TextFormat.PlainText)
        self.words.setAlignment(Qt.AlignmentFlag.AlignTop)
        self.words.setMargin(8)
        self.words.setAccessibleName("Verdict in words")
        self.words.setMinimumWidth(200)
        area = QScrollArea()
        area.setFrameShape(QFrame.Shape.NoFrame)
        area.setWidgetResizable(True)
        area.setWidget(self.words)
        self.body.addWidget(area)
        self.body.setStretchFactor(0, 3)
        self.body.setStretchFactor(1, 1)
        self.body.setSizes([750, 250])
        self.filtered.connect(self.refresh)
        self.acted.connect(self._choose)

    def _choose(self, row: int) -> None:
        self._tell(row)
        self._workbench.show_on_rake(self._rows[row].species)

    def _tell(self, row: int | None) -> None:
        """The verdict of a row in sentences; with None how to get one."""
        said = () if row is None else verdict_words(self._rows[row], self._workbench.session)
        text = "\n".join(f"{s[:1].upper()}{s[1:]}." for s in said).replace(" -", " −")
        self.words.setText(text or CHOOSE)

    def show_session(self, session) -> None:
        rows = () if session is None else session.roll_call
        if rows is self._rows and self.model.columns:
            return
        first, self._rows = not self._rows, rows
        self._followed = None
        self._tell(None)
        self.refresh()
        if first and rows:
            for i, column in enumerate(self.model.columns):
                self.table.setColumnWidth(i, column.width)

    def show_species(self, species: str) -> None:
        """The row and the verdict of the species that Evidence looks at."""
        at = next((i for i, r in enumerate(self._rows) if r.species == species), None)
        if at is not None and species != self._followed:
            self._followed = species
            self.follow(at)
            self._tell(at)

    def refresh(self) -> None:
        text = self.text.text().strip().lower()
        keep = [i for i, r in enumerate(self._rows)
                if text in f"{r.species} {r.verdict}".lower()]
        self.model.show_rows(_columns(self._rows, self._workbench.medium), np.array(keep, dtype=int))
        self.show_state("No species passes this filter." if self._rows else EMPTY)


def _columns(rows, medium: str) -> list[Column]:
    def numbers(name):
        return lambda: np.array([getattr(r, name) for r in rows], dtype=float)

    def count(title, name, tip):
        return Column(title, tip, lambda i: f"{getattr(rows[i], name)}", numbers(name), True, 84)

    return [
        Column("species", "Species on trial", lambda i: rows[i].species,
               lambda: np.array([r.species for r in rows], dtype=str), False, 100),
        Column("verdict", "present, possible, absent or not testable",
               lambda i: VERDICTS.get(rows[i].verdict, rows[i].verdict),
               lambda: np.array([_ORDER.index(r.verdict) if r.verdict in _ORDER else 9
                                 for r in rows]), False, 118),
        count("expected", "expected", "Lines predicted strong enough to be seen in the coverage"),
        count("seen", "seen", "Expected lines found"),
        count("missing", "missing", "Expected lines not found"),
        Column("chance", "Probability that chance alone matches as many lines",
               lambda i: _chance(rows[i].p_chance), numbers("p_chance"), True, 96),
        Column("strength offset (dex)", "Learned strength of the species over the predicted one",
               lambda i: _offset(rows[i]), numbers("offset_dex"), True, 150),
        Column("upper limit (dex)", "Where the species is not seen: its strength offset lies "
               "below this", lambda i: _limit(rows[i]), numbers("limit_dex"), True, 116),
        Column("limit from", "The line that sets the limit, and the equivalent width it would at "
               "least need", lambda i: _limit_line(rows[i], medium), numbers("limit_wave"), True, 150),
        Column("strongest missing", "The strongest expected line that is not seen, and its "
               "predicted depth", lambda i: _missing(rows[i], medium), numbers("missing_wave"),
               True, 150),
    ]


def _chance(p: float) -> str:
    if p == 0:
        return "< 1e−300"
    return f"{p:.1e}".replace("-", "−") if 0 <= p < 0.001 else words.number(p, 3)


def _limit(row) -> str:
    text = words.number(row.limit_dex, 2, True)
    return f"< {text}" if text else ""


def _limit_line(row, medium: str) -> str:
    if not np.isfinite(row.limit_wave):
        return ""
    ew = words.number(row.limit_ew, 1)
    return f"{float(to_medium(row.limit_wave, medium)):.2f} Å" + (f", {ew} mÅ" if ew else "")


def _missing(row, medium: str) -> str:
    if not row.missing or not np.isfinite(row.missing_wave):
        return ""
    depth = words.number(row.missing_depth, 2)
    return f"{float(to_medium(row.missing_wave, medium)):.2f} Å" + (f", {depth}" if depth else "")


def _offset(row) -> str:
    text = words.number(row.offset_dex, 2, True)
    error = words.number(row.offset_err, 2)
    return f"{text} ± {error}" if text and error else text
