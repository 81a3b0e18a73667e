"""Simulated lines of more than one part: discs, winds, chromospheres, and plain ones.

A profile is a function of velocity that multiplies the continuum. None is a sum of Gaussians of
the fitted kind: the disc is integrated over rings and azimuth (optically thin, in Keplerian
rotation; Smak 1969, Acta Astron. 19, 155; 1981, Acta Astron. 31, 395), absorption is exp(-tau)
of the light behind it, and chromospheric emission fills the core of a line with damping wings.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from linewright.spectra.medium import C_KM_S
from linewright.spectra.spectrum import Segment, Spectrum

FWHM = 2.3548200450309493
GRID = 1.0  # km/s
SPAN = 3000.0  # km/s on either side of a line
APART, EDGE = 12000.0, 6000.0  # km/s between strong lines, and beyond the outer ones


def bell(v, centre: float, fwhm: float):
    return np.exp(-0.5 * ((v - centre) / fwhm * FWHM) ** 2)


def disc(v, height: float, outer: float, inner_radius: float = 0.15, fall: float = 1.5):
    """Emission of an optically thin Keplerian disc, its highest peak at ``height``.

    outer: projected velocity of the outer edge, km/s; inner_radius: of the outer; fall: power
    by which the surface emits less outwards. The peaks lie near +-outer.
    """
    radius = np.linspace(inner_radius, 1.0, 400)
    angle = (np.arange(2000) + 0.5) * 2 * np.pi / 2000
    speed = outer / np.sqrt(radius)[:, None] * np.sin(angle)[None]
    weight = (radius ** (1.0 - fall))[:, None] * np.ones(len(angle))
    even = np.arange(-SPAN, SPAN + 0.5 * GRID, GRID)
    edges = np.r_[even - 0.5 * GRID, even[-1] + 0.5 * GRID]
    made = np.histogram(speed.ravel(), edges, weights=weight.ravel())[0]
    made = np.convolve(made, bell(np.arange(-50, 51) * GRID, 0.0, 12.0), "same")  # turbulence
    return height * np.interp(v, even, made / made.max())


@dataclass(frozen=True)
class Scene:
    """Strong lines every APART km/s among narrow ones. lines: functions that give the flux
    relative to the continuum at v in km/s; resolution: resolving power, three samples each;
    snr: per sample in the continuum; vsini: km/s, of the narrow lines; crowd: of them per
    line width; first: vacuum Angstrom of the first strong line."""

    lines: tuple
    resolution: float = 30000.0
    snr: float = 100.0
    vsini: float = 8.0
    crowd: float = 0.04
    first: float = 5000.0
    seed: int = 0
    errors: bool = True

    @property
    def places(self):
        """Vacuum Angstrom of the strong lines, (n,)."""
        return self.first * np.exp(APART * np.arange(len(self.lines)) / C_KM_S)

    def build(self) -> Spectrum:
        rng = np.random.default_rng(self.seed)
        u = np.arange(-EDGE, APART * (len(self.lines) - 1) + EDGE, GRID)  # c ln(wave/first)
        flux = np.ones(len(u))
        for k, line in enumerate(self.lines):
            v = C_KM_S * np.expm1((u - k * APART) / C_KM_S)
            near = np.abs(v) <= SPAN
            flux[near] *= line(v[near])
        flux = flux * (1.0 - turned(self._forest(rng, u), self.vsini))
        flux = seen(flux, C_KM_S / self.resolution)
        places = np.arange(u[0] + 50, u[-1] - 50, C_KM_S / self.resolution / 3.0)
        clean = np.interp(places, u, flux)
        sigma = np.sqrt(np.maximum(clean, 0.05)) / self.snr
        noisy = 1000 * (clean + rng.normal(0, 1, len(clean)) * sigma)
        s = Segment(self.first * np.exp(places / C_KM_S), noisy,
                    1000 * sigma if self.errors else None, np.zeros(len(places), dtype=bool))
        return Spectrum((s,), medium="vacuum", frame="rest", name="simulated")

    def _forest(self, rng, u):
        wide = max(C_KM_S / self.resolution, 1.5 * self.vsini)
        forest = np.zeros(len(u))
        for at in rng.uniform(u[0], u[-1], int(self.crowd * np.ptp(u) / wide)):
            depth = min(0.8, 0.05 + rng.exponential(0.15))
            a, b = np.searchsorted(u, [at - 20.0, at + 20.0])
            forest[a:b] = 1 - (1 - forest[a:b]) * (1 - depth * bell(u[a:b], at, 6.0))
        return forest


def seen(flux, fwhm: float):
    """Through an instrument of a Gaussian profile of ``fwhm`` km/s."""
    half = int(2.2 * fwhm / GRID) + 2
    kernel = bell(np.arange(-half, half + 1) * GRID, 0.0, fwhm)
    padded = np.pad(flux, half, mode="edge")
    return np.convolve(padded, kernel / kernel.sum(), "valid")


def turned(depth, vsini: float):
    """Rotation profile, limb darkening 0.6 (Gray 2005, Observation and Analysis of Stellar
    Photospheres)."""
    reach = int(vsini / GRID)
    if reach < 1:
        return depth
    u = np.maximum(1 - (np.arange(-reach, reach + 1) * GRID / vsini) ** 2, 0.0)
    kernel = 0.8 * np.sqrt(u) + 0.3 * np.pi * u
    return np.convolve(depth, kernel / kernel.sum(), "same")


def voigt(v, gauss: float, lorentz: float):
    """Unit height; FWHM of the Gaussian and of the Lorentzian, km/s."""
    from scipy.special import wofz

    s = gauss / FWHM * np.sqrt(2.0)
    z = wofz((v + 0.5j * lorentz) / s).real
    return z / wofz(0.5j * lorentz / s).real


def saturated(v, tau: float, gauss: float, lorentz: float, floor: float = 0.85):
    """Depth of a line of central optical depth ``tau``."""
    return floor * (1.0 - np.exp(-tau * voigt(v, gauss, lorentz))) / (1.0 - np.exp(-tau))
