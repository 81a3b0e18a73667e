"""Features fitted by hand and continuum anchors, on simulated spectra whose truth is known."""

from __future__ import annotations

import json
from dataclasses import replace

import numpy as np
import pytest
from measured_session import nearest, session_of

from linewright.cli.main import main
from linewright.errors import InputRefused
from linewright.job.hand_anchors import anchored, anchors_in, keep_anchors, level_after, moved
from linewright.job.hand_edits import measured, merge, refit, script_measurer, split
from linewright.job.hand_fit import Wanted, limits_of
from linewright.job.view_keep import keep_acts
from linewright.measure.anchors import add_anchor
from linewright.publish.ledger import ledger_table
from linewright.session.document import Document
from linewright.session.encode import session_bytes
from linewright.session.file import load_session, save_session
from linewright.session.model import Claim
from linewright.session.script import apply_edit, apply_script, history_commands
from linewright.spectra.reading import read_spectrum
from linewright.spectra.spectrum import Segment, Spectrum

WAVE = 5000 + 0.02 * np.arange(6000)
NOISE = 0.003
SIGMA = 0.06
PAIR = ((5040.0, 0.45), (5040.17, 0.3))  # two lines 1.2 FWHM apart
TWIN = ((5060.0, 0.30), (5060.09, 0.28))  # so near that detection sees one


def gaussian(centre, depth, sigma=SIGMA):
    return depth * np.exp(-0.5 * ((WAVE - centre) / sigma) ** 2)


@pytest.fixture(scope="module")
def spectrum():
    y = sum(gaussian(c, 0.3) for c in np.arange(5006.0, 5118.0, 7.0))
    y = y + sum(gaussian(c, d) for c, d in (*PAIR, *TWIN))
    y = y - gaussian(5085.5, 1.2, 0.3) + gaussian(5084.5, 0.5, 0.25)  # P Cygni
    y = y - gaussian(5100.6, 0.9, 0.25) - gaussian(5101.5, 0.8, 0.25)  # two peaks
    flux = 1 - y + NOISE * np.random.default_rng(11).standard_normal(len(WAVE))
    segment = Segment(WAVE, flux, np.full(len(WAVE), NOISE), np.zeros(len(WAVE), dtype=bool))
    return Spectrum((segment,), "vacuum", "test", "rest", "test", "", "made", "", "0" * 64, "text")


@pytest.fixture(scope="module")
def session(spectrum):
    return session_of(spectrum)


def row(session, number):
    return session.features.take([session.index_of(number)])


def within(fitted, wave, depth, sigmas=4.0):
    assert abs(fitted.wave[0] - wave) < sigmas * fitted.wave_err[0]
    assert abs(fitted.depth[0] - depth) < sigmas * fitted.depth_err[0]
    true = depth * np.sqrt(2 * np.pi) * SIGMA * 1e3
    assert abs(fitted.ew[0] - true) < sigmas * fitted.ew_err[0]


def test_a_split_finds_the_two_lines_and_keeps_the_number(spectrum, session):
    number = nearest(session, TWIN[0][0] + 0.045)
    assert "blend" not in row(session, number).flags[0], "the machine sees one line here"
    two = split(spectrum, session, number)
    fresh = next(n for n in two.features.number.tolist() if n not in session.features.number)
    for n, (wave, depth) in zip(sorted((number, fresh), key=lambda n: row(two, n).wave[0]), TWIN):
        within(row(two, n), wave, depth)
        assert row(two, n).flags[0].split()[-1] == "hand"
    assert fresh == int(session.features.number.max()) + 1
    assert two.claims[two.index_of(number)].note == f"of {number}"
    assert two.claims[two.index_of(fresh)] == Claim()
    assert set(two.fit_of(number).features) == {number, fresh}
    assert np.all(np.diff(two.features.wave) > 0)


def test_a_merge_takes_a_split_back_but_for_the_mark(spectrum, session):
    number = nearest(session, TWIN[0][0] + 0.045)
    two = split(spectrum, session, number)
    fresh = int(two.features.number.max())
    one = merge(spectrum, two, (number, fresh))
    assert len(one.features) == len(session.features)
    kept = [n for n in (number, fresh) if n in one.features.number]
    assert len(kept) == 1
    assert "hand" in row(one, kept[0]).flags[0].split()
    assert row(one, kept[0]).ew[0] == pytest.approx(row(session, number).ew[0], rel=0.05)
    again = split(spectrum, one, kept[0])
    assert int(again.features.number.max()) == fresh + 1, "numbers are never used twice"


