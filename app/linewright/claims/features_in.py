"""Measured features in the form the engine weighs."""

from __future__ import annotations

import numpy as np

from .problem import FeatureData

SHALLOWEST, DEEPEST = 0.002, 0.98
MIN_FOR_WIDTHS = 40
BROAD = 1.25  # a feature this much broader than its like is a blend
EXCESS_SHARE = 0.25  # of the surplus width: how far its centroid may be off any one line
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
    # A fit whose error exceeds its width has failed; its peak is still inside the line.
    failed = 0.5 * np.where(features.fwhm > 0, features.fwhm, np.inf)
    return FeatureData(
        features.wave,
        np.minimum(features.wave_err, failed),
        features.fwhm,
        features.sign,
        strength,
        np.clip(np.nan_to_num(strength_err, nan=0.0), 0.0, 2.0),
        excess_error(features.wave, features.fwhm, strength, features.sign),
        features.segment if overlapping else np.zeros(len(features), dtype=int),
    )


def excess_error(wave, fwhm, strength, sign):
    """Position error (Angstrom) of features too broad for their strength; 0 for the rest.

    The width expected at a strength is the running median over features of like strength.
    """
    out = np.zeros(len(wave))
    for s in (1, -1):
        rows = np.nonzero((sign == s) & np.isfinite(fwhm) & np.isfinite(strength) & (fwhm > 0))[0]
        if len(rows) < MIN_FOR_WIDTHS:
            continue
        order = rows[np.argsort(strength[rows], kind="stable")]
        relative = fwhm[order] / wave[order]
        expected = _running_median(relative) * wave[order]
        surplus = np.maximum(fwhm[order] ** 2 - (BROAD * expected) ** 2, 0.0)
        out[order] = EXCESS_SHARE * np.sqrt(surplus)
    return out


def _running_median(values):
    """Median in overlapping windows of about a tenth of the sample, interpolated."""
    size = max(len(values) // 10, 15)
    centres = np.arange(size // 2, len(values), max(size // 2, 1))
    levels = [np.median(values[max(c - size // 2, 0) : c + size // 2 + 1]) for c in centres]
    return np.interp(np.arange(len(values)), centres, levels)
