"""OH airglow lines from the HITRAN 2004 positions, intensities and probabilities.

The source has no level data. From S = const g' A exp(-c2 E''/296 K) / nu^2 the lower energy
E'' of each line follows up to ln g'; with the vibrational ladder of OH it splits into a
vibrational and a rotational part, g' = 2 (2J'+1) follows from the latter, and the pair is
iterated. Brightness is A exp(-c2 E'rot/190 K) times a vibrational population falling by
exp(-v'/4), scaled to about 2,000 rayleigh for the brightest line (indicative only).
"""

from __future__ import annotations

from pathlib import Path

import numpy as np
from astropy.table import Table

from common import source_file

C2 = 1.438776877
# OH X2Pi: G(v) - G(0) = we v - wexe v(v+1) + weye ..., Huber & Herzberg 1979; B = 18.5 cm-1.
OMEGA, ANHARMONIC, ROTATION = 3737.76, 84.881, 18.5
PARTITION_296 = 80.36
BRIGHTEST = 3.3  # log10 rayleigh
KEEP = -2.7  # log10 of the faintest kept line relative to the brightest


def _ladder() -> np.ndarray:
    v = np.arange(11)
    return OMEGA * v - ANHARMONIC * v * (v + 1)


def _lower_energy(wavenumber, intensity, a_up, weight):
    """E'' in cm-1 from the definition of the HITRAN intensity."""
    constant = 8 * np.pi * 2.99792458e10 * PARTITION_296
    return -296.0 / C2 * np.log(intensity * constant * wavenumber**2 / (weight * a_up))


def _rotation(energy):
    """Vibrational number and rotational energy of a term energy."""
    ladder = _ladder()
    v = np.clip(np.searchsorted(ladder, energy + 60.0) - 1, 0, 10)
    return v, np.maximum(energy - ladder[v], 0.0)


def hydroxyl_lines(source: Path) -> list[dict[str, float]]:
    """The brighter OH lines: vacuum wavelength, error, log10 brightness."""
    path = source_file(source, "Barak*/barak/data/linelists/HITRAN2004_wa_lt_25000.fits.gz")
    table = Table.read(path)
    mine = np.char.strip(np.asarray(table["molecule"]).astype(str)) == "OH"
    wave, intensity, a_up = (
        np.asarray(table[key][mine], dtype=float) for key in ("wav", "intensity", "a")
    )
    use = a_up > 0
    wave, intensity, a_up = wave[use], intensity[use], a_up[use]
    wavenumber = 1e8 / wave
    weight = np.full(len(wave), 16.0)
    for _ in range(6):
        upper = _lower_energy(wavenumber, intensity, a_up, weight) + wavenumber
        v, rotational = _rotation(upper)
        j = np.sqrt(rotational / ROTATION + 0.25) - 0.5
        weight = 2 * (2 * np.maximum(j, 0.5) + 1)
    bright = weight * a_up * np.exp(-C2 * rotational / 190.0) * np.exp(-v / 4.0)
    bright = np.where((v >= 1) & (v <= 9), bright, 0.0)
    with np.errstate(divide="ignore"):
        level = np.log10(bright / bright.max())
    return [
        {"wave": wave[k], "wave_err": 0.02 * wave[k] ** 2 * 1e-8 + 0.005, "emission": level[k] + BRIGHTEST}
        for k in np.flatnonzero(level > KEEP)
    ]
