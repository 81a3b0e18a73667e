"""H I and He II by formula with fine structure, He I from levels.

Usage: python linedata/builders/hydrogen_helium.py SOURCE_DIR [--out FOLDER]
"""

from __future__ import annotations

import numpy as np

from common import ORIGIN_CODE, pack_lines, script_arguments, write_table
from components import of_patterns, pack
from helium import line_pairs
from hydrogenic import HELIUM_II, HYDROGEN, centroid, centroid_error, components

NAMES = ["H I", "He I", "He II"]
KEYS = ["Hydrogenic", "NIST_ASD", "BatesDamgaard1949"]
SHORTEST, LONGEST = 1200.0, 25000.0
COLUMNS = ("wave", "wave_err", "e_low", "loggf", "loggf_err", "spread")
HIGHEST = {"H I": 40, "He II": 30}


def formula_lines(ion) -> list[dict[str, float]]:
    """Lines of a one-electron ion at their gf-weighted centroids."""
    lines = []
    for low in range(1, 10):
        for up in range(low + 1, HIGHEST[ion.name] + 1):
            gross = ion.rydberg * ion.charge**2 * (1 / low**2 - 1 / up**2)
            if not SHORTEST < 1e8 / gross < LONGEST or (ion.name == "H I" and low > 5):
                continue
            line = centroid(ion, low, up)
            del line["average"]
            line["wave_err"] = centroid_error(line)
            line["term_low"], line["term_up"] = f"n={low}|", f"n={up}|"
            lines.append({**line, "loggf_err": 0.01})
    return lines


def patterns(ion, lines: list[dict]):
    """(centroid, component waves, component gf) of the lines between lower shells to 4."""
    for line in lines:
        low, up = (int(line[key][2:-1]) for key in ("term_low", "term_up"))
        if low <= 4 and up <= 20:
            yield line["wave"], *components(ion, low, up)


def main() -> None:
    arguments = script_arguments(__doc__.splitlines()[0])
    groups = [formula_lines(HYDROGEN), line_pairs(arguments.source_dir), formula_lines(HELIUM_II)]
    rows = [row for group in groups for row in group]
    lines = {key: np.array([row[key] for row in rows]) for key in COLUMNS}
    for key in ("term_low", "term_up"):
        lines[key] = np.array([row[key] for row in rows], dtype=object)
    sizes = [len(group) for group in groups]
    lines["species"] = np.repeat(np.arange(3), sizes)
    lines["source"] = np.repeat([0, 1, 0], sizes)
    # He I: the Coulomb approximation beside the published transition probability.
    lines["loggf_alt_shift"] = np.array([row.get("loggf_alt_shift", np.nan) for row in rows])
    lines["source_loggf_alt"] = np.where(np.isfinite(lines["loggf_alt_shift"]), 2, -1)
    lines["origin"] = np.full(len(rows), ORIGIN_CODE["stellar"])
    write_table("hydrogen_helium", pack_lines(lines, NAMES, KEYS), arguments.out)
    kept = [
        (ion.name, of_patterns(patterns(ion, group)))
        for ion, group in ((HYDROGEN, groups[0]), (HELIUM_II, groups[2]))
    ]
    write_table("hydrogen_components", pack(kept), arguments.out)
    print(dict(zip(NAMES, sizes, strict=True)))


if __name__ == "__main__":
    main()
