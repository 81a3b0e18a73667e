"""Emission in the cores of a star's strong absorption lines, found in the flux itself.

A chromosphere shines in the middle of the lines it forms (Ca II, Na I, hydrogen). Such a bump
seldom reaches the continuum, so it is no feature of its own in a measurement against it; it is
looked for between two minima inside a strong line of the list, at the star's velocity.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import erfc, sqrt

import numpy as np

from ..measure.features import FeatureTable
from ..spectra.medium import C_KM_S
from .added_rows import CORE, with_rows
from .model import Candidate, Claim, standing_of
from .profiles import CORE_REVERSAL

NEAR = 20.0  # km/s from the star within which the bump must stand
LEAST_DEPTH, LEAST_WIDTH = 0.4, 1.1  # of the line; its width in those of the narrowest lines
LEAST_SIGMA, LEAST_HEIGHT = 8.0, 0.02  # of the bump above the higher minimum
LEAST_BUMP = 0.5  # of the narrowest lines' width, for the bump's
LEAST_FLOOR = 0.5  # of the line's depth that both minima must reach: else it is a neighbour's gap
REACH = 0.6  # of the line's FWHM on either side in which the minima lie
SPECIES = {"H I", "He I", "Ca II", "Na I"}  # whose cores chromospheres fill


@dataclass(frozen=True)
class _Bump:
    """wave, error: vacuum Angstrom; height, sigma: in units of the continuum; fwhm: Angstrom."""

    wave: float
    error: float
    height: float
    sigma: float
    fwhm: float


def with_cores(spectrum, measurement, features: FeatureTable, claims, velocity: float):
    """(features, claims) with a row of emission for each reversed core, flagged on both rows.

    velocity: of the star, km/s. Its depth is minus the bump's height above the higher of its
    two minima: a lower bound of the emission.
    """
    rows, new, claims = [], [], list(claims)
    for i, claim in enumerate(claims):
        if not _suited(claim, features, i):
            continue
        bump = _bump(spectrum, measurement, (features, i), claim.candidates[0].wave, velocity)
        if bump is not None:
            rows.append((i, bump))
            new.append(_claim(claim, bump))
            claims[i] = replace(claim, flags=f"{claim.flags} {CORE_REVERSAL}".strip())
    if not rows:
        return features, tuple(claims)
    return with_rows(features, claims, _table(features, rows), new)


def _suited(claim: Claim, features, i: int) -> bool:
    return (
        claim.species in SPECIES and claim.origin == "stellar" and claim.probability >= 0.5
        and features.sign[i] > 0 and features.depth[i] >= LEAST_DEPTH and features.fwhm[i] > 0
        and CORE_REVERSAL not in claim.flags
    )  # fmt: skip


def _bump(spectrum, measurement, feature, line: float, velocity: float) -> _Bump | None:
    """The bump nearest to the star's velocity in one line; None where there is none."""
    features, i = feature
    number = int(features.segment[i])
    nodes, s = measurement.segments[number], spectrum.segments[number]
    place, fwhm = line * (1.0 + velocity / C_KM_S), float(features.fwhm[i])
    narrow = float(nodes.width_at(place))
    if fwhm < LEAST_WIDTH * narrow:
        return None
    reach = max(REACH * fwhm, 1.8 * narrow)
    low, high = np.searchsorted(s.wave, [place - reach, place + reach])
    good = ~s.mask[low:high] & np.isfinite(s.flux[low:high])
    if good.sum() < 8 or good.mean() < 0.9:
        return None
    wave = s.wave[low:high][good]
    flux = s.flux[low:high][good] / nodes.continuum_at(wave)
    size = max(int(round(0.6 * narrow / np.median(np.diff(wave)))), 1)
    smooth = _mean(flux, size)
    noise = float(nodes.noise_at(place)) * np.sqrt(nodes.correlation_length / size)
    top = 1.0 - LEAST_FLOOR * float(features.depth[i])
    return _highest(wave, smooth, noise, (place, narrow, top))


def _mean(flux, size: int):
    kernel = np.ones(size) / size
    return np.convolve(np.pad(flux, size // 2, mode="edge"), kernel, mode="valid")[: len(flux)]


def _highest(wave, smooth, noise: float, where) -> _Bump | None:
    """The highest bump near the place; where: (place, narrowest FWHM, level that both minima
    must stay below)."""
    place, narrow, top = where
    inner = np.nonzero((smooth[1:-1] > smooth[:-2]) & (smooth[1:-1] >= smooth[2:]))[0] + 1
    inner = inner[np.abs(wave[inner] / place - 1.0) * C_KM_S < NEAR]
    best = None
    for k in inner:
        floor = max(float(smooth[:k].min()), float(smooth[k + 1 :].min()))
        height = float(smooth[k]) - floor
        if floor > top:
            continue
        if best is None or height > best[0]:
            best = (height, int(k), floor)
    if best is None or best[0] < max(LEAST_HEIGHT, LEAST_SIGMA * noise):
        return None
    height, k, floor = best
    above = smooth > floor + 0.5 * height
    left = k - int(np.argmin(above[: k + 1][::-1])) + 1 if not above[: k + 1].all() else 0
    right = k + int(np.argmin(above[k:])) if not above[k:].all() else len(wave)
    if right - left < 3:
        return None
    part = slice(left, right)
    weight = np.maximum(smooth[part] - floor, 0.0)
    centre = float(np.sum(weight * wave[part]) / np.sum(weight))
    width = float(wave[right - 1] - wave[left])
    if width < LEAST_BUMP * narrow:
        return None
    step = float(np.median(np.diff(wave)))
    # position error of a Gaussian of this height and width (the method's limit)
    error = 0.692 * np.sqrt(width * step) * noise / height
    return _Bump(centre, max(float(error), 0.1 * step), height, noise, width)


def _claim(absorbed: Claim, bump: _Bump) -> Claim:
    """As sure as the absorption around it, and that the bump is no noise."""
    tail = 0.5 * erfc(bump.height / max(bump.sigma, 1e-9) / sqrt(2.0))
    p = absorbed.probability * (1.0 - tail)
    own = absorbed.candidates[0]
    line = Candidate(
        own.species, "stellar", own.wave, own.wave_err, own.e_low, own.loggf,
        float(C_KM_S * (bump.wave / own.wave - 1.0)), p, 1.0, 0.0, float("nan"), own.source,
    )  # fmt: skip
    return Claim(own.species, p, p, 1.0 - p, standing_of(p), origin="stellar",
                 candidates=(line,), flags=CORE_REVERSAL)


def _table(features: FeatureTable, rows) -> FeatureTable:
    at = [i for i, _ in rows]
    bumps = [b for _, b in rows]
    height = np.array([b.height for b in bumps])
    error = np.array([b.sigma for b in bumps])
    fwhm = np.array([b.fwhm for b in bumps])
    n, nothing = len(rows), np.full(len(rows), np.nan)
    return FeatureTable(
        number=np.zeros(n, dtype=int), segment=features.segment[at],
        component=np.zeros(n, dtype=int), sign=-np.ones(n, dtype=int),
        wave=np.array([b.wave for b in bumps]), wave_err=np.array([b.error for b in bumps]),
        significance=height / np.maximum(error, 1e-9), depth=-height, depth_err=error,
        fwhm=fwhm, fwhm_err=nothing, ew=-1064.5 * height * fwhm, ew_err=1064.5 * error * fwhm,
        continuum=features.continuum[at], flags=(CORE,) * n,
    )  # fmt: skip
