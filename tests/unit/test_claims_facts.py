"""What would change a verdict: the facts against the engine itself, weighed again."""

from __future__ import annotations

import re
from dataclasses import replace

import numpy as np
import pytest

from linewright.claims.breakdown import Breakdown
from linewright.claims.facts import Place, Trial, deciding_facts, nearest_bound
from linewright.claims.identify import identify
from linewright.claims.model import Claim, standing_of
from linewright.claims.options import ClaimOptions
from linewright.job.options import SolveOptions
from linewright.job.solve import solve
from linewright.job.view_reasons import what_would_change
from linewright.lines.loading import load_catalogue
from linewright.resources import samples_dir
from linewright.spectra.reading import read_spectrum


@pytest.fixture(scope="module")
def session():
    spectrum = read_spectrum(samples_dir() / "g_dwarf.fits")
    return solve(spectrum, options=SolveOptions(ranges=((5200.0, 5250.0),)))


def placed(session, row):
    return Place(float(session.features.wave[row]), session.spectrum.medium)


def weighed(session):
    """Rows of machine claims that keep a breakdown of their own species' lines."""
    return [
        i for i, c in enumerate(session.claims)
        if c.by == "machine" and any(k.weights and k.species == c.species for k in c.candidates)
    ]


def test_the_odds_kept_give_the_probability_again(session):
    rows = weighed(session)
    assert len(rows) > 25
    trials = [Trial(session.claims[i], session.claims[i].species, placed(session, i)) for i in rows]
    stated = [session.claims[i].probability for i in rows]
    assert [t.probability() for t in trials] == pytest.approx(stated, abs=1e-6)
    # what had to be added to the odds for that is the share of the species' other lines
    added = [t.sure * t.more / (1 + np.sum(t.odds) + t.rest) for t in trials]
    others = [
        c.probability - sum(k.probability for k in c.candidates if k.weights and k.species == c.species)
        for c in (session.claims[i] for i in rows)
    ]
    assert added == pytest.approx(others, abs=0.002)


def test_lines_that_no_other_feature_wants_are_free(session):
    """The freedom is what is left of the engine's odds when its other factors are taken out."""
    free = [Breakdown(*k.weights).free for c in session.claims for k in c.candidates if k.weights]
    assert max(free) < 1e-3
    assert np.mean(np.abs(free) < 1e-3) > 0.8


def test_every_fact_crosses_the_nearest_bound(session):
    told = 0
    for i in weighed(session):
        bound, rising = nearest_bound(session.claims[i].probability)
        for fact in deciding_facts(session.claims[i], placed(session, i)):
            told += 1
            assert (fact.probability >= bound) == rising
            assert fact.standing == standing_of(fact.probability)
    assert told > 10


def test_a_feature_really_moved_gets_about_the_probability_told(session):
    """The engine runs again with the feature displaced as the fact says."""
    catalogue, tried = load_catalogue(), []
    options = ClaimOptions(
        velocity=session.velocity.velocity, temperature=session.temperature_k,
        frame=session.spectrum.frame,
    )  # fmt: skip
    for i in weighed(session):
        for fact in deciding_facts(session.claims[i], placed(session, i)):
            moved = re.match(r"it stood ([\d.]+) Å (redder|bluer)$", fact.words)
            if moved and len(tried) < 4 and session.claims[i].probability > 0.5:
                shift = float(moved[1]) * (1 if moved[2] == "redder" else -1)
                wave = session.features.wave.copy()
                wave[i] += shift
                found = identify(replace(session.features, wave=wave),
                                 session.spectrum.coverage, catalogue, options)
                species = session.claims[i].species
                p = sum(c.probability for c in found.claims[i].candidates if c.species == species)
                tried.append((p, fact.probability))
    assert len(tried) == 4
    real, told = np.array(tried).T
    assert np.max(np.abs(real - told)) < 0.2  # other claims move with it; the told odds do not


@pytest.mark.parametrize(
    ("probability", "bound", "rising"),
    [(0.2, 0.5, True), (0.55, 0.5, False), (0.78, 0.8, True), (0.93, 0.95, True), (0.999, 0.95, False)],
)
def test_nearest_bound(probability, bound, rising):
    assert nearest_bound(probability) == (bound, rising)


def test_a_persons_claim_has_no_facts(session):
    row = weighed(session)[0]
    theirs = replace(session.claims[row], by="person")
    claims = (*session.claims[:row], theirs, *session.claims[row + 1:])
    assert what_would_change(replace(session, claims=claims), row).words == ()
    assert deciding_facts(Claim(), placed(session, row)) == ()


def test_where_no_fact_decides_the_furthest_is_told(session):
    answers = [what_would_change(session, i) for i in weighed(session)]
    undecided = [a for a in answers if a.words and not a.decisive]
    assert undecided and all(a.words[0].startswith("no single fact") for a in undecided)
