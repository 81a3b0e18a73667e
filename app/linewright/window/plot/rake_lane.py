"""The Rake: predicted lines hang as teeth under the spectrum and slide with the velocity."""

from __future__ import annotations

import numpy as np
from PySide6.QtCore import QEvent, QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QImage, QPainter, QPen
from PySide6.QtWidgets import QToolTip

from ...spectra.medium import C_KM_S, from_medium, to_medium
from .geometry import LEFT, RIGHT, to_device
from .marks import marker_pixmap
from .navigation import NavigableLane
from .rake_data import RakeData
from .rake_mark import draw_marked
from .rake_teeth import RakeTeeth

ROW = 22
SMALLEST_ROW = 13
TALLEST = 156
MOST_ROWS = 12
_HEAD = 4
_WIDE_SPACING = 10
_REACH = 4.0
_BAND, _BAND_ALPHA = 4, 110


class RakeLane(NavigableLane):
    """One row per species shown; tooth length is the predicted depth."""

    def __init__(self, state, parent=None):
        super().__init__(state, parent)
        self.teeth, self._pitch = RakeTeeth(RakeData.empty()), ROW
        self.marked: tuple[float, str] | None = None
        self.setAccessibleName("Rake: predicted lines of the chosen species")
        self._fit()

    def set_rake(self, rake: RakeData) -> None:
        self.teeth = RakeTeeth(rake)
        self._fit()
        self.update()

    def set_marked(self, marked: tuple[float, str] | None) -> None:
        """Frame the tooth of one line: (vacuum wavelength at rest, species); None for none."""
        self.marked = marked
        self.update()

    def set_pitch(self, room: int) -> None:
        """Row height there is room for, kept between the smallest and the usual."""
        pitch = min(max(room, SMALLEST_ROW), ROW)
        if pitch != self._pitch:
            self._pitch = pitch
            self._fit()

    @property
    def shown_rows(self) -> int:
        return min(len(self.teeth.names), MOST_ROWS)

    @property
    def row_height(self) -> int:
        rows = max(self.shown_rows, 1)
        return int(max(SMALLEST_ROW, min(self._pitch, TALLEST // rows)))

    head = _HEAD  # logical pixels above the first row

    def row_of(self, species: str) -> int | None:
        """The row of a species that is shown."""
        shown = self.teeth.names[: self.shown_rows]
        return shown.index(species) if species in shown else None

    def _fit(self) -> None:
        self.setFixedHeight(max(self.shown_rows, 1) * self.row_height + _HEAD + 3)
        hidden = len(self.teeth.names) - self.shown_rows
        more = f" {hidden} more species do not fit." if hidden > 0 else ""
        self.setToolTip(
            "Rake: where lines of the chosen species are predicted at this velocity; the "
            "longer a tooth, the deeper the line should be. Lines of the air, of clouds and of "
            "other components stand at their own velocity and do not slide along." + more
        )

    def tooth_text(self, x: float, y: float) -> str:
        """Species, wavelength (own medium, at rest) and depth of the tooth at a point."""
        row = int((y - _HEAD) // self.row_height)
        if not 0 <= row < self.shown_rows or x < LEFT:
            return ""
        state = self.state
        observed = float(from_medium(self.wave_at(x), state.medium))
        reach = _REACH * self.scale().per_pixel
        tooth = self.teeth.nearest(row, observed, reach, state.velocity)
        if tooth is None:
            return ""
        wave = float(to_medium(tooth[0], state.medium))
        molecule = any(band[0] == row for band in self.teeth.bands)
        said = "head of a band, step" if molecule else "predicted depth"
        return f"{self.teeth.names[row]} {wave:.3f} Å, {said} {tooth[1]:.2f}"

    def event(self, event: QEvent) -> bool:
        """The tool tip names the tooth under the pointer, elsewhere it explains the Rake."""
        if event.type() == QEvent.Type.ToolTip:
            text = self.tooth_text(event.pos().x(), event.pos().y())
            QToolTip.showText(event.globalPos(), text or self.toolTip(), self)
            return True
        return super().event(event)

    def draw(self, painter: QPainter) -> None:
        if self.shown_rows == 0:
            self._draw_empty(painter)
            return
        if self.exposed.left() < LEFT:
            self._draw_names(painter)
        painter.setClipRect(QRectF(LEFT, 0, self.width() - LEFT - RIGHT, self.height()))
        x, y, ratio = to_device(painter)
        scale = self.scale((x, ratio))
        pixels = self._comb(scale, ratio)
        tall, wide = pixels.shape
        picture = QImage(pixels.data, wide, tall, 4 * wide, QImage.Format.Format_RGB32)
        painter.drawImage(QPointF(scale.first_column(), y), picture)
        self._draw_bands(painter, scale, (y, ratio))
        self._draw_missing(painter, scale, (y, ratio))
        if self.marked is not None:
            draw_marked(painter, self, scale, (y, ratio))

    def _draw_empty(self, painter: QPainter) -> None:
        painter.setPen(QColor(self.state.theme.muted))
        painter.drawText(
            self.rect().adjusted(LEFT + 6, 0, -RIGHT, 0),
            Qt.AlignmentFlag.AlignVCenter,
            "Rake: choose species in the Catalogue and their predicted lines hang here",
        )

    def slide(self) -> None:
        """Repaint the teeth only: what a change of velocity moves."""
        self.update(LEFT, 0, self.width() - LEFT, self.height())

    def _draw_names(self, painter: QPainter) -> None:
        theme, height = self.state.theme, self.row_height
        ratio = painter.device().devicePixelRatioF()
        font = painter.font()
        font.setPointSizeF(max(7.0, font.pointSizeF() - 1))
        painter.setFont(font)
        for row, name in enumerate(self.teeth.names[: self.shown_rows]):
            top = _HEAD + row * height
            who = self.teeth.who(row)
            mark = marker_pixmap(theme.marker(*who), theme.colour(*who), 1.0, 9, ratio)
            painter.drawPixmap(QPointF(5, top + height / 2 - 4), mark)
            painter.setPen(QColor(theme.text_colour(*who)))
            box = QRectF(14, top, LEFT - 20, height)
            flags = Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter
            painter.drawText(box, int(flags), name)

    def _comb(self, scale, ratio: float) -> np.ndarray:
        """The lane as pixels 0xffRRGGBB, shape (device height, columns): bars and teeth."""
        state, theme, pitch = self.state, self.state.theme, self.row_height
        depth = self.teeth.columns(self.shown_rows, scale, state.medium, state.velocity)
        lengths = _widened(_lengths(depth, pitch, ratio), ratio)
        size = (round(self.height() * ratio), depth.shape[1])
        pixels = np.full(size, _rgb(theme.base), np.uint32)
        steps = np.arange(round(pitch * ratio), dtype=np.int16)[:, None]
        for row, length in enumerate(lengths):
            top = round((_HEAD + row * pitch) * ratio)
            pixels[top] = _rgb(theme.edge)
            band = pixels[top + 1 : top + 1 + int(length.max(initial=0))]
            colour = np.uint32(_rgb(theme.colour(*self.teeth.who(row))))
            np.copyto(band, colour, where=steps[: len(band)] < length)
        return pixels

    def _draw_bands(self, painter: QPainter, scale, place) -> None:
        """A bar along the reach of each molecular band."""
        offset, ratio = place
        state, factor = self.state, 1.0 + self.state.velocity / C_KM_S
        for row, low, high in self.teeth.bands:
            ends = scale.pixels(to_medium(np.array([low, high]) * factor, state.medium))
            left, right = np.clip(ends, scale.origin, scale.origin + scale.width).tolist()
            if row < self.shown_rows and right > left:
                colour = QColor(state.theme.colour(*self.teeth.who(row)))
                colour.setAlpha(_BAND_ALPHA)
                top = offset + (_HEAD + row * self.row_height + 1) * ratio
                painter.fillRect(QRectF(left, top, right - left, _BAND * ratio), colour)

    def _draw_missing(self, painter: QPainter, scale, place) -> None:
        offset, ratio = place
        state, pitch = self.state, self.row_height
        rows, x, depth = self.teeth.missing(scale, state.medium, state.velocity)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing, True)
        painter.setBrush(QColor(state.theme.base))
        y = offset + (_HEAD + rows * pitch + 1) * ratio + _lengths(depth, pitch, ratio)
        for row, at, foot in zip(rows.tolist(), x.tolist(), y.tolist()):
            if row < self.shown_rows:
                colour = QColor(state.theme.colour(*self.teeth.who(row)))
                painter.setPen(QPen(colour, 1.3 * ratio))
                painter.drawEllipse(QPointF(at, foot), 3 * ratio, 3 * ratio)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing, False)


def _lengths(depth: np.ndarray, pitch: int, ratio: float) -> np.ndarray:
    """Device pixels of tooth for a depth; 0 where there is none (NaN)."""
    length = np.maximum(depth * (pitch - 5), 2.0) * ratio
    return np.where(np.isfinite(depth), length, 0.0).astype(np.int16)


def _widened(lengths: np.ndarray, ratio: float) -> np.ndarray:
    """Teeth two logical pixels wide where few, one where many."""
    few = np.count_nonzero(lengths, axis=1) * _WIDE_SPACING * ratio < lengths.shape[1]
    wide = np.where(few, round(2 * ratio), round(ratio))
    for extra in range(1, int(wide.max(initial=1))):
        rows = wide > extra
        lengths[rows, 1:] = np.maximum(lengths[rows, 1:], lengths[rows, :-1])
    return lengths


def _rgb(colour: str) -> int:
    return 0xFF000000 | int(colour[1:], 16)
