"""Lines named as the trade prints them."""

from __future__ import annotations

import math

import pytest

from linewright.publish.notation import hydrogen_name, line_text, species_text
from linewright.spectra.medium import air_to_vacuum

# Air wavelengths: Balmer and Paschen lines as in NIST ASD (5-figure values from memory).
HYDROGEN = [
    (6562.8, "Hα"), (4861.3, "Hβ"), (4340.5, "Hγ"), (4101.7, "Hδ"), (3970.1, "Hε"),
    (3889.1, "H8"), (3835.4, "H9"), (10938.1, "Paγ"), (10049.4, "Paδ"), (8862.8, "Pa11"),
    (21655.3, "Brγ"), (8750.5, "Pa12"),
]  # fmt: skip


@pytest.mark.parametrize(("air", "name"), HYDROGEN)
def test_hydrogen_lines_have_their_names(air, name):
    assert hydrogen_name(float(air_to_vacuum(air))) == name


@pytest.mark.parametrize("wave", [5000.0, 6500.0, 0.0, -1.0, 3000.0])
def test_other_wavelengths_are_no_hydrogen_line(wave):
    assert hydrogen_name(wave) == ""


def test_labels():
    assert line_text("Fe I", 5271.0, 5269.537) == "Fe I 5269.54"
    assert line_text("[O III]", 5008.24, 5006.843) == "[O III] 5006.84"
    assert line_text("H I", 6564.6, 6562.8) == "Hα"
    assert line_text("H I", 5000.0, 4998.6) == "H I 4998.60"
    assert line_text("Eu II", math.nan, math.nan) == "Eu II"
    assert line_text("Mg I", 5168.8, 5167.32, blended=True) == "Mg I 5167.32 bl"


def test_molecules_have_subscripts_and_atoms_none():
    assert species_text("H2O") == "H₂O"
    assert species_text("Fe I") == "Fe I" and species_text("C III]") == "C III]"
