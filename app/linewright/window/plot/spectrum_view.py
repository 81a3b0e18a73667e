"""The spectrum with its context strip above and the Rake below, on one wavelength axis."""

from __future__ import annotations

import numpy as np
from PySide6.QtCore import QPoint, QRect, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QVBoxLayout, QWidget

from ...session.model import Session
from ...spectra.medium import from_medium, to_medium
from ...spectra.spectrum import Spectrum
from ..theme import Theme
from .context_strip import HEIGHT as STRIP
from .context_strip import LOWEST as LOW_STRIP
from .context_strip import ContextStrip
from .feature_marks import marks_after
from .hand_marks import HandMarks
from .rake_data import RakeData
from .rake_lane import RakeLane
from .spectrum_item import SpectrumItem
from .spectrum_plot import SpectrumPlot
from .view_keys import key_act
from .view_state import ViewState
from .wavelength_axis import WavelengthAxis


class SpectrumView(QWidget):
    """Shows one spectrum; wavelengths on the axis are in the spectrum's own medium.

    Keys: see ``view_keys``.
    """

    featureClicked = Signal(int)  # permanent feature number
    pickRequested = Signal(float)  # vacuum Angstrom of a click on bare spectrum
    viewChanged = Signal(float, float)  # own-medium Angstrom

    def __init__(self, parent: QWidget | None = None):
        super().__init__(parent)
        self.state = ViewState(self)
        self.strip = ContextStrip(self.state, self)
        self.plot = SpectrumPlot(self.state, self)
        self.rake = RakeLane(self.state, self)
        self.axis = WavelengthAxis(self.state, self)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(0)
        for lane, stretch in ((self.strip, 0), (self.plot, 1), (self.rake, 0), (self.axis, 0)):
            layout.addWidget(lane, stretch)
        self.setFocusProxy(self.plot)
        self.state.moved.connect(self.viewChanged)
        self.plot.featureClicked.connect(self.featureClicked)
        self.plot.pickRequested.connect(self._pick)
        self.hand = HandMarks(self)
        self._continuum: tuple = ((), "")

    def resizeEvent(self, event) -> None:
        """On a low window strip and Rake leave the spectrum its share."""
        super().resizeEvent(event)
        self.strip.setFixedHeight(int(np.clip(self.height() // 8, LOW_STRIP, STRIP)))
        self.rake.set_pitch(self.height() // 25)

    @staticmethod
    def prepare(spectrum: Spectrum) -> SpectrumItem:
        """The slow part of ``set_spectrum`` for millions of samples; safe in a worker."""
        return SpectrumItem(spectrum).prepared()

    def set_spectrum(
        self, spectrum: Spectrum | None, prepared: SpectrumItem | None = None
    ) -> None:
        """Show a spectrum whole; None empties the view. The session is removed.

        prepared: what ``prepare`` made of this spectrum, where it was called before.
        """
        item = prepared
        if item is None and spectrum is not None:
            item = SpectrumItem(spectrum)
        self.plot.set_item(item, "" if spectrum is None else spectrum.flux_unit)
        self.strip.set_item(item)
        if spectrum is None:
            self.state.set_full(None, "unknown")
        else:
            self.state.set_full(spectrum.own_range(), spectrum.medium)
        self.set_session(None)

    def set_session(self, session: Session | None) -> None:
        """Ticks, claim labels and continuum of a session; None removes them.

        The selection stays where the session still has that feature.
        """
        medium = self.state.medium
        marks, rows = marks_after(self.plot.labels.marks, session, medium)
        self.plot.labels.set_marks(marks, rows)
        if marks.row_of(self.plot.labels.selected) is None:
            self.plot.labels.selected = None
        self._show_continuum(() if session is None else session.continuum, medium)
        if rows is None:
            self.strip.set_marks(marks)
        self.plot.update()

    def _show_continuum(self, nodes, medium: str) -> None:
        if (nodes, medium) != self._continuum:
            self._continuum = (nodes, medium)
            self.plot.continuum = [
                (to_medium(n.wave, medium), np.asarray(n.value, dtype=float)) for n in nodes
            ]

    def set_rake(self, rake: RakeData) -> None:
        """Replace the teeth; the velocity stays."""
        self.rake.set_rake(rake)

    def set_velocity(self, km_s: float) -> None:
        """Slide the rake as one to a velocity in km/s (receding positive)."""
        self.state.velocity = float(km_s)
        self.rake.slide()

    def select(self, number: int | None) -> None:
        """Highlight a feature and bring it into view when it is outside; None clears."""
        labels = self.plot.labels
        row = labels.marks.row_of(number)
        labels.selected = None if row is None else number
        self.plot.pointed = None
        if row is not None:
            wave = float(labels.marks.wave[row])
            low, high = self.view()
            if not low <= wave <= high:
                half = 0.5 * (high - low)
                self.state.set_view(wave - half, wave + half)
        self.plot.update()

    def show_profile(self, wave, flux) -> None:
        """Fitted profile over the spectrum: vacuum Angstrom and flux; None, None removes it."""
        if wave is None or flux is None or len(wave) == 0:
            self.plot.profile = None
        else:
            own = to_medium(np.asarray(wave, dtype=float), self.state.medium)
            self.plot.profile = (own, np.asarray(flux, dtype=float))
        self.plot.update()

    def set_uncertainty_shown(self, shown: bool) -> None:
        """Show or hide the band of one sigma about the flux."""
        self.plot.uncertainty_shown = bool(shown)
        self.plot.update()

    def set_view(self, low: float, high: float) -> None:
        """Show low to high, own-medium Angstrom (kept inside a margin of the spectrum)."""
        self.state.set_view(low, high)

    def view(self) -> tuple[float, float]:
        """(low, high) shown, own-medium Angstrom."""
        return self.state.low, self.state.high

    def set_flux_range(self, low: float, high: float) -> None:
        """Fix the flux axis; ``auto_flux`` gives it back to the automatic scale.

        Raises ValueError unless low < high.
        """
        if not low < high:
            raise ValueError("flux range must ascend")
        self.state.set_flux((float(low), float(high)))

    def auto_flux(self) -> None:
        """Scale the flux axis to what is in view, now and on every change of view."""
        self.plot.flux_shown = (0.0, 0.0)
        self.state.set_flux(None)
        self.plot.update()

    def zoom_all(self) -> None:
        """Show the whole spectrum."""
        self.state.zoom_all()

    def step(self, fraction: float) -> None:
        """Move the view by a fraction of its width (negative: to shorter wavelengths)."""
        self.state.step(fraction)

    def zoom(self, factor: float) -> None:
        """Magnify about the middle of the view (or the selection when in view)."""
        labels = self.plot.labels
        row = labels.marks.row_of(labels.selected)
        wave = None if row is None else float(labels.marks.wave[row])
        inside = wave is not None and self.state.low < wave < self.state.high
        self.state.zoom(factor, wave if inside else None)

    def set_theme(self, theme: Theme) -> None:
        """Change colours at once."""
        self.state.set_theme(theme)

    def step_feature(self, direction: int) -> None:
        """Click the next feature to the right (+1) or left (-1) of the selection or middle."""
        marks = self.plot.labels.marks
        row = marks.row_of(self.plot.labels.selected)
        if row is None:
            at = np.searchsorted(marks.wave, 0.5 * sum(self.view()))
            row = int(at) - 1 if direction > 0 else int(at)
        row += direction
        if 0 <= row < len(marks):
            number = int(marks.number[row])
            self.select(number)
            self.featureClicked.emit(number)

    def feature_rect(self, number: int) -> QRect:
        """Where a feature's flux column is in this widget; empty when out of view."""
        marks = self.plot.labels.marks
        row = marks.row_of(number)
        if row is None or not self.state.low <= marks.wave[row] <= self.state.high:
            return QRect()
        x = int(self.plot.scale().pixels(marks.wave[row]))
        top = int(self.plot.labels.height)
        corner = self.plot.mapTo(self, QPoint(x - 3, top))
        return QRect(corner.x(), corner.y(), 7, self.plot.height() - top)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        act = key_act(self, event)
        if act is None:
            super().keyPressEvent(event)
        else:
            act()
            event.accept()

    def show_pointed(self, wave: float | None) -> None:
        """Mark a clicked place (vacuum Angstrom) while it is being measured; None removes it."""
        self.plot.pointed = None if wave is None else float(to_medium(wave, self.state.medium))
        self.plot.update()

    def _pick(self, own_wave: float) -> None:
        self.pickRequested.emit(float(from_medium(own_wave, self.state.medium)))

