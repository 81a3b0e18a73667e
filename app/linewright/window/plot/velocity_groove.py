"""The groove of the velocity track: score curve, rivals and the handle."""

from __future__ import annotations

import numpy as np
from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QColor, QKeyEvent, QMouseEvent, QPainter, QPen, QWheelEvent
from PySide6.QtWidgets import QWidget

from ..theme import LIGHT, Theme
from .extremes import Extremes, PixelScale
from .groove_marks import TOP, draw_handle, draw_rivals, draw_ticks
from .primitives import draw_polyline, polygon
from .safe_paint import paint_safely

_SIDE = 16
_SNAP = 5.0


class VelocityGroove(QWidget):
    """Drag, click, wheel or keys: arrows 0.5 km/s (Shift 5, Ctrl 0.05), pages 25."""

    moved = Signal(float, bool)  # km/s, final

    def __init__(self, parent: QWidget | None = None):
        super().__init__(parent)
        self.low, self.high, self.velocity = -500.0, 500.0, 0.0
        self.declared = True
        self.rivals: tuple[tuple[float, float], ...] = ()
        self._curve: Extremes | None = None
        self._theme: Theme = LIGHT
        self._dragging = False
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setMinimumWidth(200)
        self.setFixedHeight(44 + self.fontMetrics().height() // 2)
        self.setAccessibleName("Velocity track")
        self.setToolTip(
            "Match score over velocity: drag, or use the arrow keys; triangles mark rivals"
        )

    def set_curve(self, grid, score) -> None:
        grid, score = np.asarray(grid, dtype=float), np.asarray(score, dtype=float)
        order = np.argsort(grid, kind="stable")
        self._curve = Extremes(grid[order], score[order]) if len(grid) > 1 else None
        self.update()

    def set_velocity(self, km_s: float) -> None:
        self.velocity = float(min(max(km_s, self.low), self.high))
        self.update()

    def set_declared(self, declared: bool) -> None:
        self.declared = bool(declared)
        self.update()

    def set_range(self, low: float, high: float) -> None:
        self.low, self.high = float(low), float(high)
        self.set_velocity(self.velocity)

    def set_rivals(self, rivals) -> None:
        self.rivals = tuple((float(v), float(below)) for v, below in rivals)
        self.update()

    def set_theme(self, theme: Theme) -> None:
        self._theme = theme
        self.update()

    def scale(self, ratio: float = 1.0) -> PixelScale:
        """Velocity to pixels of this widget."""
        inner = max(self.width() - 2 * _SIDE, 1)
        return PixelScale(self.low, self.high, _SIDE * ratio, inner * ratio)

    def _floor(self) -> float:
        return self.height() - self.fontMetrics().height() - 8.0

    def paintEvent(self, _event) -> None:
        paint_safely(self, self._draw)

    def _draw(self, painter: QPainter) -> None:
        theme, scale, floor = self._theme, self.scale(), self._floor()
        painter.fillRect(self.rect(), QColor(theme.base))
        self._draw_curve(painter, scale, floor)
        painter.setPen(QPen(QColor(theme.faint), 0))
        painter.drawLine(_SIDE, int(floor), self.width() - _SIDE, int(floor))
        draw_ticks(painter, self.width(), (scale, floor), theme)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing, True)
        inside = [v for v, _below in self.rivals if self.low <= v <= self.high]
        draw_rivals(painter, scale.pixels(inside), floor, theme)
        draw_handle(painter, (float(scale.pixels(self.velocity)), floor), theme, self.declared)
        if self.hasFocus():
            painter.setPen(QPen(QColor(theme.accent), 2))
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawRect(self.rect().adjusted(1, 1, -1, -1))

    def _draw_curve(self, painter: QPainter, scale: PixelScale, floor: float) -> None:
        if self._curve is None:
            return
        x, y = self._outline(scale)
        if len(x) < 2:
            return
        base, top = float(np.median(y)), float(np.max(y))
        low = min(float(np.min(y)), base)
        y = floor - 1 - (y - low) / max(top - low, 1e-300) * (floor - TOP - 4)
        shade = QColor(self._theme.accent)
        shade.setAlpha(45)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing, True)
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(shade)
        painter.drawPolygon(
            polygon(np.concatenate([x[:1], x, x[-1:]]), np.concatenate([[floor], y, [floor]]))
        )
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.setPen(QPen(QColor(self._theme.accent), 1))
        draw_polyline(painter, x, y)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing, False)

    def _outline(self, scale: PixelScale) -> tuple[np.ndarray, np.ndarray]:
        """The curve, or where it is finer than pixels the highest score of each."""
        start, stop = self._curve.visible(self.low, self.high)
        if stop - start <= 2 * scale.width:
            x, y = self._curve.x[start:stop], self._curve.y[start:stop]
            x, good = scale.pixels(x), np.isfinite(y)
        else:
            columns = self._curve.columns(scale)
            x, y, good = columns.column + 0.5, columns.high, np.isfinite(columns.high)
        return np.clip(x[good], _SIDE, self.width() - _SIDE), y[good]

    def _at(self, x: float) -> float:
        """Velocity under x, at a rival's mark exactly there; rounded to 0.01 km/s."""
        scale = self.scale()
        for velocity, _below in self.rivals:
            if not self._dragging and abs(float(scale.pixels(velocity)) - x) < _SNAP:
                return velocity
        value = scale.low + (x - scale.origin) * scale.per_pixel
        return round(min(max(value, self.low), self.high), 2)

    def _move(self, km_s: float, final: bool) -> None:
        self.set_velocity(km_s)
        self.moved.emit(self.velocity, final)

    def mousePressEvent(self, event: QMouseEvent) -> None:
        if event.button() == Qt.MouseButton.LeftButton:
            self._dragging = False
            self._move(self._at(event.position().x()), False)
            self._dragging = True

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        if self._dragging:
            self._move(self._at(event.position().x()), False)

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        if event.button() == Qt.MouseButton.LeftButton and self._dragging:
            self._dragging = False
            self.moved.emit(self.velocity, True)

    def wheelEvent(self, event: QWheelEvent) -> None:
        self._move(round(self.velocity + event.angleDelta().y() / 120.0 * 0.5, 3), True)
        event.accept()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        step = 0.5
        if event.modifiers() & Qt.KeyboardModifier.ShiftModifier:
            step = 5.0
        elif event.modifiers() & Qt.KeyboardModifier.ControlModifier:
            step = 0.05
        key = Qt.Key(event.key())
        shift = {
            Qt.Key.Key_Left: -step, Qt.Key.Key_Down: -step,
            Qt.Key.Key_Right: step, Qt.Key.Key_Up: step,
            Qt.Key.Key_PageUp: 25.0, Qt.Key.Key_PageDown: -25.0,
        }.get(key)
        if shift is not None:
            self._move(round(self.velocity + shift, 3), True)
        elif key == Qt.Key.Key_Home:
            self._move(0.0, True)
        else:
            super().keyPressEvent(event)
