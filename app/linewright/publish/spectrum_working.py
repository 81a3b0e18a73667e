"""The working spectrum: normalised, brought to rest, segments merged, in a chosen medium."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from ..spectra.medium import C_KM_S
from ..spectra.spectrum import Segment, Spectrum
from ..spectra.velocity import shift


def normalised(spectrum: Spectrum, nodes) -> Spectrum:
    """Flux and uncertainty over the pseudo-continuum.

    nodes: one (wave, flux) pair of arrays per segment, vacuum Angstrom, linear between; a
    segment without nodes, and samples where the continuum is not positive, are masked.
    """
    segments = []
    for segment, (wave, level) in zip(spectrum.segments, nodes, strict=True):
        known = len(wave) > 0
        continuum = np.interp(segment.wave, wave, level) if known else np.full(
            len(segment.wave), np.nan)
        good = np.isfinite(continuum) & (continuum > 0)
        safe = np.where(good, continuum, 1.0)
        sigma = None if segment.uncertainty is None else segment.uncertainty / safe
        segments.append(Segment(segment.wave, np.where(good, segment.flux / safe, np.nan), sigma,
                                segment.mask | ~good))
    return replace(spectrum, segments=tuple(segments), flux_unit="")


def at_rest(spectrum: Spectrum, velocity: float) -> Spectrum:
    """Vacuum wavelengths divided by (1 + velocity/c), velocity in km/s; frame 'rest'."""
    if spectrum.frame == "rest":
        return spectrum
    inverse = C_KM_S * (1.0 / (1.0 + velocity / C_KM_S) - 1.0)
    words = f"brought to rest from {velocity:+.4f} km/s ({spectrum.frame} frame)"
    moved = shift(spectrum, inverse)
    return replace(moved, frame="rest", frame_from=words, observer_velocity=float("nan"),
                   corrections=(*spectrum.corrections, words))


def _weights(first: Segment, second_sigma, second_bad, span) -> tuple[np.ndarray, np.ndarray]:
    """Weights of both in the overlap: 1/sigma^2, else a linear cross-fade."""
    if first.uncertainty is not None and second_sigma is not None:
        with np.errstate(divide="ignore", invalid="ignore"):
            a, b = 1.0 / first.uncertainty**2, 1.0 / second_sigma**2
    else:
        b = np.clip((first.wave - span[0]) / max(span[1] - span[0], 1e-12), 0.0, 1.0)
        a = 1.0 - b
    a = np.where(first.mask | ~np.isfinite(first.flux), 0.0, np.nan_to_num(a, posinf=0.0))
    return a, np.where(second_bad, 0.0, np.nan_to_num(b, posinf=0.0))


def _blended(first: Segment, second: Segment, span) -> Segment:
    """``first`` (only its overlap) averaged with ``second`` interpolated onto its samples."""
    flux = np.interp(first.wave, second.wave, np.nan_to_num(second.flux))
    bad = np.interp(first.wave, second.wave,
                    (second.mask | ~np.isfinite(second.flux)).astype(float)) > 0
    sigma = None if second.uncertainty is None else np.interp(
        first.wave, second.wave, np.nan_to_num(second.uncertainty, nan=np.inf))
    a, b = _weights(first, sigma, bad, span)
    total = a + b
    used = np.where(total > 0, total, 1.0)
    mean = np.where(total > 0, (a * np.nan_to_num(first.flux) + b * flux) / used, first.flux)
    error = None
    if first.uncertainty is not None and sigma is not None:
        error = np.where(total > 0, 1.0 / np.sqrt(used), first.uncertainty)
    return Segment(first.wave, mean, error, total <= 0)


def _part(segment: Segment, keep: np.ndarray) -> Segment:
    sigma = segment.uncertainty
    return Segment(segment.wave[keep], segment.flux[keep],
                   None if sigma is None else sigma[keep], segment.mask[keep])


def _joined(parts: list[Segment]) -> Segment:
    parts = [p for p in parts if len(p.wave)]
    known = all(p.uncertainty is not None for p in parts)
    return Segment(
        np.concatenate([p.wave for p in parts]), np.concatenate([p.flux for p in parts]),
        np.concatenate([p.uncertainty for p in parts]) if known else None,
        np.concatenate([p.mask for p in parts]))


def _two(first: Segment, second: Segment) -> Segment:
    low, high = second.wave[0], min(first.wave[-1], second.wave[-1])
    if low > high:
        return _joined([first, second])
    inside = (first.wave >= low) & (first.wave <= high)
    middle = _blended(_part(first, inside), second, (low, high))
    return _joined([_part(first, first.wave < low), middle, _part(first, first.wave > high),
                    _part(second, second.wave > first.wave[-1])])


def merged(spectrum: Spectrum) -> Spectrum:
    """One segment; overlaps averaged on the samples of the bluer one.

    Weights are 1/sigma^2 where both have errors, else a linear cross-fade. The second
    segment is interpolated, which correlates its noise: errors there are not independent.
    """
    whole = spectrum.segments[0]
    for segment in spectrum.segments[1:]:
        whole = _two(whole, segment)
    return replace(spectrum, segments=(whole,))
