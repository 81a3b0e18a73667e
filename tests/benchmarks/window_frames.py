"""Target 6: gaps between frames while each job runs, against the same window idle.

python window_frames.py [SPECTRUM]; without one, a sample. Prints idle p95, then for each job
its duration, the p95 and the largest gap in milliseconds, and the ratio to idle p95. The
window repaints at 60 Hz by a timer; a gap is the time between two paints of the spectrum.
'own' is the most processor time the window's process (all its threads) used in one gap: what
the program itself did, whatever else the machine was busy with.
"""

from __future__ import annotations

import os
import sys
import tempfile
import time
from pathlib import Path

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
ROOT = Path(__file__).resolve().parents[2]
sys.path.insert(0, str(ROOT / "app"))

import numpy as np  # noqa: E402
from PySide6.QtCore import QEventLoop, QObject, QSettings, QTimer  # noqa: E402


class Beat(QObject):
    """Repaints the spectrum at 60 Hz and notes when it was painted."""

    def __init__(self, widget):
        super().__init__()
        self._widget, self.times, self.spent = widget, [], []
        self._timer = QTimer(self)
        self._timer.setInterval(16)
        self._timer.timeout.connect(self._tick)
        self._timer.start()

    def _tick(self) -> None:
        self._widget.repaint()
        self.times.append(time.perf_counter())
        self.spent.append(time.process_time())

    def gaps(self) -> tuple[np.ndarray, np.ndarray]:
        """(wall, processor) milliseconds between paints since the last call."""
        gaps = 1000.0 * np.diff(self.times), 1000.0 * np.diff(self.spent)
        self.times, self.spent = self.times[-1:], self.spent[-1:]
        return gaps


def wait(app, ready, seconds: float) -> None:
    end = time.monotonic() + seconds
    while not ready() and time.monotonic() < end:
        app.processEvents(QEventLoop.ProcessEventsFlag.AllEvents, 5)
        time.sleep(0.0005)


def main() -> int:
    from linewright.resources import samples_dir
    from linewright.window.acts import opening, picking, saving
    from linewright.window.app import application, new_window

    path = Path(sys.argv[1]) if len(sys.argv) > 1 else samples_dir() / "g_dwarf.fits"
    folder = Path(tempfile.mkdtemp())
    QSettings.setPath(QSettings.Format.IniFormat, QSettings.Scope.UserScope, str(folder))
    app = application([])
    window = new_window()
    window.resize(1600, 900)
    window.show()
    bench = window.bench
    opening.open_file(bench, path)
    wait(app, lambda: bench.depth is not None, 60)
    if bench.session.spectrum.medium == "unknown":
        opening.set_medium(bench, "air")
    wait(app, lambda: not bench.tasks._current, 60)
    beat = Beat(window.spectrum_view.plot)

    def measure(name: str, start, key: str | None, seconds: float = 300) -> None:
        wait(app, lambda: False, 0.3)
        beat.gaps()
        begun = time.perf_counter()
        start()
        wait(app, (lambda: False) if key is None else (lambda: not bench.tasks.busy(key)), seconds)
        lasted = time.perf_counter() - begun
        wait(app, lambda: False, 0.1)
        report(name, lasted, beat.gaps())

    def report(name: str, lasted: float, both: tuple[np.ndarray, np.ndarray]) -> None:
        gaps, own = both
        p95, most = np.percentile(gaps, 95), gaps.max()
        if name == "idle":
            report.base = p95
        late = int(np.sum(gaps > 33))
        print(f"{name:28s} {lasted:7.2f} s  p95 {p95:6.1f} ms  largest {most:7.1f} ms  "
              f"over 33 ms {late:3d}  ratio {most / report.base:5.2f}  "
              f"own {own.max():6.1f} ms", flush=True)

    other = samples_dir() / "cool_giant.fits"
    nothing = lambda: None  # noqa: E731
    measure("idle", nothing, None, 3)
    measure("idle again (control)", nothing, None, 3)
    measure("solve", lambda: bench.run("spectrum.solve"), "solve")
    desk = bench.desk
    measure("save", lambda: saving.save(bench, folder / "a.linewright.json"), f"save {id(desk)}")
    measure("table", lambda: saving.export_table(bench, folder / "a.ecsv"), "table")
    low, high = bench.spectrum.own_range()
    bench.view.change(span=(0.5 * (low + high), 0.5 * (low + high) + 30))
    measure("figure", lambda: saving.export_figure(bench, folder / "a.pdf"), "figure")
    wave = float(bench.session.features.wave[len(bench.session.features) // 2]) + 0.9
    measure("pick", lambda: picking.pick(bench, wave), "pick")
    measure("select 20 features", lambda: _select(app, bench, 20), None, 0.2)
    measure("edit", lambda: bench.run("claim.aside"), None, 0.3)
    measure("undo", lambda: bench.run("edit.undo"), None, 0.3)
    measure("open another", lambda: opening.open_file(bench, other), f"open {other}")
    window._leaving = True
    window.close()
    return 0


def _select(app, bench, count: int) -> None:
    for number in bench.session.features.number[:count]:
        bench.view.select(int(number))
        wait(app, lambda: False, 0.06)


if __name__ == "__main__":
    sys.exit(main())
