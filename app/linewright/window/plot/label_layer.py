"""Ticks at features and their claim labels, drawn by one object.

Labels stand upright above the flux area; each is rendered once to a small picture and
then blitted, because text drawn under a rotation costs far more than its pixels.
"""

from __future__ import annotations

from collections import OrderedDict
from dataclasses import dataclass, field

import numpy as np
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QFont, QFontMetricsF, QPainter, QPen, QPixmap

from ..theme import Theme
from .extremes import PixelScale
from .feature_marks import FIRM, LIKELY, SET_ASIDE, TENTATIVE, UNCLAIMED, FeatureMarks, no_marks
from .marks import FILL, marker_pixmap
from .placement import place, ration
from .primitives import draw_lines

_STANDING_FILL = {FIRM: FILL["firm"], LIKELY: FILL["likely"], TENTATIVE: FILL["tentative"]}
_LEADER, _MARKER, _TICK, _GAP = 12, 9, 10, 5
_CACHE = 2000
_FULL_FROM, _SHORT_FROM = 250, 150


@dataclass
class Placed:
    """What the last paint put where (logical pixels), for clicks and tests."""

    rows: np.ndarray = field(default_factory=lambda: np.zeros(0, dtype=int))
    rects: list[QRectF] = field(default_factory=list)


