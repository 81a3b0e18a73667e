"""Ticks at features and their claim labels, drawn by one object.

Labels stand upright above the flux area; an elbow leads from each to its feature.
"""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from PySide6.QtCore import QPointF, QRectF
from PySide6.QtGui import QColor, QFont, QFontMetricsF, QPainter, QPen

from ..theme import Theme
from .extremes import PixelScale
from .feature_marks import FIRM, LIKELY, TENTATIVE, FeatureMarks, no_marks
from .geometry import to_device
from .label_atlas import LabelAtlas, LabelContent
from .marks import FILL, marker_pixmap
from .placement import place, ration
from .primitives import draw_lines
from .tick_strokes import TICK, TickStrokes

_STANDING_FILL = {FIRM: FILL["firm"], LIKELY: FILL["likely"], TENTATIVE: FILL["tentative"]}
_LEADER, _MARKER, _GAP = 12, 9, 5
_FULL_FROM, _SHORT_FROM = 250, 150
_NEW_PER_PAINT = 48  # labels rendered in one paint: the others come with the next


@dataclass(frozen=True, eq=False)
class Placed:
    """What the last paint put where (logical pixels), for clicks and tests.

    rows: rows of the marks; centre: of each label; top, bottom: of all labels; width: of one
    """

    rows: np.ndarray = field(default_factory=lambda: np.zeros(0, dtype=int))
    centre: np.ndarray = field(default_factory=lambda: np.zeros(0))
    top: float = 0.0
    bottom: float = 0.0
    width: float = 0.0

    @property
    def rects(self) -> list[QRectF]:
        left = self.centre - self.width / 2
        return [QRectF(x, self.top, self.width, self.bottom - self.top) for x in left]


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
        self.placed, self.unfinished = Placed(), False
        self._atlas: tuple[tuple, LabelAtlas | None] = ((), None)
        self._slot_of = self._kind_of = np.zeros(0, dtype=int)
        self._ticks: TickStrokes | None = None

    def set_marks(self, marks: FeatureMarks, rows: np.ndarray | None = None) -> None:
        """rows: which differ from the marks before; None when all may."""
        self.marks = marks
        if rows is None:
            self._ticks = None
            self._atlas = ((), None)
            return
        if self._ticks is not None:
            self._ticks.follow(marks, rows)
        if self._atlas[1] is not None:
            self._slot_of[rows] = -1
            self._atlas[1].forget_chosen()

    def fit(self, height: float) -> None:
        """Choose how much text a lane of this height has room for."""
        self.mode = "full" if height >= _FULL_FROM else "short" if height >= _SHORT_FROM else "none"

    @property
    def height(self) -> float:
        if len(self.marks) == 0:
            return 8.0
        return self._label_foot + _LEADER + _MARKER + TICK + _GAP

    @property
    def _label_foot(self) -> float:
        return 4.0 + self._lengths[self.mode]

    def paint(self, painter: QPainter, scale: PixelScale, theme: Theme) -> None:
        """``scale`` in logical pixels of the widget; the painter likewise."""
        self.placed, self.unfinished = Placed(), False
        first, last = np.searchsorted(self.marks.wave, [scale.low, scale.high])
        if last <= first:
            return
        rows = np.arange(first, last)
        x = np.floor(scale.pixels(self.marks.wave[rows])) + 0.5
        self._paint_ticks(painter, scale, theme)
        if self.mode != "none":
            self._paint_labels(painter, (rows, x), scale, theme)

    def _paint_ticks(self, painter: QPainter, scale: PixelScale, theme: Theme) -> None:
        if self._ticks is None or self._ticks.theme is not theme:
            self._ticks = TickStrokes(self.marks, theme)
        foot = self._label_foot + _LEADER + _MARKER + TICK
        for colour, lines in self._ticks.lines(scale, foot):
            painter.setPen(QPen(QColor(colour), 0))
            draw_lines(painter, lines)

    def _paint_labels(self, painter: QPainter, found, scale: PixelScale, theme: Theme) -> None:
        rows, x = self._chosen(*found, scale)
        ends = (scale.origin - self.line / 2, scale.origin + scale.width + self.line / 2)
        kept, places = place(x, self.line, ends)
        if len(kept) == 0:
            return
        rows, x, places = rows[kept], x[kept], np.floor(places) + 0.5
        foot = self._label_foot
        self.placed = Placed(rows, places, 4.0, foot, self.line)
        painter.setPen(QPen(QColor(theme.muted), 0))
        draw_lines(painter, leader_lines(x, places, foot))
        self._blit(painter, (rows, x, places), theme)

    def _chosen(self, rows, x, scale: PixelScale):
        """Rows with a label, rationed where they crowd; the selected one always."""
        marks = self.marks
        has = marks.standing[rows] <= TENTATIVE
        rows, x = rows[has], x[has]
        importance = marks.importance[rows]
        importance[marks.number[rows] == self.selected] = np.inf
        pick = ration(marks.wave[rows] / scale.per_pixel, importance, self.line)
        return rows[pick], x[pick]

    def _blit(self, painter: QPainter, found, theme: Theme) -> None:
        rows, x, places = found
        atlas = self._atlas_for(theme, painter.device().devicePixelRatioF())
        slots = self._slots(atlas, rows, theme)
        ready = slots >= 0
        self.unfinished = not ready.all()
        rows, x, places, slots = rows[ready], x[ready], places[ready], slots[ready]
        painter.save()
        left, top, ratio = to_device(painter)
        atlas.blit_labels(painter, slots, np.floor(left + places * ratio), round(top + 4 * ratio))
        under = round(top + (self._label_foot + _LEADER - 1) * ratio)
        atlas.blit_markers(painter, self._kind_of[rows], np.floor(left + x * ratio), under)
        painter.restore()

    def _slots(self, atlas: LabelAtlas, rows: np.ndarray, theme: Theme) -> np.ndarray:
        """Slot of each row, rendered where it is new; the selected row has one of its own.

        -1 for those that must wait for the next paint.
        """
        slots = self._slot_of[rows]
        new = np.count_nonzero(slots < 0)
        if atlas.used + new + 1 > atlas.slots:
            atlas.used = 0
            self._slot_of[:] = -1
            slots = self._slot_of[rows]
        for index in np.nonzero(slots < 0)[0][:_NEW_PER_PAINT].tolist():
            row = int(rows[index])
            slots[index] = self._slot_of[row] = atlas.add(self._content(row, theme, False))
            self._kind_of[row] = self._marker_kind(atlas, row, theme)
        chosen = self.marks.row_of(self.selected)
        where = np.nonzero(rows == chosen)[0] if chosen is not None else ()
        if len(where):
            slots[where] = atlas.set_chosen(chosen, self._content(chosen, theme, True))
        return slots

    def _atlas_for(self, theme: Theme, ratio: float) -> LabelAtlas:
        key = (theme, ratio, self.mode)
        if self._atlas[0] != key:
            sizes = (self.line, self._lengths[self.mode], _MARKER)
            self._atlas = (key, LabelAtlas(self.font, sizes, (ratio, theme.base)))
            self._slot_of = np.full(len(self.marks), -1)
            self._kind_of = np.zeros(len(self.marks), dtype=int)
        return self._atlas[1]

    def _content(self, row: int, theme: Theme, chosen: bool) -> LabelContent:
        marks = self.marks
        if chosen:
            return LabelContent(self._text(row), theme.accent_ink, theme.accent)
        colour = theme.text_colour(marks.species[row], marks.origin[row])
        return LabelContent(self._text(row), colour, "")

    def _marker_kind(self, atlas: LabelAtlas, row: int, theme: Theme) -> int:
        who = self.marks.species[row], self.marks.origin[row]
        fill = _STANDING_FILL[int(self.marks.standing[row])]
        key = (theme.marker(*who), theme.colour(*who), fill, _MARKER, self._atlas[0][1])
        return atlas.marker_kind(key, lambda: marker_pixmap(*key))

    def _text(self, row: int) -> str:
        return self.marks.short[row] if self.mode == "short" else self.marks.text[row]

    def number_at(self, point: QPointF) -> int | None:
        """Feature number of the label under a point of the widget."""
        placed = self.placed
        if not placed.top <= point.y() <= placed.bottom or len(placed.rows) == 0:
            return None
        nearest = int(np.argmin(np.abs(placed.centre - point.x())))
        if abs(placed.centre[nearest] - point.x()) > placed.width / 2:
            return None
        return int(self.marks.number[placed.rows[nearest]])


def leader_lines(x: np.ndarray, places: np.ndarray, top: float) -> np.ndarray:
    """Lines from the feet of labels at ``places`` down to features at ``x``.

    One stroke where a label stands over its feature, an elbow of three elsewhere.
    """
    start, knee, base, end = top + 1.0, top + 4.5, top + _LEADER - 4, top + _LEADER - 1
    apart = x != places
    straight, x, places = x[~apart], x[apart], places[apart]
    strokes = (
        (straight, start, straight, end),
        (places, start, places, knee),
        (places, knee, x, base),
        (x, base, x, end),
    )
    lines = np.empty((len(straight) + 3 * len(x), 4))
    stop = 0
    for stroke in strokes:
        first, stop = stop, stop + len(stroke[0])
        for column, values in enumerate(stroke):
            lines[first:stop, column] = values
    return lines
