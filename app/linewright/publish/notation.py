"""Lines named as the trade prints them: 'Fe I 5269.54', '[O III] 5006.84', 'H alpha'."""

from __future__ import annotations

import math

GREEK = "αβγδε"
# Rydberg constant of hydrogen, cm-1: R_inf/(1 + m_e/m_p), CODATA 2018 values (from memory)
RYDBERG_H = 109677.5834
SUBSCRIPTS = str.maketrans("0123456789", "₀₁₂₃₄₅₆₇₈₉")
SERIES = {2: "H", 3: "Pa", 4: "Br"}
TOLERANCE = 1e-4


def hydrogen_name(wave_vac: float) -> str:
    """'Hα', 'H8', 'Paβ', 'Pa11' of a vacuum wavelength (Angstrom); '' for no such line.

    Balmer, Paschen and Brackett series by Rydberg's formula, upper levels to 40.
    """
    for lower, name in SERIES.items():
        energy = 1e8 / wave_vac / RYDBERG_H if wave_vac > 0 else math.nan
        below = 1.0 / lower**2 - energy
        upper = round(1.0 / math.sqrt(below)) if below > 1e-4 else 0
        if lower < upper <= 40:
            ideal = 1e8 / (RYDBERG_H * (1.0 / lower**2 - 1.0 / upper**2))
            if abs(ideal / wave_vac - 1.0) < TOLERANCE:
                step = upper - lower - 1
                return name + (GREEK[step] if step < len(GREEK) else str(upper))
    return ""


def species_text(species: str) -> str:
    """The species for print; molecules with subscripts (H₂O)."""
    is_molecule = " " not in species and not species.endswith("]")
    return species.translate(SUBSCRIPTS) if is_molecule else species


def line_text(species: str, wave_vac: float, wave_own: float, blended: bool = False) -> str:
    """The label of a line; ``wave_own`` is its laboratory wavelength in the figure's medium.

    'bl' marks a blend; a line without a wavelength is named by its species alone.
    """
    name = hydrogen_name(wave_vac) if species == "H I" and math.isfinite(wave_vac) else ""
    if not name:
        name = species_text(species)
        if math.isfinite(wave_own):
            name += f" {wave_own:.2f}"
    return f"{name} bl" if blended else name
