"""A long list of well-known hot-star lines: all listed, where published, as strong as published.

Sources: tests/hot_lines.py (NIST ASD and its compilations, from memory).
"""

from __future__ import annotations

import numpy as np
import pytest
from hot_lines import EXPECTED, HOT_LINES

from linewright.lines.catalogue import NONLTE
from linewright.lines.depths import zero_point
from linewright.lines.loading import load_catalogue
from linewright.lines.strengths import absorption_strength
from linewright.spectra.medium import vacuum_to_air


@pytest.fixture(scope="module")
def catalogue():
    return load_catalogue(origins="stellar")


@pytest.fixture(scope="module")
def air(catalogue):
    return vacuum_to_air(catalogue.wave)


def strongest(catalogue, air, species, wave):
    mine = catalogue.species == catalogue.species_names.index(species)
    rows = np.flatnonzero((np.abs(air - wave) < 0.12) & mine)
    return int(rows[np.argmax(catalogue.loggf[rows])]) if len(rows) else -1


def test_at_least_110_lines_of_every_family_are_listed(catalogue, air):
    rows = {(s, w): strongest(catalogue, air, s, w) for s, w, _ in HOT_LINES}
    assert [key for key, row in rows.items() if row < 0] == []
    close = [
        abs(air[row] - wave) < max(0.05, 2 * catalogue.wave_err[row])
        for (_, wave), row in rows.items() if row >= 0
    ]
    assert len(close) >= 210
    assert np.mean(close) > 0.98
    assert (catalogue.grade[[row for row in rows.values() if row >= 0]] > 0).all()


def test_strengths_scatter_as_the_stated_errors_say(catalogue, air):
    offsets, errors = [], []
    for species, wave, loggf in HOT_LINES:
        if loggf is None or species in ("Fe III", "Al II"):
            continue
        row = strongest(catalogue, air, species, wave)
        offsets.append(float(catalogue.loggf[row]) - loggf)
        errors.append(float(catalogue.loggf_err[row]))
    pulls = np.array(offsets) / np.array(errors)
    assert len(offsets) > 140
    assert np.sqrt(np.mean(np.square(offsets))) < 0.10
    assert np.mean(np.abs(pulls) > 3) < 0.02


@pytest.mark.parametrize(("temperature", "log_pe", "expected"), EXPECTED)
def test_expected_lines_are_among_the_forty_strongest(catalogue, air, temperature, log_pe, expected):
    strength = absorption_strength(catalogue, temperature, log_pe)
    strength = strength - zero_point(catalogue.wave, temperature, log_pe)
    optical = (air > 3900) & (air < 6800) & np.isfinite(strength)
    cut = np.sort(strength[optical])[-40]
    for species, wave in expected:
        assert strength[strongest(catalogue, air, species, wave)] >= cut, f"{species} {wave}"


@pytest.mark.parametrize(
    ("species", "wave"),
    [("C III", 5695.92), ("N III", 4640.64), ("N III", 4634.13), ("Si IV", 6701.21),
     ("O I", 7771.94)],
)
def test_known_departures_from_lte_are_flagged(catalogue, air, species, wave):
    """C III 5696, N III 4640, Si IV 6701 (emission in O stars), O I 7772."""
    assert catalogue.flags[strongest(catalogue, air, species, wave)] & NONLTE
