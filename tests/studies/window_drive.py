"""Drives the window at random for a while: python window_drive.py MINUTES [SPECTRUM ...].

Random selections, edits, undo and redo, filters, velocities, views, themes, tabs, picks,
saves, solves and cancels. Prints the number of acts, exceptions, threads and memory at the
start (after a tenth of the time) and at the end; exit status 1 when an exception happened, a
thread was left or memory grew by more than 5 %.
"""

from __future__ import annotations

import os
import random
import sys
import tempfile
import threading
import time
import traceback
from collections import Counter
from pathlib import Path

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
ROOT = Path(__file__).resolve().parents[2]
sys.path.insert(0, str(ROOT / "app"))
from PySide6.QtCore import Qt  # noqa: E402


def memory_mb() -> float:
    """Resident memory of this process."""
    for line in Path("/proc/self/status").read_text().splitlines():
        if line.startswith("VmRSS"):
            return int(line.split()[1]) / 1024
    return 0.0


class Driver:
    """Picks acts at random and does them as a person would: through commands and widgets."""

    def __init__(self, app, window, files, folder: Path, seed: int = 0):
        self.app, self.window, self.bench, self.files = app, window, window.bench, files
        self.random, self.folder = random.Random(seed), folder
        self.done: Counter = Counter()

    def step(self) -> None:
        names = [n for n in dir(self) if n.startswith("do_")]
        weights = [getattr(self, n).__func__.__dict__.get("weight", 10) for n in names]
        name = self.random.choices(names, weights)[0]
        getattr(self, name)()
        self.done[name[3:]] += 1
        for _ in range(3):
            self.app.processEvents()

    def do_select(self) -> None:
        numbers = self.bench.session.features.number
        if len(numbers):
            self.bench.view.select(int(self.random.choice(numbers)))

    def do_command(self) -> None:
        kept = ("claim.", "edit.", "fit.", "view.", "spectrum.slower", "spectrum.faster")
        ids = [i for i in self.bench.commands if i.startswith(kept)
               and i not in ("claim.note", "view.goto", "fit.limits", "fit.split_more",
                            "fit.anchor_add")]
        self.bench.run(self.random.choice(ids))

    do_command.weight = 40

    def do_undo_many(self) -> None:
        for _ in range(self.random.randint(1, 30)):
            self.bench.run(self.random.choice(["edit.undo", "edit.undo", "edit.redo"]))

    def do_filter(self) -> None:
        self.window.ledger.text.setText(self.random.choice(["", "fe", "ti i", "51", "xx"]))
        self.window.ledger.filter_now()

    def do_sort(self) -> None:
        order = self.random.choice(list(Qt.SortOrder))
        self.window.ledger.table.sortByColumn(self.random.randint(-1, 9), order)

    def do_slide(self) -> None:
        for _ in range(10):
            v = self.random.uniform(-300, 300)
            self.window.space.track.velocityChanged.emit(v, self.random.random() < 0.2)
            self.app.processEvents()

    def do_view(self) -> None:
        low, high = self.bench.spectrum.own_range()
        middle = self.random.uniform(low, high)
        half = 10 ** self.random.uniform(-1, 2.5)
        self.bench.view.change(span=(middle - half, middle + half))

    def do_tab(self) -> None:
        self.window.space.tables.setCurrentIndex(self.random.randint(0, 4))

    def do_catalogue(self) -> None:
        panel = self.window.space.catalogue
        panel.fields["range"].setText(self.random.choice(["", "all", "view", "here", "5100:5200"]))
        panel.fields["depth"].setText(self.random.choice(["", "0.1", "x"]))
        panel.text.setText(self.random.choice(["", "Fe I", "ti e<2", "gf>-1", "multiplet", "gf="]))
        panel.filter_now()

    def do_line(self) -> None:
        panel = self.window.space.catalogue
        rows = panel.model.rowCount()
        if rows:
            at = panel.model.index(self.random.randrange(rows), 0)
            panel.table.setCurrentIndex(at)
        self.bench.run(self.random.choice(["line.claim", "line.rake", "line.go", "line.here",
                                           "line.bibtex", "line.search"]))

    def do_sort_lines(self) -> None:
        self.window.space.catalogue.table.sortByColumn(
            self.random.randint(-1, 7), self.random.choice(list(Qt.SortOrder)))

    do_sort_lines.weight = 2

    do_catalogue.weight = 2

    def do_pick(self) -> None:
        segment = self.random.choice(self.bench.spectrum.segments)
        self.window.spectrum_view.pickRequested.emit(float(self.random.choice(segment.wave)))

    do_pick.weight = 2

    def do_solve(self) -> None:
        self.bench.run("spectrum.solve")

    do_solve.weight = 1

    def do_stop(self) -> None:
        self.bench.run("spectrum.stop")

    do_stop.weight = 1

    def do_save(self) -> None:
        from linewright.window.acts import saving

        saving.save(self.bench, self.folder / f"{self.bench.desk.name}.linewright.json")

    do_save.weight = 1

    def do_open(self) -> None:
        from linewright.window.acts import opening

        opening.open_file(self.bench, Path(self.random.choice(self.files)))

    do_open.weight = 2

    def do_drop(self) -> None:
        from linewright.window.acts import opening

        if len(self.bench.desks) > 2:
            opening.drop(self.bench, self.bench.desk)

    do_drop.weight = 2

    def do_theme(self) -> None:
        self.window.choose_theme(self.random.choice(["light", "dark"]))

    do_theme.weight = 1


