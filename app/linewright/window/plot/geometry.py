"""Margins, device pixels and axis ticks shared by the drawing widgets."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from PySide6.QtGui import QPainter

from .extremes import PixelScale
from .primitives import FAR

# Logical pixels left and right of every lane that shares the wavelength axis.
LEFT = 66
RIGHT = 12


@dataclass(frozen=True)
class Frame:
    """Where data fall on device pixels in one paint.

    scale: wavelength to x; top, bottom: of the flux area (device pixels, bottom larger);
    flux_low, flux_high: flux at bottom and top; ratio: device pixels per logical pixel
    """

    scale: PixelScale
    top: float
    bottom: float
    flux_low: float
    flux_high: float
    ratio: float

    def y(self, flux) -> np.ndarray:
        """Device-pixel height of flux, kept within what the raster engine can draw."""
        slope = (self.top - self.bottom) / (self.flux_high - self.flux_low)
        return np.clip(self.bottom + (flux - self.flux_low) * slope, -FAR, FAR)


def to_device(painter: QPainter) -> tuple[float, float, float]:
    """Make the painter draw in device pixels; returns the widget's (x, y, ratio) there."""
    transform = painter.deviceTransform()
    inverse, _ = transform.inverted()
    painter.setWorldTransform(inverse * painter.worldTransform())
    return transform.dx(), transform.dy(), transform.m11()


def lane_scale(view: tuple[float, float], width: int, place: tuple[float, float]) -> PixelScale:
    """Wavelength scale of a lane ``width`` logical pixels wide; place: (device x, ratio)."""
    offset, ratio = place
    inner = max(width - LEFT - RIGHT, 1) * ratio
    return PixelScale(view[0], view[1], offset + LEFT * ratio, inner)


def nice_ticks(low: float, high: float, most: int) -> tuple[np.ndarray, np.ndarray, int]:
    """(major, minor, decimals): at most about ``most`` major ticks at 1, 2 or 5 x 10^n."""
    span = (high - low) / max(most, 1)
    if not np.isfinite(span) or span <= 0:
        return np.zeros(0), np.zeros(0), 0
    power = 10.0 ** np.floor(np.log10(span))
    factor = next(f for f in (1, 2, 5, 10) if f * power >= span * (1 - 1e-9))
    step = factor * power
    divisions = {1: 5, 2: 4, 5: 5, 10: 5}[factor]
    minor = step / divisions * np.arange(
        np.ceil(low / step * divisions), np.floor(high / step * divisions) + 1
    )
    major = step * np.arange(np.ceil(low / step), np.floor(high / step) + 1)
    return major, minor, max(0, int(-np.floor(np.log10(step) + 1e-9)))
