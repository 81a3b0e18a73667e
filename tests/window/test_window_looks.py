"""What a reader must be able to see: several velocities and bands in the Rake, flags, plain counts."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import plot_scenes as scenes
import pytest
import window_builders as build

from linewright.claims.model import RollRow
from linewright.job.view_breakdown import siblings_words
from linewright.job.view_rake import Elsewhere, elsewhere, heads_claimed, rake_teeth
from linewright.job.view_reasons import reasons
from linewright.job.view_seen_depths import seen_depths
from linewright.lines.bands import load_bands
from linewright.session import edits
from linewright.session.document import Document
from linewright.spectra.medium import C_KM_S, air_to_vacuum, to_medium
from linewright.window.acts import opening
from linewright.window.panels.ledger_columns import shown_probability
from linewright.window.plot import RakeData, SpectrumView
from linewright.window.plot.extremes import PixelScale
from linewright.window.plot.flux_axis import flux_title
from linewright.window.plot.off_scale import places_above
from linewright.window.plot.rake_teeth import RakeTeeth
from linewright.window.theme import LIGHT
from linewright.window.typeset import typeset
from linewright.window.workbench import Desk

AIR = -23.4  # km/s of the air, say


@pytest.fixture
def scene():
    catalogue = build.catalogue_of()
    return catalogue, build.session_of(build.spectrum_of(catalogue), catalogue)


def moved(session, rows, **fields):
    """The session with the claimed lines of some rows changed, all of them firm."""
    claims = list(session.claims)
    for i in rows:
        line = replace(claims[i].candidates[0], **fields)
        claims[i] = replace(claims[i], candidates=(line,), standing="firm",
                            origin=line.origin, species=line.species)
    return replace(session, claims=tuple(claims))


def test_teeth_of_the_air_stand_while_the_others_slide():
    rest = float(air_to_vacuum(5050.0))
    own = np.array([np.nan, AIR])
    data = RakeData(np.full(2, rest), np.array([0.5, 0.9]), np.array([0, 1]), ("Fe I", "O2"), own=own)
    teeth, scale = RakeTeeth(data), PixelScale(5040.0, 5060.0, 0.0, 4000.0)
    for velocity in (0.0, 40.0):
        found = teeth.columns(2, scale, "vacuum", velocity)
        places = [int(np.nonzero(np.isfinite(row))[0][0]) for row in found]
        wanted = rest * (1 + np.array([velocity, AIR]) / C_KM_S)
        assert places == np.floor(scale.pixels(wanted)).astype(int).tolist()
    observed = rest * (1 + AIR / C_KM_S)
    assert teeth.nearest(1, observed, 0.01, 40.0) == (rest, 0.9)
    assert teeth.nearest(0, observed, 0.01, 40.0) is None
    assert teeth.observed(1, rest, 40.0) == pytest.approx(observed, abs=1e-9)


def test_species_and_lines_of_other_components_stand_at_their_own_velocity(scene):
    catalogue, session = scene
    iron = [i for i, c in enumerate(session.claims) if c.species == "Fe I"]
    nickel = [i for i, c in enumerate(session.claims) if c.species == "Ni I"]
    assert len(iron) > 5 and len(nickel) > 2
    session = moved(session, nickel, velocity=AIR, origin="telluric")
    session = moved(session, iron[1:], velocity=build.VELOCITY)
    session = moved(session, iron[:1], velocity=80.0)
    apart = elsewhere(session)
    assert dict(apart.species) == {"Ni I": AIR}
    assert [(n, v) for n, _w, v in apart.lines] == [("Fe I", 80.0)]
    assert apart.origins == (("Ni I", "telluric"),)
    names = ("Fe I", "Ni I")
    wave = np.sort(np.concatenate([catalogue.wave[catalogue.species == k] for k in (0, 5)]))
    row = np.array([int(catalogue.species[np.searchsorted(catalogue.wave, w)] == 5) for w in wave])
    teeth = rake_teeth((wave, np.full(len(wave), 0.4), row), names, apart)
    assert np.all(np.diff(teeth.wave) >= 0) and len(teeth.wave) == len(wave) + 1
    assert np.all(teeth.own[teeth.row == 1] == AIR)
    assert teeth.own[teeth.row == 0][np.isfinite(teeth.own[teeth.row == 0])].tolist() == [80.0]


def test_nothing_stands_apart_in_a_plain_session(scene):
    _catalogue, session = scene
    assert elsewhere(session) == Elsewhere()


def with_bands(session, count: int = 2):
    """The session with its first features turned into heads of TiO that the table knows."""
    bands = [b for b in load_bands() if b.molecule == "TiO" and b.shading == "red"][:count]
    features = replace(session.features, flags=("band",) * count + session.features.flags[count:])
    session = replace(session, features=features)
    for i, band in enumerate(bands):
        session = moved(session, [i], species="TiO", origin="molecular", wave=band.head)
    return session, bands


def test_bands_hang_in_the_rake_as_heads_with_their_reach(scene, qtbot):
    _catalogue, session = scene
    session, bands = with_bands(session)
    nothing = np.zeros(0)
    teeth = rake_teeth((nothing, nothing, nothing.astype(int)), ("TiO",), elsewhere(session))
    assert teeth.wave.tolist() == sorted(b.head for b in bands)
    assert len(heads_claimed(session, "TiO")) == 2 and heads_claimed(session, "MgH") == []
    view = SpectrumView()
    qtbot.addWidget(view)
    view.resize(900, 500)
    view.set_spectrum(scenes.spectrum())
    view.show()
    low, high = air_to_vacuum(np.array([5040.0, 5060.0]))
    view.set_view(5030.0, 5070.0)

    def coloured() -> np.ndarray:
        ground = scenes.rgb(LIGHT.base)
        return np.any(scenes.pixels(view.rake)[view.rake.head + 3, 70:880] != ground, axis=1)

    view.set_rake(RakeData(nothing, nothing, nothing.astype(int), ("TiO",)))
    assert not coloured().any()
    view.set_rake(RakeData(nothing, nothing, nothing.astype(int), ("TiO",),
                           bands=((0, float(low), float(high)),)))
    assert 0.45 < coloured().mean() < 0.55  # half of the view lies inside


def test_siblings_of_a_band_are_its_other_heads(solved, qtbot):
    bench = solved.bench
    session, bands = with_bands(bench.session)
    desk = Desk(bench.spectrum, Document(session))
    bench.add_desk(desk)
    bench.view.select(int(session.features.number[0]))
    box = solved.space.evidence.siblings
    qtbot.waitUntil(lambda: box.title.text() == "Heads of TiO", timeout=3000)
    assert box.count.text() == "2 claimed"
    assert all(f"{w:.2f}" in box.strips.hint for w in heads_claimed(session, "TiO"))


def test_no_line_is_called_missing_where_all_are_seen():
    seen = RollRow("Ca II", 2, 2, 0, 1e-9, 0.0, 0.1, "present", missing_wave=3934.78)
    assert siblings_words(seen, "vacuum") == ("2 of 2 seen", "")
    gone = replace(seen, seen=1, missing=1)
    assert siblings_words(gone, "vacuum") == ("1 of 2 seen", "missing 3934.78")


def flagged(solved):
    session = solved.bench.session
    claims = list(session.claims)
    claims[4] = replace(claims[4], flags="off-velocity off-excitation")
    flags = list(session.features.flags)
    flags[4] = "wing blend"
    features = replace(session.features, flags=tuple(flags))
    desk = Desk(solved.bench.spectrum, Document(replace(
        session, features=features, claims=tuple(claims))))
    solved.bench.add_desk(desk)
    return int(features.number[4])


def test_what_stands_out_is_seen_in_ledger_and_evidence(solved, qtbot):
    number = flagged(solved)
    solved.bench.view.select(number)
    panel, ledger = solved.space.evidence, solved.space.ledger
    qtbot.waitUntil(lambda: panel.flags.text().startswith("off-velocity: "), timeout=3000)
    assert "off-excitation: its lower level" in panel.flags.text()
    assert panel.flags.text().endswith("also wing, blend")
    assert panel.flags.objectName() == "standsOut"
    column = next(c for c in ledger.model.columns if c.title == "flags")
    assert column.text(4) == "off-velocity off-excitation wing blend"
    room = ledger.table.columnWidth(ledger.model.columns.index(column))
    assert ledger.table.fontMetrics().horizontalAdvance("off-velocity off-excitation") < room
    ledger.text.setText("off-velocity")
    ledger.filter_now()
    assert ledger.model.shown.tolist() == [4]


def test_hopeless_candidates_take_one_line(solved, qtbot):
    session = solved.bench.session
    row = next(i for i, c in enumerate(session.claims) if c.candidates[1].probability < 0.004)
    solved.bench.view.select(int(session.features.number[row]))
    rows = solved.space.evidence.rows
    qtbot.waitUntil(lambda: not rows[1].isHidden(), timeout=3000)
    assert rows[1].detail.isHidden() and not rows[0].detail.isHidden()
    solved.bench.view.change(candidate=1)
    qtbot.waitUntil(lambda: not rows[1].detail.isHidden(), timeout=3000)


@pytest.mark.parametrize(("written", "printed"), [
    ("Fe I (stellar) -0.152 A away", "Fe I (stellar) −0.152 Å away"),
    ("Co I is -0.219 Å off, -7.7 sigma", "Co I is −0.219 Å off, −7.7 σ"),
    ("voting gives -68.3 +- 4.6 km/s", "voting gives −68.3 ± 4.6 km/s"),
    ("2.1e-5 of an A star", "2.1e-5 of an A star"),
])
def test_sentences_are_shown_in_the_signs_of_print(written, printed):
    assert typeset(written) == printed


def test_a_saved_session_tells_reading_and_solving_apart(scene):
    _catalogue, session = scene
    spectrum = replace(build.spectrum_of(_catalogue), warnings=("no errors given",))
    both = replace(session, warnings=("no errors given", "bands are seen"))
    assert opening._said(both, spectrum) == (
        "Assumed in reading: no errors given. Warned of when solved: bands are seen.")


def test_the_bar_at_a_predicted_depth_lies_inside_its_strip(qtbot):
    from linewright.window.plot import SiblingStrips, Strip

    strips = SiblingStrips()
    qtbot.addWidget(strips)
    strips.resize(300, 200)
    velocity = np.linspace(-60, 60, 200)
    shallow = 1 - 0.1 * np.exp(-0.5 * (velocity / 6) ** 2)
    strips.set_strips([Strip("5000.00", velocity, shallow, "seen", d) for d in (0.2, 0.7)], "#c00000")
    strips.show()
    strips.grab()
    for index, y in strips.bars.items():
        assert strips.cell(index).top() < y < strips.cell(index).bottom()
    assert len(strips.bars) == 2


def test_the_roll_call_follows_what_evidence_looks_at(solved, qtbot):
    bench, panel = solved.bench, solved.space.roll_call
    for number in (5, 17):
        bench.view.select(number)
        name = bench.candidate().species
        assert panel._rows[panel.model.source_row(panel.table.currentIndex())].species == name
        assert panel.words.text() != "" and "Choose a species" not in panel.words.text()
    assert bench.view.now.rake is None, "following puts nothing on the rake"


def test_words_that_may_be_cut_off_stand_in_the_tip(solved):
    from PySide6.QtCore import Qt

    session = solved.bench.session
    long = replace(session.orphans[0], why="Fe I is +0.043 Å off, +4.2 sigma; " * 3)
    solved.bench.desk.document.replace(replace(session, orphans=(long,)), "test")
    model = solved.space.orphans.model
    at = [c.title for c in model.columns].index("why")
    tip = model.index(0, at).data(Qt.ItemDataRole.ToolTipRole)
    assert tip == model.index(0, at).data() and "σ" in tip
    assert model.index(0, 0).data(Qt.ItemDataRole.ToolTipRole) is None


def test_the_ledger_tells_the_probability_of_what_a_person_claims(scene):
    _catalogue, session = scene
    number = next(int(n) for n, c in zip(session.features.number, session.claims)
                  if c.candidates[0].species != c.candidates[1].species)
    row = session.index_of(number)
    machine, second = session.claims[row].probability, session.claims[row].candidates[1]
    assert shown_probability(session.claims[row]) == machine
    told = edits.accept_candidate(session, number, 2).claims[row]
    assert told.species == second.species and shown_probability(told) == second.probability
    assert shown_probability(edits.accept_candidate(session, number, 1).claims[row]) == machine
    never = edits.set_species(session, number, "Xe II").claims[row]
    assert np.isnan(shown_probability(never))


def test_a_share_of_nothing_is_less_than_one_per_cent(scene):
    _catalogue, session = scene
    claim = session.claims[5]
    small = replace(claim.candidates[1], share=0.002)
    said = reasons(small, claim, 0.4)
    assert any("less than 1% of what is predicted" in words for words in said.against)


def test_siblings_are_predicted_as_deep_as_this_spectrum_shows_lines(scene):
    catalogue, session = scene
    depth = 10.0 ** (catalogue.loggf + 1.0)
    claims = tuple(
        replace(c, standing="firm", candidates=(replace(c.candidates[0], depth_predicted=0.2 * d),))
        for c, d in zip(session.claims, depth, strict=True))
    shallow = seen_depths(replace(session, claims=claims), catalogue, depth, "stellar")
    np.testing.assert_allclose(shallow, 0.2 * depth, rtol=0.1)
    few = replace(session, claims=claims[:10])
    assert seen_depths(few, catalogue, depth, "stellar") is depth
    assert seen_depths(replace(session, claims=claims), catalogue, depth, "telluric") is depth


def test_the_spectrum_keeps_its_place_from_claim_to_claim(solved, qtbot):
    bench, view = solved.bench, solved.spectrum_view
    seen = set()
    for low in (5110.0, 5180.0, 5240.0):
        bench.view.change(span=(low, low + 1.5))
        solved.rake.refresh()
        for number in (5, 90, 200):
            bench.view.select(number)
            solved.rake.refresh()
            assert bench.candidate().species in solved.rake.species
            seen.add((len(solved.rake.species), view.plot.height()))
    assert len(seen) == 1


@pytest.mark.parametrize(("missing", "note"), [(0, "no feature"), (2, "missing")])
def test_no_strip_is_missing_where_the_roll_call_misses_none(solved, monkeypatch, missing, note):
    from linewright.window.panels import siblings

    cut = siblings.sibling_strips
    monkeypatch.setattr(siblings, "sibling_strips", lambda *told: [
        replace(s, feature=None, said="") for s in cut(*told)])
    bench, box = solved.bench, solved.space.evidence.siblings
    rows = tuple(replace(r, missing=missing) for r in bench.session.roll_call)
    bench.desk.document.replace(replace(bench.session, roll_call=rows), "test")
    bench.view.select(13)
    box.cut_now()
    assert box.strips.strips and {s.note for s in box.strips.strips} == {note}


@pytest.mark.parametrize(("unit", "title"), [
    ("1E-17 erg/cm^2/s/Ang", "flux (10⁻¹⁷ erg/cm²/s/Å)"),
    ("erg s^-1 cm^-2 Angstrom^-1", "flux (erg s⁻¹ cm⁻² Å⁻¹)"),
    ("ADU", "flux (ADU)"), ("", "flux")])
def test_units_are_printed_with_raised_powers(unit, title):
    assert flux_title(0, unit) == title


def test_a_peak_that_leaves_the_scale_has_a_wedge(qtbot):
    plain = build.spectrum_of(build.catalogue_of())
    whole = plain.segments[0]
    at = whole.wave[[5000, 15000]]
    flux = 1.0 + 50.0 * np.exp(-0.5 * ((whole.wave[:, None] - at) / 0.1) ** 2).sum(axis=1)
    view = SpectrumView()
    qtbot.addWidget(view)
    view.resize(900, 500)
    view.set_spectrum(replace(plain, segments=(replace(whole, flux=flux),)))
    view.show()

    def wedges() -> int:
        picture = scenes.pixels(view.plot)
        row = picture[int(view.plot.labels.height) + 4]
        return int(np.all(row == scenes.rgb(LIGHT.caution), axis=1).sum())

    view.set_flux_range(0.0, 60.0)
    assert wedges() == 0
    view.set_flux_range(0.0, 20.0)
    assert 2 * 5 <= wedges() <= 2 * 9  # two, each some pixels wide
    scale, reduced = view.plot.scale(), view.plot.reduced()
    places = places_above(reduced, 20.0, 10.0)
    own = to_medium(at, plain.medium)
    np.testing.assert_allclose(places, scale.pixels(own), atol=1.5)


def test_a_closed_window_begins_no_work(qtbot):
    from linewright.window.tasks import Request, Tasks

    tasks, begun = Tasks(), []
    assert tasks.close()
    tasks.start(Request(key="late", title="", work=begun.append, done=begun.append,
                        failed=begun.append))
    qtbot.wait(50)
    assert begun == [] and not tasks.busy("late")


@pytest.mark.parametrize("part", [0.2, 0.8])
def test_of_a_spectrum_searched_in_a_small_part_that_part_is_shown(solved, part):
    """A long spectrum solved in one window opens on the window, one solved mostly opens whole."""
    bench = solved.bench
    session, wave = bench.session, bench.spectrum.segments[0].wave
    low = float(wave[0]) + 5.0
    high = low + part * float(wave[-1] - wave[0])
    fresh = replace(bench.spectrum)
    reference = replace(session.spectrum, coverage=((low, high),))
    bench.add_desk(Desk(fresh, Document(replace(session, spectrum=reference))))
    span = solved.space.spectrum_view.view()
    asked = [float(to_medium(w, fresh.medium)) for w in (low, high)]
    whole = [float(to_medium(w, fresh.medium)) for w in (wave[0], wave[-1])]
    wanted = asked if part < 0.5 else whole
    assert span[0] <= wanted[0] and span[1] >= wanted[1]
    assert span[1] - span[0] < 1.2 * (wanted[1] - wanted[0])
