"""Molecular bands seen in a spectrum: steps at the heads, tested against displaced ones.

At a band's head the flux drops towards the shaded side. The step is the logarithm of the mean
flux outside over that inside. A molecule is seen where the steps at its heads, summed, beat
those of the same heads displaced together all along the spectrum (a cross-correlation whose
chance level is measured in the spectrum itself).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..lines.bands import Band, bands_between
from ..spectra.medium import C_KM_S

WINDOW, MARGIN = 10.0, 0.6  # Angstrom on each side of a head, and left out about it
TREND = 150.0  # Angstrom over which the level and scatter of steps are taken
STEP = 0.5  # Angstrom of the grid
DISPLACED = np.concatenate((np.arange(-260.0, -24.0, 2.5), np.arange(25.0, 260.1, 2.5)))
LEAST = 3.5  # sigma of the displaced sums
HEAD = 2.0  # sigma of one head's step, for the band to count in a molecule that is seen
LEAST_STEP = 0.02  # of the flux: shallower bands rule nothing


@dataclass(frozen=True)
class SeenBand:
    """band: of the catalogue (vacuum, rest); step: drop of the flux at its head, 0-1; sigma:
    of that step; significance: of its molecule; low, high: observed vacuum range."""

    band: Band
    step: float
    sigma: float
    significance: float
    low: float
    high: float


def seen_bands(spectrum, velocity: float, resolution_width: float = 0.0) -> tuple[SeenBand, ...]:
    """Bands of molecules that show in a spectrum at a velocity.

    spectrum: Spectrum; velocity: km/s; resolution_width: FWHM of the narrowest lines,
    Angstrom, which widens the windows at low resolving power.
    """
    if not np.isfinite(velocity):
        return ()
    trace = _Steps(spectrum, resolution_width)
    if trace.empty:
        return ()
    factor = 1.0 + velocity / C_KM_S
    everything = bands_between(trace.low / factor, trace.high / factor)
    out: list[SeenBand] = []
    for molecule in sorted({b.molecule for b in everything}):
        bands = [b for b in everything if b.molecule == molecule and b.shading != "both"]
        out += _molecule(trace, bands, factor)
    return tuple(sorted(out, key=lambda s: s.low))


def _molecule(trace: "_Steps", bands, factor: float) -> list[SeenBand]:
    place = np.array([b.head * factor for b in bands])
    side = np.array([1.0 if b.shading == "red" else -1.0 for b in bands])
    weight = np.array([1.0 if not np.isfinite(b.strength) else 10.0 ** b.strength for b in bands])
    if not len(bands):
        return []
    weight = np.sqrt(weight / weight.max())
    z = trace.z(place) * side
    known = np.isfinite(z)
    if not known.any():
        return []
    own = _pooled(z, weight)
    others = np.array([_pooled(trace.z(place + d) * side, weight) for d in DISPLACED])
    others = others[np.isfinite(others)]
    if len(others) < 40:
        return []
    middle = float(np.median(others))
    spread = 1.4826 * float(np.median(np.abs(others - middle)))
    significance = (own - middle) / max(spread, 0.3)
    if significance < LEAST or own <= np.max(others):
        return []
    step = 1.0 - np.exp(-trace.value(place) * side)
    return [
        SeenBand(b, float(s), float(q), float(significance), b.low * factor, b.high * factor)
        for b, s, q in zip(bands, step, z)
        if np.isfinite(q) and q >= HEAD and s >= LEAST_STEP
    ]


def _pooled(z, weight) -> float:
    known = np.isfinite(z)
    if not known.any():
        return float("nan")
    # one head that an absorption line happens to mark must not speak for the molecule
    capped = np.clip(z[known], -4.0, 4.0)
    return float(np.sum(weight[known] * capped) / np.sqrt(np.sum(weight[known] ** 2)))


class _Steps:
    """ln(mean flux bluewards / mean flux redwards) along a spectrum, with its usual scatter."""

    def __init__(self, spectrum, width: float):
        window, margin = max(WINDOW, 5.0 * width), max(MARGIN, 0.6 * width)
        parts = [_segment_steps(s, window, margin) for s in spectrum.segments]
        parts = [p for p in parts if p is not None]
        self.empty = not parts
        if self.empty:
            return
        wave = np.concatenate([p[0] for p in parts])
        step = np.concatenate([p[1] for p in parts])
        order = np.argsort(wave, kind="stable")
        self.wave, self.step = wave[order], step[order]
        self.low, self.high = float(self.wave[0]), float(self.wave[-1])
        self.nodes = np.arange(self.low, self.high + TREND, TREND / 2)
        near = [self.step[np.abs(self.wave - x) < TREND] for x in self.nodes]
        self.level = np.array([np.median(n) if len(n) else 0.0 for n in near])
        spread = [1.4826 * np.median(np.abs(n - np.median(n))) if len(n) else 1.0 for n in near]
        self.spread = np.maximum(spread, 1e-3)

    def value(self, place):
        """Steps less their usual level; NaN where the spectrum has none."""
        i = np.clip(np.searchsorted(self.wave, place), 1, len(self.wave) - 1)
        i = np.where(np.abs(self.wave[i - 1] - place) < np.abs(self.wave[i] - place), i - 1, i)
        known = np.abs(self.wave[i] - place) < 2 * STEP
        return np.where(known, self.step[i] - np.interp(place, self.nodes, self.level), np.nan)

    def z(self, place):
        return self.value(place) / np.interp(place, self.nodes, self.spread)


def _segment_steps(segment, window: float, margin: float):
    """(places, steps) of one segment; None where it is too short."""
    good = ~segment.mask & np.isfinite(segment.flux)
    wave, flux = segment.wave[good], segment.flux[good]
    if len(wave) < 20 or wave[-1] - wave[0] < 3 * window:
        return None
    place = np.arange(wave[0] + window, wave[-1] - window, STEP)
    total = np.concatenate(([0.0], np.cumsum(flux)))

    def mean(a, b):
        low, high = np.searchsorted(wave, a), np.searchsorted(wave, b)
        enough = (high - low) >= 3
        return np.where(enough, (total[high] - total[low]) / np.maximum(high - low, 1), np.nan)

    blue, red = mean(place - window, place - margin), mean(place + margin, place + window)
    fine = (blue > 0) & (red > 0)
    return (place[fine], np.log(blue[fine] / red[fine])) if fine.any() else None
