"""Permitted nebular lines: H I, He I, He II by published emissivities, others nominal."""

from __future__ import annotations

import re
from pathlib import Path

import numpy as np
from astropy.io import fits

from common import source_file, vacuum_to_air
from helium import line_pairs as helium_lines
from hydrogenic import centroid, centroid_error
from level_pairs import TERM_LETTERS, parent_term, permitted_lines
from nebula_model import DENSITY, HBETA, TEMPERATURE, recombination_level

FAINTEST = -4.0  # log10 of 100 j/j_Hbeta: lines fainter than 1e-6 H beta are left out
EV_ANGSTROM = 12398.41984
# Effective recombination into one nl shell, cascades included, for charge 1 and 10,000 K, in
# 1e-13 cm3 s-1 (rounded from hydrogenic and O II / C II case B values); falls with (4/n)^3.
SHELL = {3: (0.3, 1.2, 1.5), 4: (0.12, 0.3, 0.6, 0.7), 5: (0.06, 0.15, 0.25, 0.35, 0.35)}
# log10 of what starlight pumping adds to recombination in H II regions; nominal.
PUMPING = {
    ("O", 1, 1.0): 1.6, ("N", 1, 1.5): 2.3, ("N", 1, 0.5): 2.0, ("Si", 2, 0.5): 2.4,
    ("C", 2, 0.5): 0.4, ("N", 2, 1.0): 0.5, ("Mg", 2, 0.5): 1.0, ("S", 2, 0.5): 1.0, ("O", 1, 2.0): 0.3, ("Si", 3, 0.0): 1.5,
}


def hydrogenic_ratios(source: Path, file_name: str) -> dict[tuple[int, int], float]:
    """Case B emissivities of Storey & Hummer (1995) over that of 2-4, by (low, up).

    At 10,000 K and the tabulated density nearest 3,000 cm-3.
    """
    path = source_file(source, f"pyneb*/pyneb/atomic_data_fits/{file_name}")
    with fits.open(path) as stored:
        data = stored[1].data
        t_index = int(np.argmin(np.abs(np.asarray(data["TEMP"])[0] - TEMPERATURE)))
        density = np.asarray(data["DENS"])[:, 0]
        d_index = int(np.argmin(np.abs(density - np.log10(DENSITY))))
        return {
            tuple(sorted(map(int, name.split("_")))): float(data[name][d_index][t_index])
            for name in data.columns.names
            if re.fullmatch(r"\d+_\d+", name)
        }


def one_electron_rows(ion, emissivity: dict, abundance: float) -> list[dict]:
    """Emission rows of H I or He II: gf-weighted centroids, case B emissivities."""
    rows = []
    for (low, up), value in emissivity.items():
        gross = ion.rydberg * ion.charge**2 * (1 / low**2 - 1 / up**2)
        if value <= 0 or low > 6 or up > 40 or not 3000.0 < 1e8 / gross < 25000.0:
            continue
        line = centroid(ion, low, up)
        rows.append({
            "wave": line["wave"], "spread": line["spread"], "e_low": line["e_low"],
            "wave_err": centroid_error(line),
            "j_low": np.nan, "j_up": np.nan,
            "emission": float(np.log10(100 * value / HBETA) + abundance),
        })
    return rows


def _shell(n: int, ell: int, charge: int) -> float:
    """Effective recombination coefficient (cm3 s-1) of one nl shell."""
    table = SHELL.get(min(max(n, 3), 5))
    value = table[min(ell, len(table) - 1)] * (5 / n if n > 5 else 1.0) ** 3
    return value * 1e-13 * (charge**2 if charge > 1 else 0.5)


def helium_emissivities(source: Path) -> dict[float, float]:
    """He I emissivities of Porter et al. (2012, 2013) by nominal air wavelength."""
    path = source_file(source, "pyneb*/pyneb/atomic_data_fits/he_i_rec_Pal12-Pal13.fits")
    with fits.open(path) as stored:
        data = stored[1].data
        row = int(np.argmin(
            np.abs(data["TEMP"] - TEMPERATURE) / 1e4 + np.abs(np.log10(DENSITY) - data["DENS"])
        ))
        names = [name for name in data.columns.names if name[0].isdigit()]
        return {float(name): float(data[name][row]) for name in names}


def helium_rows(source: Path, abundance: float) -> list[dict]:
    """He I: published emissivities shared by gf in each multiplet, else nominal recombination."""
    lines = [line for line in helium_lines(source) if line["wave"] > 2900.0]
    air = vacuum_to_air(np.array([line["wave"] for line in lines]))
    level = np.array([_helium_nominal(line, lines) for line in lines]) + abundance
    for nominal, value in helium_emissivities(source).items():
        near = np.flatnonzero(np.abs(air - nominal) < 0.95)
        strong = near[level[near] > level[near].max(initial=-99.0) - 1.2]
        if len(strong):
            share = 10.0 ** level[strong]
            level[strong] = np.log10(100 * value / HBETA * share / share.sum()) + abundance
    keys = ("wave", "wave_err", "e_low", "spread")
    return [
        {key: line[key] for key in keys}
        | {"j_low": np.nan, "j_up": np.nan, "emission": float(level[k])}
        for k, line in enumerate(lines)
        if level[k] > FAINTEST
    ]


def _helium_nominal(line: dict, lines: list[dict]) -> float:
    """log10(100 j/j_Hbeta) per He+ from hydrogenic recombination and the branching in lines."""
    up = line["e_low"] + EV_ANGSTROM / line["wave"]
    same = [o for o in lines if abs(o["e_low"] + EV_ANGSTROM / o["wave"] - up) < 2e-4]
    rate = 10.0 ** line["loggf"] / line["wave"] ** 2
    total = sum(10.0 ** o["loggf"] / o["wave"] ** 2 for o in same)
    alpha = _shell(line["n_up"], line["l_up"], 1) * line["weight"] * rate / total
    return recombination_level(alpha, line["wave"], 0.0)


def _weight(state) -> float:
    """Share of a shell's recombinations into one level: (2J+1) over all states of the shell."""
    term = parent_term(state.core)
    if term:
        parent = int(term[0]) * (2 * TERM_LETTERS.index(term[1]) + 1)
    else:  # a closed core, or one odd electron that makes the total spin whole
        parent = (2 * state.parent + 1) * (2 if float(state.spin).is_integer() else 1)
    return (2 * state.j + 1) / (2.0 * (2 * state.ell + 1) * parent)


def permitted_rows(source: Path, ion, limit_ev: float, log_recombining: float) -> list[dict]:
    """Permitted lines of a heavier ion at nominal recombination (and pumping) strength."""
    element, stage = ion
    lines = permitted_lines(source, element, stage, limit_ev)
    total: dict[int, float] = {}
    for line in lines:
        line["rate"] = 10.0 ** line["loggf"] / line["wave"] ** 2
        total[line["up"].row] = total.get(line["up"].row, 0.0) + line["rate"]
    rows = []
    for line in lines:
        up = line["up"]
        alpha = _shell(up.n, up.ell, stage) * _weight(up) * line["rate"] / total[up.row]
        level = recombination_level(alpha, line["wave"], log_recombining)
        level += PUMPING.get((element, stage, up.spin), 0.0) if up.ell <= 2 else 0.0
        if level > FAINTEST and line["wave"] > 3000.0:
            keys = ("wave", "wave_err", "e_low", "j_low", "j_up", "term_low", "term_up")
            rows.append({key: line[key] for key in keys} | {"spread": 0.0, "emission": level})
    return rows
