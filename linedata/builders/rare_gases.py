"""Ne I and Ar I lines from their lowest excited levels, and C IV and N V between high shells.

Usage: python linedata/builders/rare_gases.py SOURCE_DIR [--out FOLDER]

Ne I, Ar I: wavelengths and transition probabilities of NIST ASD (read from rascal 0.3.11,
arc_lines/all_nist.csv). The list has J but no levels: a line belongs to the lower level of its J
for which the upper level it implies is reached by a second line from another lower level, or,
for J = 2 - 3, lies among the np levels (only the J = 2 level can be meant). Lower
levels: NIST ASD (Saloman & Sansonetti 2004, J. Phys. Chem. Ref. Data 33, 1113; Saloman 2010,
39, 033101), from memory. C IV, N V: one-electron formula for l >= 3 (polarisation left out: the
wavelengths err by up to 0.5 A).
"""

from __future__ import annotations

from pathlib import Path

import numpy as np

from common import EV_PER_CM, ORIGIN_CODE, pack_lines, script_arguments, source_file, write_table
from coulomb import hydrogen_radial_squared

LOWER = {  # (level in cm-1, J)
    "Ne": ((134041.8400, 2), (134459.2871, 1), (134818.6405, 0), (135888.7173, 1)),
    "Ar": ((93143.7600, 2), (93750.5978, 1), (94553.6652, 0), (95399.8276, 1)),
}
LOWER_TERMS = {"Ne": "2p5.3s|", "Ar": "3p5.4s|"}
# Error in dex of the accuracy classes of NIST transition probabilities.
ACCURACY = {"AAA": 0.002, "AA": 0.005, "A+": 0.01, "A": 0.015, "B+": 0.03, "B": 0.05, "C+": 0.08,
            "C": 0.11, "D+": 0.18, "D": 0.22, "E": 0.4}
GF_FROM_A = 1.499194e-16
SAME_LEVEL = 0.15  # cm-1
P_LEVELS = {"Ne": (148200.0, 153000.0), "Ar": (104000.0, 108800.0)}  # cm-1
RANGE = (3000.0, 12000.0)
KEYS = ["NIST_ASD", "Hydrogenic"]
NAMES = ["Ne I", "Ar I", "C IV", "N V"]
# Limit (cm-1, NIST ASD), net charge squared, Rydberg constant (cm-1).
HIGH_IONS = {"C IV": (520175.8, 16.0, 109732.3), "N V": (789537.2, 25.0, 109733.0)}
SHELLS = {"C IV": ((5, 6), (6, 7), (6, 8), (7, 9), (7, 10)), "N V": ((6, 7), (7, 8), (7, 9), (8, 11))}


def read_probabilities(source: Path, element: str) -> list[dict]:
    """Lines of a neutral atom with a transition probability and both J."""
    path = source_file(source, "rascal*/rascal/arc_lines/all_nist.csv")
    lines = []
    for text in path.read_text(errors="replace").splitlines():
        cells = text.split(",")
        if cells[:2] == [element, "1"] and len(cells) > 8 and all(cells[k] for k in (5, 7, 8)):
            lines.append({
                "wave": float(cells[2]), "error": float(cells[3] or 0.01), "a": float(cells[5]),
                "class": cells[6].strip(), "j_low": float(cells[7]), "j_up": float(cells[8]),
            })
    return [line for line in lines if RANGE[0] < line["wave"] < RANGE[1]]


def _implied(line: dict, element: str) -> list[tuple[float, float]]:
    """(lower level, implied upper level) for every lower level of the line's J."""
    return [(e, e + 1e8 / line["wave"]) for e, j in LOWER[element] if j == line["j_low"]]


def neutral_lines(source: Path, element: str) -> list[dict]:
    """Lines of Ne I or Ar I whose lower level is one of the four lowest excited ones."""
    listed = read_probabilities(source, element)
    pairs = [(k, *pair) for k, line in enumerate(listed) for pair in _implied(line, element)]
    rows = []
    for k, low, up in pairs:
        line = listed[k]
        partners = [
            other for m, other, top in pairs
            if other != low and abs(top - up) < SAME_LEVEL and listed[m]["j_up"] == line["j_up"]
        ]
        lone = (line["j_low"], line["j_up"]) == (2, 3)
        if not partners and not (lone and P_LEVELS[element][0] < up < P_LEVELS[element][1]):
            continue
        gf = GF_FROM_A * (2 * line["j_up"] + 1) * line["a"] * line["wave"] ** 2
        rows.append({
            "wave": line["wave"], "wave_err": float(np.hypot(line["error"], 4e-7 * line["wave"])),
            "e_low": low * EV_PER_CM, "j_low": line["j_low"], "j_up": line["j_up"],
            "loggf": float(np.log10(gf)), "loggf_err": ACCURACY.get(line["class"], 0.3),
            "spread": 0.0, "term_low": LOWER_TERMS[element], "term_up": "", "source": 0,
        })
    return rows


def shell_lines(name: str) -> list[dict]:
    """Lines between high shells of C IV or N V, all l >= 3 together."""
    limit, charge, rydberg = HIGH_IONS[name]
    rows = []
    for n1, n2 in SHELLS[name]:
        energy = 1 / n1**2 - 1 / n2**2
        wave = 1e8 / (rydberg * charge * energy)
        gf = sum(
            2 / 3 * energy * max(l1, l2) * hydrogen_radial_squared(n1, l1, n2, l2)
            for l1 in range(3, n1) for l2 in (l1 - 1, l1 + 1) if 3 <= l2 < n2
        )
        if RANGE[0] < wave < RANGE[1]:
            rows.append({
                "wave": wave, "wave_err": 0.5, "e_low": (limit - rydberg * charge / n1**2) * EV_PER_CM,
                "j_low": np.nan, "j_up": np.nan, "loggf": float(np.log10(gf)), "loggf_err": 0.1,
                "spread": 0.2, "term_low": f"n={n1}|", "term_up": f"n={n2}|", "source": 1,
            })
    return rows


def main() -> None:
    arguments = script_arguments(__doc__.splitlines()[0])
    groups = [neutral_lines(arguments.source_dir, element) for element in LOWER]
    groups += [shell_lines(name) for name in HIGH_IONS]
    rows = [row | {"species": code} for code, group in enumerate(groups) for row in group]
    lines = {key: np.array([row[key] for row in rows]) for key in rows[0] if "term" not in key}
    for key in ("term_low", "term_up"):
        lines[key] = np.array([row[key] for row in rows], dtype=object)
    lines["origin"] = np.full(len(rows), ORIGIN_CODE["stellar"])
    write_table("rare_gases", pack_lines(lines, NAMES, KEYS), arguments.out)
    print(dict(zip(NAMES, map(len, groups), strict=True)))


if __name__ == "__main__":
    main()
