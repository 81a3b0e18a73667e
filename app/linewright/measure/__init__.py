"""Noise, pseudo-continuum, features and their profiles."""

from .by_hand import fit_profile, measure_at
from .core import measure_spectrum
from .features import FeatureTable
from .features_from import features_from_columns
from .options import Measurement, MeasureOptions

__all__ = [
    "FeatureTable", "MeasureOptions", "Measurement", "features_from_columns", "fit_profile",
    "measure_at", "measure_spectrum",
]
