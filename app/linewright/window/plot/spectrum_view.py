"""The spectrum with its context strip above and the Rake below, on one wavelength axis."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QWidget

from ...session.model import Session
from ...spectra.spectrum import Spectrum
from ..theme import Theme
from .rake_data import RakeData


class SpectrumView(QWidget):
    """Shows one spectrum; wavelengths on the axis are in the spectrum's own medium."""

    featureClicked = Signal(int)  # permanent feature number
    pickRequested = Signal(float)  # vacuum Angstrom of a click on bare spectrum
    viewChanged = Signal(float, float)  # own-medium Angstrom

    def set_spectrum(self, spectrum: Spectrum | None) -> None:
        """Show a spectrum whole; None empties the view."""
        raise NotImplementedError

    def set_session(self, session: Session | None) -> None:
        """Ticks, claim labels and continuum of a session; None removes them."""
        raise NotImplementedError

    def set_rake(self, rake: RakeData) -> None:
        """Replace the teeth; the velocity stays."""
        raise NotImplementedError

    def set_velocity(self, km_s: float) -> None:
        """Slide the rake as one to a velocity in km/s (receding positive)."""
        raise NotImplementedError

    def select(self, number: int | None) -> None:
        """Highlight a feature and bring it into view when it is outside; None clears."""
        raise NotImplementedError

    def show_profile(self, wave, flux) -> None:
        """Fitted profile over the spectrum: vacuum Angstrom and flux; None, None removes it."""
        raise NotImplementedError

    def set_uncertainty_shown(self, shown: bool) -> None:
        """Show or hide the band of one sigma about the flux."""
        raise NotImplementedError

    def set_view(self, low: float, high: float) -> None:
        """Show low to high, own-medium Angstrom (kept inside a margin of the spectrum)."""
        raise NotImplementedError

    def view(self) -> tuple[float, float]:
        """(low, high) shown, own-medium Angstrom."""
        raise NotImplementedError

    def set_flux_range(self, low: float, high: float) -> None:
        """Fix the flux axis; ``auto_flux`` gives it back to the automatic scale."""
        raise NotImplementedError

    def auto_flux(self) -> None:
        """Scale the flux axis to what is in view, now and on every change of view."""
        raise NotImplementedError

    def zoom_all(self) -> None:
        """Show the whole spectrum."""
        raise NotImplementedError

    def step(self, fraction: float) -> None:
        """Move the view by a fraction of its width (negative: to shorter wavelengths)."""
        raise NotImplementedError

    def zoom(self, factor: float) -> None:
        """Magnify about the middle of the view (or the selection when in view)."""
        raise NotImplementedError

    def set_theme(self, theme: Theme) -> None:
        """Change colours at once."""
        raise NotImplementedError