def load_once(app, window) -> None:
    """The plotting library of the residuals stays loaded once used: before the count begins."""
    bench = window.bench
    bench.run("spectrum.solve")
    while bench.tasks.busy("solve"):
        app.processEvents()
    bench.run("view.residuals")
    window.residuals.close()


def main() -> int:
    from PySide6.QtCore import QSettings

    from linewright.resources import samples_dir
    from linewright.window.acts import opening
    from linewright.window.app import application, new_window

    minutes = float(sys.argv[1]) if len(sys.argv) > 1 else 60.0
    files = sys.argv[2:] or [str(samples_dir() / n) for n in
                             ("a_star.txt.gz", "g_dwarf.fits", "hot_star.fits")]
    folder = Path(tempfile.mkdtemp())
    QSettings.setPath(QSettings.Format.IniFormat, QSettings.Scope.UserScope, str(folder))
    app = application([])
    window = new_window()
    faults: list[str] = []

    def note(error: BaseException) -> None:
        faults.append("".join(traceback.format_exception(error)))

    window.report_unexpected = note
    sys.excepthook = lambda kind, error, trace: note(error)
    window.resize(1440, 860)
    window.show()
    opening.open_file(window.bench, Path(files[0]))
    while window.bench.depth is None or window.bench.spectrum is None:
        app.processEvents()
    load_once(app, window)
    driver, start = Driver(app, window, files, folder), time.monotonic()
    end, base, next_note = start + 60 * minutes, None, 0.0
    while time.monotonic() < end:
        driver.step()
        passed = time.monotonic() - start
        if base is None and passed > 6 * minutes:
            base = memory_mb()
        if passed > next_note:
            next_note = passed + 60
            print(f"{passed:6.0f} s  {sum(driver.done.values()):6d} acts  {memory_mb():7.1f} MB  "
                  f"{threading.active_count()} threads  {len(faults)} faults", flush=True)
    last = memory_mb()
    window._leaving = True
    window.close()
    app.processEvents()
    left = threading.active_count() - 1
    children = [e for e in window.bench.engines if e._child]
    growth = 100 * (last / base - 1)
    print(f"{sum(driver.done.values())} acts {dict(driver.done)}\nmemory {base:.1f} -> {last:.1f} MB "
          f"({growth:+.1f} %), threads left {left}, processes left {len(children)}, "
          f"faults {len(faults)}")
    for fault in faults[:5]:
        print(fault)
    return 1 if faults or left or children or growth > 5 else 0


if __name__ == "__main__":
    sys.exit(main())
