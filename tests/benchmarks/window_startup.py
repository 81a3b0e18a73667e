"""Target 5: time to the first paint, in fresh interpreters, against a bare painted window.

python window_startup.py [ROUNDS]. Cases: a bare QMainWindow (base), the welcome window, and a
50,000-sample FITS file named on the command line and painted. Paired rounds in random order;
medians of paired ratios of user + system time, with the base once more as control.
"""

from __future__ import annotations

import os
import random
import resource
import statistics
import subprocess
import sys
import tempfile
import time
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
CACHE = Path(tempfile.mkdtemp())
BARE = """
import sys
from PySide6.QtWidgets import QApplication, QMainWindow
app = QApplication([])
class Window(QMainWindow):
    def paintEvent(self, event):
        super().paintEvent(event)
        app.quit()
w = Window(); w.resize(1600, 900); w.show(); app.exec()
"""
WELCOME = """
import sys
from linewright.window.app import application, new_window, open_later
app = application([])
w = new_window(); w.resize(1600, 900); w.show()
from PySide6.QtCore import QTimer
QTimer.singleShot(0, app.quit)
app.exec(); w.repaint()
"""
SPECTRUM = """
import os, sys
from linewright.window.app import application, new_window, open_later
from linewright.window.main_window import MainWindow
MainWindow._warm_engine = lambda self: None
app = application([])
w = new_window(); w.resize(1600, 900); w.show()
open_later(w, [sys.argv[1]])
while w.bench.spectrum is None:
    app.processEvents()
w.spectrum_view.repaint()
sys.stdout.flush()
os._exit(0)
"""


def fits_file(folder: Path) -> Path:
    import numpy as np
    from astropy.io import fits

    flux = np.random.default_rng(1).normal(1, 0.01, 50_000).astype("f4")
    hdu = fits.PrimaryHDU(flux)
    hdu.header.update(CTYPE1="AWAV", CUNIT1="Angstrom", CRVAL1=5000.0, CDELT1=0.02, CRPIX1=1.0)
    path = folder / "fifty.fits"
    hdu.writeto(path)
    return path


def seconds(code: str, *arguments: str) -> tuple[float, float]:
    """(processor, wall) seconds of a fresh interpreter."""
    before = resource.getrusage(resource.RUSAGE_CHILDREN)
    start = time.perf_counter()
    subprocess.run([sys.executable, "-c", code, *arguments], check=True, env=environment(),
                   stderr=subprocess.DEVNULL)
    wall = time.perf_counter() - start
    after = resource.getrusage(resource.RUSAGE_CHILDREN)
    return after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime, wall


def environment() -> dict[str, str]:
    """Compiled modules are kept, as an installed program's are; one run before warms them."""
    kept = {k: v for k, v in os.environ.items() if k != "PYTHONDONTWRITEBYTECODE"}
    return {**kept, "QT_QPA_PLATFORM": "offscreen", "PYTHONPATH": str(ROOT / "app"),
            "PYTHONPYCACHEPREFIX": str(CACHE), "OMP_NUM_THREADS": "1",
            "OPENBLAS_NUM_THREADS": "1"}


def main() -> int:
    rounds = int(sys.argv[1]) if len(sys.argv) > 1 else 21
    path = str(fits_file(Path(tempfile.mkdtemp())))
    cases = {"base": (BARE,), "control": (BARE,), "welcome": (WELCOME,),
             "spectrum": (SPECTRUM, path)}
    taken: dict[str, list[tuple[float, float]]] = {name: [] for name in cases}
    for name in cases:
        seconds(*cases[name])
    for _ in range(rounds):
        for name in random.sample(list(cases), len(cases)):
            taken[name].append(seconds(*cases[name]))
    for name in cases:
        ratios = [t[0] / b[0] for t, b in zip(taken[name], taken["base"], strict=True)]
        wall = statistics.median(t[1] for t in taken[name])
        print(f"{name:10s} processor ratio {statistics.median(ratios):5.2f}   "
              f"processor {1000 * statistics.median(t[0] for t in taken[name]):6.0f} ms   "
              f"wall {1000 * wall:6.0f} ms")
    return 0


if __name__ == "__main__":
    sys.exit(main())
