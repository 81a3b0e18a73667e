"""Telluric O2, H2O, CO2, CH4 and N2O lines of HITRAN 2004 with vertical optical depths.

Usage: python linedata/builders/telluric_lines.py SOURCE_DIR [--out FOLDER]

depth_ref is the central optical depth at air mass 1 for a standard column (5 mm of water):
intensity x column x mean Voigt peak. Intensities of O2 and H2O are brought from 296 K to the
temperature of the layers that hold the gas (250 and 275 K) with the lower energies that
lower_energies.py derives (kept as e_low, depth-weighted where lines are joined); lines without one,
and other gases, stay at 296 K. The mean over the atmosphere weights pressure
p (atm) by p^(k-1), k the ratio of the air's scale height to the gas's (1 for a mixed gas, 4
for water), with Lorentz half width gamma p and a Doppler width at 250 K.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np
from astropy.table import Table
from scipy.special import erfcx

from common import EV_PER_CM, ORIGIN_CODE, pack_lines, script_arguments, source_file, write_table
from lower_energies import Molecule, intensity_ratio, lower_energies
from molecular_levels import oxygen_levels, water_levels
from oxygen_gaps import missing_lines

AIR_COLUMN = 2.148e25  # molecules cm-2 above sea level
# column (cm-2), air-broadened half width (cm-1/atm), scale-height ratio, mass (u), position
# error (cm-1; HITRAN accuracy codes of these bands and the pressure shift)
GASES = {
    "O2": (0.2095 * AIR_COLUMN, 0.045, 1.0, 32.0, 0.005),
    "H2O": (0.5 / 18.015 * 6.02214e23, 0.085, 4.0, 18.0, 0.010),
    "CO2": (4.0e-4 * AIR_COLUMN, 0.072, 1.0, 44.0, 0.010),
    "CH4": (1.8e-6 * AIR_COLUMN, 0.056, 1.0, 16.0, 0.010),
    "N2O": (3.2e-7 * AIR_COLUMN, 0.075, 1.0, 44.0, 0.010),
}
LEAST_DEPTH = 0.002
MERGE = 0.01  # Angstrom
TEMPERATURE = 250.0
# Ground states (Q at 296 K and abundances: HITRAN) and temperatures (K) of their gases: the
# standard atmosphere's mean over the pressure (O2) and at the scale height of water.
GROUND = {
    "O2": (Molecule(oxygen_levels(), 215.77, 0.995262, 1.0, 0.15), 250.0),
    "H2O": (Molecule(water_levels(), 174.58, 0.997317, 1.5), 275.0),
}


def mean_peak(wavenumber: np.ndarray, gamma: float, ratio: float, mass: float) -> np.ndarray:
    """Mean Voigt profile at line centre (cm) over the column."""
    sigma = wavenumber * np.sqrt(8314.46 * TEMPERATURE / mass) / 2.99792458e8
    pressure = (np.arange(400) + 0.5) / 400
    weight = pressure ** (ratio - 1.0)
    weight /= weight.sum()
    peak = np.zeros(len(wavenumber))
    for p, w in zip(pressure, weight, strict=True):
        peak += w * erfcx(gamma * p / (sigma * np.sqrt(2.0))) / (sigma * np.sqrt(2 * np.pi))
    return peak


def at_temperature(gas: str, wave, intensity, probability) -> tuple[np.ndarray, np.ndarray]:
    """(intensity at the gas's temperature, lower energy in cm-1 or NaN) of lines."""
    if gas not in GROUND:
        return intensity, np.full(len(wave), np.nan)
    molecule, temperature = GROUND[gas]
    energy = lower_energies(1e8 / wave, intensity, probability, molecule)
    return intensity * intensity_ratio(energy, temperature, molecule), energy


def weighted_energy(group, depth, energy) -> np.ndarray:
    """Depth-weighted lower energy (eV) of joined lines; NaN where under half is known."""
    known = np.isfinite(energy)
    share = np.bincount(group, depth * known)
    mean = np.bincount(group, depth * np.where(known, energy, 0.0)) / np.maximum(share, 1e-30)
    return np.where(share > 0.5 * np.bincount(group, depth), mean * EV_PER_CM, np.nan)


def carried(table: Table, gas: str) -> list[np.ndarray]:
    """Vacuum wavelength, intensity at 296 K and A of a gas, with the O2 lines the list lacks."""
    mine = np.char.strip(np.asarray(table["molecule"]).astype(str)) == gas
    columns = [np.asarray(table[key][mine], dtype=float) for key in ("wav", "intensity", "a")]
    if gas == "O2":
        found = missing_lines(*columns, GROUND[gas][0])
        columns = [np.append(values, extra) for values, extra in zip(columns, found.T, strict=True)]
    return columns


def gas_lines(table: Table, gas: str) -> dict[str, np.ndarray]:
    """Lines of one gas above LEAST_DEPTH; closer than MERGE joined, depth-weighted."""
    column, gamma, ratio, mass, error = GASES[gas]
    wave, intensity, probability = carried(table, gas)
    intensity, energy = at_temperature(gas, wave, intensity, probability)
    depth = intensity * column * mean_peak(1e8 / wave, gamma, ratio, mass)
    keep = depth > LEAST_DEPTH / 10
    order = np.argsort(wave[keep], kind="stable")
    wave, depth, energy = (values[keep][order] for values in (wave, depth, energy))
    group = np.concatenate([[0], np.cumsum(np.diff(wave) > MERGE)])
    total = np.bincount(group, depth)
    mean = np.bincount(group, depth * wave) / total
    spread = np.sqrt(np.maximum(np.bincount(group, depth * (wave - mean[group]) ** 2) / total, 0))
    strong = total > LEAST_DEPTH
    mean, spread = mean[strong], spread[strong]
    return {
        "wave": mean,
        "wave_err": np.hypot(error * mean**2 * 1e-8, spread),
        "depth_ref": total[strong],
        "e_low": weighted_energy(group, depth, energy)[strong],
        "spread": spread,
    }


def build(source: Path) -> tuple[dict, list[int]]:
    path = source_file(source, "Barak*/barak/data/linelists/HITRAN2004_wa_lt_25000.fits.gz")
    table = Table.read(path)
    parts = [gas_lines(table, gas) for gas in GASES]
    lines = {key: np.concatenate([part[key] for part in parts]) for key in parts[0]}
    sizes = [len(part["wave"]) for part in parts]
    lines["species"] = np.repeat(np.arange(len(parts)), sizes)
    lines["source"] = np.zeros(len(lines["wave"]))
    lines["origin"] = np.full(len(lines["wave"]), ORIGIN_CODE["telluric"])
    return lines, sizes


def main() -> None:
    arguments = script_arguments(__doc__.splitlines()[0])
    lines, sizes = build(arguments.source_dir)
    write_table("telluric_lines", pack_lines(lines, list(GASES), ["Rothman2005"]), arguments.out)
    print(dict(zip(GASES, sizes, strict=True)))


if __name__ == "__main__":
    main()
