"""Simulated stars whose excitation temperature is known, for tests and studies.

The lines are the catalogue's, their wavelengths and log gf perturbed by their stated errors;
the engine is given a list that lacks 5 % of them. Elements are off solar by 0.1 dex each and
the electron pressure is off the dwarfs' usual one. Lines are Voigt profiles in an atmosphere of
one temperature (Milne and Eddington: depth = A eta/(1 + eta), eta the opacities' sum), so they
saturate and blend by another law than any the engine assumes; then rotation, instrument and
noise. Hydrogen is left out and its place masked.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from linewright.claims.temperature import electron_pressure
from linewright.lines.catalogue import ORIGINS
from linewright.lines.depths import contrast, zero_point
from linewright.lines.species import ELEMENTS
from linewright.lines.strengths import absorption_strength
from linewright.spectra.medium import C_KM_S
from linewright.spectra.spectrum import Segment, Spectrum

GRID = 0.5  # km/s, of the synthesis
DOPPLER, DAMPING = 2.0, 0.03  # km/s (thermal and small-scale motion); Voigt parameter
DEEPEST = 0.85
# Balmer lines, vacuum Angstrom (n from 3 to 9, from memory), and the half width masked.
BALMER = (6564.6, 4862.7, 4341.7, 4102.9, 3971.2, 3890.2, 3836.5)
HYDROGEN = 25.5  # Angstrom
NO_ERROR = 0.15  # dex, where a line states none
MISSING = 0.05


@dataclass(frozen=True)
class Star:
    """temperature in K; vsini in km/s; pressure: dex off the usual log Pe; low, high: vacuum
    Angstrom; snr per sample, three samples a resolution element."""

    temperature: float
    vsini: float = 0.0
    pressure: float = 0.0
    metallicity: float = 0.0
    low: float = 4380.0
    high: float = 5400.0
    resolution: float = 45000.0
    snr: float = 150.0
    velocity: float = 23.0
    seed: int = 0


def simulate(star: Star, catalogue):
    """(Spectrum, catalogue for the engine) of one star."""
    return observe(star, catalogue)[:2]


def observe(star: Star, catalogue):
    """(Spectrum, catalogue for the engine, truth) of one star; truth: vacuum wavelength at
    rest, depth alone before broadening, species, (n,) each, and [X/H] by element."""
    rng = np.random.default_rng([star.seed, int(star.temperature)])
    lines = catalogue.between(star.low - 5, star.high + 5)
    opacity, wave, rows, solar = _lines(star, lines, rng)
    log = np.arange(np.log(star.low), np.log(star.high), GRID / C_KM_S)
    depth = _absorption(log, wave, opacity)
    depth = depth * np.minimum(contrast(np.exp(log), star.temperature), 1.0 / DEEPEST)
    flux = 1.0 - _broadened(depth, star)
    every = max(round(C_KM_S / star.resolution / 3.0 / GRID), 1)
    flux, seen = flux[::every], np.exp(log[::every])
    flux = flux + rng.normal(0, 1 / star.snr, len(flux))
    mask = np.min(np.abs(seen[:, None] - np.array(BALMER)), axis=1) < HYDROGEN
    segment = Segment(
        seen * (1 + star.velocity / C_KM_S), flux, np.full(len(seen), 1 / star.snr), mask
    )
    kept = catalogue.take(rng.random(len(catalogue)) > MISSING)
    spectrum = Spectrum((segment,), medium="vacuum", frame="rest", name="simulated")
    names = np.array(lines.species_names)[lines.species[rows]]
    return spectrum, kept, (wave, DEEPEST * opacity / (1.0 + opacity), names, solar)


def _lines(star: Star, lines, rng):
    """Opacity over the continuum's at line centre, true vacuum wavelength and row of the lines
    that matter, and the elements' [X/H]."""
    solar = {symbol: float(rng.normal(0, 0.1)) for symbol in ELEMENTS}
    pe = electron_pressure(star.temperature) + star.pressure
    strength = absorption_strength(lines, star.temperature, pe, star.metallicity, solar)
    error = np.where(np.isfinite(lines.loggf_err), lines.loggf_err, NO_ERROR)
    strength = strength + rng.normal(0, 1, len(lines)) * error
    strength = strength - zero_point(lines.wave, star.temperature, pe)
    wave = lines.wave + rng.normal(0, 1, len(lines)) * lines.wave_err
    hydrogen = lines.species_names.index("H I") if "H I" in lines.species_names else -1
    atomic = (lines.origin == ORIGINS.index("stellar")) & (lines.species != hydrogen)
    keep = atomic & np.isfinite(strength) & (strength > -3.0)
    return 2.0 * 10.0 ** strength[keep], wave[keep], np.nonzero(keep)[0], solar


def _absorption(log, wave, opacity):
    """Depth on the ln(wavelength) grid; Voigt profiles reach as far as they matter."""
    from scipy.special import wofz

    total, b = np.zeros(len(log)), DOPPLER / C_KM_S
    for place, eta in zip(np.log(wave), opacity):
        reach = max(5 * b, b * np.sqrt(DAMPING * eta / 1e-3))
        a, e = np.searchsorted(log, [place - reach, place + reach])
        if e > a:
            total[a:e] += eta * wofz((log[a:e] - place) / b + 1j * DAMPING).real
    return DEEPEST * total / (1.0 + total)


def _broadened(depth, star: Star):
    sigma = C_KM_S / star.resolution / 2.3548 / GRID
    x = np.arange(-int(5 * sigma) - 1, int(5 * sigma) + 2)
    kernel = np.exp(-0.5 * (x / sigma) ** 2)
    depth = np.convolve(depth, kernel / kernel.sum(), mode="same")
    if star.vsini <= 0:
        return depth
    # rotation profile, limb darkening 0.6 (Gray 2005, Observation and Analysis of Stellar
    # Photospheres)
    reach = int(star.vsini / GRID)
    u = np.maximum(1 - (np.arange(-reach, reach + 1) * GRID / star.vsini) ** 2, 0.0)
    turning = 0.8 * np.sqrt(u) + 0.3 * np.pi * u
    return np.convolve(depth, turning / turning.sum(), mode="same")


def with_seed(star: Star, seed: int) -> Star:
    return replace(star, seed=seed)