def test_a_neighbour_is_held_while_one_line_of_a_blend_is_fitted(spectrum, session):
    number = nearest(session, PAIR[0][0])
    one = refit(spectrum, session, (number,), profile="gaussian")
    assert len(one.features) == len(session.features)
    # the neighbour's own error is not in these: six of the conditional sigmas
    within(row(one, number), *PAIR[0], sigmas=6.0)


@pytest.mark.parametrize("profile", ["voigt", "rotational", "core-wings"])
def test_a_chosen_profile_is_kept_and_written(spectrum, session, profile):
    number = nearest(session, 5013.0)
    one = refit(spectrum, session, (number,), profile=profile)
    flags = row(one, number).flags[0].split()
    assert profile in flags and "hand" in flags
    assert one.fit_of(number).profile == profile
    assert refit(spectrum, one, (number,)).fit_of(number).profile == profile
    at = list(ledger_table(one)["feature"]).index(number)
    assert {"hand", profile} <= set(str(ledger_table(one)["flags"][at]).split())


def test_p_cygni_is_a_trough_and_a_peak_of_one_fit(spectrum, session):
    one = refit(spectrum, session, (nearest(session, 5085.5),), profile="p-cygni")
    fit = one.fit_of(nearest(one, 5085.5))
    trough, peak = (row(one, n) for n in fit.features)
    assert (trough.sign[0], peak.sign[0]) == (1, -1)
    assert abs(trough.wave[0] - 5084.5) < 5 * trough.wave_err[0]
    assert abs(peak.wave[0] - 5085.5) < 5 * peak.wave_err[0]
    assert abs(peak.depth[0] + 1.2) < 5 * peak.depth_err[0]
    assert len(set(session.features.number.tolist()) & set(fit.features)) == 2


def test_double_peaked_finds_both_peaks_from_one(spectrum, session):
    number = nearest(session, 5100.6)
    other = nearest(session, 5101.5)
    alone = session if other == number else merge(spectrum, session, (number, other),
                                                  limits=(5099.5, 5102.6))
    number = nearest(alone, 5101.0)
    one = refit(spectrum, alone, (number,), limits=(5099.5, 5102.6), profile="double-peaked")
    waves = [row(one, n).wave[0] for n in one.fit_of(number).features]
    assert np.allclose(waves, [5100.6, 5101.5], atol=0.02)
    assert "double-peaked" in row(one, number).flags[0].split()


def test_the_same_act_gives_the_same_bytes_and_replays_without_the_spectrum(spectrum, session,
                                                                           tmp_path):
    number = nearest(session, TWIN[0][0])
    acts = [lambda s: split(spectrum, s, number),
            lambda s: refit(spectrum, s, (nearest(session, 5013.0),), (5012.8, 5013.2), "voigt"),
            lambda s: merge(spectrum, s, tuple(nearest(session, c) for c, _ in PAIR)),
            lambda s: apply_edit(s, anchored(spectrum, s, 0, _lifted(s, 5050.0)))]
    first = second = session
    for act in acts:
        first, second = act(first), act(second)
    assert session_bytes(first, tmp_path) == session_bytes(second, tmp_path)
    replayed = apply_script(session, history_commands(first))
    assert session_bytes(replayed, tmp_path) == session_bytes(first, tmp_path)


def test_hand_work_is_saved_reopened_and_undone(spectrum, session, tmp_path):
    document = Document(session)
    document.apply(lambda s: split(spectrum, s, nearest(s, TWIN[0][0])))
    document.apply(lambda s: apply_edit(s, anchored(spectrum, s, 0, _lifted(s, 5050.0))))
    path = tmp_path / "a.linewright.json"
    save_session(document.session, path)
    back = load_session(path)
    assert back.fits == document.session.fits
    assert np.array_equal(back.anchors[0].value, document.session.anchors[0].value)
    assert session_bytes(back, tmp_path) == path.read_bytes()
    assert document.undo() and document.undo_label == "split feature"
    assert document.undo() and session_bytes(document.session, tmp_path) == session_bytes(
        session, tmp_path)
    assert document.redo() and document.redo()
    assert session_bytes(document.session, tmp_path) == path.read_bytes()


def _lifted(session, wave, factor=1.02):
    anchors = anchors_in(session, 0)
    index = int(np.argmin(np.abs(anchors.wave - wave)))
    return moved(anchors, index, anchors.wave[index], anchors.value[index] * factor)


