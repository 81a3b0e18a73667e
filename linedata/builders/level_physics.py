"""Partition functions, ionisation energies and solar abundances.

Usage: python linedata/builders/level_physics.py SOURCE_DIR [--out FOLDER]
"""

from __future__ import annotations

import pickle
from functools import lru_cache
from pathlib import Path

import numpy as np
from scipy.interpolate import PchipInterpolator

from common import script_arguments, source_file, write_table
from nist_levels import read_levels
from symbols import ELEMENTS, ROMAN

STAGES = 5
GRID = np.concatenate([np.arange(1000.0, 10000.0, 250.0), np.arange(10000.0, 50001.0, 500.0)])
# Temperatures of Table 8 of Barklem & Collet (2016), K.
BARKLEM_T = np.array(
    [1e-5, 1e-4, 1e-3, 1e-2, 0.1, 0.15, 0.2, 0.3, 0.5, 0.7, 1, 1.3, 1.7, 2, 3, 5, 7, 10, 15, 20,
     30, 50, 70, 100, 130, 170, 200, 250, 300, 500, 700, 1000, 1500, 2000, 3000, 4000, 5000, 6000,
     7000, 8000, 9000, 10000]
)
CM_PER_EV = 8065.543937
K_CM = 0.695034800
CUT_EV = 0.1


def barklem_collet(source: Path) -> dict[str, np.ndarray]:
    """Published partition functions by name ('Fe_I'), on BARKLEM_T."""
    path = source_file(source, "exojax*/exojax/data/atom/barklem_collet_2016_pff.txt")
    rows = (line.split() for line in path.read_text().splitlines() if not line.startswith("#"))
    return {row[0]: np.array(row[1:], float) for row in rows if len(row) == len(BARKLEM_T) + 1}


@lru_cache(maxsize=None)
def ionisation_energies(source: Path) -> np.ndarray:
    """(92, STAGES) energies in eV; NaN where the table has none."""
    path = source_file(source, "exojax*/exojax/data/atom/NIST_Atomic_Ionization_Energies.txt")
    energies = np.full((92, STAGES), np.nan)
    for line in path.read_text(errors="replace").splitlines():
        cells = [cell.strip() for cell in line.split("|")]
        if len(cells) < 5 or not cells[0].isdigit():
            continue
        z, charge = int(cells[0]), int(cells[2].lstrip("+") or 0)
        value = cells[4].strip("()[] ")
        if z <= 92 and charge < STAGES and value:
            energies[z - 1, charge] = float(value)
    return energies


def direct_sum(source: Path, z: int, stage: int, limit_ev: float) -> np.ndarray | None:
    """Sum of (2J+1) exp(-E/kT) over NIST levels below the limit less 0.1 eV, on GRID."""
    levels = read_levels(source, ELEMENTS[z - 1], stage)
    if levels is None:
        return None
    top = (limit_ev - CUT_EV) * CM_PER_EV if np.isfinite(limit_ev) else np.inf
    use = np.isfinite(levels.j) & (levels.energy < top)
    if not use.any():
        return None
    weights = (2 * levels.j + 1)[use]
    return (weights * np.exp(-levels.energy[use] / (K_CM * GRID[:, None]))).sum(axis=1)


def partition(published: np.ndarray | None, summed: np.ndarray | None) -> np.ndarray | None:
    """log10 U on GRID: published to 10,000 K, continued above by the ratio of direct sums."""
    if published is None:
        return None if summed is None else np.log10(summed)
    warm = BARKLEM_T >= 700.0
    smooth = PchipInterpolator(np.log(BARKLEM_T[warm]), np.log10(published[warm]))
    cold = smooth(np.log(np.minimum(GRID, BARKLEM_T[-1])))
    if summed is None:
        return cold
    last = np.log10(published[-1])
    at_last = np.interp(np.log(BARKLEM_T[-1]), np.log(GRID), np.log10(summed))
    return np.where(GRID > BARKLEM_T[-1], last + np.log10(summed) - at_last, cold)


def abundances(source: Path) -> np.ndarray:
    """log10 N/N_H + 12 of Asplund et al. (2009), by atomic number; NaN unknown."""
    path = source_file(source, "lightweaver*/lightweaver/Data/AbundancesAsplund09.pickle")
    with open(path, "rb") as stream:
        stored = pickle.load(stream)
    values = np.full(92, np.nan)
    for entry in stored:
        element, value = entry["elem"]["elem"], entry["elem"]["abundance"]
        if value is not None and element["Z"] <= 92 and value > -5:
            values[element["Z"] - 1] = value
    return values


def main() -> None:
    arguments = script_arguments(__doc__.splitlines()[0])
    source = arguments.source_dir
    published, energies = barklem_collet(source), ionisation_energies(source)
    tables = np.full((92, STAGES, len(GRID)), np.nan)
    origin = np.zeros((92, STAGES), np.int8)
    for z in range(1, 93):
        for stage in range(1, min(STAGES, z + 1) + 1):
            name = f"{ELEMENTS[z - 1]}_{ROMAN[stage - 1]}"
            bare = stage == z + 1
            limit = np.nan if bare else energies[z - 1, stage - 1]
            summed = np.ones(len(GRID)) if bare else direct_sum(source, z, stage, limit)
            values = partition(published.get(name), summed)
            if values is not None:
                tables[z - 1, stage - 1] = values
                origin[z - 1, stage - 1] = 1 if name in published else 2
    columns = {
        "temperature": GRID,
        "log_u": tables.astype("<f4"),
        "log_u_source": origin,
        "ionisation_ev": energies,
        "abundance": abundances(source),
    }
    write_table("level_physics", columns, arguments.out)
    print(f"{np.isfinite(tables[..., 0]).sum()} partition functions")


if __name__ == "__main__":
    main()
