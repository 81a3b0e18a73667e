"""Velocities of a nebula's ions against ones put in."""

from __future__ import annotations

from types import SimpleNamespace

import numpy as np
import pytest

from linewright.claims.ion_velocities import ION_SPREAD, learned, neutral
from linewright.spectra.medium import C_KM_S

NEBULA, NEUTRAL_GAS, WAVE_ERR = 15.0, 10.0, 0.02  # km/s, km/s beyond it, Angstrom
NAMES = ("N I", "[Ni II]", "[O III]", "H I")
WAVES = {"N I": (7442.3, 7468.3, 8216.3, 8223.1), "[Ni II]": (7377.8, 7411.6),
         "[O III]": (4959.0, 5007.0), "H I": (4861.3, 6562.8, 8598.4)}  # fmt: skip


@pytest.mark.parametrize(
    ("species", "is_neutral"),
    [("N I", True), ("[O I]", True), ("[Fe II]", True), ("[Ni II]", True), ("[Cl II]", True),
     ("H I", False), ("He I", False), ("[N II]", False), ("[O III]", False), ("[Fe III]", False),
     ("C II", False)],
)  # fmt: skip
def test_gas_ionised_by_less_than_a_rydberg_is_neutral(species, is_neutral):
    """First ionisation energies (NIST): Fe 7.90, Ni 7.64, Cl 12.97, N 14.53, O 13.62 eV. C II
    recombines from C2+, made at 24.4 eV."""
    assert neutral(species) == is_neutral


def nebula(moved=()):
    """(catalogue, solution) of the lines above, neutral gas NEUTRAL_GAS redder; moved: rows
    displaced by a further 20 km/s."""
    species = np.concatenate([np.full(len(WAVES[n]), i) for i, n in enumerate(NAMES)])
    wave = np.concatenate([WAVES[n] for n in NAMES])
    v = NEBULA + NEUTRAL_GAS * (species < 2) + 20.0 * np.isin(np.arange(len(wave)), moved)
    rows = np.arange(len(wave))
    nothing = np.zeros(len(wave))
    features = SimpleNamespace(
        wave=wave * (1 + v / C_KM_S), error=nothing + WAVE_ERR, fwhm=nothing, excess=nothing
    )
    entries = SimpleNamespace(component=np.zeros(len(wave), int), row=rows)
    solution = SimpleNamespace(
        problem=SimpleNamespace(entries=entries, features=features), feature=rows, entry=rows,
        probability=nothing + 0.9, groups=SimpleNamespace(share=nothing + 1.0),
    )

    class Catalogue(SimpleNamespace):
        def __len__(self):
            return len(wave)

    return Catalogue(wave=wave, species=species, species_names=NAMES), solution


def test_ions_get_the_velocities_put_in():
    catalogue, solution = nebula()
    ions = learned(catalogue, solution, 0, NEBULA)
    nitrogen, oxygen = catalogue.species == 0, catalogue.species == 2
    assert ions.shift[nitrogen] == pytest.approx(NEUTRAL_GAS, abs=1.0)
    assert ions.shift[oxygen] == pytest.approx(0.0, abs=1.0)
    assert np.all(ions.error[nitrogen] < 1.0)


def test_no_line_vouches_for_itself():
    """A displaced line moves the others' expectation, not its own."""
    catalogue, still = nebula()
    _, moved = nebula(moved=[0])
    before, after = (learned(catalogue, s, 0, NEBULA) for s in (still, moved))
    assert after.shift[0] == pytest.approx(before.shift[0])
    assert after.shift[1] > before.shift[1] + 3.0


def test_a_lone_line_leans_on_its_zone():
    """Of nickel's two lines one is left: it gets the neutral gas's velocity, with ions' spread."""
    catalogue, solution = nebula()
    solution.probability[5] = 0.0
    ions = learned(catalogue, solution, 0, NEBULA)
    assert ions.shift[4] == pytest.approx(NEUTRAL_GAS, abs=5.0)
    assert ions.error[4] >= ION_SPREAD
