"""Edits: what a person may change, and what never changes."""

from __future__ import annotations

import json
from dataclasses import replace

import builders
import numpy as np
import pytest

from linewright.errors import InputRefused
from linewright.session import edits, feature_edits, script
from linewright.session.model import STANDINGS
from linewright.session.plain import plain, row_from


@pytest.fixture
def made():
    return builders.session(20, segments=2)


def _with_candidates(session, least=2):
    return next(
        int(n)
        for n, c in zip(session.features.number, session.claims, strict=True)
        if len(c.candidates) >= least
    )


def _claim(session, number):
    return session.claims[session.index_of(number)]


def test_accepting_another_candidate_keeps_the_machines_numbers(made):
    number = _with_candidates(made)
    before = _claim(made, number)
    after = edits.accept_candidate(made, number, 2)
    claim = _claim(after, number)
    assert claim.line == before.candidates[1]
    assert claim.species == before.candidates[1].species
    assert (claim.standing, claim.by) == ("firm", "person")
    for name in ("probability", "p_line", "p_unlisted", "candidates"):
        assert getattr(claim, name) == getattr(before, name)
    assert _claim(made, number) is before, "the old session must not change"
    assert after.history[-1].action == "accept_candidate"
    assert after.history[-1].by == "person"


def test_accepting_the_first_candidate_needs_no_other_line(made):
    number = _with_candidates(made)
    claim = _claim(edits.accept_candidate(made, number, 1), number)
    assert claim.chosen is None and claim.by == "person"


@pytest.mark.parametrize("rank", [0, -1, 99])
def test_there_is_no_such_candidate(made, rank):
    with pytest.raises(InputRefused, match="no candidate of rank"):
        edits.accept_candidate(made, _with_candidates(made), rank)


def test_a_typed_species_takes_its_best_candidate(made):
    number = _with_candidates(made, 3)
    wanted = _claim(made, number).candidates[2]
    first = next(c for c in _claim(made, number).candidates if c.species == wanted.species)
    claim = _claim(edits.set_species(made, number, f" {wanted.species} "), number)
    assert claim.line == first


def test_a_species_without_candidates_has_no_line_of_another(made):
    number = _with_candidates(made)
    claim = _claim(edits.set_species(made, number, "Eu II"), number)
    assert claim.species == "Eu II" == claim.line.species
    assert np.isnan(claim.line.wave) and claim.by == "person"


def test_a_species_may_be_typed_in_short(made):
    assert _claim(edits.set_species(made, 1, "eu2"), 1).species == "Eu II"
    with pytest.raises(InputRefused, match="not the name"):
        edits.set_species(made, 1, "Xyz IX")


def test_a_species_must_agree_with_its_line(made):
    number = _with_candidates(made)
    line = _claim(made, number).candidates[0]
    with pytest.raises(InputRefused, match="belongs to"):
        edits.set_species(made, number, "Eu II", line)
    with pytest.raises(InputRefused, match="no species"):
        edits.set_species(made, number, "  ")


def test_blends_are_marked_and_unmarked(made):
    number = 3
    marked = edits.mark_blend(made, number, [["Fe I", 5100.1, 0.4], ["Ti II", 5100.2, 0.1]])
    claim = _claim(marked, number)
    assert claim.blend == (("Fe I", 5100.1, 0.4), ("Ti II", 5100.2, 0.1))
    assert "blend" in claim.flags.split()
    assert "blend" not in _claim(edits.mark_blend(marked, number, []), number).flags.split()


@pytest.mark.parametrize("bad", [[["Fe I"]], [["", 5000.0, 0.1]], [["Fe I", 5e3, 1.5]], [1], 7])
def test_blends_that_make_no_sense_are_refused(made, bad):
    with pytest.raises(InputRefused):
        edits.mark_blend(made, 3, bad)


def test_set_aside_keeps_the_claim_and_says_why(made):
    number = _with_candidates(made)
    claim = _claim(edits.set_aside(made, number, "cosmic ray"), number)
    assert claim.standing == "set aside" and claim.origin == "artefact"
    assert "cosmic-ray" in claim.flags.split()
    assert claim.species == _claim(made, number).species


def test_restore_brings_back_the_machines_claim_with_note_and_lock(made):
    number = _with_candidates(made, 3)
    after = edits.set_note(made, number, "seen in\nanother star")
    after = edits.accept_candidate(after, number, 2)
    after = edits.mark_blend(after, number, [["Fe I", 5100.1, 0.4]])
    after = edits.lock(edits.set_aside(after, number, "artefact"), number, True)
    back = _claim(edits.restore(after, number), number)
    assert replace(back, note="", locked=False) == _claim(made, number)
    assert back.note == "seen in another star" and back.locked


def test_restore_of_a_machine_claim_does_nothing(made):
    assert edits.restore(made, 3) is made


def test_restore_does_not_take_the_record_of_an_earlier_solve(made):
    """After solving again a number may mean another feature; its probabilities tell."""
    number = _with_candidates(made)
    before = edits.set_aside(made, number, "artefact")
    row = made.index_of(number)
    solved = replace(_claim(made, number), probability=0.61, species="Fe I", by="person")
    claims = (*before.claims[:row], solved, *before.claims[row + 1 :])
    claim = _claim(edits.restore(replace(before, claims=claims), number), number)
    assert (claim.by, claim.standing) == ("machine", "tentative")
    assert claim.species == solved.candidates[0].species


def test_restore_without_history_falls_back_to_the_probability(made):
    number = _with_candidates(made)
    after = replace(edits.accept_candidate(made, number, 2), history=())
    claim, machine = _claim(edits.restore(after, number), number), _claim(made, number)
    assert (claim.species, claim.standing, claim.by) == (
        machine.species, machine.standing, "machine"
    )  # fmt: skip


