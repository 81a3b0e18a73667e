"""Labels over a panel, their elbow leaders and the marks at the leaders' feet."""

from __future__ import annotations

import numpy as np
from matplotlib.lines import Line2D

from .figure_labels import Label, Marks
from .figure_style import DASHES, GREY, INK, LEADER_WIDTH, FigureStyle, Row
from .figure_trace import Trace
from .placement import choose

GAP = 4.0
FOOT = 2.5
STUB = 2.0
ELBOW = 13.0
REACH = 60.0
AIR = 0.9
EDGES = {"bar": 2.0}  # points: a bar is all edge, and drawn as thin as one it cannot be seen
MARKERS = {
    "diamond": "D", "triangle": "^", "square": "s", "circle": "o", "cross": "P", "bar": "_",
    "star": "*", "vee": "v", "hexagon": "h",
}  # fmt: skip


# a star's points leave it little ink at the size of the others
SIZES = {"star": 1.5}


class LabelDrawing:
    """Draws on ``figure`` in points; ``row`` says where the panel lies."""

    def __init__(self, figure, row: Row, style: FigureStyle, ruler):
        self._figure, self._row, self._style, self._ruler = figure, row, style, ruler
        self._width, self._height = (72.0 * inches for inches in figure.get_size_inches())

    def _line(self, xs, ys, **look) -> None:
        xs, ys = np.asarray(xs) / self._width, np.asarray(ys) / self._height
        self._figure.add_artist(Line2D(xs, ys, transform=self._figure.transFigure, **look))

    def _feet(self, waves, drawn: list[Trace]) -> np.ndarray:
        """Height in points at which the trace near each wavelength is left clear."""
        row = self._row
        reach = 2.0 / row.width * (row.high - row.low)
        feet = np.full(len(waves), row.bottom)
        for trace in drawn:
            for at, wave in enumerate(waves):
                first, last = np.searchsorted(trace.wave, [wave - reach, wave + reach])
                near = trace.flux[max(first - 1, 0) : last + 1]
                near = near[np.isfinite(near)]
                if len(near):
                    feet[at] = max(feet[at], float(row.y(near.max())))
        return feet + GAP

    def bare(self, marks: Marks, drawn: list[Trace]) -> None:
        """Short grey ticks over unclaimed features, crosses over those set aside."""
        for waves, marker in ((marks.unclaimed, "|"), (marks.set_aside, "x")):
            if len(waves):
                look = {"marker": marker, "ms": 2.6, "mew": LEADER_WIDTH, "lw": 0, "color": GREY}
                self._line(self._row.x(waves), self._feet(waves, drawn), **look)

    def named(self, labels: tuple[Label, ...], drawn: list[Trace]) -> int:
        """Place the labels; returns how many found room."""
        row = self._row
        pitch = self._ruler.line_height(self._style.label_size) + AIR
        anchors = np.array([row.x(label.wave) for label in labels])
        order = np.argsort([-label.importance for label in labels], kind="stable")
        low, high = row.left + pitch / 2 - 2.0, row.left + row.width - pitch / 2 + 2.0
        kept, places = choose(anchors, order, pitch, low, high, REACH)
        chosen = [labels[i] for i in kept]
        feet = self._feet([label.wave for label in chosen], drawn)
        for label, foot, place in zip(chosen, feet, places, strict=True):
            self._one(label, foot, float(place))
        return len(chosen)

    def _one(self, label: Label, foot: float, place: float) -> None:
        row = self._row
        x, top = row.x(label.wave), row.bottom + row.height
        foot = min(foot, top)
        base = top + ELBOW
        look = {"color": label.family.light, "lw": LEADER_WIDTH, "solid_capstyle": "butt"}
        dashes = DASHES[label.standing]
        if dashes:
            look["dashes"] = dashes
        self._line([x, x, place, place], [foot, top, base - STUB, base], **look)
        shape = label.family.marker
        size = FOOT * SIZES.get(shape, 1.0)
        marker = {"marker": MARKERS[shape], "ms": size, "mew": EDGES.get(shape, 0.6), "lw": 0}
        self._line([x], [foot], color=label.family.light, **marker)
        self._text(label.text, place, base + 1.5)

    def _text(self, text: str, x: float, y: float) -> None:
        artist = self._figure.text(
            x / self._width, y / self._height, text, rotation=90, ha="center", va="bottom",
            fontproperties=self._ruler.font, color=INK,
        )  # fmt: skip
        artist.set_fontsize(self._style.label_size)
        artist.set_gid("line-label")
