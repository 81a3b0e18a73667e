"""Simulated spectra for tests and studies of measuring: Gaussian lines, white or smooth noise."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from linewright.measure.core import measure_spectrum
from linewright.spectra.spectrum import Segment, Spectrum

FWHM_PER_SIGMA = 2.3548200450309493
AREA = 1.0644670194312262


def spectrum_of(wave, flux, uncertainty=None, mask=None):
    mask = np.zeros(len(wave), dtype=bool) if mask is None else mask
    return Spectrum((Segment(wave, flux, uncertainty, mask),), medium="vacuum", name="simulated")


def smooth_noise(rng, n: int, blur: float):
    """Unit noise; blur: sigma in samples of the Gaussian that correlates it (0: white)."""
    noise = rng.standard_normal(n + 40)
    if blur:
        kernel = np.exp(-0.5 * (np.arange(-20, 21) / blur) ** 2)
        noise = np.convolve(noise, kernel / np.sqrt(np.sum(kernel**2)), "same")
    return noise[20:-20]


@dataclass(frozen=True)
class Lines:
    """count equal lines, ``apart`` FWHM from one another, of ``pixels`` samples FWHM."""

    pixels: float = 4.0
    depth: float = 0.3
    snr: float = 50.0
    count: int = 400
    apart: float = 25.0
    blur: float = 0.0
    seed: int = 0

    @property
    def fwhm(self) -> float:
        return self.pixels * self.step

    @property
    def step(self) -> float:
        return 5500.0 / 50000.0 / self.pixels

    def build(self, with_errors: bool = False):
        """(Spectrum of flux 1000, true centres)."""
        rng = np.random.default_rng(self.seed)
        n = int(self.count * self.apart * self.pixels) + 200
        wave = 5000.0 + self.step * np.arange(n)
        place = 100 + self.apart * self.pixels * (np.arange(self.count) + 0.5)
        place = place + rng.uniform(-1, 1, self.count) * min(self.pixels, 0.2 * self.apart)
        centres = 5000.0 + self.step * place
        y = np.zeros(n)
        for c in centres:
            a, b = np.searchsorted(wave, [c - 6 * self.fwhm, c + 6 * self.fwhm])
            u = (wave[a:b] - c) / self.fwhm * FWHM_PER_SIGMA
            y[a:b] += self.depth * np.exp(-0.5 * u * u)
        flux = 1000.0 * (1.0 - y + smooth_noise(rng, n, self.blur) / self.snr)
        error = np.full(n, 1000.0 / self.snr) if with_errors else None
        return spectrum_of(wave, flux, error), centres


def wood(first, last, seed=0, even_log=True, snr=100.0, span=(5000.0, 5800.0), apart=8.0):
    """(Spectrum, resolving power at every sample): Gaussian lines at random, on average
    ``apart`` widths from one another, three samples per FWHM at the highest resolving power; the power runs
    from ``first`` to ``last`` in proportion to wavelength."""
    rng = np.random.default_rng(seed)
    low, high = span
    most = max(first, last) * 3.0
    wave = low * np.exp(np.arange(int(np.log(high / low) * most)) / most)
    wave = wave if even_log else np.arange(low, high, low / most)
    power = np.interp(wave, span, (first, last))
    clear, centre = np.ones(len(wave)), low + 1.0
    while centre < high - 1.0:
        fwhm = centre / np.interp(centre, wave, power)
        a, b = np.searchsorted(wave, [centre - 4 * fwhm, centre + 4 * fwhm])
        u = (wave[a:b] - centre) / fwhm * FWHM_PER_SIGMA
        clear[a:b] *= 1.0 - min(0.8, 0.05 + rng.exponential(0.15)) * np.exp(-0.5 * u * u)
        centre += fwhm * rng.exponential(apart)
    flux = 1000.0 * (clear + rng.standard_normal(len(wave)) / snr)
    return spectrum_of(wave, flux, np.full(len(wave), 1000.0 / snr)), power


def pulls_of(lines: Lines, with_errors: bool = False):
    """(pulls by quantity, share of lines found, Measurement) of one simulation."""
    spectrum, centres = lines.build(with_errors)
    measured = measure_spectrum(spectrum)
    f = measured.features
    if not len(f):
        raise AssertionError(f"no feature found at all: {lines}")
    rows = np.array([np.argmin(np.abs(f.wave - c)) for c in centres])
    found = (np.abs(f.wave[rows] - centres) < 0.7 * lines.fwhm)
    found &= f.sign[rows] == np.sign(lines.depth)
    i, c = rows[found], centres[found]
    ew = 1e3 * AREA * lines.depth * lines.fwhm
    pulls = {
        "wave": (f.wave[i] - c) / f.wave_err[i],
        "depth": (f.depth[i] - lines.depth) / f.depth_err[i],
        "fwhm": (f.fwhm[i] - lines.fwhm) / f.fwhm_err[i],
        "ew": (f.ew[i] - ew) / f.ew_err[i],
    }
    return pulls, float(found.mean()), measured
