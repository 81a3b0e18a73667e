"""What a person waits for after a word: a claim made, its consequences looked up and taken over.

    python tests/benchmarks/window_word.py [SPECTRUM or SESSION] [ROUNDS]

Without one, the solar-type sample, solved first. Times of the window's thread, each until the
whole window is painted again, as ratios to one painting of the whole window (A) in the same round,
and their medians in milliseconds; 'waited' is the clock from the act to the outcome painted, the
answer of the engine's process included, as a ratio to the clock of the same painting and in
milliseconds (in both other programs count). A control outside 0.9 to 1.1
makes the run noisy. Words: the second candidate of features that are not firm, taken in turn,
each taken back before the next.
"""

from __future__ import annotations

import os
import statistics
import sys
import tempfile
import time
from pathlib import Path

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
HERE = Path(__file__).resolve().parent
sys.path[:0] = [str(HERE), str(HERE.parent.parent / "app")]

from PySide6.QtCore import QSettings, QStandardPaths  # noqa: E402
from rounds import steady  # noqa: E402
from window_frames import wait  # noqa: E402

from linewright.resources import samples_dir  # noqa: E402

ROUNDS = 9
WORDS = {
    "A'": "painting the whole window (control)",
    "word": "a firm claim, shown everywhere",
    "looked up": "from the end of the rest to 'would change' (offered)",
    "taken": "F7 after that: taken over",
    "undo": "undo of it",
    "F7": "F7 with nothing looked up",
}


class Rounds:
    """One window with a solved session; ``times[act]`` are (thread, waited) seconds."""

    def __init__(self, app, window):
        self.app, self.window, self.bench = app, window, window.bench
        self.times: dict[str, list[tuple[float, float]]] = {"A": [], **{k: [] for k in WORDS}}
        session = self.bench.session
        self.numbers = [
            int(session.features.number[i]) for i, c in enumerate(session.claims)
            if c.standing in ("likely", "tentative") and c.by == "machine"
            and len({k.species for k in c.candidates[:2]}) == 2]

    def timed(self, name: str, act, ready=lambda: True) -> None:
        thread, clock = time.thread_time(), time.perf_counter()
        act()
        wait(self.app, ready, 60)
        self.window.repaint()
        self.app.processEvents()
        self.times[name].append((time.thread_time() - thread, time.perf_counter() - clock))

    def still(self) -> bool:
        return not self.bench.tasks.busy("reweigh") and (
            not self.window.refresher.reweigh_soon.isActive())

    def calm(self) -> None:
        wait(self.app, self.still, 60)
        wait(self.app, lambda: False, 0.15)

    def round(self, k: int) -> None:
        bench, soon = self.bench, self.window.refresher.reweigh_soon
        bench.view.select(self.numbers[(k * 37) % len(self.numbers)])
        self.calm()
        for name in ("A", "A'"):
            self.timed(name, lambda: None)
        self.timed("word", lambda: bench.run("claim.accept2"))
        soon.stop()
        self.timed("looked up", soon.timeout.emit, self.still)
        self.taken("taken")
        self.timed("undo", lambda: bench.run("edit.undo"))
        bench.desk.weighed = None
        self.calm()
        self.taken("F7")
        for _ in range(2):
            bench.run("edit.undo")
        self.calm()

    def taken(self, name: str) -> None:
        before = self.bench.session
        self.timed(name, lambda: self.bench.run("claim.reweigh"),
                   lambda: self.bench.session is not before)
        assert self.bench.session.history[-1].action == "reweigh"

    def report(self) -> None:
        base, clock = zip(*self.times["A"])
        for name, words in WORDS.items():
            ratio = statistics.median(t / a for (t, _), a in zip(self.times[name], base))
            waits = statistics.median(w / a for (_, w), a in zip(self.times[name], clock))
            thread, waited = (1e3 * statistics.median(c) for c in zip(*self.times[name]))
            print(f"{words:56} {ratio:6.2f} A {thread:7.1f} ms  waited {waits:6.2f} A {waited:7.1f} ms")
            if name == "A'":
                print(f"A: {1e3 * statistics.median(base):.1f} ms, "
                      f"{'steady' if steady(ratio) else 'noisy'}")


def main() -> int:
    from linewright.window.acts import opening
    from linewright.window.app import application, new_window

    path = Path(sys.argv[1]) if len(sys.argv) > 1 else samples_dir() / "g_dwarf.fits"
    rounds = int(sys.argv[2]) if len(sys.argv) > 2 else ROUNDS
    QStandardPaths.setTestModeEnabled(True)
    QSettings.setPath(
        QSettings.Format.IniFormat, QSettings.Scope.UserScope, tempfile.mkdtemp())
    app = application([])
    window = new_window()
    window.resize(1600, 900)
    window.show()
    bench = window.bench
    opening.open_files(bench, [str(path)])
    wait(app, lambda: bench.depth is not None and not bench.tasks._current, 60)
    if bench.session.spectrum.medium == "unknown":
        opening.set_medium(bench, "air")
    if not len(bench.session.features):
        bench.run("spectrum.solve")
        wait(app, lambda: len(bench.session.features) > 0, 300)
    wait(app, lambda: bench.desk.ready_for is bench.session.features, 60)
    wait(app, lambda: not bench.tasks._current, 120)
    run = Rounds(app, window)
    print(f"{len(bench.session.features):,} features, {rounds} rounds")
    for k in range(-1, rounds):
        run.round(k)
        if k < 0:  # first times fill caches
            run.times = {name: [] for name in run.times}
    run.report()
    window._leaving = True
    window.close()
    return 0


if __name__ == "__main__":
    sys.exit(main())
