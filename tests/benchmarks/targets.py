"""The drawing targets, each measured against its base in the same run."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import pyqtgraph
import scenes
from PySide6.QtWidgets import QApplication
from rounds import Act, measure, steady


@dataclass(frozen=True)
class Row:
    """One line of the table; verdict is 'met', 'aim', 'missed' or 'noisy'."""

    target: str
    what: str
    value: float
    first: float
    going: float
    verdict: str
    note: str = ""


def judged(value: float, first: float, going: float, control: float) -> str:
    """'aim' for the second column, 'met' for the first; never a failure on a noisy run."""
    if not steady(control):
        return "noisy"
    return "aim" if value <= going else "met" if value <= first else "missed"


def base_plot() -> pyqtgraph.PlotWidget:
    """BASE: a static curve of 6,400 points, window size and axes as ours."""
    plot = pyqtgraph.PlotWidget()
    plot.resize(*scenes.SIZE)
    x = np.linspace(scenes.LOW, scenes.HIGH, 6400)
    curve = pyqtgraph.PlotCurveItem(x, np.sin(x) + 0.1 * np.cos(7 * x))
    plot.addItem(curve)
    plot.show()
    return plot


def deliver() -> None:
    """Let Qt paint what is marked dirty, as it does between two frames."""
    QApplication.processEvents()


def base_act(plot: pyqtgraph.PlotWidget, name: str) -> Act:
    def paint() -> None:
        plot.viewport().update()
        deliver()

    return Act(name, paint)


class PanAct:
    """Steps a view to and fro; asserts one paint per lane and step."""

    def __init__(self, view, width: float = 0.5):
        self.view = view
        middle, half = 0.5 * (scenes.LOW + scenes.HIGH), 0.5 * width * (scenes.HIGH - scenes.LOW)
        view.set_view(middle - half, middle + half)
        self.sign = 1
        self.before: list[int] = []
        self.most = 0

    def prepare(self) -> None:
        self.before = [lane.paints for lane in scenes.lanes(self.view)]

    def run(self) -> None:
        self.view.step(0.013 * self.sign)
        deliver()

    def check(self) -> None:
        self.sign = -self.sign
        deliver()
        counts = [a.paints - b for a, b in zip(scenes.lanes(self.view), self.before)]
        assert min(counts[1:]) >= 1, "a lane was not painted"
        self.most = max(self.most, *counts)

    def act(self, name: str) -> Act:
        return Act(name, self.run, self.prepare, self.check)


def peak_plot(samples: int) -> tuple[pyqtgraph.PlotWidget, Callable[[], None]]:
    """The library's automatic 'peak' downsampling with clipping, and a pan step of it."""
    plot = pyqtgraph.PlotWidget()
    plot.resize(*scenes.SIZE)
    part = scenes.spectrum(samples).segments[0]
    item = pyqtgraph.PlotDataItem(part.wave, part.flux)
    plot.addItem(item)
    item.setClipToView(True)
    item.setDownsampling(auto=True, method="peak")
    plot.show()
    middle, half = 0.5 * (scenes.LOW + scenes.HIGH), 0.25 * (scenes.HIGH - scenes.LOW)
    state = {"sign": 1, "middle": middle}

    def step() -> None:
        state["middle"] += 0.026 * half * state["sign"]
        state["sign"] = -state["sign"]
        plot.setXRange(state["middle"] - half, state["middle"] + half, padding=0)
        plot.scene().prepareForPaint()
        deliver()

    return plot, step


def pan(samples: int, rounds: int, drain) -> list[Row]:
    """Targets 1 and 2."""
    base, view = base_plot(), scenes.view(samples)
    peak, peak_step = peak_plot(samples)
    drain()
    panning = PanAct(view)
    drain()
    acts = [base_act(base, "A"), base_act(base, "A'"), panning.act("pan"), Act("peak", peak_step)]
    timing = measure(acts, rounds, drain)
    control = timing.ratio("A'", "A")
    static, automatic = timing.ratio("pan", "A"), timing.ratio("pan", "peak")
    note = f"{timing.milliseconds('pan'):.2f} ms; base {timing.milliseconds('A'):.2f} ms"
    size = f"{samples:.0e} samples"
    rows = [
        Row("0", "control A'/A", control, 1.1, 1.1, "steady" if steady(control) else "noisy"),
        Row("1", f"pan {size} / static base", static, 1.6, 1.15,
            judged(static, 1.6, 1.15, control), note),
        Row("1", f"pan {size} / automatic peak", automatic, 0.5, 0.3,
            judged(automatic, 0.5, 0.3, control), f"{timing.milliseconds('peak'):.2f} ms"),
        Row("2", "paints of a lane per range change", panning.most, 1, 1,
            "aim" if panning.most == 1 else "missed"),
    ]
    for widget in (base, view, peak):
        widget.close()
    return rows


def velocity(teeth: int, rounds: int, drain) -> list[Row]:
    """Target 3: one velocity step against one repaint of the spectrum."""
    view = scenes.view(100_000)
    view.set_rake(scenes.rake(teeth))
    drain()
    state = {"velocity": 0.0}

    def step() -> None:
        state["velocity"] = 0.0 if state["velocity"] else 1.7
        view.set_velocity(state["velocity"])
        deliver()

    def spectrum() -> None:
        view.plot.update()
        deliver()

    acts = [Act("A", spectrum), Act("A'", spectrum), Act("step", step)]
    timing = measure(acts, rounds, drain)
    control, value = timing.ratio("A'", "A"), timing.ratio("step", "A")
    note = f"{timing.milliseconds('step'):.2f} ms; spectrum {timing.milliseconds('A'):.2f} ms"
    view.close()
    return [
        Row("0", "control A'/A", control, 1.1, 1.1, "steady" if steady(control) else "noisy"),
        Row("3", f"velocity step, {teeth:.0e} teeth / spectrum", value, 0.6, 0.35,
            judged(value, 0.6, 0.35, control), note),
    ]


def labels(count: int, rounds: int, drain) -> list[Row]:
    """Target 4: pan with labels against the same with ticks only."""
    views = [scenes.view(100_000) for _ in range(2)]
    for view, claimed in zip(views, (True, False)):
        view.set_session(scenes.session(count, claimed))
    drain()
    with_labels, without = (PanAct(view, width=1.01) for view in views)
    drain()
    acts = [without.act("A"), without.act("A'"), with_labels.act("labels")]
    timing = measure(acts, rounds, drain)
    control, value = timing.ratio("A'", "A"), timing.ratio("labels", "A")
    placed = len(views[0].plot.labels.placed.rects)
    note = f"{placed} placed; {timing.milliseconds('labels'):.2f} ms"
    for view in views:
        view.close()
    return [
        Row("0", "control A'/A", control, 1.1, 1.1, "steady" if steady(control) else "noisy"),
        Row("4", f"{count} labels / none", value, 1.25, 1.1,
            judged(value, 1.25, 1.1, control), note),
    ]
