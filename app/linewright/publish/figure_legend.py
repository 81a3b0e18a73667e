"""The legend under the panels: families by shape and colour, standings by line."""

from __future__ import annotations

from dataclasses import dataclass

from matplotlib.lines import Line2D

from ..session.model import Session
from .families import FAMILIES
from .figure_labels import Marks
from .figure_leaders import EDGES, FOOT, MARKERS, SIZES
from .figure_style import CONTINUUM, DASHES, GREY, INK, LEADER_WIDTH, FigureStyle

LEFT, RIGHT = 8.0, 7.0
SAMPLE, AFTER, LINE = 12.5, 7.5, 9.5


@dataclass(frozen=True)
class Entry:
    """A sample of a line or marker with its name; ``look`` are Line2D properties."""

    text: str
    look: dict
    is_line: bool


def _entries(marks: list[Marks], session: Session) -> list[Entry]:
    labels = [label for row in marks for label in row.labels]
    used = {label.family.title for label in labels}
    entries = []
    for family in (f for f in FAMILIES if f.title in used):
        look = {"marker": MARKERS[family.marker], "ms": _size(family), "color": family.light,
                "mew": EDGES.get(family.marker, 0.6)}
        entries.append(Entry(family.title, look, False))
    for standing in (s for s in DASHES if any(label.standing == s for label in labels)):
        look = {"color": INK, "lw": LEADER_WIDTH}
        if DASHES[standing]:
            look["dashes"] = DASHES[standing]
        entries.append(Entry(standing, look, True))
    if any(len(row.unclaimed) for row in marks):
        entries.append(Entry("unclaimed", {"marker": "|", "ms": 3.0, "color": GREY}, False))
    if any(len(row.set_aside) for row in marks):
        entries.append(Entry("set aside", {"marker": "x", "ms": 2.6, "color": GREY}, False))
    if session.continuum:
        look = {"color": CONTINUUM, "lw": 0.8, "dashes": (4, 2)}
        entries.append(Entry("continuum", look, True))
    return entries


def _size(family) -> float:
    return (FOOT + 0.8) * SIZES.get(family.marker, 1.0)


def _left_out_text(count: int) -> str:
    return f"{count} label{'' if count == 1 else 's'} not shown"


def _placed(entries: list[Entry], count: int, style: FigureStyle, ruler):
    """[(entry or None, text, x, line number)], flowing from left to right."""
    size = style.type_size - 0.7
    items = [(entry, entry.text) for entry in entries]
    if count:
        items.append((None, _left_out_text(count)))
    x, line, placed = LEFT, 0, []
    for entry, text in items:
        width = ruler.size(text, size)[0] + (SAMPLE if entry else 0.0)
        if x > LEFT and x + width > style.width_pt - RIGHT:
            x, line = LEFT, line + 1
        placed.append((entry, text, x, line))
        x += width + AFTER
    return placed


def legend_height(marks: list[Marks], session: Session, style: FigureStyle, ruler) -> float:
    """Points of height the legend needs, with the widest count it may have to print."""
    most = sum(len(row.labels) for row in marks)
    placed = _placed(_entries(marks, session), most, style, ruler)
    return 6.0 + LINE * (placed[-1][3] + 1) if placed else 4.0


def draw_legend(figure, below: tuple[float, int], marks, session, style: FigureStyle) -> None:
    """Draw it at the foot of the page; ``below``: (page height in points, labels left out)."""
    from matplotlib.font_manager import FontProperties

    from .figure_text import Ruler

    height, count = below
    ruler = Ruler(FontProperties(family="DejaVu Sans"))
    placed = _placed(_entries(marks, session), count, style, ruler)
    lines = max((line for *_, line in placed), default=0) + 1
    for entry, text, x, line in placed:
        y = 4.0 + LINE * (lines - 1 - line) + 2.5
        if entry is not None:
            _sample(figure, entry, x, y)
        artist = figure.text(
            (x + (SAMPLE if entry else 0.0)) / style.width_pt, y / height, text,
            va="center_baseline", fontproperties=ruler.font, color=INK,
        )  # fmt: skip
        artist.set_fontsize(style.type_size - 0.7)
        artist.set_gid("legend")


def _sample(figure, entry: Entry, x: float, y: float) -> None:
    width, height = (72.0 * inches for inches in figure.get_size_inches())
    xs = [x, x + SAMPLE - 3.0] if entry.is_line else [x + (SAMPLE - 3.0) / 2]
    look = {"lw": 0, **entry.look} if not entry.is_line else entry.look
    ys = [y / height] * len(xs)
    figure.add_artist(Line2D([v / width for v in xs], ys, transform=figure.transFigure, **look))
