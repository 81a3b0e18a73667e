"""The Catalogue tab: searching, the page of a line, claiming with it, a million rows."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtCore import Qt, QUrl
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QPushButton

from linewright.spectra.medium import C_KM_S, to_medium


@pytest.fixture
def found(solved, qtbot):
    """Types into the Catalogue's fields and waits until the answer is shown."""
    panel = solved.space.catalogue
    solved.space.tables.setCurrentWidget(panel)

    def search(words="", **fields):
        panel.text.setText(words)
        for name, edit in panel.fields.items():
            edit.setText(fields.get(name, ""))
        panel.filter_now()
        qtbot.waitUntil(lambda: not panel._searching.busy, timeout=5000)
        return panel.model.shown
    return search


def test_every_field_narrows_the_lines(found, solved, invented):
    c, depth = invented, solved.bench.depth
    name = np.array(c.species_names)[c.species]
    wave = to_medium(c.wave, "air")
    assert set(name[found(species="fe i")]) == {"Fe I"}
    assert set(name[found(species="ti, mg i")]) == {"Ti II", "Mg I"}
    rows = found(range="5200:5210")
    assert sorted(rows) == list(np.flatnonzero((wave >= 5200) & (wave <= 5210))) != []
    assert sorted(found(depth="0.5", range="all")) == list(np.flatnonzero(depth >= 0.5))
    assert sorted(found(loggf="-1.3")) == list(np.flatnonzero(c.loggf > -1.3)) != []
    assert len(found(e_low="2")) == 0 and len(found(e_low="2:3")) == len(c)


def test_the_search_field_understands_plain_words(found, invented):
    c = invented
    name = np.array(c.species_names)[c.species]
    wave = to_medium(c.wave, "air")
    rows = found("Fe I 5150:5250 e<3 gf>-1.5")
    assert sorted(rows) == list(np.flatnonzero(
        (name == "Fe I") & (wave >= 5150) & (wave <= 5250) & (c.loggf > -1.5))) != []
    digits = f"{wave[40]:.1f}"[:6]
    assert 40 in found(digits) and len(found(digits)) < 10
    assert len(found("nothing like it")) == 0


def test_what_is_not_understood_is_said_in_the_tables_place(found, solved):
    found("Fe I gf=")
    assert "is not understood" in solved.space.catalogue.empty.text()
    assert solved.notices.current is None
    found("qwertz")
    assert "No catalogue line fits" in solved.space.catalogue.empty.text()


def test_view_and_here_follow_what_is_looked_at(found, solved, invented, qtbot):
    bench, wave = solved.bench, to_medium(invented.wave, "air")
    bench.view.change(span=(5150.0, 5160.0))
    shift = 1 + bench.view.now.velocity / C_KM_S
    inside = np.flatnonzero((wave * shift >= 5150) & (wave * shift <= 5160))
    assert sorted(found(range="view")) == list(inside) != []
    bench.view.change(span=(5160.0, 5170.0))
    panel = solved.space.catalogue
    qtbot.waitUntil(lambda: list(panel.model.shown) != list(inside), timeout=3000)
    bench.view.select(30)
    rows = found("here")
    assert 29 in rows and len(rows) < 4
    bench.view.select(None)
    found("here")
    assert "no feature is selected" in panel.empty.text()


def test_the_order_is_made_beside_the_window(found, solved, invented, qtbot):
    panel = solved.space.catalogue
    found(range="all")
    panel.table.sortByColumn(3, Qt.SortOrder.DescendingOrder)
    qtbot.waitUntil(lambda: not panel._searching.busy, timeout=3000)
    assert list(np.diff(invented.loggf[panel.model.shown]) <= 0).count(False) == 0
    panel.table.sortByColumn(1, Qt.SortOrder.AscendingOrder)
    qtbot.waitUntil(lambda: not panel._searching.busy, timeout=3000)
    names = [invented.species_of(i) for i in panel.model.shown]
    assert names == sorted(names)
    panel.table.sortByColumn(-1, Qt.SortOrder.AscendingOrder)
    qtbot.waitUntil(lambda: not panel._searching.busy, timeout=3000)
    assert list(panel.model.shown) == list(range(len(invented)))


def chosen(window, row, qtbot):
    """Chooses a line in the table, as the arrow keys would, and waits for its page."""
    panel = window.space.catalogue
    panel.table.setCurrentIndex(panel.model.index(panel.model.row_showing(row), 0))
    qtbot.waitUntil(lambda: panel.page.page is not None and panel.page.page.row == row,
                    timeout=3000)
    return panel.page


def test_a_chosen_line_is_shown_on_its_page_in_the_spectrum_and_on_the_rake(
        found, solved, invented, qtbot):
    bench = solved.bench
    found(range="all")
    page = chosen(solved, 100, qtbot)
    assert page.title.text().startswith(invented.species_of(100))
    text = page.text.toPlainText()
    assert f"{to_medium(invented.wave[100], 'air'):.4f}" in text and "Invented2024" in text
    low, high = bench.view.now.span
    shift = 1 + bench.view.now.velocity / C_KM_S
    assert low < to_medium(invented.wave[100] * shift, "air") < high
    assert bench.session.claims[bench.selected_row()].species == invented.species_of(100)
    lane = solved.spectrum_view.rake
    assert lane.marked == (invented.wave[100], invented.species_of(100))
    assert invented.species_of(100) in lane.teeth.names
    bench.view.change(rake=())
    qtbot.mouseClick(page.buttons["line.rake"], Qt.MouseButton.LeftButton)
    assert bench.view.now.rake == (invented.species_of(100),)


