"""Noise, pseudo-continuum, features and their profiles; each name is imported when used."""

from importlib import import_module

_PLACES = {
    "again": ("Differences", "differences", "measure_again"),
    "anchors": ("Anchors", "add_anchor", "anchors_of", "move_anchor", "refit", "remove_anchor"),
    "by_hand": ("fit_profile", "measure_at"),
    "core": ("measure_spectrum",),
    "features": ("FeatureTable",),
    "features_from": ("features_from_columns",),
    "limits": (
        "EquivalentWidth", "equivalent_width", "rest_width", "upper_limit", "upper_limits",
    ),
    "options": ("Measurement", "MeasureOptions"),
    "region": ("RegionFit", "choose_region", "fit_region"),
}
_WHERE = {name: place for place, names in _PLACES.items() for name in names}

__all__ = sorted(_WHERE)


def __getattr__(name: str):
    if name not in _WHERE:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    value = getattr(import_module(f".{_WHERE[name]}", __name__), name)
    globals()[name] = value
    return value


def __dir__():
    return sorted({*globals(), *__all__})