def test_standing_note_and_lock(made):
    for standing in STANDINGS:
        claim = _claim(edits.set_standing(made, 1, standing), 1)
        assert (claim.standing, claim.by) == (standing, "person")
    with pytest.raises(InputRefused, match="no standing 'sure'"):
        edits.set_standing(made, 1, "sure")
    assert _claim(edits.set_note(made, 1, "x"), 1).by == "machine"
    assert _claim(edits.lock(made, 1), 1).locked


@pytest.mark.parametrize("edit", ["restore", "remove_feature"])
def test_unknown_features_are_refused(made, edit):
    with pytest.raises(InputRefused, match="feature 999: no such feature"):
        script.apply_edit(made, {"edit": edit, "feature": 999})


def test_velocity_by_hand_keeps_the_score_curve(made):
    after = edits.set_velocity(made, -33.25)
    assert (after.velocity.velocity, after.velocity.how) == (-33.25, "given")
    assert after.velocity.score is made.velocity.score
    for bad in (np.nan, np.inf, 3e5):
        with pytest.raises(InputRefused):
            edits.set_velocity(made, bad)


def _in_order(session):
    keys = list(zip(session.features.segment, session.features.wave, strict=True))
    assert keys == sorted(keys)
    assert len(session.claims) == len(session.features)


def test_added_features_are_sorted_in_and_numbers_never_reused(made):
    row = row_from({"wave": 5200.0, "sign": 1, "segment": 1, "depth": 0.3})
    once = feature_edits.add_feature(made, row)
    assert once.features.number.max() == 21
    _in_order(once)
    again = feature_edits.add_feature(feature_edits.remove_feature(once, 21), row)
    assert 21 not in again.features.number and 22 in again.features.number
    _in_order(again)
    for number in made.features.number:
        assert _claim(again, number) is _claim(made, number), "claims must move with features"


def test_removing_drops_the_orphan_too(made):
    after = feature_edits.remove_feature(made, 3)
    assert 3 not in after.features.number and not after.orphans
    _in_order(after)


def test_replacing_keeps_number_and_claim(made):
    row = row_from({"wave": 5399.9, "sign": -1, "depth": -0.2, "flags": "hand"})
    after = feature_edits.replace_feature(made, 2, row)
    at = after.index_of(2)
    assert after.features.wave[at] == 5399.9 and after.features.flags[at] == "hand"
    assert _claim(after, 2) is _claim(made, 2)
    _in_order(after)


@pytest.mark.parametrize(
    "row",
    [
        {"wave": 5000.0},
        {"wave": -1.0, "sign": 1},
        {"wave": None, "sign": 1},
        {"wave": 5000.0, "sign": 0},
        {"wave": 5000.0, "sign": 1, "segment": 7},
        {"wave": "x", "sign": 1},
        {"wave": 5000.0, "sign": 1, "colour": 3},
        [5000.0, 1],
    ],
)
def test_rows_that_make_no_sense_are_refused(made, row):
    with pytest.raises(InputRefused):
        script.apply_edit(made, {"edit": "add_feature", "row": row})


def test_a_history_applied_again_gives_the_same_session(made):
    number = _with_candidates(made)
    after = edits.accept_candidate(made, number, 2)
    after = (
        edits.set_species(after, 4, "Fe I", _claim(made, number).candidates[0])
        if (_claim(made, number).candidates[0].species == "Fe I")
        else edits.set_species(after, 4, "Eu II")
    )
    after = feature_edits.add_feature(after, row_from({"wave": 5201.0, "sign": 1}))
    after = edits.set_velocity(edits.restore(after, number), 5)
    replayed = script.apply_script(made, json.loads(json.dumps(script.history_commands(after))))
    assert repr(replayed.claims) == repr(after.claims)
    assert repr(replayed.history) == repr(after.history)
    assert repr(plain(replayed)) == repr(plain(after))


@pytest.mark.parametrize(
    ("command", "cause"),
    [
        ({"edit": "paint"}, "no such edit"),
        ({}, "no edit named"),
        ([], "no edit named"),
        ({"edit": "restore"}, "'feature' is missing"),
        ({"edit": "restore", "feature": 1, "why": "x"}, "'why' is not an argument"),
        ({"edit": "restore", "feature": "1"}, "give a whole number"),
        ({"edit": "lock", "feature": 1, "locked": 1}, "give true or false"),
        ({"edit": "set_note", "feature": 1, "note": 3}, "give text"),
        ({"edit": "set_velocity", "km_s": "fast"}, "give a number"),
        (
            {"edit": "set_species", "feature": 1, "species": "Fe I", "line": {"a": 1}},
            "understood",
        ),
        (
            {"edit": "add_feature", "row": {"wave": 5e3, "sign": 1}, "claim": 3},
            "named fields",
        ),
    ],
)
def test_commands_that_make_no_sense_are_refused(made, command, cause):
    with pytest.raises(InputRefused, match=cause):
        script.apply_edit(made, command)


def test_a_script_is_all_or_nothing_and_names_the_line(made, tmp_path):
    path = tmp_path / "e.jsonl"
    path.write_text(
        '# by hand\n\n{"edit": "set_note", "feature": 1, "note": "a"}\n'
        '{"edit": "set_aside", "feature": 99, "reason": "artefact"}\n'
    )
    with pytest.raises(InputRefused, match="line 4: feature 99: no such feature"):
        script.apply_script(made, script.read_script(path), str(path))
    path.write_text("{oops\n")
    with pytest.raises(InputRefused, match="line 1: not JSON"):
        script.read_script(path)
    with pytest.raises(InputRefused, match="cannot be read"):
        script.read_script(tmp_path / "none")
