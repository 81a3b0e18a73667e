"""The velocity control: a slider whose groove shows the match score over velocity."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QDoubleSpinBox, QHBoxLayout, QLabel, QPushButton, QWidget

from ..theme import LIGHT, Theme
from .velocity_groove import VelocityGroove


class VelocityTrack(QWidget):
    """Slider, numeric field, error text and solve button; velocities in km/s."""

    velocityChanged = Signal(float, bool)  # km/s, final (False while dragging)
    solveRequested = Signal()

    def __init__(self, parent: QWidget | None = None):
        super().__init__(parent)
        self.groove = VelocityGroove(self)
        self.field = QDoubleSpinBox(self)
        self.error = QLabel("", self)
        self.button = QPushButton("Solve", self)
        self._build()
        self.groove.moved.connect(self._from_groove)
        self.field.valueChanged.connect(self._from_field)
        self.button.clicked.connect(lambda: self.solveRequested.emit())
        self.set_range(-500.0, 500.0)
        self.set_theme(LIGHT)

    def _build(self) -> None:
        title = QLabel("velocity", self)
        title.setBuddy(self.field)
        self.field.setDecimals(2)
        self.field.setSingleStep(0.5)
        self.field.setSuffix(" km/s")
        self.field.setKeyboardTracking(False)
        self.field.setAccelerated(True)
        self.field.setAlignment(Qt.AlignmentFlag.AlignRight)
        self.field.setMinimumWidth(118)
        self.field.setAccessibleName("Velocity in km/s")
        self.field.setToolTip("Radial velocity, receding positive: type it or step it")
        metrics = self.error.fontMetrics()
        self.error.setMinimumWidth(metrics.horizontalAdvance("± 00.00 km/s") + 8)
        self.button.setToolTip("Measure, find the velocity and name every feature")
        layout = QHBoxLayout(self)
        layout.setContentsMargins(8, 2, 8, 2)
        layout.setSpacing(8)
        layout.addWidget(title)
        layout.addWidget(self.groove, 1)
        for widget in (self.field, self.error, self.button):
            layout.addWidget(widget)
        self.setFocusProxy(self.groove)

    def set_curve(self, grid, score) -> None:
        """Match score (any unit) over a velocity grid in km/s; empty arrays remove it."""
        self.groove.set_curve(grid, score)

    def set_velocity(
        self, km_s: float, error: float | None = None, declared: bool = True
    ) -> None:
        """Show a velocity without emitting; an undeclared one is marked as a guess."""
        self._show(km_s)
        self.groove.set_declared(declared)
        if not declared:
            self.error.setText("not certain")
            self.error.setToolTip("No velocity stands out: the best match is a guess")
        else:
            known = error is not None and error == error
            self.error.setText(f"± {error:.2f} km/s" if known else "")
            self.error.setToolTip("One standard error" if known else "")

    def velocity(self) -> float:
        """The velocity shown, km/s."""
        return self.groove.velocity

    def set_range(self, low: float, high: float) -> None:
        """Ends of the groove, km/s; ValueError unless low < high."""
        if not low < high:
            raise ValueError("velocity range must ascend")
        blocked = self.field.blockSignals(True)
        self.field.setRange(low, high)
        self.field.blockSignals(blocked)
        self.groove.set_range(low, high)

    def set_rivals(self, rivals) -> None:
        """Other maxima as (km/s, log-likelihood below the best) pairs, shown as marks."""
        self.groove.set_rivals(rivals)

    def set_busy(self, busy: bool) -> None:
        """While a solve runs the button is disabled."""
        self.button.setEnabled(not busy)

    def set_theme(self, theme: Theme) -> None:
        """Change colours at once."""
        self.groove.set_theme(theme)

    def _show(self, km_s: float) -> None:
        if km_s != km_s:
            km_s = 0.0
        blocked = self.field.blockSignals(True)
        self.field.setValue(km_s)
        self.field.blockSignals(blocked)
        self.groove.set_velocity(km_s)

    def _from_groove(self, km_s: float, final: bool) -> None:
        self._by_hand(km_s)
        self.velocityChanged.emit(km_s, final)

    def _from_field(self, km_s: float) -> None:
        self._by_hand(km_s)
        self.velocityChanged.emit(km_s, True)

    def _by_hand(self, km_s: float) -> None:
        self._show(km_s)
        self.groove.set_declared(True)
        self.error.setText("by hand")
        self.error.setToolTip("Set by hand; solve again to measure it")
