"""The velocity residuals: claims against wavelength and against lower-level energy.

A wavelength scale gone wrong shows as a slope on the left, or as a step of the medians drawn
there stretch by stretch; wrong names as points far from
the band, a chromospheric or layered gas as a slope on the right. The plotting library loads
when this is first opened.
"""

from __future__ import annotations

import numpy as np
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QLabel, QVBoxLayout, QWidget

from ..job.view_residuals import residuals, steps, steps_words, trend
from ..spectra.medium import to_medium

SYMBOLS = {"diamond": "d", "triangle": "t1", "square": "s", "circle": "o", "cross": "+",
           "bar": "s", "star": "star", "vee": "t", "hexagon": "h"}
EMPTY = "No confident claims yet: solve the spectrum (F5)."
TIP = "Click a point to select its feature everywhere; wheel and drag zoom and move."


class ResidualsWindow(QWidget):
    """A window of its own beside the work; it follows session, selection and theme."""

    def __init__(self, bench, parent=None):
        super().__init__(parent, Qt.WindowType.Window)
        self._bench, self.found, self._session = bench, None, None
        self.setWindowTitle("Velocity residuals · Linewright")
        self.setAccessibleName("Velocity residuals")
        self.resize(1000, 420)
        self.words = QLabel(EMPTY)
        self.words.setWordWrap(True)
        self.words.setMargin(6)
        box = QVBoxLayout(self)
        box.setContentsMargins(6, 2, 6, 6)
        box.addWidget(self.words)
        box.addWidget(self._plots(), 1)
        bench.listen(lambda old, new: self._follow(new))
        bench.view.listen(lambda old, new: self._mark())

    def _plots(self) -> QWidget:
        import pyqtgraph

        self._library = pyqtgraph
        self.area = pyqtgraph.GraphicsLayoutWidget()
        self.area.setToolTip(TIP)
        self.plots = [self.area.addPlot(0, k) for k in range(2)]
        self.plots[1].setYLink(self.plots[0])
        self.points, self.marks, self.lines = [], [], []
        for plot in self.plots:
            points = pyqtgraph.ScatterPlotItem(size=7, pxMode=True)
            points.sigClicked.connect(self._clicked)
            mark = pyqtgraph.ScatterPlotItem(size=15, pxMode=True, brush=None)
            line = pyqtgraph.PlotCurveItem()
            for item in (points, line, mark):
                plot.addItem(item)
            self.points.append(points)
            self.marks.append(mark)
            self.lines.append(line)
        self.steps = pyqtgraph.PlotCurveItem()
        self.plots[0].addItem(self.steps)
        return self.area

    def open(self) -> None:
        self.show()
        self.raise_()
        self.activateWindow()
        self._session = None
        self._follow(self._bench.session)

    def _follow(self, session) -> None:
        if session is self._session or not self.isVisible():
            return
        self._session = session
        self.found = residuals(session) if session is not None else None
        self.refresh()

    def refresh(self) -> None:
        """Draws what was found in the colours of the present theme."""
        theme, found = self._bench.theme, self.found
        self.area.setBackground(theme.base)
        for plot, title in zip(self.plots, (f"wavelength in {self._bench.medium} (Å)",
                                            "lower-level energy (eV)")):
            for side in ("left", "bottom"):
                plot.getAxis(side).setPen(theme.faint)
                plot.getAxis(side).setTextPen(theme.ink)
            plot.setLabel("bottom", title, color=theme.ink)
        self.plots[0].setLabel("left", "offset (km/s)", color=theme.ink)
        if found is None or not len(found):
            self.words.setText(EMPTY)
            for item in (*self.points, *self.marks):
                item.setData([], [])
            self.steps.setData([], [])
            return
        self._draw(found, theme)
        self._mark()

    def columns(self) -> tuple[np.ndarray, np.ndarray]:
        """(own-medium wavelength, lower-level energy) of the points."""
        return to_medium(self.found.wave, self._bench.medium), self.found.e_low

    def _draw(self, found, theme) -> None:
        who = list(zip(found.species, found.origin))
        brushes = [self._library.mkBrush(theme.colour(*w)) for w in who]
        symbols = [SYMBOLS[theme.marker(*w)] for w in who]
        said = []
        for x, points, line, unit in zip(self.columns(), self.points, self.lines,
                                         (("1000 Å", 1000.0), ("eV", 1.0))):
            known = np.isfinite(x)
            keep = np.nonzero(known)[0].tolist()
            points.setData(x=x[known], y=found.offset[known], data=found.number[known],
                           brush=[brushes[k] for k in keep], pen=None,
                           symbol=[symbols[k] for k in keep])
            start, slope, error = trend(x, found.offset)
            line.setPen(theme.profile, width=2)
            ends = np.array([x[known].min(), x[known].max()]) if keep else np.zeros(0)
            line.setData(ends, start + slope * ends)
            said.append(_signed(slope, error, *unit))
        self.words.setText(
            f"{len(found):,} firm and likely claims: median {_minus(found.middle)} km/s, scatter "
            f"{found.scatter:.3f} km/s; slopes {said[0]} and {said[1]}{self._stepped(theme)}.")
        reach = max(8.0 * found.scatter, 0.1)
        self.plots[0].setYRange(found.middle - reach, found.middle + reach)

    def _stepped(self, theme) -> str:
        """Draws the medians of the stretches; what stands off most, in words."""
        edges, middle, error = steps(self.columns()[0], self.found.offset)
        self.steps.setPen(theme.ink, width=2)
        self.steps.setData(np.repeat(edges, 2)[1:-1], np.repeat(middle, 2))
        words = steps_words(edges, middle, error)
        return f"; {words}" if words else ""

    def _mark(self) -> None:
        """A ring about the selected feature."""
        if self.found is None or not self.isVisible():
            return
        at = np.nonzero(self.found.number == (self._bench.view.now.selected or -1))[0]
        pen = self._library.mkPen(self._bench.theme.ink, width=2)
        for x, mark in zip(self.columns(), self.marks):
            mark.setData(x=x[at], y=self.found.offset[at], pen=pen)

    def _clicked(self, _item, points, _event=None) -> None:
        if len(points):
            self._bench.view.select(int(points[0].data()))

    def keyPressEvent(self, event) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.close()
        else:
            super().keyPressEvent(event)


def _signed(slope: float, error: float, unit: str, size: float) -> str:
    if not np.isfinite(slope):
        return "unknown"
    return f"{_minus(slope * size)} ± {error * size:.3f} km/s per {unit}"


def _minus(value: float) -> str:
    return f"{value:+.3f}".replace("-", "−")
