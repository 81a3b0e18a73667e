"""Hydrogen and He II against level averages, fine structure and published strengths.

Sources: level averages of shells from NIST ASD (Kramida 2010, ADNDT 96, 586); fine structure of
H alpha from Dirac levels and the Lamb shift, worked out independently; log gf and Einstein A of
Wiese & Fuhr 2009 (A from memory); He II centroids as observed (from memory).
"""

from __future__ import annotations

import numpy as np
import pytest

from linewright.lines.loading import load_catalogue
from linewright.spectra.medium import vacuum_to_air

# Upper shell, air wavelength from level averages.
BALMER = [
    (3, 6562.819), (4, 4861.333), (5, 4340.471), (6, 4101.741), (7, 3970.079), (8, 3889.056),
    (9, 3835.391), (10, 3797.904), (11, 3770.637), (12, 3750.158),
]
PASCHEN = [
    (5, 12818.070), (6, 10938.086), (7, 10049.369), (8, 9545.969), (9, 9229.014),
    (10, 9014.910), (11, 8862.783), (12, 8750.472), (13, 8665.018), (14, 8598.392),
    (15, 8545.383), (16, 8502.483), (17, 8467.254), (18, 8437.956),
]


@pytest.fixture(scope="module")
def stellar():
    return load_catalogue("hydrogen_helium")


def at(catalogue, species, air, reach=0.2):
    waves = vacuum_to_air(catalogue.wave)
    rows = np.flatnonzero(np.abs(waves - air) < reach)
    rows = [k for k in rows if catalogue.species_of(k) == species]
    assert rows, f"{species} {air} is missing"
    return max(rows, key=lambda k: catalogue.loggf[k])


def test_h_alpha_is_the_strength_weighted_centroid(stellar):
    row = at(stellar, "H I", 6562.8)
    assert float(vacuum_to_air(stellar.wave[row])) == pytest.approx(6562.795, abs=0.001)
    assert stellar.wave[row] == pytest.approx(6564.608, abs=0.001)


def test_h_alpha_error_covers_the_level_average_within_two_sigma(stellar):
    row = at(stellar, "H I", 6562.8)
    assert abs(float(vacuum_to_air(stellar.wave[row])) - 6562.819) < 2 * stellar.wave_err[row]


@pytest.mark.parametrize(("upper", "air"), BALMER + PASCHEN)
def test_series_lie_within_the_fine_structure_of_the_level_averages(stellar, upper, air):
    row = at(stellar, "H I", air)
    offset = float(vacuum_to_air(stellar.wave[row])) - air
    assert abs(offset) < 0.026
    assert abs(offset) < stellar.spread[row]


@pytest.mark.parametrize(
    ("air", "loggf"), [(6562.80, 0.710), (4861.33, -0.020), (4340.47, -0.447), (4101.74, -0.753)]
)
def test_oscillator_strengths(stellar, air, loggf):
    assert stellar.loggf[at(stellar, "H I", air)] == pytest.approx(loggf, abs=0.002)


@pytest.mark.parametrize(
    ("air", "a_value", "lower", "upper"),
    [(6562.80, 4.4101e7, 2, 3), (4861.33, 8.4193e6, 2, 4), (4340.47, 2.5304e6, 2, 5)],
)
def test_einstein_coefficients(stellar, air, a_value, lower, upper):
    row = at(stellar, "H I", air)
    gf = 10.0 ** stellar.loggf[row]
    found = gf / (1.4992e-16 * stellar.wave[row] ** 2 * 2 * upper**2)
    assert found == pytest.approx(a_value, rel=0.002)


@pytest.mark.parametrize("air", [5411.52, 4541.59, 4199.83])
def test_ionised_helium_centroids(stellar, air):
    row = at(stellar, "He II", air)
    assert float(vacuum_to_air(stellar.wave[row])) == pytest.approx(air, abs=0.005)


def test_he_ii_4686_lies_in_the_observed_range(stellar):
    row = at(stellar, "He II", 4685.75)
    assert 4685.70 < float(vacuum_to_air(stellar.wave[row])) < 4685.80


# NIST transition probabilities of He I (Wiese & Fuhr 2009), s-1.
HELIUM = [
    (4387.929, 8.9889e6, 5), (4921.931, 1.9863e7, 5), (5015.678, 1.3372e7, 3),
    (6678.152, 6.3705e7, 5), (7281.351, 1.8299e7, 1), (3964.729, 6.9507e6, 3),
]


@pytest.mark.parametrize(("air", "a_value", "weight"), HELIUM)
def test_neutral_helium_strengths(stellar, air, a_value, weight):
    row = at(stellar, "He I", air, 0.01)
    expected = np.log10(1.4992e-16 * a_value * weight * stellar.wave[row] ** 2)
    assert stellar.loggf[row] == pytest.approx(expected, abs=0.01)


def test_he_i_5876_carries_its_whole_multiplet(stellar):
    """log gf 0.739 for 2 3P - 3 3D (Wiese & Fuhr 2009, from memory): two lines, 8/9 and 1/9."""
    rows = [at(stellar, "He I", 5875.624, 0.02), at(stellar, "He I", 5875.97, 0.03)]
    total = np.log10((10.0 ** stellar.loggf[rows]).sum())
    assert total == pytest.approx(0.739, abs=0.01)
