"""Collisionally excited lines: statistical equilibrium of the low levels of an ion.

A values (s-1) and effective collision strengths are the published ones carried in the text
files of pyneb 1.1.32 (each file names its paper); the solver is our own.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import numpy as np

from common import source_file
from nist_levels import Levels, read_levels
from ritz import sort_levels

COLLISION_RATE = 8.629e-6  # cm3 s-1 K^0.5: q_ul = this Upsilon / (g_u sqrt T)
K_CM = 0.695034800
HC = 1.98644586e-16  # erg cm


@dataclass(frozen=True)
class Emission:
    """One line: vacuum wavelength and error (Angstrom), levels, A (s-1), power per ion (erg/s),
    terms ('configuration|term')."""

    wave: float
    wave_err: float
    e_low: float
    j_low: float
    j_up: float
    a_value: float
    power: float
    term_low: str = ""
    term_up: str = ""


def read_probabilities(path: Path) -> np.ndarray:
    """Square matrix A[upper, lower] of an atom file."""
    rows = []
    for line in path.read_text(errors="replace").splitlines():
        cells = line.split()
        if not cells or line.startswith("*"):
            continue
        try:
            rows.append([float(cell) for cell in cells])
        except ValueError:
            continue
    size = max(len(rows), max(len(row) for row in rows))
    matrix = np.zeros((size, size))
    for k, row in enumerate(rows):
        matrix[k, : len(row)] = row
    return matrix


def read_collisions(path: Path, temperature: float, size: int) -> np.ndarray:
    """Symmetric matrix of effective collision strengths at one temperature."""
    matrix = np.zeros((size, size))
    grid = None
    for line in path.read_text(errors="replace").splitlines():
        cells = line.split()
        if line.startswith("*") or len(cells) < 3:
            continue
        try:
            i, k, values = int(cells[0]), int(cells[1]), np.array(cells[2:], float)
        except ValueError:
            continue
        if i == 0 and k == 0:
            grid = values if values.max() > 30 else 10.0**values
        elif grid is not None and 0 < max(i, k) <= size and len(values) >= len(grid):
            value = np.interp(np.log(temperature), np.log(grid), values[: len(grid)])
            matrix[i - 1, k - 1] = matrix[k - 1, i - 1] = value
    return matrix


def populations(energy, weight, a_values, upsilon, temperature, density) -> np.ndarray:
    """Fractions of the ions in each level (energies cm-1, density cm-3)."""
    n = len(energy)
    rates = np.zeros((n, n))
    for up in range(n):
        for low in range(up):
            down = density * COLLISION_RATE * upsilon[up, low] / np.sqrt(temperature)
            rates[up, low] = a_values[up, low] + down / weight[up]
            boltzmann = np.exp(-(energy[up] - energy[low]) / (K_CM * temperature))
            rates[low, up] = down / weight[low] * boltzmann
    matrix = rates.T - np.diag(rates.sum(axis=1))
    matrix[0] = 1.0
    solution = np.linalg.lstsq(matrix, np.eye(n)[0], rcond=None)[0]
    return np.clip(solution, 0.0, None)


def _emissions(levels: Levels, a_values, upsilon, temperature, density) -> list[Emission]:
    n = min(len(a_values), len(levels))
    weight = 2 * np.nan_to_num(levels.j[:n], nan=0.5) + 1
    solved = populations(
        levels.energy[:n], weight, a_values[:n, :n], upsilon[:n, :n], temperature, density
    )
    lines = []
    for up in range(n):
        for low in range(up):
            gap = levels.energy[up] - levels.energy[low]
            if a_values[up, low] <= 0 or not 4000 < gap < 83334:
                continue
            if levels.odd[up] != levels.odd[low]:
                continue
            wave = 1e8 / gap
            error = wave**2 * 1e-8 * np.hypot(levels.error[up], levels.error[low])
            lines.append(Emission(
                wave, float(np.hypot(error, 4e-7 * wave)), levels.energy[low] / 8065.543937,
                levels.j[low], levels.j[up], a_values[up, low],
                solved[up] * a_values[up, low] * HC * gap, levels.label(low), levels.label(up),
            ))
    return lines


def published_ion(source: Path, ion: tuple[str, int], files, conditions) -> list[Emission]:
    """Lines of an ion with published atomic data; files: (atom file, collision file)."""
    levels = sort_levels(read_levels(source, *ion))
    folder = "pyneb*/pyneb/atomic_data/"
    a_values = read_probabilities(source_file(source, folder + files[0]))
    size = min(len(a_values), len(levels))
    upsilon = read_collisions(source_file(source, folder + files[1]), conditions[0], size)
    return _emissions(levels, a_values[:size, :size], upsilon, *conditions)


def nominal_ion(source: Path, ion: tuple[str, int], top: float, conditions) -> list[Emission]:
    """Forbidden lines of an ion without published data here: nominal A and collision strength.

    All pairs of the ground level's parity below ``top`` (cm-1), |Delta J| <= 2; A scales with
    the cube of the wavenumber from 0.1 s-1 at 7000 A, less for Delta S or Delta J = 2;
    Upsilon = 0.15 sqrt(g g'). Good to about 1 dex.
    """
    levels = sort_levels(read_levels(source, *ion))
    keep = (levels.energy < top) & (levels.odd == levels.odd[0]) & np.isfinite(levels.j)
    levels = Levels(*(getattr(levels, name)[keep] for name in Levels.__dataclass_fields__))
    n = len(levels)
    spin = np.array([int("".join(ch for ch in t.split()[-1] if ch.isdigit())[:1] or 1)
                     if t else 1 for t in levels.term])
    gap = levels.energy[:, None] - levels.energy[None, :]
    a_values = 0.1 * np.clip(gap / 14286.0, 0.0, None) ** 3
    a_values *= np.where(spin[:, None] == spin[None, :], 1.0, 0.2)
    step = np.abs(levels.j[:, None] - levels.j[None, :])
    a_values *= np.select([step <= 1, step <= 2], [1.0, 0.3], 0.0)
    weight = 2 * levels.j + 1
    upsilon = 0.15 * np.sqrt(weight[:, None] * weight[None, :])
    assert n > 1
    return _emissions(levels, a_values, upsilon, *conditions)
