"""The whole spectrum in a narrow strip, with the view as a bracket to drag."""

from __future__ import annotations

import numpy as np
from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QColor, QMouseEvent, QPainter, QPen, QPixmap

from .extremes import PixelScale
from .feature_marks import FeatureMarks, no_marks
from .geometry import LEFT, RIGHT
from .lane import Lane
from .safe_paint import painting
from .spectrum_item import SpectrumItem
from .strip_frame import strip_frame

HEIGHT, LOWEST = 62, 44
_HEAT = 5
_GRIP = 6
_SMALLEST = 8


class ContextStrip(Lane):
    """The picture of the whole spectrum is kept; only the bracket is drawn per change."""

    def __init__(self, state, parent=None):
        super().__init__(state, parent)
        self.item: SpectrumItem | None = None
        self.marks = no_marks()
        self._picture: QPixmap | None = None
        self._made_for: tuple = ()
        self._grab: tuple[str, float] | None = None
        self.setFixedHeight(HEIGHT)
        self.setMouseTracking(True)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setAccessibleName("Whole spectrum; the bracket is the view")
        self.setToolTip(
            "The whole spectrum. Drag the bracket or its ends, or click to look elsewhere; "
            "the line at the foot is darkest where features crowd."
        )

    def set_item(self, item: SpectrumItem | None) -> None:
        self.item = item
        self._made_for = ()
        self.update()

    def set_marks(self, marks: FeatureMarks) -> None:
        self.marks = marks
        self._made_for = ()
        self.update()

    def whole_scale(self) -> PixelScale | None:
        """Wavelength scale of the strip in logical pixels; None without a spectrum."""
        if self.state.full is None:
            return None
        low, high = self.state.full
        return PixelScale(low, high, LEFT, max(self.width() - LEFT - RIGHT, 1))

    def bracket(self) -> tuple[float, float]:
        """(left, right) of the view in logical pixels."""
        ends = self.whole_scale().pixels([self.state.low, self.state.high])
        left, right = np.clip(ends, LEFT - 4, self.width() - RIGHT + 4)
        return float(left), float(max(right, left + 2))

    def draw(self, painter: QPainter) -> None:
        if self.item is None or self.state.full is None:
            return
        ratio = self.devicePixelRatioF()
        wanted = (self.size(), ratio, self.state.theme, self.state.full)
        if wanted != self._made_for:
            self._picture, self._made_for = self._render(ratio), wanted
        painter.drawPixmap(0, 0, self._picture)
        left, right = self.bracket()
        accent = QColor(self.state.theme.accent)
        shade = QColor(accent)
        shade.setAlpha(50)
        foot = self.height() - _HEAT - 3
        if right - left < self.whole_scale().width:
            painter.fillRect(QRectF(left, 2, right - left, foot - 2), shade)
        painter.setPen(QPen(accent, 1.6))
        for x, inward in ((left, 5), (right, -5)):
            painter.drawLine(int(x), 2, int(x), foot)
            if right - left > 14:
                painter.drawLine(int(x), 2, int(x) + inward, 2)
                painter.drawLine(int(x), foot, int(x) + inward, foot)

    def _render(self, ratio: float) -> QPixmap:
        picture = QPixmap(round(self.width() * ratio), round(self.height() * ratio))
        picture.setDevicePixelRatio(ratio)
        picture.fill(QColor(self.state.theme.base))
        whole = self.whole_scale()
        scale = PixelScale(whole.low, whole.high, whole.origin * ratio, whole.width * ratio)
        with painting(picture) as painter:
            painter.scale(1 / ratio, 1 / ratio)
            self._paint_whole(painter, scale, ratio)
            self._paint_heat(painter, scale, ratio)
        return picture

    def _paint_whole(self, painter: QPainter, scale: PixelScale, ratio: float) -> None:
        reduced = self.item.reduce(scale)
        foot = (self.height() - _HEAT - 6) * ratio
        frame = strip_frame(self.item, reduced, (scale, 5 * ratio, foot, ratio))
        self.item.paint(painter, frame, reduced, self.state.theme.faint)

    def _paint_heat(self, painter: QPainter, scale: PixelScale, ratio: float) -> None:
        """Feature density along the foot, smoothed over a few pixels, as opacity."""
        if len(self.marks) == 0:
            return
        bins = np.arange(LEFT * ratio, (self.width() - RIGHT) * ratio + 1, 3 * ratio)
        if len(bins) < 2:
            return
        count, _ = np.histogram(scale.pixels(self.marks.wave), bins)
        density = np.convolve(count, np.array([1.0, 2.0, 1.0]) / 4, mode="same")
        density = _contrast(density)
        top = (self.height() - _HEAT) * ratio
        colour = QColor(self.state.theme.profile)
        for x, strength in zip(bins, density):
            if strength > 0:
                colour.setAlphaF(float(strength))
                painter.fillRect(QRectF(x, top, 3 * ratio, (_HEAT - 1) * ratio), colour)

    def _part_at(self, x: float) -> str:
        left, right = self.bracket()
        if right - left > _SMALLEST:
            if abs(x - left) <= _GRIP:
                return "low"
            if abs(x - right) <= _GRIP:
                return "high"
        near = max(0.0, (_SMALLEST - (right - left)) / 2)
        return "middle" if left - near <= x <= right + near else "outside"

    def mousePressEvent(self, event: QMouseEvent) -> None:
        if event.button() != Qt.MouseButton.LeftButton or self.state.full is None:
            return
        x = event.position().x()
        part = self._part_at(x)
        wave = self._wave(x)
        if part == "outside":
            half = 0.5 * (self.state.high - self.state.low)
            self.state.set_view(wave - half, wave + half)
            part = "middle"
        start = self.state.low if part in ("low", "middle") else self.state.high
        self._grab = (part, start - wave)

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        if self.state.full is None:
            return
        x = event.position().x()
        if self._grab is None:
            at_end = self._part_at(x) in ("low", "high")
            shape = Qt.CursorShape.SizeHorCursor if at_end else Qt.CursorShape.ArrowCursor
            self.setCursor(shape)
            return
        part, offset = self._grab
        wave = self._wave(x) + offset
        if part == "middle":
            self.state.set_view(wave, wave + self.state.high - self.state.low)
        elif part == "low" and wave < self.state.high:
            self.state.set_view(wave, self.state.high)
        elif part == "high" and wave > self.state.low:
            self.state.set_view(self.state.low, wave)

    def mouseReleaseEvent(self, _event: QMouseEvent) -> None:
        self._grab = None

    def _wave(self, x: float) -> float:
        scale = self.whole_scale()
        return scale.low + (x - scale.origin) * scale.per_pixel


def _contrast(density: np.ndarray) -> np.ndarray:
    """Opacity 0-1: the emptiest occupied places faint, the most crowded full."""
    occupied = density[density > 0]
    if not len(occupied):
        return density
    low, high = np.percentile(occupied, (5, 99))
    share = (density - low) / max(high - low, 1e-9)
    return np.where(density > 0, 0.12 + 0.88 * np.clip(share, 0, 1), 0.0)
