"""The main lane: spectrum, continuum, fitted profile, ticks and claim labels."""

from __future__ import annotations

import numpy as np
from PySide6.QtCore import QPointF, QRectF, Qt, QTimer, Signal
from PySide6.QtGui import QColor, QPainter, QPen

from .caret import outline, turning_points
from .extremes import PixelScale
from .flux_axis import draw_flux_axis
from .geometry import LEFT, RIGHT, Frame, to_device
from .handled_lane import HandledLane
from .label_layer import LabelLayer
from .off_scale import draw_off_scale
from .primitives import draw_lines, draw_polyline
from .spectrum_item import Reduced, SpectrumItem

_CLICK_REACH = 5.0
_FOOT = 6
_LOWEST = 12
_HEADROOM = 0.06
_CALM_SHARE = 0.6


class SpectrumPlot(HandledLane):
    """Draws in one paint per change; ``frame`` says where things are after a paint."""

    featureClicked = Signal(int)
    pickRequested = Signal(float)  # own-medium Angstrom

    def __init__(self, state, parent=None):
        super().__init__(state, parent)
        self.item: SpectrumItem | None = None
        self.labels = LabelLayer(self.font())
        self.continuum: list[tuple[np.ndarray, np.ndarray]] = []
        self.profile: tuple[np.ndarray, np.ndarray] | None = None
        self.uncertainty_shown = False
        self.flux_unit = ""
        self.flux_shown = (0.0, 1.0)
        self.caret: float | None = None
        self.pointed: float | None = None  # clicked and not yet measured
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setMinimumHeight(120)
        self.setAccessibleName("Spectrum")

    def set_item(self, item: SpectrumItem | None, flux_unit: str) -> None:
        self.item, self.flux_unit = item, flux_unit
        self.profile, self.continuum, self.caret = None, [], None
        self.flux_shown = (0.0, 0.0)
        self.update()

    def reduced(self) -> list[Reduced]:
        """What is in view now, on logical pixels (for keys; paints reduce on their own)."""
        return self.item.reduce(self.scale()) if self.item else []

    def draw(self, painter: QPainter) -> None:
        self.labels.fit(self.height())
        if self.item is None:
            self._draw_empty(painter)
            return
        top = self.labels.height
        if self.height() - _FOOT - top < _LOWEST:
            return
        painter.save()
        x, y, ratio = to_device(painter)
        scale = self.scale((x, ratio))
        reduced = self.item.reduce(scale)
        low, high = self._flux_range(reduced, scale)
        frame = Frame(scale, y + top * ratio, y + (self.height() - _FOOT) * ratio, low, high, ratio)
        painter.setClipRect(
            QRectF(scale.origin, frame.top, scale.width, frame.bottom - frame.top + _FOOT * ratio)
        )
        self._draw_data(painter, frame, reduced)
        painter.restore()
        painter.save()
        painter.setClipRect(QRectF(LEFT - 8, 0, self.width() - LEFT - RIGHT + 16, self.height()))
        self.labels.paint(painter, self.scale(), self.state.theme)
        painter.restore()
        if self.labels.unfinished:
            QTimer.singleShot(0, self.update)
        draw_flux_axis(painter, self.rect(), (top, self.height() - _FOOT), self)

    def _draw_empty(self, painter: QPainter) -> None:
        painter.setPen(QColor(self.state.theme.muted))
        painter.drawText(
            self.rect(),
            int(Qt.AlignmentFlag.AlignCenter),
            "No spectrum: open a file, or drop one here",
        )

    def _draw_data(self, painter: QPainter, frame: Frame, reduced: list[Reduced]) -> None:
        theme = self.state.theme
        self._draw_selection(painter, frame)
        if self.uncertainty_shown:
            self.item.paint_uncertainty(painter, frame, QColor(theme.faint))
        self._draw_continuum(painter, frame)
        self.item.paint(painter, frame, reduced, theme.ink)
        draw_off_scale(painter, frame, reduced, theme.caution)
        if self.profile is not None:
            painter.setRenderHint(QPainter.RenderHint.Antialiasing, True)
            painter.setPen(QPen(QColor(theme.profile), 2 * frame.ratio))
            wave, flux = self.profile
            pixels = np.clip(frame.scale.pixels(wave), -3e4, 3e4)
            draw_polyline(painter, pixels, frame.y(flux))
            painter.setRenderHint(QPainter.RenderHint.Antialiasing, False)
        if self.pointed is not None:
            self._draw_upright(painter, frame, self.pointed, QColor(theme.accent))
        if self.caret is not None:
            self._draw_upright(painter, frame, self.caret, QColor(theme.profile))
        for grip in self.grips:
            grip.paint(painter, frame, theme)

    def _draw_selection(self, painter: QPainter, frame: Frame) -> None:
        marks = self.labels.marks
        row = marks.row_of(self.labels.selected)
        if row is not None:
            x = float(frame.scale.pixels(marks.wave[row]))
            half = 4 * frame.ratio
            shade = QColor(self.state.theme.accent)
            shade.setAlpha(46)
            painter.fillRect(QRectF(x - half, frame.top, 2 * half, 1e4), shade)

    def _draw_upright(self, painter: QPainter, frame: Frame, wave: float, colour) -> None:
        x = np.floor(frame.scale.pixels(wave)) + 0.5
        painter.setPen(QPen(colour, 0, Qt.PenStyle.DashLine))
        draw_lines(painter, np.array([[x, frame.top, x, frame.bottom]]))

    def _draw_continuum(self, painter: QPainter, frame: Frame) -> None:
        """Linear between nodes; with more nodes than pixels one per pixel is enough."""
        painter.setPen(QPen(QColor(self.state.theme.continuum), 0, Qt.PenStyle.DashLine))
        for wave, value in self.continuum:
            first, last = np.searchsorted(wave, [frame.scale.low, frame.scale.high])
            part = slice(max(first - 1, 0), last + 1)
            x, y = np.clip(frame.scale.pixels(wave[part]), -3e4, 3e4), frame.y(value[part])
            if len(x) > frame.scale.width:
                _, keep = np.unique(np.floor(x), return_index=True)
                x, y = x[keep], y[keep]
            draw_polyline(painter, x, y)

    def _flux_range(self, reduced: list[Reduced], scale: PixelScale) -> tuple[float, float]:
        """The user's range, or a calm automatic one: kept while the data still suit it."""
        if self.state.flux is not None:
            self.flux_shown = self.state.flux
        if self.state.flux is not None or self.held:
            return self.flux_shown
        limits = self.item.flux_limits(reduced, scale)
        if limits is not None:
            room = [grip.headroom(scale.low, scale.high) for grip in self.grips]
            limits = limits[0], max([limits[1], *(flux for flux in room if flux is not None)])
            low, high = _with_headroom(*limits)
            shown_low, shown_high = self.flux_shown
            suits = shown_low <= limits[0] and limits[1] <= shown_high
            if not suits or high - low < _CALM_SHARE * (shown_high - shown_low):
                self.flux_shown = (low, high)
        if self.flux_shown[1] <= self.flux_shown[0]:
            self.flux_shown = (self.flux_shown[0], self.flux_shown[0] + 1.0)
        return self.flux_shown

    def flux_at(self, y: float) -> float:
        """Flux under a logical y."""
        top, foot = self.labels.height, self.height() - _FOOT
        low, high = self.flux_shown
        return low + (foot - y) / max(foot - top, 1.0) * (high - low)

    def y_of(self, flux):
        """Logical y of a flux."""
        top, foot = self.labels.height, self.height() - _FOOT
        low, high = self.flux_shown
        return foot - (np.asarray(flux) - low) / (high - low) * (foot - top)

    def zoom_flux(self, factor: float, y: float) -> None:
        about = self.flux_at(y)
        low, high = self.flux_shown
        self.state.set_flux((about - (about - low) / factor, about + (high - about) / factor))

    def click(self, point: QPointF) -> None:
        self.setFocus(Qt.FocusReason.MouseFocusReason)
        if self.item is None or any(grip.clicked(None, point, self) for grip in self.grips):
            return
        labelled = self.labels.number_at(point)
        wave = self.wave_at(point.x())
        row = self.labels.marks.nearest(wave, _CLICK_REACH * self.scale().per_pixel)
        if labelled is not None:
            self.featureClicked.emit(labelled)
        elif row is not None:
            self.featureClicked.emit(int(self.labels.marks.number[row]))
        elif point.y() >= self.labels.height and LEFT <= point.x() <= self.width() - RIGHT:
            self.pickRequested.emit(wave)

    def move_caret(self, direction: int) -> None:
        """To the next peak or trough in view, from the caret or the middle of the view."""
        turns = turning_points(*outline(self.reduced()))
        waves = np.array([self.wave_at(x) for x in turns])
        view = (self.state.low, self.state.high)
        waves = waves[(waves > view[0]) & (waves < view[1])]
        inside = self.caret is not None and view[0] <= self.caret <= view[1]
        at = self.caret if inside else 0.5 * sum(view)
        tiny = 0.5 * self.scale().per_pixel
        ahead = waves[(waves - at) * direction > tiny]
        if len(ahead):
            self.caret = float(ahead[0] if direction > 0 else ahead[-1])
            self.update()

    def act_at_caret(self) -> None:
        """Select the feature at the caret, or ask to pick there."""
        if self.caret is None:
            return
        row = self.labels.marks.nearest(self.caret, 2.0 * self.scale().per_pixel)
        if row is not None:
            self.featureClicked.emit(int(self.labels.marks.number[row]))
        else:
            self.pickRequested.emit(self.caret)


def _with_headroom(low: float, high: float) -> tuple[float, float]:
    """A little air; from zero where the flux nearly reaches it."""
    if 0 < low < 0.4 * high:
        low = 0.0
    pad = _HEADROOM * (high - low) or 0.5 * abs(high) or 1.0
    return low - pad * 0.5, high + pad