def test_the_marked_tooth_is_drawn(found, solved, qtbot):
    found(range="all")
    chosen(solved, 100, qtbot)
    lane = solved.spectrum_view.rake
    before = lane.grab().toImage()
    lane.set_marked(None)
    after = lane.grab().toImage()
    assert before != after and not lane.failed


def test_siblings_on_the_page_lead_on(found, solved, invented, qtbot):
    found(range="all")
    page = chosen(solved, 100, qtbot)
    other = page.page.strongest[0].row
    assert f"{to_medium(invented.wave[other], 'air'):.3f}" in page.text.toPlainText()
    page.text.anchorClicked.emit(QUrl(f"line:{other}"))
    qtbot.waitUntil(lambda: page.page.row == other, timeout=3000)
    assert solved.bench.view.now.line == other
    panel = solved.space.catalogue
    assert panel.model.source_row(panel.table.currentIndex()) == other


def test_the_selected_feature_is_claimed_with_the_line(found, solved, invented, qtbot):
    bench = solved.bench
    row = int(np.argmin(np.diff(invented.wave)))  # the line nearest to its neighbour
    bench.view.select(row + 1)
    near = next(i for i in found("here") if i != row)
    chosen(solved, near, qtbot)
    assert bench.view.now.selected == row + 1
    bench.run("line.claim")
    claim = bench.session.claims[row]
    assert (claim.species, claim.standing, claim.by) == (
        invented.species_of(near), "firm", "person")
    assert claim.line.wave == invented.wave[near]
    bench.run("edit.undo")
    assert bench.session.claims[row].by == "machine"
    assert not bench.session.claims[row].chosen


def test_claiming_with_a_ranked_candidate_accepts_it(found, solved, qtbot):
    bench = solved.bench
    bench.view.select(30)
    found(range="all")
    chosen(solved, 29, qtbot)
    bench.run("line.claim")
    assert bench.session.history[-1].action == "accept_candidate"
    assert bench.session.claims[29].line == bench.session.claims[29].candidates[0]


def test_a_claim_far_from_its_line_is_remarked_on(found, solved, qtbot):
    bench = solved.bench
    found(range="all")
    chosen(solved, 200, qtbot)
    bench.view.select(30)
    bench.run("line.claim")
    assert "line widths from this feature" in solved.notices.current.text


def test_the_sources_entry_is_copied(found, solved, invented, qtbot):
    bench = solved.bench
    found(range="all")
    chosen(solved, 7, qtbot)
    bench.run("line.bibtex")
    assert "no BibTeX entry" in solved.notices.current.text
    bench.catalogue = replace(invented, source_keys=("NIST_ASD",))
    bench.run("line.bibtex")
    assert QGuiApplication.clipboard().text().startswith("@misc{NIST_ASD,")


def test_flags_and_grade_are_told_in_words(qtbot, invented):
    from linewright.lines.catalogue import NOMINAL, NONLTE
    from linewright.lines.page import line_page
    from linewright.window.panels.line_page_text import page_html

    n = len(invented)
    flagged = replace(invented, flags=np.full(n, NOMINAL | NONLTE, np.uint8),
                      grade=np.full(n, 2, np.uint8), wave_alt=invented.wave + 0.001,
                      source_alt=np.zeros(n, np.int32))
    html = page_html(line_page(flagged, 5), "air", ("#000000", "#000000"))
    for words in ("no published strength", "depart from the populations", "0.12 dex or better",
                  "second source", "0.0010 Å"):
        assert words in html, words


def test_lines_can_be_searched_without_the_mouse(solved, qtbot):
    bench = solved.bench
    bench.view.select(30)
    bench.run("line.here")
    panel = solved.space.catalogue
    assert solved.space.tables.currentWidget() is panel
    assert panel.fields["range"].text() == "here"
    qtbot.waitUntil(lambda: 29 in panel.model.shown, timeout=3000)
    keys = {k for name, c in bench.commands.items() if name.startswith("line.") for k in c.keys}
    assert len(keys) >= 6
    for button in panel.page.findChildren(QPushButton):
        assert button.toolTip().endswith(")"), "a button tells its key"


def test_a_newer_question_overtakes_waiting_ones(window, qtbot):
    import threading

    from linewright.window.coalesced import Coalesced

    gate, done, started = threading.Event(), [], []
    asking = Coalesced(window.tasks, "test", "", done.append)

    def work(name):
        started.append(name)
        gate.wait(5)
        return name
    for name in "abc":
        asking.ask(lambda n=name: work(n), done.append)
    gate.set()
    qtbot.waitUntil(lambda: not asking.busy, timeout=5000)
    assert started == ["a", "c"] and done == ["c"]


def test_a_million_lines_cost_a_screenful_of_texts(qtbot):
    """Texts are made for the cells asked for and for no others."""
    import window_builders as build

    from linewright.window.panels.catalogue_model import CatalogueModel, catalogue_columns

    few = build.catalogue_of(2000, low=3000.0, high=10000.0)
    many = np.sort(np.resize(few.wave, 1_000_000))
    columns = {name: np.resize(value, len(many)) for name, value in vars(few).items()
               if isinstance(value, np.ndarray) and name != "wave"}
    catalogue, made = replace(few, wave=many, **columns), []

    def counted(column):
        return replace(column, text=lambda i: made.append(i) or column.text(i))
    model = CatalogueModel()
    model.show_found([counted(c) for c in catalogue_columns(catalogue, None, "air")],
                     np.arange(len(catalogue)))
    assert model.rowCount() == 1_000_000 and made == []
    screen = range(500_000, 500_020)
    for row in screen:
        for column in range(model.columnCount()):
            assert isinstance(model.index(row, column).data(), str)
    assert made == [row for row in screen for _ in range(model.columnCount())]
