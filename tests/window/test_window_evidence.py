"""Evidence: what the odds are made of, what would change the verdict, what siblings say."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from linewright.claims.breakdown import Breakdown
from linewright.claims.model import RollRow
from linewright.job.view_breakdown import factor_text, siblings_words, terms

KNOWN = Breakdown(0.6, 5.2, 1.1, -0.7, 0.006, 0.004, 0.001, 0.12, 0.15, 0.8, 0.07, -0.5)


def with_breakdown(session, row: int):
    """The session with a breakdown kept for the best candidate of one row."""
    claim = session.claims[row]
    best = replace(claim.candidates[0], weights=tuple(KNOWN))
    claim = replace(claim, candidates=(best, *claim.candidates[1:]), probability=0.7,
                    standing="tentative", p_unlisted=0.02)
    return replace(session, claims=(*session.claims[:row], claim, *session.claims[row + 1:]))


def test_factors_are_written_as_times_and_parts():
    assert factor_text(math.log(340)) == "×340"
    assert factor_text(-math.log(12)) == "÷12"
    assert factor_text(math.log(2.13)) == "×2.1"
    assert factor_text(0.01) == factor_text(-0.02) == "×1"
    assert factor_text(30.0) == "×10^13"


def test_the_terms_multiply_to_the_odds(solved):
    candidate = replace(solved.bench.session.claims[5].candidates[0], weights=tuple(KNOWN))
    four = terms(candidate)
    assert [t.name for t in four] == ["shows", "place", "strength", "free"]
    assert sum(t.log for t in four) == pytest.approx(KNOWN.log_odds)
    assert "181 times better" in four[1].words
    assert "+0.12 dex" in four[2].words
    assert "want this line too" in four[3].words
    assert terms(replace(candidate, weights=())) == ()


def test_the_chosen_candidate_shows_its_odds(solved, qtbot):
    bench = solved.bench
    bench.desk.document.replace(with_breakdown(bench.session, 12), "test")
    bench.view.select(13)
    rows = solved.space.evidence.rows
    assert not rows[0].odds.isHidden() and rows[1].odds.isHidden()
    assert "place ×181" in rows[0].odds.accessibleName()
    drawn = rows[0].odds.grab().toImage()
    colours = {drawn.pixelColor(x, y).name() for x in range(drawn.width())
               for y in range(drawn.height())}
    theme = bench.theme
    assert {theme.good, theme.bad} <= colours, "bars for and against"
    bench.view.change(candidate=1)
    assert rows[0].odds.isHidden()


def test_what_would_change_the_verdict_is_told_when_the_hands_rest(solved, qtbot, monkeypatch):
    from linewright.job.view_reasons import WhatChanges
    from linewright.window.panels import facts_box

    asked = []

    def told(session, row, species):
        asked.append((row, species))
        return WhatChanges(("if it stood 0.010 Å redder: P 0.94, likely",), (), True)
    monkeypatch.setattr(facts_box, "what_would_change", told)
    bench, facts = solved.bench, solved.space.evidence.facts
    for number in (3, 4, 5):
        bench.view.select(number)
    qtbot.waitUntil(lambda: not facts.isHidden(), timeout=2000)
    assert asked == [(4, bench.candidate().species)], "only where the selection rests"
    assert facts.text.text() == "If it stood 0.010 Å redder: P 0.94, likely"
    bench.view.change(candidate=1)
    qtbot.waitUntil(lambda: len(asked) == 2, timeout=2000)
    bench.view.select(None)
    assert facts.isHidden()


def test_real_facts_come_from_the_kept_breakdown(solved, qtbot):
    bench, facts = solved.bench, solved.space.evidence.facts
    bench.desk.document.replace(with_breakdown(bench.session, 12), "test")
    bench.view.select(13)
    qtbot.waitUntil(lambda: not facts.isHidden(), timeout=2000)
    assert ": P " in facts.text.text()


def test_the_words_of_the_list_are_never_cut(solved, qtbot):
    """Each label is as tall as its wrapped text needs, at any width and whatever was shown."""
    bench, evidence = solved.bench, solved.space.evidence
    bench.desk.document.replace(with_breakdown(bench.session, 12), "test")
    for width in (1600, 1280):
        solved.resize(width, 720)
        for number in (5, 13, 40):
            bench.view.select(number)
            qtbot.wait(80)
            for row in evidence.rows:
                if not row.isHidden() and not row.why.isHidden():
                    assert row.why.height() >= row.why.heightForWidth(row.why.width()) - 1
            assert evidence.verdict.height() >= evidence.verdict.heightForWidth(
                evidence.verdict.width()) - 1


def roll(**more) -> RollRow:
    return RollRow("Fe I", 12, 9, 3, 1e-9, 0.1, 0.05, "present", **more)


def test_siblings_tell_seen_missing_and_outside(solved):
    words = siblings_words(roll(missing_wave=5270.0, gap_wave=6600.0), "vacuum")
    assert words == ("9 of 12 seen", "missing 5270.00 · outside 6600.00")
    assert siblings_words(roll(), "vacuum") == ("9 of 12 seen", "")
    assert siblings_words(None, "air") == ("", "")
    bench, siblings = solved.bench, solved.space.evidence.siblings
    session = replace(bench.session, roll_call=tuple(
        replace(r, missing=1, missing_wave=5270.0) for r in bench.session.roll_call))
    bench.desk.document.replace(session, "test")
    bench.view.select(13)
    siblings.cut_now()
    assert " seen" in siblings.count.text()
    assert siblings.lines.text() == "missing 5268.53", "in the spectrum's own medium, air"


def test_the_roll_call_tells_limits_and_what_is_missing(solved):
    bench, panel = solved.bench, solved.space.roll_call
    rows = list(bench.session.roll_call)
    rows[0] = replace(rows[0], missing=1, missing_wave=5270.0, missing_depth=0.31)
    rows[-1] = replace(rows[-1], limit_dex=-0.4, limit_wave=4935.45, limit_ew=3.2)
    bench.desk.document.replace(replace(bench.session, roll_call=tuple(rows)), "test")
    titles = [c.title for c in panel.model.columns]

    def cell(row, title):
        return panel.model.index(panel.model.row_showing(row), titles.index(title)).data()
    last = len(rows) - 1
    assert cell(0, "strongest missing") == "5268.53 Å, 0.31"
    assert cell(0, "upper limit (dex)") == ""
    assert cell(last, "upper limit (dex)") == "< −0.40"
    assert cell(last, "limit from") == "4934.07 Å, 3.2 mÅ"


def test_a_chosen_species_is_told_in_words(solved):
    bench, panel = solved.bench, solved.space.roll_call
    assert "Choose a species" in panel.words.text()
    panel.table.setCurrentIndex(panel.model.index(0, 0))
    assert panel.words.text().startswith(f"{bench.session.roll_call[0].species} is present")
    assert "no abundance" in panel.words.text()
    bench.desk.document.replace(replace(bench.session, roll_call=()), "test")
    assert "Choose a species" in panel.words.text()


def test_strips_are_cut_only_where_the_selection_rests(solved, qtbot, monkeypatch):
    from linewright.window.panels import siblings as module

    bench, siblings, cut = solved.bench, solved.space.evidence.siblings, []
    real = module.sibling_strips
    monkeypatch.setattr(module, "sibling_strips", lambda *a: (cut.append(a[3]), real(*a))[1])
    for number in (3, 4, 5, 6):
        bench.view.select(number)
    assert cut == []
    qtbot.waitUntil(lambda: bool(cut), timeout=2000)
    assert cut == [bench.candidate()]
    assert siblings.title.text() == f"Siblings of {bench.candidate().species}"
    bench.view.select(7)
    bench.view.select(None)
    qtbot.wait(60)
    assert len(cut) == 1 and siblings.title.text() == "Siblings"
