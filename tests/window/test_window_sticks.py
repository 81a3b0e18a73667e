"""A session without a spectrum shows its features as sticks; edits follow in the plot."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import window_builders as build

from linewright.job.view_sticks import stick_spectrum
from linewright.session import edits
from linewright.session.document import Document
from linewright.spectra.medium import to_medium
from linewright.window.workbench import Desk


def session_without_samples(invented):
    session = build.session_of(build.spectrum_of(invented), invented)
    return replace(session, spectrum=replace(session.spectrum, from_features=True))


def test_each_stick_has_the_depth_of_its_feature(invented):
    session = session_without_samples(invented)
    segment = stick_spectrum(session).segments[0]
    f = session.features
    at = np.searchsorted(segment.wave, f.wave)
    assert np.array_equal(segment.wave[at], f.wave)
    assert np.allclose(1.0 - segment.flux[at], f.depth)
    assert np.all(np.diff(segment.wave) > 0)
    assert np.count_nonzero(segment.flux != 1.0) == len(f)


def test_a_feature_session_is_drawn_and_can_be_walked(window, invented, qtbot):
    session = session_without_samples(invented)
    bench = window.bench
    bench.add_desk(Desk(None, Document(session)))
    qtbot.waitUntil(lambda: bench.depth is not None, timeout=5000)
    view = window.spectrum_view
    assert bench.spectrum is None and view.plot.item is not None
    row = next(k for k in range(40, 80) if session.claims[k].standing == "firm")
    number = int(session.features.number[row])
    own = float(to_medium(session.features.wave[row], "air"))
    bench.view.change(span=(own - 5, own + 5))
    bench.view.select(number)
    window.spectrum_view.plot.repaint()
    low, high = view.plot.flux_shown
    assert low < 1.0 - session.features.depth[row] < high
    assert number in view.plot.labels.marks.number[view.plot.labels.placed.rows]
    assert not bench.allows("spectrum.solve") and bench.allows("view.whole")
    assert len(window.rake.species) > 0


def test_the_view_stays_where_a_stick_is_removed(window, invented, qtbot):
    bench = window.bench
    bench.add_desk(Desk(None, Document(session_without_samples(invented))))
    bench.view.change(span=(5180.0, 5190.0))
    bench.view.select(int(bench.session.features.number[150]))
    count = len(window.spectrum_view.plot.item.parts[0].x)
    span = bench.view.now.span
    bench.run("claim.remove")
    assert len(window.spectrum_view.plot.item.parts[0].x) == count - 3
    assert np.allclose(bench.view.now.span, span)


def test_marks_after_an_edit_equal_marks_made_anew(solved):
    from linewright.window.plot.feature_marks import marks_after, marks_of
    from linewright.window.plot.tick_strokes import TickStrokes

    session, theme = solved.bench.session, solved.bench.theme
    old = marks_of(session, "air")
    strokes = TickStrokes(old, theme)
    changed = edits.set_aside(session, 12, "artefact")
    changed = edits.set_species(changed, 30, "Eu II")
    new, rows = marks_after(old, changed, "air")
    fresh = marks_of(changed, "air")
    assert sorted(old.number[rows].tolist()) == [12, 30]
    for name in ("standing", "species", "origin", "text", "short", "importance"):
        assert np.array_equal(getattr(new, name), getattr(fresh, name)), name
    strokes.follow(new, rows)
    scale = solved.spectrum_view.plot.scale()
    said = {colour: lines for colour, lines in strokes.lines(scale, 50.0)}
    for colour, lines in TickStrokes(fresh, theme).lines(scale, 50.0):
        assert np.array_equal(said.pop(colour), lines)
    assert not said


def test_siblings_follow_an_edit_without_new_cuts(solved, monkeypatch):
    """After a claim changes the strips say so, and equal strips made anew."""
    from linewright.job import view_siblings
    from linewright.window.panels import siblings

    bench, box = solved.bench, solved.space.evidence.siblings
    session = bench.session
    row = next(k for k, c in enumerate(session.claims) if c.standing == "firm")
    bench.view.select(int(session.features.number[row]))
    box.cut_now()
    sibling = next(s for s in box._found if s.said == session.claims[row].species)
    made = []
    monkeypatch.setattr(siblings, "sibling_strips", lambda *a: made.append(a))
    changed = edits.set_species(bench.session, sibling.feature, "Eu II")
    bench.desk.document.replace(changed, "test")
    assert not made
    said = {s.wave: s.said for s in box._found}
    assert said[sibling.wave] == "Eu II"
    fresh = view_siblings.sibling_strips(
        bench.spectrum, bench.session, (bench.catalogue, bench.depth), bench.candidate(),
        bench.view.now.velocity, float(session.features.fwhm[row]))
    assert [(s.wave, s.feature, s.said) for s in fresh] == [
        (s.wave, s.feature, s.said) for s in box._found]
