"""Measures of a figure: journal widths, type sizes and line weights, in points."""

from __future__ import annotations

from dataclasses import dataclass

from ..errors import InputRefused

POINTS_PER_MM = 72.0 / 25.4
# Astronomy & Astrophysics: one column 88 mm, full page 180 mm (author's guide, figures)
WIDTHS_MM = {"one-column": 88.0, "two-column": 180.0}
INK = "#000000"
GREY = "#6b7280"
CONTINUUM = "#8a929c"
# dash patterns in points (on, off); standing is told by the leader's line
DASHES = {"firm": None, "likely": (3.0, 1.5), "tentative": (0.8, 1.4)}
LEADER_WIDTH = 0.5
TRACE_WIDTH = 0.6
AXIS_WIDTH = 0.6


@dataclass(frozen=True)
class FigureStyle:
    """What to draw: ``range`` (own medium, Angstrom; None for all), rows and width.

    width: 'one-column' (88 mm), 'two-column' (180 mm) or millimetres; dpi for .png
    """

    range: tuple[float, float] | None = None
    rows: int = 1
    width: str | float = "two-column"
    dpi: int = 300

    def __post_init__(self):
        if self.rows < 1 or self.rows > 20:
            raise InputRefused("--rows", f"{self.rows} rows", "use 1 to 20")
        if isinstance(self.width, str) and self.width not in WIDTHS_MM:
            raise InputRefused("--width", f"no width '{self.width}'", f"use {', '.join(WIDTHS_MM)}")
        if not 40.0 <= self.width_mm <= 1000.0:
            raise InputRefused("--width", f"{self.width} mm", "use 40 to 1000 mm")

    @property
    def width_mm(self) -> float:
        return WIDTHS_MM[self.width] if isinstance(self.width, str) else float(self.width)

    @property
    def width_pt(self) -> float:
        return self.width_mm * POINTS_PER_MM

    @property
    def is_narrow(self) -> bool:
        return self.width_mm < 120.0

    @property
    def type_size(self) -> float:
        """Of axis labels; the labels of lines are half a point smaller."""
        return 7.0 if self.is_narrow else 7.5

    @property
    def label_size(self) -> float:
        return self.type_size - 0.7


@dataclass(frozen=True)
class Row:
    """One panel on the page, in points from the page's lower left corner.

    left, bottom, width, height: of the axes; strip: height of the label strip above
    low, high: own-medium wavelengths; floor, ceiling: flux at the lower and upper edge
    """

    left: float
    bottom: float
    width: float
    height: float
    strip: float
    low: float
    high: float
    floor: float
    ceiling: float

    def x(self, wave):
        return self.left + (wave - self.low) / (self.high - self.low) * self.width

    def y(self, flux):
        return self.bottom + (flux - self.floor) / (self.ceiling - self.floor) * self.height
