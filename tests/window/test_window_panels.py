"""Ledger, Roll call, Catalogue, Orphans and Evidence on an invented session."""

from __future__ import annotations

import numpy as np
import pytest
from PySide6.QtCore import Qt

from linewright.spectra.medium import to_medium


def shown_texts(panel, column: int) -> list[str]:
    model = panel.model
    return [model.index(r, column).data() for r in range(model.rowCount())]


def test_the_ledger_lists_every_feature_in_own_medium(solved):
    session = solved.bench.session
    texts = shown_texts(solved.ledger, 0)
    wave = to_medium(session.features.wave, "air")
    assert len(texts) == len(session.features)
    assert texts[0].startswith(f"{wave[0]:.4f} ± 0.0030")


def test_ledger_filters_by_text_standing_and_species(solved, qtbot):
    ledger, claims = solved.ledger, solved.bench.session.claims
    ledger.text.setText("ti ii")
    ledger.filter_now()
    assert {t.strip("()") for t in shown_texts(ledger, 1)} == {"Ti II"}
    ledger.text.clear()
    ledger.standing.setCurrentIndex(1)
    ledger.filter_now()
    assert ledger.model.rowCount() == sum(c.standing == "firm" for c in claims) > 0
    assert set(shown_texts(ledger, 7)) == {"● firm"}
    ledger.species.setCurrentText("Fe I")
    both = sum(c.standing == "firm" and c.species == "Fe I" for c in claims)
    assert ledger.model.rowCount() == both
    solved.bench.run("edit.clear")
    assert ledger.model.rowCount() == len(claims)


@pytest.mark.parametrize("column", range(10))
def test_every_ledger_column_sorts_both_ways(solved, column):
    ledger = solved.ledger
    ledger.table.sortByColumn(column, Qt.SortOrder.AscendingOrder)
    keys = ledger.model.columns[column].keys()[ledger.model.shown]
    assert all(keys[i] <= keys[i + 1] for i in range(len(keys) - 1))
    ledger.table.sortByColumn(column, Qt.SortOrder.DescendingOrder)
    keys = ledger.model.columns[column].keys()[ledger.model.shown]
    assert all(keys[i] >= keys[i + 1] for i in range(len(keys) - 1))


def test_absent_numbers_sort_last_both_ways(solved):
    panel = solved.space.roll_call
    for order in (Qt.SortOrder.AscendingOrder, Qt.SortOrder.DescendingOrder):
        panel.table.sortByColumn(6, order)
        assert shown_texts(panel, 0)[-1] == "Ba II"
        assert shown_texts(panel, 6)[-1] == ""


def test_selecting_in_the_ledger_selects_everywhere(solved):
    bench = solved.bench
    row = 20
    solved.ledger.table.setCurrentIndex(solved.ledger.model.index(row, 0))
    number = int(bench.session.features.number[row])
    assert bench.view.now.selected == number
    assert solved.spectrum_view.plot.labels.selected == number
    wave = float(to_medium(bench.session.features.wave[row], "air"))
    assert f"{wave:.3f}" in solved.space.evidence.heading.text()


def test_selecting_in_the_spectrum_selects_in_the_ledger(solved):
    number = int(solved.bench.session.features.number[7])
    solved.spectrum_view.featureClicked.emit(number)
    current = solved.ledger.table.currentIndex()
    assert solved.ledger.model.source_row(current) == 7


def test_selecting_an_orphan_selects_its_feature(solved):
    orphans = solved.space.orphans
    orphans.table.setCurrentIndex(orphans.model.index(1, 0))
    assert solved.bench.view.now.selected == 9
    assert "far too weak" in shown_texts(orphans, 5)[1]


def test_a_species_of_the_roll_call_goes_on_the_rake(solved):
    panel = solved.space.roll_call
    row = shown_texts(panel, 0).index("Ti II")
    panel.table.setCurrentIndex(panel.model.index(row, 0))
    assert solved.bench.view.now.rake[0] == "Ti II"
    assert solved.rake.species[0] == "Ti II"


def test_the_rake_shows_the_most_claimed_in_view_and_the_candidate(solved, qtbot):
    bench = solved.bench
    bench.view.select(int(bench.session.features.number[0]))
    bench.view.change(span=(5150.0, 5170.0))
    solved.rake.refresh()
    session = bench.session
    wave = to_medium(session.features.wave, "air")
    inside = [session.claims[i].species for i in np.nonzero((wave >= 5150) & (wave <= 5170))[0]
              if session.claims[i].standing != "unclaimed"]
    best = max(sorted(set(inside)), key=inside.count)
    assert solved.rake.species[0] == best
    assert session.claims[0].species in solved.rake.species


def test_evidence_ranks_candidates_with_reasons(solved):
    bench, evidence = solved.bench, solved.space.evidence
    bench.view.select(int(bench.session.features.number[12]))
    claim = bench.session.claims[12]
    first, second = evidence.rows[0], evidence.rows[1]
    assert first.name.text().startswith(claim.candidates[0].species)
    assert "offset +6.3 σ" in second.detail.text()
    assert first.why.text().startswith("+ stands where it should; as deep as predicted")
    assert not first.why.isHidden() and second.why.isHidden()
    second.chosen.emit(1)
    assert "− stands too far from its place" in second.why.text()
    assert first.why.isHidden()
    assert evidence.unlisted.number.text()


def test_siblings_are_other_lines_of_the_candidates_species(solved, invented):
    bench, siblings = solved.bench, solved.space.evidence.siblings
    bench.view.select(int(bench.session.features.number[12]))
    siblings.cut_now()
    species = bench.session.claims[12].candidates[0].species
    assert siblings.title.text() == f"Siblings of {species}"
    strips = siblings.strips.strips
    assert 4 <= len(strips) <= 6
    own = to_medium(invented.wave[invented.species == invented.species_names.index(species)], "air")
    for strip in strips:
        assert np.min(np.abs(own - float(strip.title))) < 0.006
        # every line of the invented spectrum is there: the flux is lowest at zero velocity
        near = np.abs(strip.velocity) < 3
        assert np.nanmin(strip.flux[near]) < 0.75
    siblings.strips.stripActivated.emit(0)
    selected = bench.session.claims[bench.selected_row()]
    assert selected.species == species


def test_empty_panels_say_what_will_be_there(window, invented, qtbot):
    import window_builders as build

    from linewright.job.view_session import unsolved_session
    from linewright.session.document import Document
    from linewright.window.workbench import Desk

    spectrum = build.spectrum_of(invented)
    window.bench.add_desk(Desk(spectrum, Document(unsolved_session(spectrum))))
    for panel in (window.ledger, window.space.roll_call, window.space.orphans):
        assert "F5" in panel.empty.text()
    assert window.space.evidence._pages.currentIndex() == 0
