"""Interstellar lines, diffuse bands, night-sky and city-lamp lines.

Usage: python linedata/builders/interstellar_sky.py SOURCE_DIR [--out FOLDER]

Atomic wavelengths are Ritz values of the levels named here by E_low and the air wavelength
(Angstrom); molecules and bands are the published values, listed below with their sources.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np

from airglow import hydroxyl_lines
from common import ORIGIN_CODE, air_to_vacuum, pack_lines, script_arguments, write_table
from nist_levels import read_levels
from ritz import sort_levels
from symbols import ROMAN

# Resonance lines: element, stage, air wavelength, oscillator strength times g_low of the ground
# level (Morton 2003, ApJS 149, 205).
ATOMS = [
    ("Na", 1, 5889.951, 1.282), ("Na", 1, 5895.924, 0.640), ("Na", 1, 3302.369, 0.0180),
    ("Na", 1, 3302.979, 0.0090), ("K", 1, 7664.899, 1.34), ("K", 1, 7698.965, 0.666),
    ("K", 1, 4044.143, 0.0122), ("Ca", 1, 4226.728, 1.77), ("Ca", 2, 3933.663, 1.253),
    ("Ca", 2, 3968.469, 0.624), ("Ti", 2, 3383.759, 1.432), ("Ti", 2, 3241.983, 0.929),
    ("Ti", 2, 3229.190, 0.276), ("Ti", 2, 3072.971, 0.484), ("Fe", 1, 3719.935, 0.370),
    ("Fe", 1, 3859.911, 0.195), ("Al", 1, 3944.006, 0.238), ("Mg", 1, 2852.127, 1.83),
    ("Mg", 2, 2795.528, 1.231), ("Mg", 2, 2802.705, 0.612), ("Fe", 2, 2343.495, 1.14),
    ("Fe", 2, 2373.736, 0.313), ("Fe", 2, 2382.037, 3.20), ("Fe", 2, 2585.876, 0.691),
    ("Fe", 2, 2599.396, 2.39), ("Li", 1, 6707.76, 0.996), ("Rb", 1, 7800.268, 1.39),
]
# Molecules: name, air wavelength, error, f; van Dishoeck & Black 1989 ApJ 340, 273 (f), and
# Gredel, van Dishoeck & Black 1993 A&A 269, 477 (CH, CH+, CN positions).
MOLECULES = [
    ("CH", 4300.313, 0.003, 0.00506), ("CH", 3890.217, 0.003, 0.00170),
    ("CH", 3886.409, 0.003, 0.00320), ("CH", 3878.774, 0.003, 0.00107),
    ("CH+", 4232.548, 0.003, 0.00545), ("CH+", 3957.692, 0.003, 0.00331),
    ("CH+", 3745.308, 0.003, 0.00172), ("CN", 3874.608, 0.005, 0.0342),
    ("CN", 3873.998, 0.005, 0.0228), ("CN", 3875.764, 0.005, 0.0114),
]
# Diffuse bands: air wavelength, FWHM (Angstrom); Hobbs et al. 2008 ApJ 680, 1256; Hobbs et al.
# 2009 ApJ 705, 32; Jenniskens & Desert 1994 A&AS 106, 39.
BANDS = [
    (4428.2, 17.0), (4501.8, 2.4), (4726.8, 2.7), (4762.6, 2.5), (4963.9, 0.6), (5404.6, 1.0),
    (5487.7, 5.2), (5494.1, 0.7), (5705.1, 2.6), (5780.48, 2.1), (5797.06, 0.8), (5849.8, 0.8),
    (6010.6, 3.0), (6089.85, 0.5), (6195.98, 0.4), (6203.1, 1.2), (6269.8, 1.2), (6283.84, 4.8),
    (6376.1, 0.7), (6379.3, 0.6), (6613.62, 0.9), (6660.7, 0.6), (6993.1, 0.8), (7224.0, 0.9),
    (8620.4, 4.3),
]
BAND_ERROR = 0.3
# Night sky and city light: element, stage, forbidden, air wavelength, brightness (log10 of a
# typical dark-site intensity in rayleigh; Osterbrock et al. 1996 PASP 108, 277, rounded).
SKY = [
    ("O", 1, True, 5577.339, 2.4), ("O", 1, True, 6300.304, 2.0), ("O", 1, True, 6363.776, 1.5),
    ("Na", 1, False, 5889.951, 1.7), ("Na", 1, False, 5895.924, 1.5),
    ("N", 1, True, 5200.257, 0.0), ("N", 1, True, 5197.902, -0.2),
]
LAMPS = [
    ("Hg", 1, 4046.565), ("Hg", 1, 4077.837), ("Hg", 1, 4358.335), ("Hg", 1, 5460.750),
    ("Hg", 1, 5769.610), ("Hg", 1, 5790.670), ("Na", 1, 4978.541), ("Na", 1, 4982.813),
    ("Na", 1, 5682.633), ("Na", 1, 5688.205), ("Na", 1, 6154.225), ("Na", 1, 6160.747),
    ("Na", 1, 8183.256), ("Na", 1, 8194.824), ("Li", 1, 6707.76), ("K", 1, 7698.965),
]


def ritz_wave(source: Path, element: str, stage: int, air: float, forbidden: bool = False):
    """Vacuum Ritz wavelength, its error, E_low (eV) and J nearest a named air wavelength."""
    levels = read_levels(source, element, stage)
    vacuum = float(air_to_vacuum(air))
    if levels is None:
        return vacuum, 0.003, np.nan, np.nan, np.nan
    levels = sort_levels(levels)
    best = None
    for low in range(len(levels)):
        gap = 1e8 / np.maximum(levels.energy - levels.energy[low], 1.0)
        for up in np.flatnonzero(np.abs(gap - vacuum) < 0.06):
            if (levels.odd[up] != levels.odd[low]) == forbidden:
                continue
            key = (levels.energy[low], abs(gap[up] - vacuum))
            if best is None or key < best[0]:
                error = gap[up] ** 2 * 1e-8 * np.hypot(levels.error[low], levels.error[up])
                best = (
                    key, float(gap[up]), float(np.hypot(error, 4e-7 * gap[up])),
                    levels.energy[low] / 8065.543937, levels.j[low], levels.j[up],
                )
    if best is None:
        return vacuum, 0.003, np.nan, np.nan, np.nan
    return best[1:]


def _row(species, origin, key, placed, **values):
    wave, error, e_low, j_low, j_up = placed
    row = {"species": species, "origin": origin, "source": key, "wave": wave, "wave_err": error,
           "e_low": e_low, "j_low": j_low, "j_up": j_up, "loggf": np.nan, "emission": np.nan,
           "spread": 0.0}
    return row | values


def all_rows(source: Path) -> list[dict]:
    """Every entry of the table."""
    rows = []
    for element, stage, air, gf in ATOMS:
        name = f"{element} {ROMAN[stage - 1]}"
        placed = ritz_wave(source, element, stage, air)
        rows.append(_row(name, "interstellar", "Morton2003", placed, loggf=np.log10(gf)))
    for name, air, error, f in MOLECULES:
        placed = (float(air_to_vacuum(air)), error, 0.0, np.nan, np.nan)
        rows.append(_row(name, "interstellar", "Gredel1993", placed, loggf=np.log10(2 * f)))
    for air, fwhm in BANDS:
        placed = (float(air_to_vacuum(air)), BAND_ERROR, np.nan, np.nan, np.nan)
        rows.append(_row("DIB", "interstellar", "Hobbs2008", placed, spread=fwhm / 2.3548))
    for element, stage, forbidden, air, bright in SKY:
        name = f"{element} {ROMAN[stage - 1]}"
        name = f"[{name}]" if forbidden else name
        placed = ritz_wave(source, element, stage, air, forbidden)
        rows.append(_row(name, "sky", "Osterbrock1996", placed, emission=bright))
    for element, stage, air in LAMPS:
        name = f"{element} {ROMAN[stage - 1]}"
        key = "Sansonetti1996" if element == "Hg" else "NIST_ASD"
        placed = ritz_wave(source, element, stage, air)
        rows.append(_row(name, "lamp", key, placed, emission=0.0))
    for line in hydroxyl_lines(source):
        placed = (line["wave"], line["wave_err"], np.nan, np.nan, np.nan)
        rows.append(_row("OH", "sky", "Rothman2005", placed, emission=line["emission"]))
    return rows


def main() -> None:
    arguments = script_arguments(__doc__.splitlines()[0])
    rows = all_rows(arguments.source_dir)
    names = list(dict.fromkeys(row["species"] for row in rows))
    keys = list(dict.fromkeys(row["source"] for row in rows))
    columns = ("wave", "wave_err", "e_low", "j_low", "j_up", "loggf", "emission", "spread")
    lines = {key: np.array([row[key] for row in rows], dtype=float) for key in columns}
    lines["loggf_err"] = np.where(np.isfinite(lines["loggf"]), 0.05, np.nan)
    lines["species"] = np.array([names.index(row["species"]) for row in rows])
    lines["source"] = np.array([keys.index(row["source"]) for row in rows])
    lines["origin"] = np.array([ORIGIN_CODE[row["origin"]] for row in rows])
    write_table("interstellar_sky", pack_lines(lines, names, keys), arguments.out)
    print(len(rows), "lines")


if __name__ == "__main__":
    main()
