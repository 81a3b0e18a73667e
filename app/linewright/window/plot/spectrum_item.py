"""The spectrum itself, drawn exactly: the one layer that touches every sample."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from PySide6.QtGui import QColor, QPainter, QPen

from ...spectra.medium import to_medium
from ...spectra.spectrum import Segment, Spectrum
from .extremes import PYRAMID_ABOVE, Columns, Extremes, PixelScale
from .geometry import Frame
from .primitives import draw_lines, draw_polyline
from .spikes import top_without_spikes

# Up to this many samples per pixel the samples themselves are drawn.
RAW_PER_PIXEL = 4
# A visible extreme farther than this many bulk ranges from the bulk does not set the scale.
OUTLIER_RANGES = 40.0


@dataclass(frozen=True)
class Reduced:
    """One segment in one view: its columns, or (where sparse) its sample runs (px, flux)."""

    columns: Columns | None
    runs: tuple[tuple[np.ndarray, np.ndarray], ...]

    @property
    def smooth(self) -> bool:
        """Few samples are drawn antialiased; columns are on the pixels already."""
        return self.columns is None

    def extremes(self) -> tuple[np.ndarray, np.ndarray]:
        """(lows, highs) in flux units, NaN-free."""
        if self.columns is not None:
            low, high = self.columns.low, self.columns.high
            return low[np.isfinite(low)], high[np.isfinite(high)]
        flux = np.concatenate([run[1] for run in self.runs]) if self.runs else np.zeros(0)
        return flux, flux


def _drawable(segment: Segment) -> np.ndarray:
    return np.where(np.asarray(segment.mask, dtype=bool), np.nan, segment.flux)


class SpectrumItem:
    """Segments of one spectrum in own-medium wavelengths, reduced and drawn per paint."""

    def __init__(self, spectrum: Spectrum):
        waves = [to_medium(s.wave, spectrum.medium) for s in spectrum.segments]
        self.parts = [
            Extremes(wave, _drawable(s)) for wave, s in zip(waves, spectrum.segments)
        ]
        self._segments = spectrum.segments
        self._bands: list[tuple[Extremes, Extremes] | None] | None = None

    def prepared(self) -> SpectrumItem:
        """Itself, with the pyramids that long segments will need."""
        for part in self.parts:
            if len(part.x) > PYRAMID_ABOVE:
                part.build_pyramid()
        return self

    @property
    def samples(self) -> int:
        return sum(len(part.x) for part in self.parts)

    @property
    def has_uncertainty(self) -> bool:
        return any(s.uncertainty is not None for s in self._segments)

    def reduce(self, scale: PixelScale) -> list[Reduced]:
        """What each segment in view must draw."""
        return [reduce_part(part, scale) for part in self.parts]

    def flux_limits(
        self, reduced: list[Reduced], scale: PixelScale
    ) -> tuple[float, float] | None:
        """(lowest, highest) flux in view; None with nothing in view.

        Spikes of one sample are left out, as is what lies more than OUTLIER_RANGES bulk
        ranges from the median.
        """
        pairs = [part.extremes() for part in reduced]
        lows = np.concatenate([pair[0] for pair in pairs])
        highs = np.concatenate([pair[1] for pair in pairs])
        if len(lows) == 0:
            return None
        values = np.concatenate([lows, highs])
        order = [int(share * (len(values) - 1)) for share in (0.02, 0.5, 0.98)]
        bottom, middle, top = np.partition(values, order)[order].tolist()
        bulk = max(top - bottom, 1e-300)
        reach, most = OUTLIER_RANGES * bulk, float(highs.max())
        if most > top + bulk:
            lines = top_without_spikes(self.parts, reduced, scale, (middle, top + bulk))
            most = min(most, max(lines, float(highs[highs <= top + bulk].max())))
        return max(float(lows.min()), middle - reach), min(most, middle + reach)

    def paint(self, painter: QPainter, frame: Frame, reduced: list[Reduced], ink: str) -> None:
        """Draw with a pen of one device pixel; the painter is in device pixels."""
        painter.setPen(QPen(QColor(ink), 0))
        for part in reduced:
            painter.setRenderHint(QPainter.RenderHint.Antialiasing, part.smooth)
            if part.columns is not None:
                draw_lines(painter, column_lines(part.columns, frame))
            for pixels, flux in part.runs:
                draw_run(painter, pixels, frame.y(flux))
        painter.setRenderHint(QPainter.RenderHint.Antialiasing, False)

    def paint_uncertainty(self, painter: QPainter, frame: Frame, colour: QColor) -> None:
        """One vertical line per column from the lowest flux - sigma to the highest + sigma."""
        painter.setPen(QPen(colour, 0))
        for band in self._uncertainty_bands():
            if band is None:
                continue
            below, above = (part.columns(frame.scale) for part in band)
            x = below.column + 0.5
            lines = np.stack([x, frame.y(below.low), x, frame.y(above.high)], axis=1)
            draw_lines(painter, lines[np.isfinite(lines).all(axis=1)])

    def _uncertainty_bands(self):
        if self._bands is None:
            self._bands = [
                None
                if s.uncertainty is None
                else (Extremes(p.x, p.y - s.uncertainty), Extremes(p.x, p.y + s.uncertainty))
                for p, s in zip(self.parts, self._segments)
            ]
        return self._bands


def reduce_part(part: Extremes, scale: PixelScale, raw: float = RAW_PER_PIXEL) -> Reduced:
    """Samples themselves up to ``raw`` per pixel, else columns."""
    start, stop = part.visible(scale.low, scale.high)
    count = stop - start
    if count > raw * scale.width:
        return Reduced(part.columns(scale), ())
    pixels = np.clip(scale.pixels(part.x[start:stop]), -3e4, 3e4)
    flux = part.y[start:stop]
    runs = tuple(
        (pixels[a - start : b - start], flux[a - start : b - start])
        for a, b in part.runs(start, stop)
    )
    return Reduced(None, runs)


def column_lines(columns: Columns, frame: Frame) -> np.ndarray:
    """Line rows (x1, y1, x2, y2): one upright per column and what joins it to the one before.

    Neighbouring columns whose uprights share a height touch already: no line is needed.
    """
    x = columns.column + 0.5
    high = frame.y(columns.high)
    # A column of one value would be a line of no length, which nothing draws.
    low = np.maximum(frame.y(columns.low), high + 0.5)
    upright = np.stack([x, low, x, high], axis=1)
    touch = (np.diff(columns.column) == 1) & (low[1:] >= high[:-1]) & (low[:-1] >= high[1:])
    apart = columns.joined.copy()
    apart[1:] &= ~touch
    where = np.nonzero(apart)[0]
    first, last = frame.y(columns.first[where]), frame.y(columns.last[where - 1])
    across = np.stack([x[where - 1], last, x[where], first], axis=1)
    return np.concatenate([upright[np.isfinite(low)], across])


def draw_run(painter: QPainter, x: np.ndarray, y: np.ndarray) -> None:
    if len(x) == 1:
        draw_lines(painter, np.array([[x[0] - 0.5, y[0], x[0] + 0.5, y[0]]]))
    else:
        draw_polyline(painter, x, y)
