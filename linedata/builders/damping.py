"""Van der Waals damping of neutral atoms by hydrogen; Stark damping comes from stark.py.

Cross sections of Anstee & O'Mara 1995 (MNRAS 276, 859), Barklem & O'Mara 1997 (290, 102) and
Barklem, O'Mara & Ross 1998 (296, 1057), tables as carried by lightweaver 0.17.0, by effective
quantum numbers of the jumping electron; one electron outside the lowest term of its core.
"""

from __future__ import annotations

from functools import lru_cache
from math import gamma
from pathlib import Path

import numpy as np

from common import source_file
from electrons import Electron, jumping_electron
from level_gaps import ORBITALS
from stark import stark_width
from symbols import ELEMENTS

# lower and higher l: (file, first effective quantum number of either)
TABLES = {"sp": ("sp", 1.0, 1.3), "pd": ("pd", 1.3, 2.3), "df": ("df", 2.3, 3.3)}
STEP = 0.1
BOHR_SQUARED = 2.8002852e-17  # cm2
SPEED = 1.0e6  # cm/s, speed the cross sections are given for
TEMPERATURE = 1.0e4  # K
BOLTZMANN, MASS_UNIT, HYDROGEN = 1.380649e-16, 1.66053907e-24, 1.008


@lru_cache(maxsize=None)
def table(source: Path, kind: str) -> tuple[np.ndarray, np.ndarray]:
    """(cross sections in atomic units, velocity exponents) over effective quantum numbers."""
    name = f"lightweaver*/lightweaver/Data/Barklem_{TABLES[kind][0]}data.dat"
    data = np.genfromtxt(source_file(source, name), comments="c")
    half = len(data) // 2
    return data[:half], data[half:]


def _interpolate(grid: np.ndarray, row: float, column: float) -> float:
    """Bilinear; NaN outside."""
    if not (0 <= row <= grid.shape[0] - 1 and 0 <= column <= grid.shape[1] - 1):
        return float("nan")
    i, j = min(int(row), grid.shape[0] - 2), min(int(column), grid.shape[1] - 2)
    u, v = row - i, column - j
    return float(
        (1 - u) * (1 - v) * grid[i, j] + u * (1 - v) * grid[i + 1, j]
        + (1 - u) * v * grid[i, j + 1] + u * v * grid[i + 1, j + 1]
    )


def log_gamma(source: Path, kind: str, low: float, high: float, mass: float) -> float:
    """log10 of the full width at half maximum per hydrogen atom, rad s-1 cm3, at 10,000 K.

    kind: 'sp', 'pd' or 'df'; low, high: effective quantum numbers of the electron with the
    lower and the higher l; mass of the atom, u. NaN outside the tables.
    """
    cross, exponent = table(source, kind)
    place = ((low - TABLES[kind][1]) / STEP, (high - TABLES[kind][2]) / STEP)
    sigma, alpha = _interpolate(cross, *place), _interpolate(exponent, *place)
    if not np.isfinite(sigma):
        return float("nan")
    reduced = MASS_UNIT / (1.0 / HYDROGEN + 1.0 / mass)
    mean = np.sqrt(8 * BOLTZMANN * TEMPERATURE / (np.pi * reduced))
    width = (4 / np.pi) ** (alpha / 2) * gamma((4 - alpha) / 2) * SPEED * sigma * BOHR_SQUARED
    return float(np.log10(2 * width * (mean / SPEED) ** (1 - alpha)))


def van_der_waals(source: Path, ion: tuple[str, int], electron: Electron | None) -> float:
    """log10 gamma per hydrogen atom at 10,000 K of a line; NaN where the theory is silent.

    Neutral atoms only.
    """
    if ion[1] != 1 or electron is None:
        return float("nan")
    # The mass enters through the reduced mass with hydrogen only: 2.15 Z is good to 0.2 %.
    mass = 2.15 * (ELEMENTS.index(ion[0]) + 1)
    ends = sorted(((electron.l_low, electron.n_low), (electron.l_up, electron.n_up)))
    kind = ORBITALS[ends[0][0]] + ORBITALS[ends[1][0]]
    return log_gamma(source, kind, ends[0][1], ends[1][1], mass) if kind in TABLES else float("nan")


def collisional_widths(source: Path, ion: tuple[str, int], levels, matches) -> dict[str, np.ndarray]:
    """gamma_waals and gamma_stark (log10, 10,000 K) of lines with a level pair, else NaN."""
    n = len(matches.low)
    widths = {"gamma_waals": np.full(n, np.nan), "gamma_stark": np.full(n, np.nan)}
    for k in np.flatnonzero(matches.low >= 0):
        low, up = int(matches.low[k]), int(matches.up[k])
        electron = jumping_electron(source, ion, levels, low, up)
        widths["gamma_waals"][k] = van_der_waals(source, ion, electron)
        widths["gamma_stark"][k] = stark_width(electron, ion[1])
    return widths
