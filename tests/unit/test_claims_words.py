"""A person's words are weighed in where they tell, with the outcome of weighing all again."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from linewright.claims import words_weighed
from linewright.claims.heard import CHANGED, Ground
from linewright.claims.identify import Setting, conclude, weigh
from linewright.claims.mixture import solve_mixture
from linewright.claims.options import ClaimOptions
from linewright.claims.problem import NOT_SAID, SET_ASIDE
from linewright.job.options import SolveOptions
from linewright.job.reweigh import MOVED
from linewright.job.solve import solve
from linewright.lines.loading import load_catalogue
from linewright.progress import Progress
from linewright.resources import samples_dir
from linewright.spectra.reading import read_spectrum

LOW, HIGH = 5150.0, 5400.0
COLD = 20  # rounds from the first state


@pytest.fixture(scope="module")
def weighing():
    spectrum = read_spectrum(samples_dir() / "g_dwarf.fits")
    session = solve(spectrum, options=SolveOptions(ranges=((LOW, HIGH),)))
    options = ClaimOptions(
        velocity=session.velocity.velocity, temperature=session.temperature_k
    )
    setting = Setting(session.features, load_catalogue(), session.spectrum.coverage, options)
    return weigh(setting, Progress())


@pytest.fixture(scope="module")
def ground(weighing):
    return Ground(weighing)


def words(ground, seed: int, count: int):
    """Second candidates of features whose first ones are likely, one set aside."""
    rng = np.random.default_rng(seed)
    open_ = [i for i, c in enumerate(ground.claims) if len(c.candidates) > 1
             and c.candidates[1].species != c.species and 0.3 < c.probability < 0.97]
    said = np.full(len(ground.claims), NOT_SAID)
    names = ground.catalogue.species_names
    chosen = rng.choice(open_, count, replace=False)
    for i in chosen:
        said[i] = names.index(ground.claims[i].candidates[1].species)
    if count > 1:
        said[chosen[-1]] = SET_ASIDE
    return said


def test_nothing_said_changes_nothing(ground):
    heard = ground.hearing(np.full(len(ground.claims), NOT_SAID))
    assert heard.claims == {}
    assert heard.roll_call is ground.roll_call and heard.orphans is ground.orphans


def test_the_words_stand(ground):
    said = words(ground, 1, 3)
    heard = ground.hearing(said)
    names = ground.catalogue.species_names
    for row in np.nonzero(said >= 0)[0]:
        assert heard.claims[row].species == names[said[row]]
        assert heard.claims[row].standing == "firm"
    for row in np.nonzero(said == SET_ASIDE)[0]:
        assert heard.claims[row].probability < 1e-9


@pytest.mark.parametrize("seed", [1, 2, 3])
def test_weighing_locally_is_weighing_everything_with_what_was_learned(
        ground, seed, monkeypatch):
    """All pairs weighed and all species learned in every turn: the same but for the least
    change of an offset that is followed (0.001 dex and 1 % of a scatter)."""
    said = words(ground, seed, 2)
    monkeypatch.setattr(words_weighed, "MUCH", 1.0)
    local = ground.hearing(said).solution
    assert local.state.detection is ground._settled.solution.state.detection, "weighed locally"
    monkeypatch.setattr(words_weighed, "STILL", -1.0)
    monkeypatch.setattr(words_weighed, "LEAST_DEX", -1.0)
    monkeypatch.setattr(words_weighed, "LEAST_SCATTER", -1.0)
    whole = ground.hearing(said).solution
    assert np.max(np.abs(local.probability - whole.probability)) < 0.01


@pytest.fixture(scope="module")
def cold(weighing):
    """The mixture without words from its first state."""
    return solve_mixture(weighing.solution.problem, COLD)


@pytest.mark.parametrize("seed", [1, 2, 3, 4])
def test_a_word_makes_the_difference_it_makes_from_cold(weighing, ground, cold, seed):
    """A full weighing from the first state, with the word and without: probabilities differ by
    what they differ here, root mean square by feature within the least change that is told, and
    what changes much, changes alike. (A mixture counts as settled when a round moves 0.001.)"""
    said = words(ground, seed, 1)
    spoken = solve_mixture(replace(weighing.solution.problem, said=said), COLD)
    full = spoken.probability - cold.probability
    heard = ground.hearing(said).solution
    local = heard.probability - ground._settled.solution.probability
    assert np.sum(np.abs(full)) > 0.5, "the word makes a difference"
    assert np.sqrt(np.sum((local - full) ** 2) / len(said)) < MOVED
    much = np.abs(full) > 0.1
    assert np.all(np.abs(local - full)[much] < 0.3 * np.abs(full)[much])
    assert np.all(np.abs(local)[~much] < 0.2)


def test_many_words_let_the_whole_mixture_learn(ground):
    said = words(ground, 5, 12)
    heard = ground.hearing(said).solution
    assert heard.state.detection is not ground._settled.solution.state.detection


def test_the_same_words_tell_the_same(weighing, ground):
    said = words(ground, 6, 2)
    first = ground.hearing(said)
    ground.hearing(words(ground, 7, 3))
    again, fresh = ground.hearing(said), Ground(weighing).hearing(said)
    assert repr(first.claims) == repr(again.claims) == repr(fresh.claims)
    assert repr(first.roll_call) == repr(again.roll_call) == repr(fresh.roll_call)
    assert repr(first.orphans) == repr(again.orphans) == repr(fresh.orphans)


def test_claims_roll_call_and_orphans_are_those_made_of_everything(weighing, ground):
    """What is made anew for a few features and species is what ``conclude`` makes of all."""
    said = words(ground, 8, 2)
    heard = ground.hearing(said)
    whole = conclude(replace(weighing, solution=heard.solution))
    for row, claim in enumerate(whole.claims):
        mine = heard.claims.get(row, ground.claims[row])
        assert (mine.species, mine.standing) == (claim.species, claim.standing)
        assert mine.probability == pytest.approx(claim.probability, abs=CHANGED)
        if row in heard.claims:
            assert mine.candidates == claim.candidates and mine.blend == claim.blend
    assert [o.feature for o in heard.orphans] == [o.feature for o in whole.orphans]
    calls = {r.species: r for r in whole.roll_call}
    assert set(calls) == {r.species for r in heard.roll_call}
    for row in heard.roll_call:
        other = calls[row.species]
        assert (row.seen, row.expected) == (other.seen, other.expected)
        assert row.p_chance == pytest.approx(other.p_chance, rel=0.1, abs=1e-12)
