"""Acts with the catalogue line looked at: go there, claim with it, cite it."""

from __future__ import annotations

from ...errors import LinewrightError
from ...job.view_line_page import line_as_candidate, widths_away
from ...session import edits
from ..notices import Notice
from . import viewing

FAR = 3.0  # widths from its place at which a claimed line is remarked on


def has_line(bench) -> bool:
    return bench.catalogue is not None and bench.view.now.line is not None


def can_claim(bench) -> bool:
    return has_line(bench) and bench.session is not None and bench.selected_row() is not None


def claim_line(bench) -> None:
    """The selected feature is claimed for the line looked at."""
    number, row = bench.view.now.selected, bench.view.now.line
    line = line_as_candidate(bench.catalogue, row, bench.depth, bench.session, number)
    ranked = bench.session.claims[bench.selected_row()].candidates
    same = [k for k, c in enumerate(ranked, 1)
            if c.species == line.species and abs(c.wave - line.wave) < 1e-4]
    if same:
        done = bench.act(edits.accept_candidate, number, same[0])
    else:
        done = bench.act(edits.set_species, number, line.species, line)
    away = widths_away(bench.session, number, line)
    if done and away > FAR:
        bench.notify(Notice(
            f"Claimed, but {line.species} stands {away:.0f} line widths from this feature at the "
            "present velocity. Ctrl+Z takes it back.", "warning", seconds=15, topic="far"))


def go_to_line(bench) -> None:
    viewing.look_at_line(bench, bench.view.now.line)


def rake_line(bench) -> None:
    viewing.show_on_rake(bench, bench.catalogue.species_of(bench.view.now.line))


def copy_bibtex(bench) -> None:
    """The entries of the line's sources, on the clipboard."""
    from PySide6.QtGui import QGuiApplication

    from ...lines.citations import bibtex

    c, row = bench.catalogue, bench.view.now.line
    codes = [int(c.source[row]), int(c.source_alt[row])]
    keys = [c.source_keys[code] for code in codes if 0 <= code < len(c.source_keys)]
    try:
        text = bibtex(keys)
    except LinewrightError as refusal:
        bench.refuse(refusal)
        return
    if text:
        QGuiApplication.clipboard().setText(text + "\n")
        said = f"BibTeX entry of {' and '.join(dict.fromkeys(keys))} copied."
    else:
        said = f"{' and '.join(keys) or 'This line'} has no BibTeX entry: it is a source of your own."
    bench.notify(Notice(said, "note", seconds=6, topic="bibtex"))


def search_lines(bench, span: str = "") -> None:
    """The Catalogue in front, ready to type; span: a word for the range field."""
    panel = bench.window.space.catalogue
    bench.window.space.tables.show()
    bench.window.space.tables.setCurrentWidget(panel)
    if span:
        panel.fields["range"].setText(span)
        panel.filter_now()
    bench.window.focus_filter()
