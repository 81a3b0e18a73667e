"""Stark damping of isolated lines by electrons, approximate.

Ions: the simplified modified semi-empirical formula of Dimitrijevic & Konjevic 1987 (A&A 172, 345),
full width in Angstrom 2.2151e-8 lambda(cm)^2 N(cm-3) T^-1/2 (0.9 - 1.1/Z) sum (3n*/2Z)^2
(n*^2 - l^2 - l - 1) over both levels, Z = 2 for single ions; stated good to 30 %.
Neutral atoms: the semi-empirical formula of Griem 1968 (Phys. Rev. 165, 258), half width
8 (pi/3)^1.5 (hbar/m a0) N (E_H/kT)^0.5 sum R^2 g, R^2 = n*^2 (5 n*^2 + 1 - 3 l(l+1))/2 in a0^2, with
a Gaunt factor g of 0.1 set on Na I 5890, Mg I 5184 and Ca I 6162 (Griem 1974; Dimitrijevic &
Sahal-Brechot 1996); good to a factor 3. Both at 10,000 K, formulae from memory. Lines of hydrogen
and helium are broadened otherwise and have none; nor have lines between levels so high or so
hydrogenic that they are not isolated.
"""

from __future__ import annotations

import numpy as np

from electrons import Electron

TEMPERATURE = 1.0e4  # K
LIGHT = 2.99792458e10  # cm/s
NEUTRAL_GAUNT = 0.1
# hbar / (m a0) (cm/s), a0^2 (cm2), E_H / k (K)
ATOMIC_SPEED, BOHR_SQUARED, HARTREE_HALF = 2.18769126e8, 2.8002852e-17, 157887.5
HIGHEST_N, HIGHEST_L = 12.0, 3  # beyond, neighbouring levels overlap
LEAST_SIZE = 0.5


def ion_width(charge: int, n_low: float, l_low: int, n_up: float, l_up: int) -> float:
    """Full width (rad s-1 cm3) of an ion's line; charge 2 for a singly ionised atom. NaN where
    the formula gives no positive sum."""
    size = sum(
        (1.5 * n / charge) ** 2 * (n * n - ell * ell - ell - 1.0)
        for n, ell in ((n_low, l_low), (n_up, l_up))
    )
    if size < LEAST_SIZE:
        return float("nan")
    # The width in Angstrom per lambda(cm)^2 becomes angular frequency: 2 pi c / lambda^2.
    width = 2.2151e-8 / np.sqrt(TEMPERATURE) * (0.9 - 1.1 / charge) * size * 1e-8
    return float(2 * np.pi * LIGHT * width)


def neutral_width(n_low: float, l_low: int, n_up: float, l_up: int) -> float:
    """Full width (rad s-1 cm3) of a neutral atom's line; NaN without a positive sum."""
    size = sum(
        0.5 * n * n * (5.0 * n * n + 1.0 - 3.0 * ell * (ell + 1))
        for n, ell in ((n_low, l_low), (n_up, l_up))
    )
    if size < LEAST_SIZE:
        return float("nan")
    speed = ATOMIC_SPEED * np.sqrt(HARTREE_HALF / TEMPERATURE) * BOHR_SQUARED
    return float(2 * 8 * (np.pi / 3) ** 1.5 * speed * size * NEUTRAL_GAUNT)


def stark_width(electron: Electron | None, stage: int) -> float:
    """log10 of the full width per electron (rad s-1 cm3) at 10,000 K; NaN where not isolated."""
    if electron is None or max(electron.n_low, electron.n_up) > HIGHEST_N:
        return float("nan")
    if max(electron.l_low, electron.l_up) > HIGHEST_L:
        return float("nan")
    place = (electron.n_low, electron.l_low, electron.n_up, electron.l_up)
    width = neutral_width(*place) if stage == 1 else ion_width(stage, *place)
    return float(np.log10(width))
