"""Lines of metals that the general list lacks although both levels are known.

Usage: python linedata/builders/level_gaps.py SOURCE_DIR [--out FOLDER]
Needs atomic_lines.npz and level_lines.npz, so that no line is entered twice.


All pairs of levels that one electron's jump joins (dipole rules on parity, J, and, where both
levels have a term, S and L). The strength is the Coulomb approximation where the core stays as
it is (level_pairs.py); elsewhere it is nominal: the 70th percentile of log gf of the listed lines of the
same ion and kind of jump, grade E, good to about 1 dex.
"""

from __future__ import annotations

import re
from functools import lru_cache
from pathlib import Path

import numpy as np

from common import EV_PER_CM, ORIGIN_CODE, TABLES, pack_lines, script_arguments, write_table
from linewright.lines.loading import read_table
from level_pairs import TERM_LETTERS, permitted_lines
from level_physics import ionisation_energies
from nist_levels import Levels, read_levels
from ritz import match_lines, sort_levels
from symbols import ELEMENTS, ROMAN

GAP_IONS = [("Ni", 1), ("Ti", 1), ("Y", 1), ("Ca", 2), ("K", 1)]
KEYS = ["NIST_ASD"]
SAME_WAVE, SAME_ENERGY = 0.06, 0.008  # Angstrom at 5000 A, eV
RANGE = (3000.0, 12000.0)  # Angstrom, vacuum
HIGHEST_LOW = {("Y", 1): 0.3, ("Ca", 2): 9.0}  # eV; others 4.7
LEAST_NOMINAL = -1.7
NOMINAL_ERROR = 1.0  # dex
ORBITALS = "spdfgh"


def occupation(configuration: str) -> dict[str, int]:
    """Electrons per orbital of '3d5.(4G).4s' ({'3d': 5, '4s': 1}); empty where unreadable."""
    found: dict[str, int] = {}
    bare = re.sub(r"\(.*?\)|<.*?>", "", configuration)
    for part in re.findall(r"[^.\s]+", bare):
        match = re.fullmatch(r"(\d+[spdfgh])(\d*)", part)
        if not match:
            return {}
        found[match[1]] = found.get(match[1], 0) + int(match[2] or 1)
    return found


@lru_cache(maxsize=None)
def jump(low: str, up: str) -> str:
    """'4p-5s' where one electron moves with Delta l = 1 between two configurations, else ''."""
    first, second = occupation(low), occupation(up)
    if not first or not second:
        return ""
    change = {o: second.get(o, 0) - first.get(o, 0) for o in {*first, *second}}
    gone = [o for o, step in change.items() if step == -1]
    come = [o for o, step in change.items() if step == 1]
    if len(gone) != 1 or len(come) != 1 or sum(map(abs, change.values())) != 2:
        return ""
    step = ORBITALS.index(come[0][-1]) - ORBITALS.index(gone[0][-1])
    return f"{gone[0]}-{come[0]}" if abs(step) == 1 else ""


def spin_and_orbit(term: str) -> tuple[int, int] | None:
    """(2S+1, L) of an LS term; None for other coupling."""
    match = re.search(r"(\d+)([A-Z])\d*\*?$", term.strip())
    if "[" in term or not match or match[2] not in TERM_LETTERS:
        return None
    return int(match[1]), TERM_LETTERS.index(match[2])


def allowed(levels: Levels, low: int, up: int) -> str:
    """The jump of a permitted pair, '' where a rule forbids it."""
    j1, j2 = levels.j[low], levels.j[up]
    if levels.odd[low] == levels.odd[up] or not abs(j1 - j2) <= 1 or j1 + j2 == 0:
        return ""
    a, b = spin_and_orbit(levels.term[low]), spin_and_orbit(levels.term[up])
    if a and b and (a[0] != b[0] or abs(a[1] - b[1]) > 1 or a[1] + b[1] == 0):
        return ""
    return jump(levels.configuration[low], levels.configuration[up])


def typical_strengths(levels: Levels, matches, loggf: np.ndarray) -> dict[str, float]:
    """Upper-third log gf of the listed lines by jump, at least five lines each."""
    found: dict[str, list[float]] = {}
    for k in np.flatnonzero(matches.low >= 0):
        kind = allowed(levels, matches.low[k], matches.up[k])
        if kind:
            found.setdefault(kind, []).append(float(loggf[k]))
    return {kind: float(np.percentile(v, 70)) for kind, v in found.items() if len(v) >= 5}


