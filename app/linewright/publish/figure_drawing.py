"""Draws a figure on matplotlib: panels, traces, labels with leaders, legend."""

from __future__ import annotations

import numpy as np
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.font_manager import FontProperties
from matplotlib.ticker import AutoMinorLocator, MaxNLocator, ScalarFormatter

from ..errors import InputRefused
from ..session.model import Session
from ..spectra.medium import to_medium
from ..spectra.spectrum import Spectrum
from .figure_labels import Marks, marks_between
from .figure_leaders import LabelDrawing
from .figure_legend import draw_legend, legend_height
from .figure_style import AXIS_WIDTH, CONTINUUM, INK, TRACE_WIDTH, FigureStyle, Row
from .figure_text import Ruler
from .figure_trace import Trace, continuum_traces, stick_traces, traces

LEFT, RIGHT, TOP = 36.0, 12.0, 4.0
ELBOW = 13.0
TICK_LABELS, AXIS_LABEL = 11.0, 11.0
FONT = "DejaVu Sans"
SUPERSCRIPTS = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")


def draw(session: Session, spectrum: Spectrum | None, style: FigureStyle):
    """(Figure, FigureReport) of a session; raises InputRefused for a range without data."""
    from .figure import FigureReport

    low, high = _whole_range(session, spectrum, style)
    edges = np.linspace(low, high, style.rows + 1)
    marks = [marks_between(session, a, b) for a, b in zip(edges[:-1], edges[1:], strict=True)]
    ruler = Ruler(FontProperties(family=FONT))
    page = _Page(session, spectrum, style, marks, ruler)
    for index, (a, b) in enumerate(zip(edges[:-1], edges[1:], strict=True)):
        page.add_row(index, float(a), float(b))
    shown, left_out = page.finish()
    return page.figure, FigureReport(shown, left_out)


def _whole_range(session: Session, spectrum: Spectrum | None, style: FigureStyle):
    medium = session.spectrum.medium
    if spectrum is not None:
        ends = [(s.wave[0], s.wave[-1]) for s in spectrum.segments]
        full = to_medium(np.array([min(e[0] for e in ends), max(e[1] for e in ends)]), medium)
    elif len(session.features):
        own = to_medium(session.features.wave, medium)
        full = (own.min() - 1.0, own.max() + 1.0)
    else:
        raise InputRefused("figure", "nothing to draw", "solve a spectrum with features")
    low, high = style.range or full
    if high <= full[0] or low >= full[1]:
        raise InputRefused(
            "--range",
            f"{low:g}:{high:g} lies outside the spectrum",
            f"choose within {full[0]:.1f}:{full[1]:.1f}",
        )
    return float(low), float(high)


