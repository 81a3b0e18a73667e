"""The flux scale of the context strip: linear, or compressed where bright lines tower."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .extremes import PixelScale
from .geometry import Frame
from .primitives import FAR
from .spikes import top_without_spikes

_TOWERING = 6.0  # bulk ranges above the middle from which linear would hide all else
_ROOM = 0.12  # of the height for what lies below the middle


@dataclass(frozen=True)
class CompressedFrame(Frame):
    """asinh((flux - middle)/knee): linear for faint lines, logarithmic for bright ones."""

    middle: float
    knee: float

    def y(self, flux) -> np.ndarray:
        room = self.bottom - self.top
        top = np.arcsinh((self.flux_high - self.middle) / self.knee)
        share = np.arcsinh((np.asarray(flux) - self.middle) / self.knee) / top
        return np.clip(self.bottom - room * (_ROOM + (1 - _ROOM) * share), -FAR, FAR)


def strip_frame(item, reduced, place: tuple[PixelScale, float, float, float]) -> Frame:
    """Frame for the whole spectrum; place: (scale, top, bottom, device ratio)."""
    scale, top, bottom, ratio = place
    pairs = [part.extremes() for part in reduced]
    values = np.concatenate([v for pair in pairs for v in pair]) if pairs else np.zeros(0)
    if not len(values):
        return Frame(scale, top, bottom, 0.0, 1.0, ratio)
    low, middle, high = np.percentile(values, (2, 50, 90))
    bulk = max(float(high - low), 1e-300)
    most = float(values.max())
    if most > high + bulk:
        level = float(middle), float(high + bulk)
        lines = top_without_spikes(item.parts, reduced, scale, level)
        most = min(most, max(lines, float(values[values <= level[1]].max())))
    if most - middle > _TOWERING * bulk:
        knee = max(bulk / 4, 2e-4 * (most - middle))
        return CompressedFrame(scale, top, bottom, float(low), most, ratio, float(middle), knee)
    least = float(values.min())
    foot = min(least, max(0.0, 0.8 * least))
    return Frame(scale, top, bottom, foot, most if most > foot else foot + 1.0, ratio)
