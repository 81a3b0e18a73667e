"""The helpers of the window that need no Qt: reasons, rake rows, kept acts, written numbers."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from linewright.job.view_keep import keep_acts
from linewright.job.view_rake import most_claimed, rake_columns
from linewright.job.view_reasons import reasons
from linewright.session import edits
from linewright.window.panels import words


@pytest.fixture
def scene(invented):
    import window_builders as build

    spectrum = build.spectrum_of(invented)
    return invented, build.session_of(spectrum, invented)


def test_reasons_name_what_is_wrong_and_only_that(scene):
    _catalogue, session = scene
    claim = session.claims[5]
    good = replace(claim.candidates[0], offset_sigma=0.3, depth_predicted=0.4, share=0.9)
    said = reasons(good, replace(claim, p_unlisted=0.01), 0.41)
    assert len(said.for_it) == 3 and said.against == ()
    bad = replace(good, offset_sigma=-5.0, depth_predicted=0.05, share=0.1)
    said = reasons(bad, replace(claim, p_unlisted=0.6), 0.41)
    assert said.for_it == () and len(said.against) == 4
    assert "8 times deeper" in said.against[1]
    emission = reasons(good, claim, -0.4)
    assert any("seen in emission" in r for r in emission.against)


def test_reasons_are_silent_about_what_is_unknown(scene):
    _catalogue, session = scene
    unknown = replace(session.claims[5].candidates[0], depth_predicted=math.nan,
                      offset_sigma=math.nan, share=math.nan)
    said = reasons(unknown, replace(session.claims[5], p_unlisted=0.0), 0.4)
    assert said.for_it == () and said.against == ()


def test_rake_columns_are_sorted_and_of_the_species(scene):
    catalogue, session = scene
    depth = 10.0 ** (catalogue.loggf + 1.0)
    wave, length, row = rake_columns(catalogue, depth, ("Ti II", "Nothing", "Fe I"), 5150, 5200)
    assert np.all(np.diff(wave) >= 0) and len(wave) == len(length) == len(row)
    inside = (catalogue.wave >= 5150) & (catalogue.wave <= 5200)
    for k, name in ((0, "Ti II"), (2, "Fe I")):
        code = catalogue.species_names.index(name)
        assert np.sum(row == k) == np.sum(inside & (catalogue.species == code))
    assert not np.any(row == 1)
    assert len(most_claimed(session, 5150, 5200, 3)) == 3
    assert most_claimed(session, 1.0, 2.0) == ()


def test_kept_acts_follow_moved_features_and_lost_ones_are_added(scene):
    _catalogue, session = scene
    old = edits.set_note(edits.accept_candidate(session, 5, 2), 9, "look again")
    f = session.features
    moved = replace(f, wave=f.wave + 0.004, number=f.number + 100)
    keep = np.arange(len(f)) != 8  # the noted feature is not measured again
    new = replace(session, features=moved.take(keep),
                  claims=tuple(c for i, c in enumerate(session.claims) if i != 8))
    kept = keep_acts(old, new)
    assert len(kept.features) == len(f)
    assert kept.claims[4].by == "person" and kept.claims[4].line == old.claims[4].line
    row = int(np.argmin(np.abs(kept.features.wave - f.wave[8])))
    assert kept.claims[row].note == "look again"
    assert len(set(kept.features.number.tolist())) == len(kept.features)


def test_untouched_sessions_are_replaced_whole(scene):
    _catalogue, session = scene
    assert keep_acts(session, session).claims == session.claims


@pytest.mark.parametrize(("value", "shown"), [
    (0.9999, "> 0.99"), (1.0, "1.00"), (0.0, "0.00"), (0.001, "< 0.01"), (0.5, "0.50"),
    (math.nan, "")])
def test_probabilities_never_claim_certainty_they_lack(value, shown):
    assert words.probability(value) == shown


def test_numbers_have_a_true_minus_and_absent_ones_are_empty():
    assert words.number(-1.25, 2) == "−1.25"
    assert words.number(math.nan, 2) == ""
    assert words.with_error(2.0, math.nan, 1) == "2.0"
    assert words.digits_for(np.array([0.0006, 0.0004])) == 4
    assert words.digits_for(np.array([0.2, 0.3])) == 2
    assert words.digits_for(np.array([np.nan])) == 3
