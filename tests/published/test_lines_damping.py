"""Damping constants against published values.

Sources: van der Waals log gamma per hydrogen atom at 10,000 K of Barklem, Piskunov & O'Mara 2000
(A&AS 142, 467), from memory; Stark widths of ions (full width in Angstrom at 1e17 electrons per cm3,
about 15,000 K) from the critical review of Konjevic & Wiese 1990 (J. Phys. Chem. Ref. Data 19, 1307),
of neutral atoms (log full width per electron) Griem 1974, from memory; radiative widths from NIST transition probabilities (Na D A =
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


@pytest.mark.parametrize(
    ("species", "air", "width"), [("Ca II", 3933.663, 0.20), ("Si II", 6347.11, 1.2)]
)
def test_stark_widths_of_ions(catalogue, species, air, width):
    """gamma = 2 pi c dlambda / lambda^2 per electron; the formula is good to 30 %, the data too."""
    published = 2 * np.pi * 2.99792458e18 * width / air**2 / 1e17
    found = float(catalogue.gamma_stark[row_of(catalogue, species, air)])
    assert found == pytest.approx(np.log10(published), abs=0.2)


@pytest.mark.parametrize(
    ("species", "air", "published"),
    [("Na I", 5889.951, -5.64), ("Mg I", 5183.604, -5.47), ("Ca I", 6162.173, -5.32)],
)
def test_stark_widths_the_gaunt_factor_was_set_on(catalogue, species, air, published):
    found = float(catalogue.gamma_stark[row_of(catalogue, species, air)])
    assert found == pytest.approx(published, abs=0.1)


def test_hydrogen_and_helium_have_no_stark_width(catalogue):
    codes = [catalogue.species_names.index(name) for name in ("H I", "He I", "He II")]
    assert not np.isfinite(catalogue.gamma_stark[np.isin(catalogue.species, codes)]).any()
    assert np.isfinite(catalogue.gamma_stark).sum() > 50000
