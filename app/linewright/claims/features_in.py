"""Measured features in the form the engine weighs."""

from __future__ import annotations

import numpy as np

from .problem import FeatureData

SHALLOWEST, DEEPEST = 0.002, 0.98
MIN_FOR_WIDTHS = 40
BROAD = 1.25  # a feature this much broader than its like is a blend
EXCESS_SHARE = 0.25  # of the surplus width: how far its centroid may be off any one line
CROWD = 2.0  # widths
SHARED = ("blend", "wing", "fallback")
UNKNOWN_ERROR = 0.1  # Angstrom, where neither error nor width is known
LN10 = np.log(10.0)


def feature_data(features, overlapping: bool = False) -> FeatureData:
    """FeatureData of a FeatureTable: m = log10(d/(1-d)) of the depth in absorption,
    log10 of |equivalent width x continuum| in emission (line flux up to a constant)."""
    depth = np.clip(features.depth, SHALLOWEST, DEEPEST)
    absorption = np.log10(depth / (1.0 - depth))
    absorption_err = features.depth_err / (LN10 * depth * (1.0 - depth))
    scale = np.where(np.isfinite(features.continuum), np.abs(features.continuum), 1.0)
    flux = np.abs(features.ew) * scale
    with np.errstate(divide="ignore", invalid="ignore"):
        emission = np.where(flux > 0, np.log10(np.where(flux > 0, flux, 1.0)), np.nan)
        emission_err = features.ew_err / (LN10 * np.abs(features.ew))
    line = features.sign > 0
    strength = np.where(line, np.where(np.isfinite(features.depth), absorption, np.nan), emission)
    strength_err = np.where(line, absorption_err, emission_err)
    usual = usual_width(features.wave, features.fwhm, strength, features.sign)
    surplus = np.maximum(features.fwhm**2 - (BROAD * usual) ** 2, 0.0)
    surplus = np.minimum(surplus, usual**2)  # beyond that it is a band, not a blend of two
    return FeatureData(
        features.wave,
        position_error(features),
        features.fwhm,
        features.sign,
        strength,
        np.clip(np.nan_to_num(strength_err, nan=0.0), 0.0, 2.0),
        EXCESS_SHARE * np.sqrt(np.nan_to_num(surplus)),
        features.segment if overlapping else np.zeros(len(features), dtype=int),
        is_crowded(features),
    )


def position_error(features):
    """Centroid errors (Angstrom) fit for use: a fit whose error is missing or exceeds its
    width has failed, but its peak is still inside the line."""
    limit = 0.5 * np.where(features.fwhm > 0, features.fwhm, np.inf)
    error = np.where(features.wave_err > 0, features.wave_err, np.inf)
    best = np.minimum(error, limit)
    return np.where(np.isfinite(best), best, UNKNOWN_ERROR)


def is_crowded(features):
    """True where the nearest other feature is closer than CROWD widths, or a fit was shared."""
    wave = features.wave
    order = np.lexsort((wave, features.segment))
    step = np.abs(np.diff(wave[order]))
    gap = np.full(len(wave), np.inf)
    if len(step):
        gap[order[:-1]] = step
        gap[order[1:]] = np.minimum(gap[order[1:]], step)
    shared = np.array([any(w in flag for w in SHARED) for flag in features.flags], dtype=bool)
    return (gap < CROWD * np.nan_to_num(features.fwhm)) | shared


def usual_width(wave, fwhm, strength, sign):
    """FWHM (Angstrom) usual at each feature's strength: a running median over its like; NaN
    where too few are measured."""
    out = np.full(len(wave), np.nan)
    for s in (1, -1):
        rows = np.nonzero((sign == s) & np.isfinite(fwhm) & np.isfinite(strength) & (fwhm > 0))[0]
        if len(rows) < MIN_FOR_WIDTHS:
            continue
        order = rows[np.argsort(strength[rows], kind="stable")]
        out[order] = _running_median(fwhm[order] / wave[order]) * wave[order]
    return out


def _running_median(values):
    """Median in overlapping windows of about a tenth of the sample, interpolated."""
    size = max(len(values) // 10, 15)
    centres = np.arange(size // 2, len(values), max(size // 2, 1))
    levels = [np.median(values[max(c - size // 2, 0) : c + size // 2 + 1]) for c in centres]
    return np.interp(np.arange(len(values)), centres, levels)