class LabelLayer:
    """Draws marks in the band above the flux area; ``height`` is what it needs."""

    def __init__(self, font: QFont):
        self.font = QFont(font)
        self.font.setPointSizeF(max(7.0, font.pointSizeF() - 1.0))
        metrics = QFontMetricsF(self.font)
        self.line = float(np.ceil(metrics.height()))
        self._lengths = {
            "full": float(np.ceil(metrics.horizontalAdvance("[Fe III] 00000.00 ?"))),
            "short": float(np.ceil(metrics.horizontalAdvance("[Fe III] ?"))),
            "none": 0.0,
        }
        self.marks = no_marks()
        self.selected: int | None = None
        self.mode = "full"
        self.placed = Placed()
        self._pictures: OrderedDict[tuple, QPixmap] = OrderedDict()
        self._groups: tuple[Theme | None, np.ndarray, list[str]] = (None, np.zeros(0), [])

    def set_marks(self, marks: FeatureMarks) -> None:
        self.marks = marks
        self._groups = (None, np.zeros(0), [])

    def fit(self, height: float) -> None:
        """Choose how much text a lane of this height has room for."""
        self.mode = "full" if height >= _FULL_FROM else "short" if height >= _SHORT_FROM else "none"

    @property
    def height(self) -> float:
        if len(self.marks) == 0:
            return 8.0
        return self._label_foot + _LEADER + _MARKER + _TICK + _GAP

    @property
    def _label_foot(self) -> float:
        return 4.0 + self._lengths[self.mode]

    def paint(self, painter: QPainter, scale: PixelScale, theme: Theme) -> None:
        """``scale`` in logical pixels of the widget; the painter likewise."""
        self.placed = Placed()
        first, last = np.searchsorted(self.marks.wave, [scale.low, scale.high])
        if last <= first:
            return
        rows = np.arange(first, last)
        x = np.floor(scale.pixels(self.marks.wave[rows])) + 0.5
        self._paint_ticks(painter, rows, x, theme)
        if self.mode != "none":
            self._paint_labels(painter, (rows, x), scale, theme)

    def _colours(self, theme: Theme) -> tuple[np.ndarray, list[str]]:
        if self._groups[0] is not theme:
            marks = self.marks
            colours = [
                theme.faint if standing in (UNCLAIMED, SET_ASIDE) else theme.colour(name, origin)
                for standing, name, origin in zip(marks.standing, marks.species, marks.origin)
            ]
            names = sorted(set(colours))
            group = np.array([names.index(colour) for colour in colours], dtype=int)
            self._groups = (theme, group, names)
        return self._groups[1], self._groups[2]

    def _paint_ticks(self, painter: QPainter, rows, x, theme: Theme) -> None:
        group, names = self._colours(theme)
        foot = self._label_foot + _LEADER + _MARKER + _TICK
        standing = self.marks.standing[rows]
        for index, colour in enumerate(names):
            mine = group[rows] == index
            if mine.any():
                painter.setPen(QPen(QColor(colour), 0))
                draw_lines(painter, tick_lines(x[mine], standing[mine], foot))

    def _paint_labels(self, painter: QPainter, found, scale: PixelScale, theme: Theme) -> None:
        rows, x = self._chosen(*found, scale)
        ends = (scale.origin - self.line / 2, scale.origin + scale.width + self.line / 2)
        kept, places = place(x, self.line, ends)
        rows, x = rows[kept], x[kept]
        places = np.round(places)
        self.placed = Placed(rows, [])
        self._paint_leaders(painter, rows, x, places, theme)
        for row, at, centre in zip(rows.tolist(), x.tolist(), places.tolist()):
            self._paint_label(painter, row, (at, centre), theme)

    def _chosen(self, rows, x, scale: PixelScale):
        """Rows with a label, rationed where they crowd; the selected one always."""
        marks = self.marks
        has = np.array([bool(marks.text[row]) for row in rows], dtype=bool)
        rows, x = rows[has], x[has]
        importance = marks.importance[rows].copy()
        importance[marks.number[rows] == self.selected] = np.inf
        pick = ration(marks.wave[rows] / scale.per_pixel, importance, self.line)
        return rows[pick], x[pick]

    def _paint_leaders(self, painter: QPainter, rows, x, places, theme: Theme) -> None:
        group, names = self._colours(theme)
        top = self._label_foot + 1.5
        foot = top + _LEADER - 3
        head = np.full(len(x), top)
        knee, base = head + 3, head + _LEADER - 4
        end = np.full(len(x), foot)
        lines = np.stack(
            [
                np.stack([places, head, places, knee], axis=1),
                np.stack([places, knee, x, base], axis=1),
                np.stack([x, base, x, end], axis=1),
            ],
            axis=1,
        )
        for index in np.unique(group[rows]):
            painter.setPen(QPen(QColor(names[index]), 0))
            draw_lines(painter, lines[group[rows] == index].reshape(-1, 4))

    def _paint_label(self, painter: QPainter, row: int, at: tuple, theme: Theme) -> None:
        marks = self.marks
        x, centre = at
        species, origin = marks.species[row], marks.origin[row]
        chosen = marks.number[row] == self.selected
        colour = theme.accent_ink if chosen else theme.text_colour(species, origin)
        ground = theme.accent if chosen else ""
        ratio = painter.device().devicePixelRatioF()
        picture = self._picture(self._text(row), colour, ground, ratio)
        rect = QRectF(
            centre - self.line / 2,
            self._label_foot - picture.height() / ratio,
            self.line,
            picture.height() / ratio,
        )
        painter.drawPixmap(rect.topLeft(), picture)
        self.placed.rects.append(rect)
        fill = _STANDING_FILL[int(marks.standing[row])]
        mark = marker_pixmap(
            theme.marker(species, origin), theme.colour(species, origin), fill, _MARKER, ratio
        )
        painter.drawPixmap(QPointF(x - _MARKER / 2, self._label_foot + _LEADER - 1), mark)

    def _text(self, row: int) -> str:
        return self.marks.short[row] if self.mode == "short" else self.marks.text[row]

    def _picture(self, text: str, colour: str, ground: str, ratio: float) -> QPixmap:
        key = (text, colour, ground, ratio)
        picture = self._pictures.get(key)
        if picture is None:
            picture = self._pictures[key] = self._render(text, colour, ground, ratio)
            if len(self._pictures) > _CACHE:
                self._pictures.popitem(last=False)
        return picture

    def _render(self, text: str, colour: str, ground: str, ratio: float) -> QPixmap:
        length = float(np.ceil(QFontMetricsF(self.font).horizontalAdvance(text))) + 4
        picture = QPixmap(round(self.line * ratio), round(length * ratio))
        picture.setDevicePixelRatio(ratio)
        picture.fill(QColor(ground) if ground else Qt.GlobalColor.transparent)
        painter = QPainter(picture)
        painter.setFont(self.font)
        painter.setPen(QColor(colour))
        painter.translate(0, length)
        painter.rotate(-90)
        painter.drawText(QRectF(2, 0, length, self.line), Qt.AlignmentFlag.AlignVCenter, text)
        painter.end()
        return picture

    def number_at(self, point: QPointF) -> int | None:
        """Feature number of the label under a point of the widget."""
        for row, rect in zip(self.placed.rows, self.placed.rects):
            if rect.contains(point):
                return int(self.marks.number[row])
        return None


def tick_lines(x: np.ndarray, standing: np.ndarray, foot: float) -> np.ndarray:
    """Line rows of ticks ending at ``foot``; the standing shows in form, not colour.

    firm: two pixels wide; likely: one; tentative: broken; unclaimed: short; set aside: x
    """

    def upright(which, top, bottom, shift=0.0):
        at = x[which] + shift
        return np.stack([at, np.full(len(at), top), at, np.full(len(at), bottom)], axis=1)

    full = foot - _TICK
    aside = x[standing == SET_ASIDE]
    ones = np.ones(len(aside))
    return np.concatenate(
        [
            upright((standing == FIRM) | (standing == LIKELY), full, foot),
            upright(standing == FIRM, full, foot, 1.0),
            upright(standing == TENTATIVE, full, full + 3),
            upright(standing == TENTATIVE, foot - 3, foot),
            upright(standing == UNCLAIMED, foot - 5, foot),
            np.stack([aside - 3, foot * ones - 6, aside + 3, foot * ones], axis=1),
            np.stack([aside - 3, foot * ones, aside + 3, foot * ones - 6], axis=1),
        ]
    )
