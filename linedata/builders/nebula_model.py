"""Nominal abundances of ions in an H II region, for emission strengths.

emission = log10(100 j / j_Hbeta) at 10,000 K and 3,000 cm-3, solar abundances (Asplund et
al. 2009) less depletion onto dust, ionic fractions by ionisation potential. Inside one ion
the values are as good as the atomic data; between ions to about 0.5 dex.
"""

from __future__ import annotations

import numpy as np

TEMPERATURE, DENSITY = 1.0e4, 3.0e3
# j_Hbeta / (n_e n_p): Storey & Hummer 1995, case B, 10,000 K, erg cm3 s-1 (4 pi included).
HBETA = 1.235e-25
ALPHA_HBETA = 3.03e-14
DEPLETION = {
    "Fe": -1.4, "Ni": -1.4, "Cr": -1.4, "Co": -1.4, "Mn": -1.2, "V": -1.4, "Ti": -2.0,
    "Ca": -2.5, "Si": -0.7, "Mg": -0.7, "Al": -1.2, "K": -0.3,
}
# (creation potential below, destruction potential below, log10 fraction), first that fits.
FRACTIONS = [
    (1.0, 13.6, -2.0), (1.0, 20.0, -1.7), (13.6, 20.0, -0.9), (12.0, 25.0, -1.0),
    (15.0, 36.0, -0.5), (20.0, 60.0, -0.3), (30.0, 60.0, -0.1), (36.0, 99.0, -0.25),
    (41.5, 99.0, -0.8), (48.0, 999.0, -2.5), (60.0, np.inf, -3.5),
]


def log_fraction(z: int, stage: int, energies: np.ndarray) -> float:
    """log10 of the share of an element in one stage."""
    if stage > energies.shape[1]:
        return -5.0
    below = energies[z - 1, stage - 2] if stage > 1 else 0.0
    above = energies[z - 1, stage - 1]
    above = np.inf if np.isnan(above) else above
    for created, destroyed, value in FRACTIONS:
        if below < created and above < destroyed:
            return value
    return -5.0


def log_ion_abundance(element: str, z: int, stage: int, energies, abundances) -> float:
    """log10 N(ion)/N(H)."""
    return (
        abundances[z - 1] - 12.0 + DEPLETION.get(element, 0.0) + log_fraction(z, stage, energies)
    )


def collisional_level(power: float, log_abundance: float) -> float:
    """log10(100 j/j_Hbeta) of a line that emits ``power`` (erg/s) per ion."""
    if power <= 0:
        return -np.inf
    return float(np.log10(100.0 * power / DENSITY / HBETA) + log_abundance)


def recombination_level(alpha: float, wave: float, log_abundance: float) -> float:
    """log10(100 j/j_Hbeta) of a line with effective recombination coefficient alpha."""
    if alpha <= 0:
        return -np.inf
    return float(np.log10(100.0 * alpha / ALPHA_HBETA * 4862.69 / wave) + log_abundance)
