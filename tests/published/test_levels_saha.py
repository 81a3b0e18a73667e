"""Saha and Boltzmann worked examples.

Source: Carroll & Ostlie, An Introduction to Modern Astrophysics, 2nd ed., examples 8.1.3-8.1.5
(inputs of the book, its printed answers from memory, digits recomputed from the inputs).
"""

from __future__ import annotations

import numpy as np
import pytest

from linewright.lines.levels import (
    boltzmann_ratio,
    ion_fractions,
    ionisation_energy,
    saha_ratio_log,
    solar_abundance,
)

SUN_T, SUN_LOG_PE = 5777.0, np.log10(15.0)  # 1.5 N m-2 is 15 dyn cm-2


def hydrogen_ratio(temperature, log_pe):
    return 10.0 ** saha_ratio_log(np.log10(1 / 2), 13.6, temperature, log_pe)


@pytest.mark.parametrize(
    ("temperature", "fraction"),
    [(8300.0, 0.0546), (9600.0, 0.5218), (11000.0, 0.9255), (11300.0, 0.9511)],
)
def test_ionised_share_of_hydrogen_at_200_dyn(temperature, fraction):
    ratio = hydrogen_ratio(temperature, np.log10(200.0))
    assert ratio / (1 + ratio) == pytest.approx(fraction, abs=2e-4)


def test_excited_hydrogen_peaks_near_9900_kelvin():
    grid = np.arange(8000.0, 12000.0, 10.0)
    excited = []
    for temperature in grid:
        ratio = boltzmann_ratio(4.0, 10.2, temperature)
        ionised = hydrogen_ratio(temperature, np.log10(200.0))
        excited.append(ratio / (1 + ratio) / (1 + ionised))
    assert grid[int(np.argmax(excited))] == pytest.approx(9873.0, abs=15.0)
    assert max(excited) == pytest.approx(8.74e-6, rel=0.01)


def test_first_excited_level_equals_the_ground_at_85400_kelvin():
    assert boltzmann_ratio(4.0, 10.2, 85383.0) == pytest.approx(1.0, abs=2e-3)


def test_the_sun_s_hydrogen():
    assert hydrogen_ratio(SUN_T, SUN_LOG_PE) == pytest.approx(7.703e-5, rel=0.005)
    assert boltzmann_ratio(4.0, 10.2, SUN_T) == pytest.approx(5.055e-9, rel=0.005)


def test_the_sun_s_calcium():
    ratio = 10.0 ** saha_ratio_log(np.log10(2.30 / 1.32), 6.11, SUN_T, SUN_LOG_PE)
    assert ratio == pytest.approx(918.4, rel=0.005)
    assert boltzmann_ratio(2.0, 3.12, SUN_T) == pytest.approx(3.795e-3, rel=0.005)


# N2/N1 at 5000 and 6000 K, P_e 15 dyn cm-2, with the partition functions of Barklem & Collet
# 2016; recomputed independently.
@pytest.mark.parametrize(
    ("element", "at_5000", "at_6000"),
    [("Na", 251.5, 2698.0), ("Ca", 101.6, 1531.0), ("Ti", 19.39, 385.0), ("Mg", 3.034, 89.35),
     ("Fe", 1.330, 42.77)],
)
def test_ion_ratios_of_metals(element, at_5000, at_6000):
    for temperature, expected in ((5000.0, at_5000), (6000.0, at_6000)):
        shares = ion_fractions(element, temperature, SUN_LOG_PE)
        assert shares[1] / shares[0] == pytest.approx(expected, rel=0.005)
        assert shares.sum() == pytest.approx(1.0)


def test_bare_nuclei_end_the_chain():
    assert ion_fractions("H", 20000.0, 2.0)[2:].max() == 0.0
    shares = ion_fractions("He", 50000.0, 2.0)
    assert shares[2] > 0.9 and shares[3:].max() == 0.0


# NIST ASD ionisation energies in eV.
@pytest.mark.parametrize(
    ("ion", "energy"),
    [("H I", 13.59843), ("He I", 24.58739), ("He II", 54.41777), ("C II", 24.38314),
     ("N I", 14.53413), ("O II", 35.12112), ("Na I", 5.13908), ("Mg II", 15.03527),
     ("Si II", 16.34585), ("K I", 4.34066), ("Ca II", 11.87172), ("Ti I", 6.82812),
     ("Fe I", 7.90247), ("Fe II", 16.19921), ("Ba II", 10.00383), ("Sr I", 5.69487)],
)
def test_ionisation_energies(ion, energy):
    assert ionisation_energy(ion) == pytest.approx(energy, abs=2e-4)


# Asplund, Grevesse, Sauval & Scott 2009, ARA&A 47, 481.
@pytest.mark.parametrize(
    ("element", "value"),
    [("He", 10.93), ("Li", 1.05), ("C", 8.43), ("N", 7.83), ("O", 8.69), ("Ne", 7.93),
     ("Na", 6.24), ("Mg", 7.60), ("Al", 6.45), ("Si", 7.51), ("S", 7.12), ("K", 5.03),
     ("Ca", 6.34), ("Sc", 3.15), ("Ti", 4.95), ("Cr", 5.64), ("Mn", 5.43), ("Fe", 7.50),
     ("Ni", 6.22), ("Sr", 2.87), ("Y", 2.21), ("Ba", 2.18), ("Eu", 0.52)],
)
def test_solar_abundances(element, value):
    assert solar_abundance(element) == pytest.approx(value, abs=1e-6)
