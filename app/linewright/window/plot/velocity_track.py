"""The velocity control: a slider whose groove shows the match score over velocity."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QWidget

from ..theme import Theme


class VelocityTrack(QWidget):
    """Slider, numeric field, error text and solve button; velocities in km/s."""

    velocityChanged = Signal(float, bool)  # km/s, final (False while dragging)
    solveRequested = Signal()

    def set_curve(self, grid, score) -> None:
        """Match score (any unit) over a velocity grid in km/s; empty arrays remove it."""
        raise NotImplementedError

    def set_velocity(
        self, km_s: float, error: float | None = None, declared: bool = True
    ) -> None:
        """Show a velocity without emitting; an undeclared one is marked as a guess."""
        raise NotImplementedError

    def velocity(self) -> float:
        """The velocity shown, km/s."""
        raise NotImplementedError

    def set_range(self, low: float, high: float) -> None:
        """Ends of the groove, km/s; ValueError unless low < high."""
        raise NotImplementedError

    def set_rivals(self, rivals) -> None:
        """Other maxima as (km/s, log-likelihood below the best) pairs, shown as marks."""
        raise NotImplementedError

    def set_busy(self, busy: bool) -> None:
        """While a solve runs the button is disabled."""
        raise NotImplementedError

    def set_theme(self, theme: Theme) -> None:
        """Change colours at once."""
        raise NotImplementedError
