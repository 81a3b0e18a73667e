"""A click on a bare trough or peak measures it there."""

from __future__ import annotations

import numpy as np
import pytest

from linewright.job.view_pick import pick, surroundings, weighed, without_claims
from linewright.job.view_session import unsolved_session
from linewright.session.document import Document
from linewright.spectra.medium import C_KM_S


@pytest.fixture
def unsolved(window):
    """An invented spectrum with few, well separated lines."""
    import window_builders as build

    from linewright.window.workbench import Desk

    catalogue = build.catalogue_of(60)
    spectrum = build.spectrum_of(catalogue)
    window.bench.add_desk(Desk(spectrum, Document(unsolved_session(spectrum))))
    window.invented = catalogue
    return window


def lone_line(catalogue) -> int:
    gaps = np.minimum(np.diff(catalogue.wave)[1:], np.diff(catalogue.wave)[:-1])
    return int(np.argmax(gaps)) + 1


def test_a_click_beside_a_trough_snaps_to_it(unsolved, qtbot):
    bench, catalogue = unsolved.bench, unsolved.invented
    row = lone_line(catalogue)
    centre = catalogue.wave[row] * (1 + 12.0 / C_KM_S)
    unsolved.spectrum_view.pickRequested.emit(float(centre + 0.04))
    qtbot.waitUntil(lambda: len(bench.session.features) == 1, timeout=60000)
    f = bench.session.features
    # the centre within five of the error of a Gaussian of this depth (Cayrel's formula gives
    # 0.692 sqrt(FWHM dx)/(depth S/N)), the depth within the noise of the spectrum
    assert f.wave[0] == pytest.approx(centre, abs=5 * 0.692 * np.sqrt(0.118 * 0.01) / (0.1 * 500))
    assert f.depth[0] == pytest.approx(10.0 ** (catalogue.loggf[row] + 1), abs=0.03)
    assert bench.view.now.selected == int(f.number[0])
    assert "hand" in f.flags[0].split()
    assert "Picked by hand" in unsolved.space.evidence.none_near.text()
    unsolved.spectrum_view.pickRequested.emit(float(centre))
    qtbot.waitUntil(lambda: not bench.tasks.busy("pick"), timeout=60000)
    assert len(bench.session.features) == 1, "picked again it is selected, not doubled"
    bench.run("edit.undo")
    assert len(bench.session.features) == 0


def test_a_click_on_bare_continuum_says_so(unsolved, qtbot):
    bench, catalogue = unsolved.bench, unsolved.invented
    middle = int(np.argmax(np.diff(catalogue.wave)))
    bare = 0.5 * (catalogue.wave[middle] + catalogue.wave[middle + 1])
    bench.view.change(span=(5150.0, 5151.0))
    unsolved.spectrum_view.pickRequested.emit(float(bare))
    qtbot.waitUntil(lambda: not bench.tasks.busy("pick"), timeout=60000)
    if len(bench.session.features):  # a noise peak above 2.5 sigma may stand within reach
        assert bench.session.features.significance[0] < 5
    else:
        assert "Nothing stands out" in unsolved.notices.current.text


def test_a_click_outside_all_samples_does_nothing(unsolved):
    assert surroundings(unsolved.bench.spectrum, unsolved.bench.session, 9000.0) is None


def test_a_pick_in_a_solved_session_is_weighed_among_its_neighbours(invented):
    import window_builders as build

    from linewright.session.feature_edits import remove_feature

    spectrum = build.spectrum_of(invented)
    session = build.session_of(spectrum, invented)
    row = lone_line(invented)
    wave = float(session.features.wave[row])
    session = remove_feature(session, row + 1)
    about = surroundings(spectrum, session, wave)
    measured = pick(*about, wave, 0.1)
    assert measured.wave[0] == pytest.approx(wave, abs=0.01)
    claim = weighed(without_claims(session), measured, spectrum.frame, invented)
    assert claim.candidates[0].species == invented.species_of(row)
    assert abs(claim.candidates[0].wave - invented.wave[row]) < 1e-6
    assert 0.0 <= claim.probability <= 1.0
    assert claim.p_unlisted > 0.0


def test_a_pick_and_its_claim_are_one_step_of_undo(solved, qtbot, invented, monkeypatch):
    import window_builders as build

    from linewright.window.acts import picking

    bench = solved.bench
    row = lone_line(invented)
    bench.view.select(row + 1)
    bench.run("claim.remove")
    before = bench.session
    said = build.claim_of(invented, row, np.random.default_rng(1))
    original = picking._call
    monkeypatch.setattr(picking, "_call", lambda engine, name, arguments: said
                        if name == "weighed" else original(None, name, arguments))
    picking.pick(bench, float(invented.wave[row] * (1 + build.VELOCITY / C_KM_S)))
    qtbot.waitUntil(lambda: bench.selected_row() is not None
                    and bench.session.claims[bench.selected_row()] == said, timeout=60000)
    assert bench.desk.document.undo_label == "add feature"
    bench.run("edit.undo")
    assert bench.session is before
