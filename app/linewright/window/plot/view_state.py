"""What part of the spectrum is shown: the one state the lanes of the view share."""

from __future__ import annotations

from PySide6.QtCore import QObject, Signal

from ..theme import LIGHT, Theme

# No view is narrower than this share of its wavelength (a tenth of a km/s or so).
NARROWEST = 4e-7
MARGIN = 0.02


class ViewState(QObject):
    """Wavelength range, flux range, velocity and theme; ``changed`` marks lanes dirty.

    low, high: own-medium Angstrom; full: range of the spectrum (None without one);
    flux: (low, high) fixed by the user, or None while automatic
    """

    changed = Signal()
    moved = Signal(float, float)

    def __init__(self, parent: QObject | None = None):
        super().__init__(parent)
        self.low, self.high = 4000.0, 7000.0
        self.full: tuple[float, float] | None = None
        self.medium = "unknown"
        self.flux: tuple[float, float] | None = None
        self.velocity = 0.0
        self.theme: Theme = LIGHT

    def set_full(self, full: tuple[float, float] | None, medium: str) -> None:
        """A new spectrum: show it whole with automatic flux."""
        self.full, self.medium, self.flux = full, medium, None
        self.zoom_all()
        self.changed.emit()

    def set_view(self, low: float, high: float) -> None:
        """Show low to high, kept inside a margin of the spectrum."""
        low, high = self._confined(*sorted((float(low), float(high))))
        if (low, high) != (self.low, self.high):
            self.low, self.high = low, high
            self.changed.emit()
            self.moved.emit(low, high)

    def _confined(self, low: float, high: float) -> tuple[float, float]:
        width = max(high - low, NARROWEST * abs(high), 1e-6)
        middle = 0.5 * (low + high)
        if self.full is not None:
            pad = MARGIN * (self.full[1] - self.full[0])
            floor, ceiling = self.full[0] - pad, self.full[1] + pad
            width = min(width, ceiling - floor)
            middle = min(max(middle, floor + width / 2), ceiling - width / 2)
        return middle - width / 2, middle + width / 2

    def zoom_all(self) -> None:
        if self.full is not None:
            pad = 0.005 * (self.full[1] - self.full[0])
            self.set_view(self.full[0] - pad, self.full[1] + pad)

    def step(self, fraction: float) -> None:
        shift = fraction * (self.high - self.low)
        self.set_view(self.low + shift, self.high + shift)

    def zoom(self, factor: float, about: float | None = None) -> None:
        """Magnify by ``factor`` keeping wavelength ``about`` where it is."""
        about = 0.5 * (self.low + self.high) if about is None else about
        self.set_view(about - (about - self.low) / factor, about + (self.high - about) / factor)

    def set_flux(self, flux: tuple[float, float] | None) -> None:
        if flux != self.flux:
            self.flux = flux
            self.changed.emit()

    def set_theme(self, theme: Theme) -> None:
        self.theme = theme
        self.changed.emit()
