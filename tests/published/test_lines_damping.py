"""Damping constants against published values.

Sources: van der Waals log gamma per hydrogen atom at 10,000 K of Barklem, Piskunov & O'Mara 2000
(A&AS 142, 467), from memory; radiative widths from NIST transition probabilities (Na D A =
6.16e7 s-1, Ca I 4227 A = 2.18e8 s-1).
"""

from __future__ import annotations

import numpy as np
import pytest

from linewright.lines.loading import load_catalogue
from linewright.lines.search import LineQuery, search


@pytest.fixture(scope="module")
def catalogue():
    return load_catalogue(origins="stellar")


def row_of(catalogue, species, air):
    rows = search(catalogue, LineQuery((air - 0.02, air + 0.02), species=(species,)))
    assert len(rows), f"{species} {air}"
    return int(rows[np.argmax(catalogue.loggf[rows])])


@pytest.mark.parametrize(
    ("species", "air", "published"),
    [("Na I", 5889.951, -7.526), ("Mg I", 5183.604, -7.267), ("Ca I", 6162.173, -7.189),
     ("Fe I", 6173.334, -7.690)],
)
def test_van_der_waals(catalogue, species, air, published):
    assert catalogue.gamma_waals[row_of(catalogue, species, air)] == pytest.approx(
        published, abs=0.06
    )


@pytest.mark.parametrize(
    ("species", "air", "a_value"), [("Na I", 5889.951, 6.16e7), ("Ca I", 4226.728, 2.18e8)]
)
def test_radiative_width_of_resonance_lines(catalogue, species, air, a_value):
    found = 10.0 ** float(catalogue.gamma_rad[row_of(catalogue, species, air)])
    assert found == pytest.approx(a_value, rel=0.1)


def test_ions_and_unmatched_lines_have_no_van_der_waals_width(catalogue):
    ionised = [k for k, name in enumerate(catalogue.species_names) if name.endswith(" II")]
    assert not np.isfinite(catalogue.gamma_waals[np.isin(catalogue.species, ionised)]).any()
    assert np.isfinite(catalogue.gamma_waals).sum() > 10000
