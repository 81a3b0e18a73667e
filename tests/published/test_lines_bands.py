"""Heads of molecular bands against published values.

Sources: Pearse & Gaydon 1976 (The Identification of Molecular Spectra), from memory; CO heads of
Kleinmann & Hall 1986 (ApJS 62, 501), vacuum micron, from memory; FeH head of Wing & Ford 1969
(PASP 81, 527).
"""

from __future__ import annotations

import numpy as np
import pytest

from linewright.lines.bands import SHADINGS, bands_between, in_bands, load_bands
from linewright.lines.citations import bibtex
from linewright.lines.species import parse_species
from linewright.spectra.medium import air_to_vacuum

# molecule, air head, shading
HEADS = [
    ("C2", 5165.2, "violet"), ("C2", 4737.1, "violet"), ("C2", 5635.5, "violet"),
    ("CN", 3883.4, "violet"), ("CN", 4216.0, "violet"), ("CH", 4314.2, "violet"),
    ("MgH", 5211.1, "violet"), ("TiO", 5166.8, "red"), ("TiO", 6158.5, "red"),
    ("TiO", 7054.5, "red"), ("TiO", 7087.6, "red"), ("TiO", 8859.6, "red"), ("FeH", 9896.0, "red"),
]


@pytest.mark.parametrize(("molecule", "air", "shading"), HEADS)
def test_heads_of_the_strong_bands(molecule, air, shading):
    """Heads recomputed from lines stand within 1 A of the published ones."""
    vacuum = float(air_to_vacuum(air))
    near = [b for b in load_bands() if b.molecule == molecule and abs(b.head - vacuum) < 1.0]
    assert near
    assert near[0].shading == shading
    assert not near[0].from_memory


@pytest.mark.parametrize("micron", [2.2935, 2.3227, 2.3525, 2.3829])
def test_carbon_monoxide_heads(micron):
    heads = [band.head for band in load_bands() if band.molecule == "CO"]
    assert min(abs(head - micron * 1e4) for head in heads) < 3.0


def test_bands_reach_to_the_side_they_are_shaded_to():
    for band in load_bands():
        assert band.shading in SHADINGS and band.high > band.low
        edge = {"red": band.low, "violet": band.high, "both": (band.low + band.high) / 2}
        assert edge[band.shading] == pytest.approx(band.head, abs=1e-6)
        assert str(parse_species(band.molecule)) == band.molecule
        assert bibtex([band.source])


def test_the_ten_molecules_are_there():
    wanted = {"TiO", "VO", "CN", "CH", "C2", "MgH", "CaH", "FeH", "CO", "H2O"}
    assert {band.molecule for band in load_bands()} == wanted


def test_selection_by_range_and_molecule():
    found = bands_between(5167.0, 5170.0)
    assert {"TiO", "MgH"} <= {band.molecule for band in found}
    assert {band.molecule for band in bands_between(5000.0, 7000.0, ("VO",))} == {"VO"}
    assert in_bands(np.array([7095.0, 7300.0]), ("TiO",)).tolist() == [True, False]
