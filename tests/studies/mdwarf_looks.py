"""Every firm claim of a solved session, looked at in the window: contact sheets for the eye.

    xvfb-run -a python tests/studies/mdwarf_looks.py SPECTRUM_OR_SESSION FOLDER [wave=LO:HI]

Opens the real window on the spectrum (solved first) or the saved session, narrows the Ledger to
firm claims and steps through them with Alt+Down, as a person would, each centred by Ctrl+J.
Cut from the window for each: the lane about the feature (labels, ticks, continuum, fit, Rake) and
the words of the Evidence panel. FOLDER gets sheet-001.png and so on, and looks.csv with one line a
claim to write the judgement beside.
"""

from __future__ import annotations

import csv
import os
import sys
import time
from pathlib import Path

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
sys.path.insert(0, str(Path(__file__).resolve().parents[2] / "app"))

from PySide6.QtCore import QPoint, QRect, QRectF, QStandardPaths, Qt  # noqa: E402
from PySide6.QtGui import QColor, QImage, QPainter  # noqa: E402
from PySide6.QtTest import QTest  # noqa: E402

WINDOW = (1440, 900)
SPAN = 5.0  # Angstrom in view: a line of 0.1 A is some twenty pixels wide
CUT = 360  # pixels of the lane about the feature
ACROSS, DOWN, WORDS = 4, 3, 62
SETTLED = 0.12  # seconds: Siblings and fit follow a selection within


class Looker:
    """Steps through the firm rows of the Ledger and keeps what the window shows."""

    def __init__(self, app, window, folder: Path):
        self.app, self.window, self.bench, self.folder = app, window, window.bench, folder
        self.cells: list[tuple[QImage, str]] = []
        self.sheets = 0

    def wait(self, ready, seconds: float = 300.0) -> None:
        end = time.monotonic() + seconds
        while not ready():
            self.app.processEvents()
            time.sleep(0.002)
            if time.monotonic() > end:
                raise TimeoutError

    def rest(self, seconds: float) -> None:
        end = time.monotonic() + seconds
        self.wait(lambda: time.monotonic() > end)

    def open(self, path: Path) -> None:
        from linewright.window.acts import opening

        bench = self.bench
        opening.open_files(bench, [str(path)])
        self.wait(lambda: bench.session is not None and bench.depth is not None)
        if not bench.session.roll_call:
            bench.run("spectrum.solve")
            self.wait(lambda: len(bench.session.roll_call) > 0)
        self.rest(2.0)

    def key(self, key, modifier) -> None:
        QTest.keyClick(self.window, key, modifier)
        self.rest(0.02)

    def rows(self, low: float, high: float):
        """Steps from the first firm claim to the last one; yields the row of each."""
        from linewright.session.model import STANDINGS

        space, bench = self.window.space, self.bench
        space.ledger.standing.setCurrentIndex(1 + STANDINGS.index("firm"))
        self.rest(0.3)
        bench.view.select(None)
        last = None
        while True:
            self.key(Qt.Key.Key_Down, Qt.KeyboardModifier.AltModifier)
            row = bench.selected_row()
            if row is None or row == last:
                return
            last = row
            if low <= bench.session.features.wave[row] <= high:
                yield row

    def look(self, row: int) -> dict:
        bench, view = self.bench, self.window.spectrum_view
        bench.run("view.selected")
        low, high = view.view()
        if abs(high - low - SPAN) > 0.01:
            middle = 0.5 * (low + high)
            bench.view.change(span=(middle - SPAN / 2, middle + SPAN / 2))
        self.rest(SETTLED)
        said = self.said(row)
        self.cells.append((self.cut(row), said["words"]))
        if len(self.cells) == ACROSS * DOWN:
            self.sheet()
        return said

    def said(self, row: int) -> dict:
        """What Ledger and Evidence say of the claim."""
        panel, session = self.window.space.evidence, self.bench.session
        claim = session.claims[row]
        first = panel.rows[0]
        words = (f"{session.features.number[row]}  {first.name.text()}  P {first.number.text()}  "
                 f"{first.detail.text()}\n{panel.heading.text()}\n{claim.flags} / "
                 f"{session.features.flags[row]}")
        return {"n": str(session.features.number[row]), "species": claim.species, "words": words,
                "flags": claim.flags, "claim": first.name.text(), "detail": first.detail.text()}

    def cut(self, row: int) -> QImage:
        view = self.window.spectrum_view
        at = view.feature_rect(int(self.bench.session.features.number[row]))
        left = max(0, at.center().x() - CUT // 2)
        picture = view.grab(QRect(QPoint(left, view.plot.y()),
                                  view.rect().bottomRight())).toImage()
        return picture.copy(0, 0, CUT, picture.height())

    def sheet(self) -> None:
        if not self.cells:
            return
        self.sheets += 1
        theme = self.bench.theme
        tall = max(c.height() for c, _w in self.cells) + WORDS
        image = QImage(ACROSS * (CUT + 8), DOWN * (tall + 8), QImage.Format.Format_RGB32)
        image.fill(QColor(theme.edge))
        painter = QPainter(image)
        for k, (cell, words) in enumerate(self.cells):
            x, y = (k % ACROSS) * (CUT + 8), (k // ACROSS) * (tall + 8)
            painter.fillRect(x, y, CUT, tall, QColor(theme.base))
            painter.setPen(QColor(theme.ink))
            painter.drawText(QRectF(x + 4, y, CUT - 6, WORDS), int(Qt.TextFlag.TextWordWrap), words)
            painter.drawImage(x, y + WORDS, cell)
        painter.end()
        image.save(str(self.folder / f"sheet-{self.sheets:03d}.png"))
        self.cells = []


def main(path: str, folder: str, *more: str) -> None:
    from linewright.window import app as application

    QStandardPaths.setTestModeEnabled(True)
    ends = dict(m.split("=") for m in more).get("wave", "0:1e9").split(":")
    out = Path(folder)
    out.mkdir(parents=True, exist_ok=True)
    app, window = application.application([]), application.new_window()
    window.resize(*WINDOW)
    window.choose_theme("light")
    window.show()
    looker = Looker(app, window, out)
    looker.open(Path(path))
    with open(out / "looks.csv", "w", newline="") as file:
        writer = csv.writer(file)
        writer.writerow(("feature", "species", "line", "numbers", "flags", "judgement"))
        count = 0
        for row in looker.rows(*map(float, ends)):
            said = looker.look(row)
            writer.writerow((said["n"], said["species"], said["claim"], said["detail"],
                             said["flags"], ""))
            count += 1
    looker.sheet()
    print(f"{count} firm claims on {looker.sheets} sheets in {out.name}")
    window._leaving = True
    window.close()


if __name__ == "__main__":
    main(*sys.argv[1:])
