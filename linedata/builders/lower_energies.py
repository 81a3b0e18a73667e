"""Lower energies of molecular lines from their intensities and transition probabilities.

HITRAN's intensity at 296 K is I_a A g' exp(-c2 E''/T) (1 - exp(-c2 nu/T)) / (8 pi c nu^2 Q)
(Rothman et al. 1998, JQSRT 60, 665), so intensity and A give g' exp(-c2 E''/T). g' is a spin weight
times 2J'+1: each J' implies an E'', and the true one is the J' whose E'' is a level of the ground
state with |J' - J''| <= 1 of the same spin weight.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

SECOND_RADIATION = 1.438776877  # h c / k, cm K
REFERENCE = 296.0  # K
LIGHT = 2.99792458e10  # cm/s


@dataclass(frozen=True)
class Molecule:
    """levels: rows (J, spin weight, energy in cm-1) of the main isotope's ground state.

    partition: Q(296 K); abundance: of the isotope; power: Q grows as T^power; tolerance: cm-1.
    """

    levels: np.ndarray
    partition: float
    abundance: float
    power: float
    tolerance: float = 0.3


def populations(wavenumber, intensity, probability, molecule: Molecule) -> np.ndarray:
    """g' exp(-c2 E''/296 K) of lines (cm-1; cm-1/(molecule cm-2); s-1)."""
    stimulated = 1.0 - np.exp(-SECOND_RADIATION * wavenumber / REFERENCE)
    scale = 8 * np.pi * LIGHT * wavenumber**2 * molecule.partition / molecule.abundance
    return scale * intensity / (probability * stimulated)


def lower_energies(wavenumber, intensity, probability, molecule: Molecule) -> np.ndarray:
    """E'' (cm-1) of each line; NaN where no level fits within the tolerance."""
    wavenumber, intensity, probability = (
        np.asarray(values, float) for values in (wavenumber, intensity, probability)
    )
    usable = probability > 0
    seen = populations(wavenumber, intensity, np.where(usable, probability, 1.0), molecule)
    best = np.full(len(seen), molecule.tolerance)
    energy = np.full(len(seen), np.nan)
    j_low, spin, level = molecule.levels.T
    for weight in np.unique(spin):
        for j_up in range(int(j_low.max()) + 2):
            implied = -REFERENCE / SECOND_RADIATION * np.log(seen / (weight * (2 * j_up + 1)))
            partners = np.sort(level[(np.abs(j_low - j_up) <= 1) & (spin == weight)])
            if not len(partners):
                continue
            place = np.clip(np.searchsorted(partners, implied), 1, len(partners) - 1)
            lower, upper = partners[place - 1], partners[place]
            nearest = np.where(implied - lower < upper - implied, lower, upper)
            miss = np.abs(nearest - implied)
            better = usable & (miss < best)
            best, energy = np.where(better, miss, best), np.where(better, nearest, energy)
    return energy


def intensity_ratio(energy, temperature: float, molecule: Molecule) -> np.ndarray:
    """Intensity at a temperature (K) over that at 296 K; 1 where E'' (cm-1) is unknown."""
    energy = np.asarray(energy, float)
    factor = np.exp(-SECOND_RADIATION * energy * (1 / temperature - 1 / REFERENCE))
    return np.where(np.isfinite(energy), factor * (REFERENCE / temperature) ** molecule.power, 1.0)
