"""Hydrogen and He II: Dirac levels with the Lamb shift of s states, strengths, centroids."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from angular import multiplet_fraction
from coulomb import hydrogen_radial_squared

ALPHA = 7.2973525643e-3  # CODATA 2022


@dataclass(frozen=True)
class OneElectronIon:
    """Rydberg constant and ionisation limit in cm-1, nuclear charge, Lamb shift of ns times n^3."""

    name: str
    rydberg: float
    limit: float
    charge: int
    lamb: float


HYDROGEN = OneElectronIon("H I", 109677.58341, 109678.77174307, 1, 0.2822)
HELIUM_II = OneElectronIon("He II", 109722.2731, 438908.8789, 2, 3.747)


def level(ion: OneElectronIon, n: int, ell: int, j: float) -> float:
    """Energy above the ground state, cm-1 (Dirac fine structure, Lamb shift of s states)."""
    gross = ion.rydberg * ion.charge**2 / n**2
    fine = ion.rydberg * ALPHA**2 * ion.charge**4 / n**3 * (1 / (j + 0.5) - 0.75 / n)
    return ion.limit - gross - fine + (ion.lamb / n**3 if ell == 0 else 0.0)


def average_level(ion: OneElectronIon, n: int) -> float:
    """Mean energy of shell n weighted by 2J+1, cm-1."""
    states = [(ell, ell + s) for ell in range(n) for s in (-0.5, 0.5) if ell + s > 0]
    weights = np.array([2 * j + 1 for _, j in states])
    energies = np.array([level(ion, n, ell, j) for ell, j in states])
    return float((weights * energies).sum() / weights.sum())


def components(ion: OneElectronIon, low: int, up: int) -> tuple[np.ndarray, np.ndarray]:
    """Vacuum wavelengths (Angstrom) and gf of all fine-structure lines low - up."""
    waves, strengths = [], []
    for l1 in range(low):
        for l2 in (l1 - 1, l1 + 1):
            if not 0 <= l2 < up:
                continue
            radial = hydrogen_radial_squared(low, l1, up, l2)
            energy = 1 / low**2 - 1 / up**2
            total = 2 / 3 * energy * max(l1, l2) * radial  # gf of nl - n'l'
            for j1 in {abs(l1 - 0.5), l1 + 0.5}:
                for j2 in {abs(l2 - 0.5), l2 + 0.5}:
                    share = multiplet_fraction(0.5, l1, j1, l2, j2)
                    if share > 0:
                        waves.append(1e8 / (level(ion, up, l2, j2) - level(ion, low, l1, j1)))
                        strengths.append(total * share)
    return np.array(waves), np.array(strengths)


def centroid(ion: OneElectronIon, low: int, up: int) -> dict[str, float]:
    """gf-weighted vacuum centroid, rms spread, log gf and level-average wavelength."""
    waves, gf = components(ion, low, up)
    wave = float((gf * waves).sum() / gf.sum())
    return {
        "wave": wave,
        "spread": float(np.sqrt((gf * (waves - wave) ** 2).sum() / gf.sum())),
        "loggf": float(np.log10(gf.sum())),
        "average": 1e8 / (average_level(ion, up) - average_level(ion, low)),
        "e_low": average_level(ion, low) / 8065.543937,
    }


def centroid_error(line: dict[str, float]) -> float:
    """Error of a centroid, Angstrom: saturation moves an unresolved line inside its structure.

    0.18 of the rms spread: half the gap between the two usual positions of H alpha.
    """
    return float(np.hypot(4e-7 * line["wave"], 0.18 * line["spread"]))
