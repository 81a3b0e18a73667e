"""A person's word informs the rest and is never touched."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from linewright.job.options import SolveOptions
from linewright.job.reweigh import reweigh
from linewright.job.solve import solve
from linewright.resources import samples_dir
from linewright.session.edits import set_aside, set_species
from linewright.spectra.reading import read_spectrum


@pytest.fixture(scope="module")
def solved():
    spectrum = read_spectrum(samples_dir() / "g_dwarf.fits")
    return solve(spectrum, options=SolveOptions(ranges=((5150.0, 5300.0),)))


def test_nothing_said_changes_nothing(solved):
    weighed, changes = reweigh(solved)
    assert changes == ()
    assert all(a is b for a, b in zip(weighed.claims, solved.claims))
    assert weighed.velocity is solved.velocity


def test_a_person_is_never_overruled(solved):
    number = int(solved.features.number[np.argmax(solved.features.depth)])
    said = set_species(solved, number, "Gd II")
    weighed, _ = reweigh(said)
    row = solved.index_of(number)
    assert weighed.claims[row] == said.claims[row]
    assert weighed.claims[row].by == "person"
    assert weighed.history[-1].action == "reweigh"


def test_a_set_aside_feature_stays_so(solved):
    firm = [i for i, c in enumerate(solved.claims) if c.standing == "firm"]
    row = firm[len(firm) // 2]
    aside = set_aside(solved, int(solved.features.number[row]), "cosmic ray")
    weighed, changes = reweigh(aside)
    assert weighed.claims[row].standing == "set aside"
    assert int(solved.features.number[row]) not in [c.feature for c in changes]


def test_the_same_whether_the_first_weighing_was_kept_or_not(solved):
    number = int(solved.features.number[np.argmax(solved.features.depth)])
    first, _ = reweigh(set_species(solved, number, "Gd II"))
    reweigh(set_aside(solved, number, "cosmic ray"))
    kept, _ = reweigh(set_species(solved, number, "Gd II"))
    fresh = replace(solved, features=replace(solved.features))  # equal tables, not the same
    again, _ = reweigh(set_species(fresh, number, "Gd II"))
    assert repr(kept.claims) == repr(first.claims) == repr(again.claims)
