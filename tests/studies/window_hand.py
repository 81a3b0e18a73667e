"""Work by hand at the pace of a hand: python window_hand.py SPECTRUM WAVE [FOLDER]

Opens a spectrum, solves it, selects the feature nearest to WAVE (own medium), drags the upper
bracket of its fit by one pixel a frame (60 a second) and prints how old the shown curve was,
how long the window's loop stood still, and what a step of a dragged continuum anchor costs.
With FOLDER, pictures are kept there.
"""

from __future__ import annotations

import os
import sys
import time
from pathlib import Path

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
sys.path.insert(0, str(Path(__file__).resolve().parents[2] / "app"))

import numpy as np  # noqa: E402
from PySide6.QtCore import QPoint, QStandardPaths, Qt  # noqa: E402
from PySide6.QtTest import QTest  # noqa: E402
from PySide6.QtWidgets import QApplication  # noqa: E402

FRAME = 1.0 / 60.0
MOVES = 90


class Hand:
    """Moves the pointer and watches what the window makes of it."""

    def __init__(self, app, window, folder: Path | None):
        self.app, self.window, self.bench, self.folder = app, window, window.bench, folder
        self.view = window.spectrum_view
        self.asked: dict[float, float] = {}
        self.ages: list[float] = []
        self.gaps: list[float] = []

    def wait(self, ready, seconds: float = 120.0) -> float:
        start = time.perf_counter()
        while not ready():
            self.app.processEvents()
            time.sleep(0.001)
            if time.perf_counter() - start > seconds:
                raise TimeoutError
        return time.perf_counter() - start

    def rest(self, seconds: float) -> None:
        end = time.perf_counter() + seconds
        self.wait(lambda: time.perf_counter() > end, seconds + 60)

    def picture(self, name: str) -> None:
        if self.folder is not None:
            self.rest(0.3)
            self.window.grab().save(str(self.folder / f"{name}.png"))

    def frame(self, start: float) -> None:
        """Runs the loop to the end of a frame, noting how long it stood still."""
        before = time.perf_counter()
        while before - start < FRAME:
            self.app.processEvents()
            now = time.perf_counter()
            self.gaps.append(now - before)
            before = now
            time.sleep(0.0005)

    def watch(self) -> None:
        follower, shown = self.window.refresher.fits, self.window.refresher.fits._show

        def told(made, final):
            asked = self.asked.get(round(made.fit["limits"][1], 6))
            if asked is not None:
                self.ages.append(time.perf_counter() - asked)
            shown(made, final)

        follower._show = told

    def drag_bracket(self) -> None:
        plot, limits = self.view.plot, self.view.hand.limits
        x, y = round(limits.pixels(plot)[1]), plot.height() // 2
        QTest.mouseMove(plot, QPoint(x, y))
        ready = self.wait(lambda: self.window.refresher.fits._ready is not None)
        print(f"ready {ready:.2f} s after the pointer came to the bracket")
        self.watch()
        QTest.mousePress(plot, Qt.MouseButton.LeftButton, pos=QPoint(x, y))
        paints = plot.paints
        for k in range(MOVES):
            start = time.perf_counter()
            QTest.mouseMove(plot, QPoint(x + 3 + min(k, MOVES - k), y))
            self.asked[round(self.view.hand._vacuum(limits.limits[1]), 6)] = start
            self.frame(start)
        print(f"{len(self.ages)} curves for {MOVES} moves in {plot.paints - paints} paints; "
              f"age of a curve when shown: median {1e3 * np.median(self.ages):.1f} ms, "
              f"95 % {1e3 * np.percentile(self.ages, 95):.1f} ms; loop still at most "
              f"{1e3 * max(self.gaps):.1f} ms, 95 % {1e3 * np.percentile(self.gaps, 95):.1f} ms")
        self.picture("bracket")
        QTest.mouseRelease(plot, Qt.MouseButton.LeftButton, pos=QPoint(x + 8, y))
        self.wait(lambda: len(self.bench.session.fits) == 1)

    def drag_anchor(self, wave: float) -> None:
        self.bench.run("fit.anchors")
        self.bench.view.change(span=(wave - 40.0, wave + 40.0))
        self.rest(0.3)
        plot, points = self.view.plot, self.view.hand.anchors
        k = int(np.argmin(np.abs(points.wave - wave)))
        x = round(float(plot.scale().pixels(points.wave[k])))
        y = round(float(plot.y_of(points.value[k])))
        QTest.mousePress(plot, Qt.MouseButton.LeftButton, pos=QPoint(x, y))
        costs = []
        for step in range(3, 15):
            start = time.perf_counter()
            QTest.mouseMove(plot, QPoint(x, y - step // 2))
            self.app.processEvents()
            costs.append(time.perf_counter() - start)
        self.picture("anchor")
        before = self.bench.session
        QTest.mouseRelease(plot, Qt.MouseButton.LeftButton, pos=QPoint(x, y - 7))
        done = self.wait(lambda: self.bench.session is not before)
        changed = np.sum(self.bench.session.features.ew != before.features.ew)
        print(f"anchor: a step with its paint {1e3 * np.median(costs):.1f} ms (most "
              f"{1e3 * max(costs):.1f}); {changed} features measured again after {done:.2f} s")


def main(path: str, wave: float, folder: Path | None) -> None:
    from linewright.spectra.medium import to_medium
    from linewright.window.acts import opening
    from linewright.window.main_window import MainWindow

    QStandardPaths.setTestModeEnabled(True)
    app = QApplication.instance() or QApplication([])
    window = MainWindow()
    window.resize(1600, 900)
    window.show()
    opening.open_files(window.bench, [path])
    bench = window.bench
    while bench.spectrum is None:
        app.processEvents()
    if bench.session.spectrum.medium not in ("air", "vacuum"):
        opening.set_medium(bench, "air")
    hand = Hand(app, window, folder)
    bench.run("spectrum.solve")
    print(f"solved in {hand.wait(lambda: len(bench.session.features) > 0, 300):.1f} s")
    own = to_medium(bench.session.features.wave, bench.session.spectrum.medium)
    row = int(np.argmin(np.abs(own - wave)))
    bench.view.change(span=(float(own[row]) - 1.2, float(own[row]) + 1.2))
    bench.view.select(int(bench.session.features.number[row]))
    hand.rest(1.0)
    hand.drag_bracket()
    hand.drag_anchor(wave)
    window._leaving = True
    window.close()


if __name__ == "__main__":
    main(sys.argv[1], float(sys.argv[2]), Path(sys.argv[3]) if len(sys.argv) > 3 else None)
