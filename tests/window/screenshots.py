"""Renders the window for people to look at: python screenshots.py FOLDER [SPECTRUM ...].

Each spectrum (or session) is opened, solved where the engine is there, and saved as PNG at
1280x720, 1600x900 and 3840x2160 (scale 2), light and dark. Run once a scale: the scale of
the display is read when the application starts.
"""

from __future__ import annotations

import argparse
import os
import subprocess
import sys
import time
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
SIZES = {"1280x720": (1280, 720, 1), "1600x900": (1600, 900, 1), "3840x2160": (1920, 1080, 2)}


def main() -> int:
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("folder", type=Path)
    parser.add_argument("files", nargs="*")
    parser.add_argument("--medium", default="air")
    parser.add_argument("--read", default="", help="such as 'columns wave=11,flux=2'")
    parser.add_argument("--sizes", default=",".join(SIZES))
    parser.add_argument("--themes", default="light,dark")
    parser.add_argument("--range", default="", help="LO:HI shown")
    parser.add_argument("--no-solve", action="store_true")
    parser.add_argument("--here", action="store_true", help="render in this process")
    args = parser.parse_args()
    args.folder.mkdir(parents=True, exist_ok=True)
    return render(args) if args.here else each_scale()


def each_scale() -> int:
    """One process for scale 1 and one for scale 2."""
    base = [sys.executable, __file__, *sys.argv[1:], "--here"]
    wanted = [s for s in SIZES if s in _sizes(sys.argv)]
    status = 0
    for scale in sorted({SIZES[s][2] for s in wanted}):
        names = ",".join(s for s in wanted if SIZES[s][2] == scale)
        environment = {**os.environ, "QT_SCALE_FACTOR": str(scale)}
        environment.setdefault("QT_QPA_PLATFORM", "offscreen")
        status |= subprocess.call([*base, "--sizes", names], env=environment)
    return status


def _sizes(arguments) -> list[str]:
    if "--sizes" in arguments:
        return arguments[arguments.index("--sizes") + 1].split(",")
    return list(SIZES)


def render(args) -> int:
    sys.path.insert(0, str(ROOT / "app"))
    from PySide6.QtCore import QSettings

    from linewright.window.app import application, new_window

    QSettings.setPath(QSettings.Format.IniFormat, QSettings.Scope.UserScope,
                      str(args.folder / ".settings"))
    app = application([])
    window = new_window()
    window.show()
    for path in args.files or [""]:
        stem = Path(path).name.split(".")[0] or "welcome"
        if path:
            prepare(app, window, path, args)
        for theme in args.themes.split(","):
            window.choose_theme(theme)
            for size in args.sizes.split(","):
                width, height, _scale = SIZES[size]
                window.resize(width, height)
                settle(app, 0.4)
                window.grab().save(str(args.folder / f"{stem}-{size}-{theme}.png"))
    window._leaving = True
    window.close()
    return 0


def prepare(app, window, path: str, args) -> None:
    from linewright.window.acts import opening, viewing

    bench = window.bench
    opening.open_files(bench, [path])
    key = f"open {Path(path).absolute()}"
    wait(app, lambda: not bench.tasks.busy(key), 60)
    if args.read:
        opening.read_again(bench, args.read)
        wait(app, lambda: not bench.tasks.busy(key), 60)
    if bench.session.spectrum.medium not in ("air", "vacuum"):
        opening.set_medium(bench, args.medium)
    wait(app, lambda: bench.depth is not None, 60)
    if not args.no_solve and not len(bench.session.features):
        bench.run("spectrum.solve")
        wait(app, lambda: not bench.tasks.busy("solve"), 300)
    if args.range:
        viewing.go_to(bench, args.range)
    settle(app, 0.3)
    select_middle(bench)


def select_middle(bench) -> None:
    """The strongest feature of the middle third of the view."""
    import numpy as np

    from linewright.spectra.medium import to_medium

    f = bench.session.features
    if not len(f):
        return
    low, high = bench.view.now.span
    wave = to_medium(f.wave, bench.session.spectrum.medium)
    inside = (wave > low + (high - low) / 3) & (wave < high - (high - low) / 3)
    rows = np.nonzero(inside)[0]
    if len(rows):
        bench.view.select(int(f.number[rows[np.argmax(f.significance[rows])]]))


def wait(app, ready, seconds: float) -> None:
    end = time.monotonic() + seconds
    while not ready() and time.monotonic() < end:
        settle(app, 0.02)


def settle(app, seconds: float) -> None:
    end = time.monotonic() + seconds
    while time.monotonic() < end:
        app.processEvents()
        time.sleep(0.005)


if __name__ == "__main__":
    sys.exit(main())
