"""Ground states of O2 and H2O, and lower energies from intensity and transition probability.

Levels: H2O Tennyson et al. 2001 (J. Phys. Chem. Ref. Data 30, 735), O2 Amiot & Verges 1981 (Can. J.
Phys. 59, 1391), both from memory.
"""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
import pytest

BUILDERS = Path(__file__).resolve().parents[2] / "linedata" / "builders"
sys.path.insert(0, str(BUILDERS))

from lower_energies import Molecule, intensity_ratio, lower_energies  # noqa: E402
from molecular_levels import oxygen_levels, oxygen_state, water_levels  # noqa: E402

WATER_LEVELS = {
    1: (23.794, 37.137, 42.372), 2: (70.091, 79.496, 95.176, 134.902, 136.164),
    3: (136.762, 142.279, 173.366, 206.301, 212.156, 285.219, 285.419),
}


@pytest.mark.parametrize("j", sorted(WATER_LEVELS))
def test_levels_of_water(j):
    levels = water_levels(4)
    found = np.sort(levels[levels[:, 0] == j, 2])
    assert found == pytest.approx(WATER_LEVELS[j], abs=0.05)


def test_spin_weights_of_water_alternate():
    """1_01 and 1_10 are ortho (weight 3), 0_00 and 1_11 para."""
    levels = water_levels(1)
    weight = {round(energy, 0): spin for _, spin, energy in levels}
    assert weight == {0.0: 1, 24.0: 3, 37.0: 1, 42.0: 3}


def test_lowest_levels_of_oxygen():
    """N = 1: J = 0, 2, 1 at 0, 2.084 and 3.961 cm-1."""
    found = [oxygen_state(1, j) for j in (0, 2, 1)]
    assert found == pytest.approx([0.0, 2.084, 3.961], abs=0.005)
    assert (oxygen_levels()[:, 2] >= 0).all()


def made_lines(molecule, j_up, energy, wavenumber=13000.0, probability=0.01):
    """Intensities as HITRAN defines them (cm-1/(molecule cm-2))."""
    weight = (2 * j_up + 1) * np.exp(-1.438776877 * energy / 296.0)
    scale = 8 * np.pi * 2.99792458e10 * wavenumber**2 * molecule.partition
    return molecule.abundance * probability * weight / scale


def test_lower_energies_come_back_from_intensities():
    molecule = Molecule(oxygen_levels(), 215.77, 0.995262, 1.0, 0.15)
    states = [(1, 2, 1), (7, 6, 6), (13, 14, 14), (21, 20, 21), (33, 34, 33)]
    for n, j_up, j_low in states:
        energy = oxygen_state(n, j_low)
        intensity = made_lines(molecule, j_up, energy)
        found = lower_energies([13000.0], [intensity * 1.0002], [0.01], molecule)
        assert found[0] == pytest.approx(energy, abs=0.01)


def test_a_line_that_fits_no_level_stays_unknown_and_unchanged():
    molecule = Molecule(oxygen_levels(), 215.77, 0.995262, 1.0, 0.15)
    found = lower_energies([13000.0], [made_lines(molecule, 0, 60.0)], [0.01], molecule)
    assert np.isnan(found[0]) and intensity_ratio(found, 250.0, molecule)[0] == 1.0


def test_high_levels_weaken_in_colder_air():
    molecule = Molecule(oxygen_levels(), 215.77, 0.995262, 1.0)
    low, high = intensity_ratio(np.array([0.0, 1000.0]), 250.0, molecule)
    assert low == pytest.approx(296.0 / 250.0)
    boltzmann = np.exp(-1.438776877 * 1000.0 * (1 / 250 - 1 / 296))
    assert high == pytest.approx(low * boltzmann)
