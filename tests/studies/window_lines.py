"""The Catalogue with a million lines: python window_lines.py [LINES]

An invented catalogue written as a CSV file, read as a user's own, and searched in the window.
Prints, in ms of the window's thread: one scroll step (set the scroll bar, repaint), and the
longest single turn of its event loop from a question being asked to its answer being painted;
in ms of the clock: that turn, and how long the answer took. (The clock counts what other
programs on the machine take.) Exit status 1 when a turn took more than 16 ms of the thread.
"""

from __future__ import annotations

import os
import sys
import tempfile
import time
from pathlib import Path

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
ROOT = Path(__file__).resolve().parents[2]
sys.path[:0] = [str(ROOT / "app"), str(ROOT / "tests" / "window")]
import numpy as np  # noqa: E402

HELD_MS = 16.0
SPECIES = ("Fe I", "Fe II", "Ti I", "Ti II", "Cr I", "Ni I", "Mn I", "Co I", "V I", "Nd II")
QUESTIONS = ("Fe I", "ti", "4000:6000 gf>-1", "all", "all e<2", "5183.6", "all depth>0.3", "Nd II all")


def written(path: Path, lines: int) -> None:
    """An invented list of lines, 3000-25000 Angstrom, vacuum."""
    rng = np.random.default_rng(0)
    wave = np.sort(rng.uniform(3000.0, 25000.0, lines))
    names = np.array(SPECIES)[rng.integers(0, len(SPECIES), lines)]
    e_low, loggf = rng.uniform(0, 8, lines), rng.normal(-3, 1.5, lines)
    with open(path, "w", encoding="utf-8") as file:
        file.write("wave,species,e_low,loggf\n")
        file.writelines(f"{w:.4f},{s},{e:.3f},{g:.2f}\n"
                        for w, s, e, g in zip(wave, names, e_low, loggf))


def read(lines: int):
    from linewright.lines.user import read_user_catalogue

    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "many.csv"
        written(path, lines)
        start = time.perf_counter()
        catalogue = read_user_catalogue(path, "vacuum")
        print(f"{len(catalogue):,} lines read in {time.perf_counter() - start:.1f} s")
    return catalogue


def desk_of(catalogue):
    import window_builders as build

    from linewright.session.document import Document
    from linewright.window.workbench import Desk

    few = build.catalogue_of(300)
    spectrum = build.spectrum_of(few)
    return Desk(spectrum, Document(build.session_of(spectrum, few)))


class Held:
    """The longest turn of the event loop: ms of the thread, ms of the clock; and the whole."""

    def __init__(self, app):
        self._app, self.thread, self.clock, self.whole = app, 0.0, 0.0, 0.0

    def turn(self, act) -> None:
        thread, clock = time.thread_time(), time.perf_counter()
        act()
        self.thread = max(self.thread, (time.thread_time() - thread) * 1e3)
        self.clock = max(self.clock, (time.perf_counter() - clock) * 1e3)

    def until(self, ready, seconds: float = 60.0) -> Held:
        start = time.perf_counter()
        while not ready() and time.perf_counter() - start < seconds:
            self.turn(self._app.processEvents)
            time.sleep(0.0005)
        self.whole = (time.perf_counter() - start) * 1e3
        return self

    def painted(self) -> Held:
        for _ in range(5):
            self.turn(self._app.processEvents)
        return self


def scrolled(app, table, steps: int = 200) -> np.ndarray:
    """ms (thread, clock) of steps of a page, half of them to anywhere in the table."""
    bar, rng = table.verticalScrollBar(), np.random.default_rng(1)
    jumps = rng.integers(0, bar.maximum(), steps // 2)
    pages = bar.maximum() // 2 + np.arange(steps - steps // 2) * bar.pageStep()
    times = []
    for value in (*jumps, *pages):
        step = Held(app)
        step.turn(lambda v=int(value): (bar.setValue(v), table.viewport().repaint()))
        times.append((step.thread, step.clock))
        app.processEvents()
    return np.array(times)


def opened(catalogue):
    """(application, window) with the catalogue in place of the shipped one."""
    from linewright.window import rake
    from linewright.window.app import application, new_window
    from linewright.window.main_window import MainWindow

    MainWindow._warm_engine = lambda self: None
    rake._loaded = lambda progress: catalogue
    app, window = application([]), new_window()
    window.resize(1600, 900)
    window.show()
    window.bench.add_desk(desk_of(catalogue))
    Held(app).until(lambda: window.bench.depth is not None)
    window.space.tables.setCurrentWidget(window.space.catalogue)
    Held(app).until(lambda: not window.space.catalogue._searching.busy)
    return app, window


def ask_all(app, panel) -> float:
    """The longest turn of all questions, ms of the thread."""
    worst = 0.0

    def report(name, act) -> None:
        nonlocal worst
        held = Held(app)
        held.turn(act)
        whole = held.until(lambda: not panel._searching.busy).whole
        held.painted()
        worst = max(worst, held.thread)
        print(f"{name:20s} {panel.model.rowCount():9,} lines in {whole:6.1f} ms; longest turn "
              f"{held.thread:.1f} ms of the thread, {held.clock:.1f} of the clock")
    for words in QUESTIONS:
        panel.text.setText(words)
        report(words, panel.filter_now)
    for column in (1, 2, 3, 5):
        report(f"sorted by column {column}", lambda c=column: panel.table.sortByColumn(
            c, panel.table.horizontalHeader().sortIndicatorOrder()))
    return worst


def main() -> int:
    app, window = opened(read(int(sys.argv[1]) if len(sys.argv) > 1 else 1_000_000))
    panel = window.space.catalogue
    worst = ask_all(app, panel)
    panel.text.setText("all")
    panel.filter_now()
    Held(app).until(lambda: not panel._searching.busy)
    for name, times in zip(("thread", "clock"), scrolled(app, panel.table).T):
        median, high, most = np.percentile(times, [50, 95, 100])
        print(f"scroll step over {panel.model.rowCount():,} rows, {name}: median {median:.1f}, "
              f"95 % {high:.1f}, longest {most:.1f} ms")
    window._leaving = True
    window.close()
    return int(worst > HELD_MS)


if __name__ == "__main__":
    sys.exit(main())