class _Page:
    """One figure while it is drawn; measures in points."""

    def __init__(self, session, spectrum, style, marks: list[Marks], ruler: Ruler):
        self.session, self.spectrum, self.style = session, spectrum, style
        self.marks, self.ruler = marks, ruler
        texts = [label.text for row in marks for label in row.labels]
        self.strip = ELBOW + max(ruler.widths(texts, style.label_size), default=0.0) + 3.0
        self.panel = 74.0 if style.is_narrow else 92.0
        self.legend = legend_height(marks, session, style, ruler)
        pitch = TOP + self.strip + self.panel + TICK_LABELS
        self.height = style.rows * pitch + AXIS_LABEL + self.legend
        self.pitch = pitch
        self.figure = Figure(figsize=(style.width_pt / 72.0, self.height / 72.0))
        FigureCanvasAgg(self.figure)
        self.depths = bool(np.isfinite(session.features.depth).any())
        self.power = 0 if spectrum is None else _power(spectrum)
        self.shown = self.left_out = 0

    def add_row(self, index: int, low: float, high: float) -> None:
        bottom = self.height - (index + 1) * self.pitch + TICK_LABELS
        width = self.style.width_pt - LEFT - RIGHT
        drawn, continuum = self._traces(low, high, width)
        floor, ceiling = _limits([*drawn, *continuum])
        row = Row(LEFT, bottom, width, self.panel, self.strip, low, high, floor, ceiling)
        axes = self._axes(row, last=index == self.style.rows - 1)
        for trace in continuum:
            axes.plot(trace.wave, trace.flux, color=CONTINUUM, lw=0.8, dashes=(4, 2), zorder=1)
        for trace in drawn:
            axes.plot(trace.wave, trace.flux, color=INK, lw=TRACE_WIDTH, zorder=2)
        labels = LabelDrawing(self.figure, row, self.style, self.ruler)
        labels.bare(self.marks[index], drawn)
        shown = labels.named(self.marks[index].labels, drawn)
        self.shown += shown
        self.left_out += len(self.marks[index].labels) - shown

    def _traces(self, low: float, high: float, width: float) -> tuple[list[Trace], list[Trace]]:
        if self.spectrum is None:
            return stick_traces(self.session, low, high), []
        medium = self.session.spectrum.medium
        drawn = traces(self.spectrum, medium, low, high, width)
        continuum = continuum_traces(self.session, low, high)
        return _scaled(drawn, self.power), _scaled(continuum, self.power)

    def _axes(self, row: Row, last: bool):
        style, wide, tall = self.style, self.style.width_pt, self.height
        box = (row.left / wide, row.bottom / tall, row.width / wide, row.height / tall)
        axes = self.figure.add_axes(box)
        axes.patch.set_visible(False)
        axes.set_xlim(row.low, row.high)
        axes.set_ylim(row.floor, row.ceiling)
        _dress(axes, style)
        if self.spectrum is None and not self.depths:
            axes.set_yticks([])
        name = {"fontsize": style.type_size, "fontfamily": FONT}
        axes.set_ylabel(self._flux_name(), labelpad=3.0, **name)
        axes.yaxis.set_label_coords(-(LEFT - style.type_size - 3.0) / row.width, 0.5)
        if last:
            axes.set_xlabel(wave_name(self.session.spectrum.medium), labelpad=2.0, **name)
        return axes

    def _flux_name(self) -> str:
        if self.spectrum is None:
            return "1 - depth" if self.depths else "depths not given"
        unit = self.session.spectrum.flux_unit
        power = f"10{str(self.power).translate(SUPERSCRIPTS)}" if self.power else ""
        factor = " ".join(part for part in (power, unit if len(unit) < 24 else "") if part)
        return f"flux ({factor})" if factor else "flux"

    def finish(self) -> tuple[int, int]:
        draw_legend(self.figure, (self.height, self.left_out), self.marks, self.session, self.style)
        return self.shown, self.left_out


def wave_name(medium: str) -> str:
    """The name of the wavelength axis."""
    if medium == "unknown":
        return "wavelength, air or vacuum unknown (Å)"
    return f"wavelength in {medium} (Å)"


def _power(spectrum: Spectrum) -> int:
    """Power of ten taken out of the flux axis; 0 where its numbers are handy as they are."""
    values = np.concatenate(
        [np.abs(s.flux[~s.mask & np.isfinite(s.flux)]) for s in spectrum.segments]
    )
    largest = float(np.quantile(values, 0.999)) if len(values) else 0.0
    power = int(np.floor(np.log10(largest))) if largest > 0 else 0
    return 0 if -3 < power < 4 else power


def _scaled(drawn: list[Trace], power: int) -> list[Trace]:
    return [Trace(t.wave, t.flux / 10.0**power) for t in drawn] if power else drawn


def _limits(drawn: list[Trace]) -> tuple[float, float]:
    """Flux range with a little air; zero is included where the lines come near it."""
    values = np.concatenate([t.flux for t in drawn]) if drawn else np.zeros(0)
    values = values[np.isfinite(values)]
    if len(values) == 0:
        return 0.0, 1.0
    low, high = float(values.min()), float(values.max())
    if 0.0 <= low < 0.4 * high:
        low = 0.0
    span = (high - low) or abs(high) or 1.0
    return low - 0.03 * span, high + 0.06 * span


def _dress(axes, style: FigureStyle) -> None:
    plain = ScalarFormatter(useOffset=False)
    plain.set_scientific(False)
    axes.xaxis.set_major_formatter(plain)
    axes.xaxis.set_major_locator(MaxNLocator(5 if style.is_narrow else 10))
    axes.yaxis.set_major_locator(MaxNLocator(4))
    for axis in (axes.xaxis, axes.yaxis):
        axis.set_minor_locator(AutoMinorLocator())
    for which, length in (("major", 3.5), ("minor", 2.0)):
        axes.tick_params(
            which=which, direction="in", length=length, width=AXIS_WIDTH, right=True,
            labelsize=style.type_size - 0.5, labelfontfamily=FONT, pad=2.5,
        )  # fmt: skip
    axes.spines["top"].set_visible(False)
    for side in ("left", "right", "bottom"):
        axes.spines[side].set_linewidth(AXIS_WIDTH)
    axes.yaxis.set_major_formatter(ScalarFormatter(useOffset=False))
