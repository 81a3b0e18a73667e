"""Flux ticks and title in the left margin."""

from __future__ import annotations

import re

import numpy as np
from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPen

from .geometry import LEFT, nice_ticks
from .primitives import draw_lines
from .text_pictures import TextPictures

_SUPERSCRIPT = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")


def flux_power(low: float, high: float) -> int:
    """Power of ten taken out of the numbers; 0 where they are short anyway."""
    largest = max(abs(low), abs(high))
    power = int(np.floor(np.log10(largest))) if largest > 0 else 0
    return power if power >= 5 or power <= -4 else 0


def printed_unit(unit: str) -> str:
    """A unit as files write it with raised powers and Å: '1E-17 erg/cm^2/s/Ang'."""
    unit = re.sub(r"\b1[eE]([+-]?\d+)\b", lambda m: "10" + _raised(m[1]), unit)
    unit = re.sub(r"\^\(?([+-]?\d+)\)?", lambda m: _raised(m[1]), unit)
    return re.sub(r"\b(Angstroms?|Ang)\b", "Å", unit)


def _raised(digits: str) -> str:
    return str(int(digits)).translate(_SUPERSCRIPT)


def flux_title(power: int, unit: str) -> str:
    """'flux', with the power of ten and the unit where there are any."""
    scale = f"10{str(power).translate(_SUPERSCRIPT)}" if power else ""
    inside = " ".join(part for part in (scale, printed_unit(unit)) if part)
    return f"flux ({inside})" if inside else "flux"


def draw_flux_axis(painter: QPainter, rect, span: tuple[float, float], plot) -> None:
    """span: (top, bottom) of the flux area; plot: has flux_shown, flux_unit, state."""
    top, bottom = span
    low, high = plot.flux_shown
    theme = plot.state.theme
    power = flux_power(low, high)
    low, high = low / 10.0**power, high / 10.0**power
    metrics = painter.fontMetrics()
    most = max(2, int((bottom - top) // (3 * metrics.height())))
    major, minor, decimals = nice_ticks(low, high, most)
    painter.setPen(QPen(QColor(theme.faint), 0))
    painter.drawLine(LEFT, int(top), LEFT, int(bottom))
    for ticks, length in ((minor, 3.0), (major, 6.0)):
        y = np.floor(bottom + (ticks - low) * (top - bottom) / (high - low)) + 0.5
        draw_lines(painter, np.stack([np.full(len(y), LEFT - length), y,
                                      np.full(len(y), float(LEFT)), y], axis=1))
    texts = TextPictures(painter, theme.ink)
    for value in major.tolist():
        y = bottom + (value - low) * (top - bottom) / (high - low)
        texts.draw(f"{value + 0.0:.{decimals}f}", LEFT - 9, y - metrics.height() / 2, 1.0)
    painter.setPen(QColor(theme.ink))
    titles = flux_title(power, plot.flux_unit), flux_title(power, "")  # the unit where it fits
    _draw_title(painter, rect, span, titles)


def _draw_title(painter: QPainter, rect, span, titles: tuple[str, ...]) -> None:
    top, bottom = span
    metrics = painter.fontMetrics()
    painter.save()
    painter.translate(rect.left() + 2, bottom)
    painter.rotate(-90)
    room = int(bottom - top)
    fitting = [t for t in titles if metrics.horizontalAdvance(t) <= room]
    shown = fitting[0] if fitting else metrics.elidedText(
        titles[-1], Qt.TextElideMode.ElideRight, room)
    painter.drawText(
        QRectF(0, 0, bottom - top, metrics.height()), int(Qt.AlignmentFlag.AlignCenter), shown
    )
    painter.restore()
