"""Lines of hot stars: wavelengths and log gf of well-known lines against published values.

Source: log gf of NIST ASD (critical compilations of Wiese, Fuhr, Kelleher, Podobedova and
co-workers), recalled from memory to 0.01 dex; Fe III: Ekberg 1993, A&AS 101, 1.
"""

from __future__ import annotations

import numpy as np
import pytest

from linewright.lines.loading import load_catalogue
from linewright.lines.strengths import absorption_strength
from linewright.spectra.medium import vacuum_to_air

# species, air wavelength, published log gf
LINES = [
    ("Mg II", 4481.126, 0.749), ("Mg II", 4481.325, 0.590), ("Mg II", 7877.05, 0.391),
    ("Si II", 6347.11, 0.149), ("Si II", 6371.37, -0.082), ("Si II", 5055.98, 0.523),
    ("Si III", 4552.62, 0.292), ("Si III", 4567.84, 0.068), ("Si III", 4574.76, -0.409),
    ("Si IV", 4088.86, 0.194), ("Si IV", 4116.10, -0.110), ("C II", 6578.05, -0.021),
    ("C II", 6582.88, -0.323), ("C III", 4647.42, 0.070), ("C III", 4650.25, -0.151),
    ("N I", 7468.31, -0.190), ("N I", 8680.28, 0.346), ("N I", 8216.34, 0.132),
    ("N II", 3995.00, 0.163), ("N II", 5679.56, 0.250), ("N II", 4630.54, 0.080),
    ("N II", 5666.63, -0.104), ("N III", 4097.36, -0.057), ("N III", 4640.64, 0.140),
    ("N III", 4103.39, -0.359), ("O I", 7771.94, 0.369), ("O I", 7774.17, 0.223),
    ("O I", 6158.19, -0.409), ("O II", 4649.13, 0.308), ("O II", 4414.90, 0.172),
    ("O II", 4596.17, 0.180), ("O III", 3759.87, 0.162), ("O III", 5592.25, -0.337),
    ("Al III", 5696.60, 0.232), ("Al III", 5722.73, -0.071), ("S II", 5453.86, 0.442),
    ("S II", 5432.80, 0.205), ("S III", 4253.59, 0.358), ("S III", 4284.98, 0.110),
    ("Ne II", 3694.21, 0.090), ("Ne II", 3334.84, 0.412), ("Ar II", 4806.02, 0.210),
    ("Ar II", 4348.06, 0.470), ("P II", 6043.08, 0.416), ("P III", 4222.20, 0.210),
    ("C IV", 5801.33, -0.194), ("C IV", 5811.98, -0.495), ("N V", 4603.74, -0.280),
    ("Fe III", 5156.11, -2.018), ("Fe III", 4419.60, -2.218), ("Al II", 4663.06, -0.284),
]


@pytest.fixture(scope="module")
def catalogue():
    return load_catalogue(origins="stellar")


def strongest(catalogue, species, air):
    code = catalogue.species_names.index(species)
    near = np.abs(vacuum_to_air(catalogue.wave) - air) < 0.12
    rows = np.flatnonzero(near & (catalogue.species == code))
    assert len(rows), f"{species} {air} is missing"
    return rows[np.argmax(catalogue.loggf[rows])]


@pytest.mark.parametrize(("species", "air", "loggf"), LINES)
def test_wavelength_within_50_mA_or_two_errors(catalogue, species, air, loggf):
    row = strongest(catalogue, species, air)
    offset = abs(float(vacuum_to_air(catalogue.wave[row])) - air)
    assert offset < max(0.05, 2 * catalogue.wave_err[row])


def test_computed_strengths_scatter_by_less_than_a_tenth_of_a_dex():
    """Lines whose log gf the builders computed; Fe III and Al II carry the published values."""
    computed = load_catalogue("level_lines")
    offsets = []
    for species, air, loggf in LINES:
        near = np.abs(vacuum_to_air(computed.wave) - air) < 0.12
        if species in ("Fe III", "Al II") or species not in computed.species_names:
            continue
        rows = np.flatnonzero(near & (computed.species == computed.species_names.index(species)))
        if len(rows) and np.max(computed.loggf[rows]) > loggf - 1.0:
            offsets.append(np.max(computed.loggf[rows]) - loggf)
    assert len(offsets) >= 35
    assert np.std(offsets) < 0.10
    assert abs(np.mean(offsets)) < 0.05
    assert np.abs(offsets).max() < 0.25


# What every spectroscopist expects among the strongest optical lines of normal stars.
@pytest.mark.parametrize(
    ("temperature", "log_pe", "expected"),
    [
        (10000, 2.5, [("Mg II", 4481.1), ("Si II", 6347.1), ("Ca II", 3933.7), ("Fe II", 5169.0)]),
        (15000, 3.0, [("He I", 4471.5), ("Si II", 4130.9), ("Mg II", 4481.1), ("He I", 5875.6)]),
        (20000, 3.0, [("He I", 4471.5), ("Si III", 4552.6), ("C II", 4267.2), ("O II", 4649.1)]),
        (30000, 3.3, [("He II", 4685.7), ("C III", 4647.4), ("Si IV", 4088.9), ("He I", 4471.5)]),
    ],
)
def test_strongest_predicted_lines_by_temperature(catalogue, temperature, log_pe, expected):
    strength = absorption_strength(catalogue, temperature, log_pe)
    optical = (catalogue.wave > 3900) & (catalogue.wave < 6700)
    cut = np.sort(strength[optical & np.isfinite(strength)])[-45]
    for species, air in expected:
        assert strength[strongest(catalogue, species, air)] >= cut, f"{species} {air}"
