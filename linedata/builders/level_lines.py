"""Lines of ions the general list lacks (N I, O I, Mg II, Si II-IV, C II-IV, ...), from levels.

Usage: python linedata/builders/level_lines.py SOURCE_DIR [--out FOLDER]
Needs tables/atomic_lines.npz, so that no line is entered twice.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np

from common import (
    EV_PER_CM, ORIGIN_CODE, TABLES, air_to_vacuum, pack_lines, script_arguments, write_table,
)
from electrons import Electron
from linewright.lines.loading import read_table
from level_pairs import permitted_lines
from level_physics import ionisation_energies
from nist_levels import read_levels
from published_strengths import FORBIDDEN, PUBLISHED, SOURCES
from stark import stark_width
from symbols import ELEMENTS, ROMAN

IONS = [
    ("Li", 1), ("C", 2), ("C", 3), ("C", 4), ("N", 1), ("N", 2), ("N", 3), ("N", 4), ("N", 5), ("O", 1),
    ("O", 2), ("O", 3), ("O", 4), ("O", 5), ("Ne", 2), ("Mg", 2), ("Al", 2), ("Al", 3),
    ("Si", 2), ("Si", 3), ("Si", 4), ("P", 2), ("P", 3), ("S", 2), ("S", 3), ("Cl", 2),
    ("Ar", 2), ("Ar", 3), ("Ca", 3), ("Ti", 3), ("Cr", 3), ("Mn", 3), ("Fe", 3), ("Ni", 3),
]
LEAST_LOGGF = -2.5
# Published scatter of level-derived wavelengths (Angstrom at 5000 A) where the levels are poor.
POOR_LEVELS = {("S", 3): 0.1, ("N", 3): 0.006, ("Fe", 3): 0.010, ("C", 4): 0.012}
# Scatter of the Coulomb approximation against published log gf, dex.
STRENGTH_ERROR = {("S", 2): 0.25, ("Fe", 3): 0.3, ("Ne", 2): 0.25, ("O", 2): 0.15, ("P", 2): 0.16}
KEYS = ["NIST_ASD", "Ekberg1993", "YanDrake1995", "Wiese1996"]
SAME_WAVE, SAME_ENERGY = 0.03, 0.01  # Angstrom at 5000 A, eV


def find_pair(levels, air: float, e_low: float, change_parity: bool) -> tuple | None:
    """(lower row, upper row, vacuum Ritz wavelength) nearest an air wavelength and E_low (eV)."""
    vacuum = float(air_to_vacuum(air))
    best = None
    for low in np.flatnonzero(np.abs(levels.energy * EV_PER_CM - e_low) < 0.01):
        gap = 1e8 / np.maximum(levels.energy - levels.energy[low], 1.0)
        for up in np.flatnonzero(np.abs(gap - vacuum) < 0.15):
            step = abs(levels.j[up] - levels.j[low])
            if (levels.odd[up] != levels.odd[low]) == change_parity and step <= 2 - change_parity:
                miss = abs(gap[up] - vacuum)
                if best is None or miss < best[0]:
                    best = (miss, low, up, float(gap[up]))
    return best[1:] if best else None


def ritz_of_published(source: Path, ion: tuple[str, int], forbidden: bool = False) -> list[dict]:
    """Lines with a published strength, their Ritz wavelengths found among the levels."""
    levels = read_levels(source, *ion)
    lines = []
    for air, e_low, *strength in (FORBIDDEN if forbidden else PUBLISHED).get(ion, ()):
        pair = find_pair(levels, air, e_low, not forbidden)
        if pair is None:
            raise ValueError(f"{ion}: no levels for {air}")
        low, up, wave = pair
        loggf = strength[0]
        if forbidden:
            loggf = float(np.log10(1.4992e-16 * strength[0] * strength[1] * wave**2))
        lines.append({
            "wave": wave, "wave_err": float(np.hypot(0.002, 4e-7 * wave)),
            "e_low": levels.energy[low] * EV_PER_CM, "j_low": levels.j[low],
            "j_up": levels.j[up], "term_low": levels.label(low), "term_up": levels.label(up),
            "loggf": loggf, "loggf_err": 0.1 if forbidden else 0.2,
            "key": "Wiese1996" if forbidden else SOURCES.get(ion, "NIST_ASD"),
        })
    return lines


def _listed(name: str, table) -> tuple[np.ndarray, np.ndarray]:
    names = [str(n) for n in table["species_names"]]
    mine = table["species"] == names.index(name) if name in names else np.zeros(0, bool)
    return (table["wave"][mine], table["e_low"][mine]) if name in names else (mine, mine)


def _is_new(line: dict, waves: np.ndarray, energies: np.ndarray) -> bool:
    reach = SAME_WAVE * line["wave"] / 5000.0
    first, last = np.searchsorted(waves, [line["wave"] - reach, line["wave"] + reach])
    return not np.any(np.abs(energies[first:last] - line["e_low"]) < SAME_ENERGY)


def ion_lines(source: Path, element: str, stage: int, energies: np.ndarray) -> list[dict]:
    """Lines of one ion stronger than LEAST_LOGGF, errors set."""
    z = ELEMENTS.index(element)
    lines = [
        line | {"loggf_err": STRENGTH_ERROR.get((element, stage), 0.12)}
        for line in permitted_lines(source, element, stage, energies[z, stage - 1])
        if line["loggf"] > LEAST_LOGGF
    ]
    published = ritz_of_published(source, (element, stage))
    taken = np.array([line["wave"] for line in published])
    lines = [line for line in lines if not np.any(np.abs(taken - line["wave"]) < 0.003)]
    for line in lines:
        low, up = line["low"], line["up"]
        line["gamma_stark"] = stark_width(Electron(low.ell, up.ell, low.n_eff, up.n_eff), stage)
    lines += published
    poor = POOR_LEVELS.get((element, stage), 0.0)
    for line in lines:
        line["wave_err"] = float(np.hypot(line["wave_err"], poor * (line["wave"] / 5000.0)))
    return lines


def main() -> None:
    arguments = script_arguments(__doc__.splitlines()[0])
    source = arguments.source_dir
    energies = ionisation_energies(source)
    rows, names = [], []
    listed = read_table(arguments.out or TABLES, "atomic_lines")
    for element, stage in IONS:
        name = f"{element} {ROMAN[stage - 1]}"
        waves, lows = _listed(name, listed)
        found = [
            line for line in ion_lines(source, element, stage, energies)
            if _is_new(line, waves, lows)
        ]
        for line in found:
            line["species"] = len(names)
        rows += found
        names.append(name)
        print(name, len(found))
    for ion in FORBIDDEN:
        found = ritz_of_published(source, ion, forbidden=True)
        rows += [line | {"species": len(names)} for line in found]
        names.append(f"[{ion[0]} {ROMAN[ion[1] - 1]}]")
    columns = ("wave", "wave_err", "e_low", "j_low", "j_up", "loggf", "loggf_err", "species")
    lines = {key: np.array([row[key] for row in rows]) for key in columns}
    for key in ("term_low", "term_up"):
        lines[key] = np.array([row.get(key, "") for row in rows], dtype=object)
    lines["gamma_stark"] = np.array([row.get("gamma_stark", np.nan) for row in rows])
    lines["nominal"] = np.array([row.get("nominal", False) for row in rows])
    lines["origin"] = np.full(len(rows), ORIGIN_CODE["stellar"])
    lines["source"] = np.array([KEYS.index(row.get("key", "NIST_ASD")) for row in rows])
    write_table("level_lines", pack_lines(lines, names, KEYS), arguments.out)
    print(len(rows), "lines")


if __name__ == "__main__":
    main()
