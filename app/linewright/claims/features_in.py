"""Measured features in the form the engine weighs."""

from __future__ import annotations

import numpy as np

from .problem import FeatureData

SHALLOWEST, DEEPEST = 0.002, 0.98
LN10 = np.log(10.0)


def feature_data(features) -> FeatureData:
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
    return FeatureData(
        features.wave,
        features.wave_err,
        features.fwhm,
        features.sign,
        strength,
        np.clip(np.nan_to_num(strength_err, nan=0.0), 0.0, 2.0),
    )
