"""What a hand can move on the spectrum: fit limits and continuum anchors, in vacuum Angstrom."""

from __future__ import annotations

import numpy as np
from PySide6.QtCore import QObject, Signal

from ...spectra.medium import from_medium, to_medium
from .anchor_points import AnchorPoints
from .fit_limits import FitLimits


class HandMarks(QObject):
    """Belongs to a SpectrumView; turns its own-medium wavelengths into vacuum ones."""

    limitsDragged = Signal(float, float, bool)  # low, high, let go
    limitsTouched = Signal()
    anchorActed = Signal(str, int, float, float)  # what, index, wavelength, flux

    def __init__(self, view):
        super().__init__(view)
        self._plot, self._state = view.plot, view.state
        self.limits = FitLimits(self._limits_dragged, self.limitsTouched.emit)
        self.anchors = AnchorPoints(self._anchor_acted)
        self._plot.grips = [self.limits, self.anchors]

    def _vacuum(self, wave: float) -> float:
        return float(from_medium(wave, self._state.medium))

    def own(self, wave):
        """Own-medium wavelengths of vacuum ones."""
        return to_medium(np.asarray(wave, dtype=float), self._state.medium)

    def _limits_dragged(self, low: float, high: float, final: bool) -> None:
        self.limitsDragged.emit(self._vacuum(low), self._vacuum(high), final)

    def _anchor_acted(self, what: str, index: int, wave: float, flux: float) -> None:
        self.anchorActed.emit(what, index, self._vacuum(wave) if wave else 0.0, flux)

    def show_limits(self, limits, inner=(), words: str = "") -> None:
        """Brackets at ``limits`` that enclose the wavelengths ``inner``; None removes them."""
        own = None if limits is None else tuple(float(x) for x in self.own(limits))
        inner = self.own(inner) if len(inner) else np.zeros(1)
        shown = own, (float(np.min(inner)), float(np.max(inner))), words
        if shown != (self.limits.limits, self.limits.inner, self.limits.words):
            self.limits.limits, self.limits.inner, self.limits.words = shown
            self._plot.update()

    def say(self, words: str) -> None:
        """Words on the fit under the brackets."""
        self.limits.words = words
        self._plot.update()

    def show_anchors(self, wave, value, chosen: int | None = None, shown: bool = True) -> None:
        """Diamonds on the continuum; shown False leaves the mode."""
        points = self.anchors
        points.wave, points.value = self.own(wave), np.asarray(value, dtype=float)
        points.chosen, points.shown = chosen, shown
        self._plot.update()

    def show_level(self, segment: int, wave, value) -> None:
        """The continuum of one segment as it would be, while an anchor is dragged."""
        if segment < len(self._plot.continuum):
            self._plot.continuum[segment] = (self.own(wave), np.asarray(value, dtype=float))
            self._plot.update()
