"""Drawing widgets: spectrum with context strip and Rake, velocity track, sibling strips.

Names are loaded on first use, so that the theme can use the families without Qt widgets.
"""

from importlib import import_module

_HOMES = {
    "RakeData": "rake_data",
    "SiblingStrips": "sibling_strips",
    "SpectrumView": "spectrum_view",
    "Strip": "sibling_strips",
    "VelocityTrack": "velocity_track",
}
__all__ = sorted(_HOMES)


def __getattr__(name: str):
    if name not in _HOMES:
        raise AttributeError(name)
    return getattr(import_module(f".{_HOMES[name]}", __name__), name)
