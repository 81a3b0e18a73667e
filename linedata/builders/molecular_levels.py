"""Rotational levels of the ground states of O2 and H2O: lower energies of telluric lines.

O2: triplet levels by the closed formulae of Schlapp 1937 (Phys. Rev. 51, 342) with constants of
Rouille et al. 1992 (J. Mol. Spectrosc. 154, 372), from memory; only odd N in 16O2.
H2O: Watson's A-reduced Hamiltonian in the representation I^r. Its constants were fitted to 49 levels
of Tennyson et al. 2001 (J. Phys. Chem. Ref. Data 30, 735), recalled from memory, to J = 8; they give
all of them back within 0.05 cm-1.
"""

from __future__ import annotations

import numpy as np

# cm-1: rotation, centrifugal distortion, spin-spin and spin-rotation coupling of O2
O2_B, O2_D, O2_LAMBDA, O2_GAMMA = 1.437677, 4.8422e-6, 1.984751, -0.0084254
WATER = {
    "A": 27.8805664, "B": 14.5215625, "C": 9.27781957, "DJ": 1.25281087e-3, "DJK": -5.76157923e-3,
    "DK": 3.24511420e-2, "dJ": 5.07785127e-4, "dK": 1.28849861e-3, "HJ": 5.14473521e-7,
    "HJK": -1.60166773e-6, "HKJ": -1.61068504e-5, "HK": 1.22886803e-4, "hJ": 2.55236940e-7,
    "hJK": -3.59932981e-7, "hK": 2.34836536e-5, "LK": -4.52779911e-7,
}


def _oxygen_term(n: int, j: int) -> float:
    """Energy (cm-1) of the level N, J of 16O2 above the rotationless, unsplit state."""
    middle = O2_B * n * (n + 1) - O2_D * (n * (n + 1)) ** 2
    if j == n:
        return middle
    sign, m = (1.0, 2 * n + 3) if j > n else (-1.0, 2 * n - 1)
    root = np.sqrt(m**2 * O2_B**2 + O2_LAMBDA**2 - 2 * O2_LAMBDA * O2_B)
    if (n, j) == (1, 0):
        root = O2_B - O2_LAMBDA  # no partner of N = -1: the other sign of the root
    spin = O2_GAMMA * (n + 1) if j > n else -O2_GAMMA * n
    return float(middle + sign * (m * O2_B - root) - O2_LAMBDA + spin)


def oxygen_state(n: int, j: int) -> float:
    """Energy (cm-1) of the level N, J (N odd, |J - N| <= 1) above the lowest one."""
    return _oxygen_term(n, j) - _oxygen_term(1, 0)


def oxygen_levels(highest: int = 47) -> np.ndarray:
    """Rows (J, spin weight 1, energy in cm-1 above the lowest level) of 16O2."""
    return np.array([
        (j, 1, oxygen_state(n, j)) for n in range(1, highest + 1, 2) for j in (n + 1, n - 1, n)
    ])


def water_matrix(j: int) -> np.ndarray:
    """Watson's Hamiltonian (A reduction, I^r) over K = -J ... J, cm-1."""
    if j == 0:
        return np.zeros((1, 1))
    w, k, jj = WATER, np.arange(-j, j + 1), j * (j + 1)
    diagonal = 0.5 * (w["B"] + w["C"]) * (jj - k**2) + w["A"] * k**2
    diagonal -= w["DJ"] * jj**2 + w["DJK"] * jj * k**2 + w["DK"] * k**4
    diagonal += w["HJ"] * jj**3 + w["HJK"] * jj**2 * k**2 + w["HKJ"] * jj * k**4
    matrix = np.diag(diagonal + w["HK"] * k**6 + w["LK"] * k**8)
    a, b = k[:-2], k[:-2] + 2
    value = 0.25 * (w["B"] - w["C"]) - w["dJ"] * jj - 0.5 * w["dK"] * (a**2 + b**2)
    value += w["hJ"] * jj**2 + 0.5 * w["hJK"] * jj * (a**2 + b**2) + 0.5 * w["hK"] * (a**4 + b**4)
    value *= np.sqrt((jj - a * (a + 1)) * (jj - (a + 1) * (a + 2)))
    return matrix + np.diag(value, 2) + np.diag(value, -2)


def water_levels(highest: int = 12) -> np.ndarray:
    """Rows (J, spin weight 1 or 3, energy in cm-1) of H2O."""
    rows = []
    for j in range(highest + 1):
        for place, energy in enumerate(np.linalg.eigvalsh(water_matrix(j))):
            # Levels rise in the order of Ka, then of Kc falling.
            odd = ((place + 1) // 2 + j - place // 2) % 2
            rows.append((j, 3 if odd else 1, energy))
    return np.array(rows)

