"""The window's questions: file dialogs and the one-line asking bar."""

from __future__ import annotations

from pathlib import Path

from . import layout_memory as memory
from .commands import claim as claiming
from .commands import anchoring, fitting, opening, saving
from .commands import view as viewing
from .formats import FIGURES, SUFFIX, TABLES
from .workspace_names import TABLES as TABS

SPECTRA = ("Spectra and sessions (*.fits *.fit *.fts *.fits.gz *.fz *.txt *.dat *.asc *.csv *.tsv "
           "*.tab *.ecsv *.vot *.xml *.json);;All files (*)")
TABLE_NAMES = {"ledger": "Ledger", "rollcall": "Roll call", "orphans": "Orphans"}


class Questions:
    """Part of the main window: asks, then calls the act."""

    def ask_open(self) -> None:
        from PySide6.QtWidgets import QFileDialog

        names, _kind = QFileDialog.getOpenFileNames(
            self, "Open spectrum or session", str(memory.recall("folder", "")), SPECTRA)
        if names:
            memory.keep("folder", str(Path(names[0]).parent))
            opening.open_files(self.bench, names)

    def _ask_path(self, title: str, suggestion: str, kinds: str) -> Path | None:
        from PySide6.QtWidgets import QFileDialog

        name, _kind = QFileDialog.getSaveFileName(self, title, suggestion, kinds)
        if not name:
            return None
        memory.keep("save folder", str(Path(name).parent))
        return Path(name)

    def save(self) -> None:
        if self.bench.desk.path is None:
            self.ask_save()
        else:
            saving.save(self.bench)

    def save_then(self, then) -> None:
        if self.bench.desk.path is None:
            self.ask_save(then)
        else:
            saving.save(self.bench, then=then)

    def ask_save(self, then=lambda: None) -> None:
        path = self._ask_path("Save session", saving.suggested(self.bench, SUFFIX),
                              f"Sessions (*{SUFFIX})")
        if path is not None:
            if not path.name.endswith(".json"):
                path = path.with_name(path.name + SUFFIX)
            saving.save(self.bench, path, then)

    def ask_table(self) -> None:
        what = self.table_shown()
        kinds = ";;".join(f"{s.upper()} (*.{s})" for s in TABLES)
        path = self._ask_path(
            f"Export the {TABLE_NAMES[what]}", saving.suggested(self.bench, f".{what}.ecsv"), kinds)
        if path is not None:
            saving.export_table(self.bench, path, what)

    def table_shown(self) -> str:
        """The table of the tab in front; the Ledger for the Catalogue's tab."""
        what = TABS[self.space.tables.currentIndex()]
        return what if what in TABLE_NAMES else "ledger"

    def ask_figure(self) -> None:
        kinds = ";;".join(f"{s.upper()} (*.{s})" for s in FIGURES)
        path = self._ask_path("Export the figure of what is in view",
                              saving.suggested(self.bench, ".pdf"), kinds)
        if path is not None:
            saving.export_figure(self.bench, path)

    def ask_note(self) -> None:
        row = self.bench.selected_row()
        self.ask_bar.ask("Note", self.bench.session.claims[row].note, "kept with this feature",
                         lambda text: claiming.set_note(self.bench, text))

    def ask_parts(self) -> None:
        self.ask_bar.ask("Split into", "3", "2 to 9 components",
                         lambda text: fitting.split_in(self.bench, text))

    def ask_limits(self) -> None:
        self.ask_bar.ask("Fit limits (Å)", fitting.limits_text(self.bench), "5187.2:5188.1",
                         lambda text: fitting.set_limits(self.bench, text))

    def ask_anchor(self) -> None:
        self.ask_bar.ask("Anchor (Å, flux)", "", "5187.2 1.013",
                         lambda text: anchoring.add(self.bench, text))

    def ask_again(self) -> None:
        """The other spectrum, then the table to write."""
        from PySide6.QtWidgets import QFileDialog

        name, _kind = QFileDialog.getOpenFileName(
            self, "Measure again in", str(memory.recall("folder", "")), SPECTRA)
        if not name:
            return
        memory.keep("folder", str(Path(name).parent))
        kinds = ";;".join(f"{s.upper()} (*.{s})" for s in TABLES)
        path = self._ask_path("Write both measurements and their differences",
                              saving.suggested(self.bench, ".again.ecsv"), kinds)
        if path is not None:
            saving.measure_again(self.bench, Path(name), path)

    def ask_reading(self) -> None:
        self.ask_bar.ask(f"Read {self.bench.asked_file.name} with", "",
                         "columns wave=11,flux=2 unit nm hdu 1 row 3 frame rest medium air",
                         lambda text: opening.read_again(self.bench, text))

    def ask_wavelength(self) -> None:
        self.ask_bar.ask("Go to (Å)", "", "5183.6 or a range 5160:5200",
                         lambda text: viewing.go_to(self.bench, text))