def test_an_anchor_moves_the_continuum_and_what_is_measured_there_and_nothing_else(spectrum,
                                                                                   session):
    anchors = anchors_in(session, 0)
    index = int(np.argmin(np.abs(anchors.wave - 5055.0)))
    up = apply_edit(session, anchored(spectrum, session, 0, _lifted(session, 5055.0)))
    low, high = anchors.wave[index - 2], anchors.wave[index + 2]
    f, g = session.features, up.features
    away = (f.wave < low) | (f.wave > high)
    assert np.array_equal(f.ew[away], g.ew[away], equal_nan=True) and away.any()
    level = np.interp(anchors.wave[index], up.continuum[0].wave, up.continuum[0].value)
    assert level == pytest.approx(1.02 * anchors.value[index], rel=1e-9)
    number = nearest(session, 5055.0)
    place = row(session, number).wave[0]
    ratio = np.interp(place, up.continuum[0].wave, up.continuum[0].value) / np.interp(
        place, session.continuum[0].wave, session.continuum[0].value)
    assert ratio > 1.005
    # flux F under a continuum r times higher: depth 1 - F/r; the line's wings take the rest
    before, after = row(session, number), row(up, number)
    assert after.ew[0] > before.ew[0]
    expected = 1 - (1 - before.depth[0]) / ratio
    assert before.depth[0] < after.depth[0] <= expected + 3 * after.depth_err[0]
    assert up.history[-1].action == "set_anchors" and up.history[-1].by == "person"


def test_anchors_given_back_are_the_machines_continuum(spectrum, session):
    up = apply_edit(session, anchored(spectrum, session, 0, _lifted(session, 5055.0)))
    back = apply_edit(up, anchored(spectrum, up, 0, None))
    assert len(back.anchors[0].wave) == 0
    at = WAVE[10:-10]
    now, was = (np.interp(at, s.continuum[0].wave, s.continuum[0].value) for s in (back, session))
    assert np.max(np.abs(now / was - 1)) < 0.005


@pytest.fixture
def on_disk(spectrum, tmp_path):
    """(spectrum file, session file) with paths that hold."""
    s = spectrum.segments[0]
    path = tmp_path / "made.txt"
    np.savetxt(path, np.column_stack([s.wave, s.flux, s.uncertainty]), fmt="%.4f %.6f %.5f")
    known = read_spectrum(path, medium="vacuum")
    held = session_of(known)
    held = replace(held, spectrum=replace(held.spectrum, read_options={"medium": "vacuum"}))
    save_session(held, tmp_path / "a.linewright.json")
    return path, tmp_path / "a.linewright.json"


def test_a_script_of_hand_work_on_the_command_line(on_disk, tmp_path, capsys):
    _, held = on_disk
    before = load_session(held)
    number, pair = nearest(before, TWIN[0][0]), [nearest(before, c) for c, _ in PAIR]
    anchor = float(anchors_in(before, 0).wave[3])
    lines = [{"edit": "split_feature", "feature": number, "parts": 2},
             {"edit": "merge_features", "features": pair},
             {"edit": "fit_features", "features": [nearest(before, 5013.0)],
              "limits": [5012.7, 5013.3], "profile": "voigt"},
             {"edit": "move_anchor", "wave": anchor, "value": 1.01},
             {"edit": "add_anchor", "wave": anchor + 1.5, "value": 1.0},
             {"edit": "remove_anchor", "wave": anchor + 1.5}]
    script = tmp_path / "e.jsonl"
    script.write_text("".join(json.dumps(line) + "\n" for line in lines))
    out = tmp_path / "b.linewright.json"
    assert main(["edit", str(held), "--script", str(script), "-o", str(out)]) == 0, capsys.readouterr()
    after = load_session(out)
    assert [h.action for h in after.history] == [
        "split_feature", "merge_features", "fit_features", *["set_anchors"] * 3]
    assert len(after.features) == len(before.features)
    again = tmp_path / "c.linewright.json"
    assert main(["edit", str(held), "--script", str(script), "-o", str(again)]) == 0
    assert again.read_bytes() == out.read_bytes()
    on_disk[0].unlink()
    assert main(["edit", str(held), "--script", str(script), "-o", str(again), "--force"]) == 1
    assert "not there any more" in capsys.readouterr().err