def _computed(source: Path, ion: tuple[str, int], limit_ev: float) -> dict[tuple, float]:
    """log gf of lines with an unchanged core by (lower, upper energy in cm-1, rounded)."""
    table = {}
    for line in permitted_lines(source, *ion, limit_ev):
        key = (round(line["low"].energy, 2), round(line["up"].energy, 2))
        table[key] = line["loggf"]
    return table


def gap_lines(source: Path, ion: tuple[str, int], known_lines: dict, limit_ev: float):
    """Missing lines of one ion as rows: vacuum wavelength, error, E_low, J, terms, log gf.

    known_lines: wave, e_low, loggf of the lines already in the catalogue.
    """
    levels = sort_levels(read_levels(source, *ion))
    matches = match_lines(levels, known_lines["wave"], known_lines["e_low"])
    typical = typical_strengths(levels, matches, known_lines["loggf"])
    computed = _computed(source, ion, limit_ev)
    taken = {(a, b) for a, b in zip(matches.low, matches.up, strict=True) if a >= 0}
    lines = []
    for low in np.flatnonzero(levels.energy * EV_PER_CM < HIGHEST_LOW.get(ion, 4.7)):
        gap = levels.energy - levels.energy[low]
        ups = np.flatnonzero((gap > 1e8 / RANGE[1]) & (gap < 1e8 / RANGE[0]))
        for up in ups:
            kind = (int(low), int(up)) not in taken and allowed(levels, low, up)
            if not kind:
                continue
            key = (round(levels.energy[low], 2), round(levels.energy[up], 2))
            known = computed.get(key)
            if known is not None and known < LEAST_NOMINAL:
                known = None  # cancellation: the approximation says nothing
            loggf = typical.get(kind, -9.0) if known is None else known
            if loggf < LEAST_NOMINAL:
                continue
            wave = 1e8 / gap[up]
            error = wave**2 * 1e-8 * np.hypot(levels.error[low], levels.error[up])
            lines.append({
                "wave": wave, "wave_err": float(np.hypot(error, 4e-7 * wave)),
                "e_low": levels.energy[low] * EV_PER_CM, "j_low": levels.j[low],
                "j_up": levels.j[up], "loggf": loggf,
                "term_low": levels.label(low), "term_up": levels.label(up),
                "loggf_err": NOMINAL_ERROR if known is None else 0.3,
                "nominal": known is None,
            })
    return lines


def _is_new(line: dict, known: dict) -> bool:
    near = np.abs(known["wave"] - line["wave"]) < SAME_WAVE * line["wave"] / 5000.0
    return not np.any(near & (np.abs(known["e_low"] - line["e_low"]) < SAME_ENERGY))


def _without_twins(lines: list[dict]) -> list[dict]:
    """One line where two labels of one level give the same line."""
    kept: list[dict] = []
    for line in lines:
        twin = any(
            abs(k["wave"] - line["wave"]) < 0.02 and abs(k["e_low"] - line["e_low"]) < 1e-4
            for k in kept
        )
        if not twin:
            kept.append(line)
    return kept


def known_lines(folder: Path, name: str) -> dict[str, np.ndarray]:
    """wave, e_low, loggf of one species in the finished tables of permitted lines."""
    parts = []
    for table in ("atomic_lines", "level_lines"):
        stored = read_table(folder, table)
        names = [str(n) for n in stored["species_names"]]
        if name in names:
            mine = stored["species"] == names.index(name)
            parts.append({k: stored[k][mine].astype(float) for k in ("wave", "e_low", "loggf")})
    return {key: np.concatenate([part[key] for part in parts]) for key in parts[0]}


def main() -> None:
    arguments = script_arguments(__doc__.splitlines()[0])
    energies = ionisation_energies(arguments.source_dir)
    rows, names = [], []
    for element, stage in GAP_IONS:
        name = f"{element} {ROMAN[stage - 1]}"
        known = known_lines(arguments.out or TABLES, name)
        limit = energies[ELEMENTS.index(element), stage - 1]
        found = gap_lines(arguments.source_dir, (element, stage), known, limit)
        found = [line | {"species": len(names)} for line in found if _is_new(line, known)]
        found = _without_twins(found)
        rows += found
        names.append(name)
        print(name, len(found))
    lines = {key: np.array([row[key] for row in rows]) for key in rows[0] if "term" not in key}
    for key in ("term_low", "term_up"):
        lines[key] = np.array([row[key] for row in rows], dtype=object)
    lines["origin"] = np.full(len(rows), ORIGIN_CODE["stellar"])
    lines["source"] = np.zeros(len(rows))
    write_table("gap_lines", pack_lines(lines, names, KEYS), arguments.out)


if __name__ == "__main__":
    main()
