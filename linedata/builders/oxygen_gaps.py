"""Lines of O2 that the carried HITRAN subset lacks, from the other lines of their upper levels.

In the b-X bands two branches rise to each upper level N' = J' = N'' + 1: from J'' = N'' + 1 and from
J'' = N''. Where the list has only one of them, the other lies above it by the splitting of the lower
level; its A is interpolated along its branch. The gamma band (6277 A) lacks two such lines, in its
head, J'' = 16 and 18.
"""

from __future__ import annotations

import numpy as np

from lower_energies import REFERENCE, SECOND_RADIATION, Molecule, populations
from molecular_levels import oxygen_state

BANDS = ((6270.0, 6340.0), (6860.0, 6970.0), (7590.0, 7700.0))  # vacuum Angstrom
HIGHEST = 45
SAME = 0.12  # cm-1


def branch(wave, intensity, probability, molecule: Molecule, step: int) -> dict[int, int]:
    """N'' -> row of the lines N', J' = N'' + 1 from J'' = N'' + step (0 or 1)."""
    seen = populations(1e8 / wave, intensity, probability, molecule)
    found = {}
    for n in range(1, HIGHEST + 1, 2):
        implied = -REFERENCE / SECOND_RADIATION * np.log(seen / (2 * n + 3))
        miss = np.abs(implied - oxygen_state(n, n + step))
        if miss.min() < SAME:
            found[n] = int(np.argmin(miss))
    return found


def missing_lines(wave, intensity, probability, molecule: Molecule) -> np.ndarray:
    """Rows (vacuum wavelength, intensity at 296 K, A) of the lines inside a branch that are absent."""
    rows = []
    for low, high in BANDS:
        inside = (wave > low) & (wave < high) & (probability > 0)
        band = [values[inside] for values in (wave, intensity, probability)]
        upper, lower = (branch(*band, molecule, step) for step in (1, 0))
        known = sorted(upper)
        for n in sorted(set(lower) - set(upper)):
            if known[0] < n < known[-1]:
                a_value = np.interp(n, known, [band[2][upper[k]] for k in known])
                rows.append(_line(n, band[0][lower[n]], a_value, molecule))
    return np.array(rows).reshape(-1, 3)


def _line(n: int, partner: float, a_value: float, molecule: Molecule) -> tuple[float, float, float]:
    """The line from J'' = N'' + 1 to the upper level of the partner from J'' = N''."""
    energy = oxygen_state(n, n + 1)
    wavenumber = 1e8 / partner + oxygen_state(n, n) - energy
    per_intensity = populations(wavenumber, 1.0, a_value, molecule)
    weight = (2 * n + 3) * np.exp(-SECOND_RADIATION * energy / REFERENCE)
    return 1e8 / wavenumber, float(weight / per_intensity), float(a_value)
