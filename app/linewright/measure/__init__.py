"""Noise, pseudo-continuum, features and their profiles."""

from .again import Differences, differences, measure_again
from .anchors import Anchors, add_anchor, anchors_of, move_anchor, refit, remove_anchor
from .by_hand import fit_profile, measure_at
from .core import measure_spectrum
from .features import FeatureTable
from .features_from import features_from_columns
from .limits import EquivalentWidth, equivalent_width, rest_width, upper_limit
from .options import Measurement, MeasureOptions
from .region import RegionFit, choose_region, fit_region

__all__ = [
    "Anchors", "Differences", "EquivalentWidth", "FeatureTable", "MeasureOptions", "Measurement",
    "RegionFit", "add_anchor", "anchors_of", "choose_region", "differences", "equivalent_width",
    "features_from_columns", "fit_profile", "fit_region", "measure_again", "measure_at",
    "measure_spectrum", "move_anchor", "refit", "remove_anchor", "rest_width", "upper_limit",
]
