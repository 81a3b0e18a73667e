"""Drawing widgets: spectrum with context strip and Rake, velocity track, sibling strips."""

from .rake_data import RakeData
from .sibling_strips import SiblingStrips, Strip
from .spectrum_view import SpectrumView
from .velocity_track import VelocityTrack

__all__ = ["RakeData", "SiblingStrips", "SpectrumView", "Strip", "VelocityTrack"]