REFUSED = [
    ({"edit": "fit_features", "features": [1], "limits": [5007.0, 5005.0]}, "do not ascend"),
    ({"edit": "fit_features", "features": [1], "limits": [5007.0]}, "not two wavelengths"),
    ({"edit": "fit_features", "features": [1], "limits": [5020.0, 5021.0]}, "outside the limits"),
    ({"edit": "fit_features", "features": [1], "limits": [5005.99, 5006.02]}, "samples"),
    ({"edit": "fit_features", "features": [1], "profile": "triangle"}, "not known"),
    ({"edit": "fit_features", "features": [1], "profile": "p-cygni"}, "no emission"),
    ({"edit": "fit_features", "features": [999]}, "no such feature"),
    ({"edit": "fit_features", "features": []}, "no feature named"),
    ({"edit": "fit_features", "features": [1], "colour": "red"}, "'colour' is not an argument"),
    ({"edit": "split_feature", "feature": 1, "parts": 1}, "two or more"),
    ({"edit": "split_feature", "feature": 1, "parts": 40}, "two to nine"),
    ({"edit": "split_feature"}, "'feature' is missing"),
    ({"edit": "merge_features", "features": [1]}, "name two or more"),
    ({"edit": "merge_features", "features": [1, 1]}, "name two or more"),
    ({"edit": "add_anchor", "wave": 4000.0, "value": 1.0}, "outside the spectrum"),
    ({"edit": "add_anchor", "wave": 5050.0, "value": -1.0}, "above zero"),
    ({"edit": "add_anchor", "value": 1.0}, "'wave' or 'value'"),
    ({"edit": "move_anchor", "wave": 5000.0, "to": 5090.0, "value": 1.0}, "cross its neighbour"),
    ({"edit": "move_anchor", "wave": 4000.0, "value": 1.0}, "within half an Angstrom"),
    ({"edit": "clear_anchors", "segment": 7}, "no continuum"),
]


@pytest.mark.parametrize("command, words", REFUSED)
def test_hand_work_outside_reason_is_refused_in_words(spectrum, session, command, words):
    with pytest.raises(InputRefused, match=words):
        apply_script(session, [command], "script", script_measurer(lambda: spectrum))


def test_a_hit_of_one_sample_is_not_split(spectrum, session):
    flux = spectrum.segments[0].flux.copy()
    flux[1000] -= 0.6
    hit = replace(spectrum, segments=(replace(spectrum.segments[0], flux=flux),))
    spiked = session_of(hit)
    number = nearest(spiked, WAVE[1000])
    assert abs(row(spiked, number).wave[0] - WAVE[1000]) < 0.01
    with pytest.raises(InputRefused, match="on one sample|samples for"):
        split(hit, spiked, number)
    flags = tuple("spike" if n == number else f
                  for n, f in zip(spiked.features.number, spiked.features.flags))
    known = replace(spiked, features=replace(spiked.features, flags=flags))
    with pytest.raises(InputRefused, match="no profile to fit"):
        split(hit, known, number)


def test_what_was_measured_without_a_spectrum_is_asked_for(session):
    with pytest.raises(InputRefused, match="'fit' is missing"):
        apply_edit(session, {"edit": "split_feature", "feature": 1, "parts": 2})


def test_limits_not_given_are_those_last_used(spectrum, session):
    number = nearest(session, 5013.0)
    one = refit(spectrum, session, (number,), (5012.75, 5013.4))
    assert limits_of(one, (number,)) == (5012.75, 5013.4)
    made = measured(spectrum, one, Wanted((number,)))
    assert made.fit["limits"] == [5012.75, 5013.4]
    assert made.wave[0] >= 5012.75 and made.wave[-1] <= 5013.4


def test_an_added_anchor_stands_on_the_continuum_it_makes(session):
    old = anchors_in(session, 0)
    new = add_anchor(old, float(old.wave[4]) + 1.0, 1.03)
    level = level_after(session.continuum[0], old, new)
    assert np.interp(old.wave[4] + 1.0, level.wave, level.value) == pytest.approx(1.03, abs=1e-12)
    others = np.interp(old.wave, level.wave, level.value)
    assert np.allclose(others, np.interp(old.wave, session.continuum[0].wave,
                                         session.continuum[0].value), rtol=1e-12)


def test_hand_work_outlives_solving_again(spectrum, session):
    """What the machine measures anew has one line where a person split, two where merged."""
    number, pair = nearest(session, TWIN[0][0]), [nearest(session, c) for c, _ in PAIR]
    before = merge(spectrum, split(spectrum, session, number), pair)
    before = apply_edit(before, anchored(spectrum, before, 0, _lifted(before, 5050.0)))
    kept = keep_anchors(spectrum, before, keep_acts(before, session))
    assert len(kept.features) == len(before.features)
    assert np.allclose(kept.features.wave, before.features.wave, atol=0.01)
    assert {len(fit.features) for fit in kept.fits} == {1, 2}
    byhand = [i for i, words in enumerate(kept.features.flags) if "hand" in words.split()]
    assert len(byhand) == 3
    assert np.array_equal(kept.anchors[0].value, before.anchors[0].value)
    place = before.anchors[0].wave
    assert np.allclose(np.interp(place, kept.continuum[0].wave, kept.continuum[0].value),
                       before.anchors[0].value, rtol=1e-12)
