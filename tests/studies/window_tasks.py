"""Ten tasks as a new user does them, on the real window with its real file dialogs.

python window_tasks.py [SPECTRUM]; without one, a copy of a sample. Every action is one mouse
click or drag, one key or one typed word, sent to the widget a person would use. Prints, for
each task, the actions and the seconds from the first of them until the result is on the
screen or on disk; the script does not pause to think. Exit status 1 when a task fails or
needs more actions than allowed.
"""

from __future__ import annotations

import os
import shutil
import sys
import tempfile
import time
from pathlib import Path

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
ROOT = Path(__file__).resolve().parents[2]
sys.path.insert(0, str(ROOT / "app"))

from PySide6.QtCore import QPoint, QSettings, Qt, QTimer  # noqa: E402
from PySide6.QtTest import QTest  # noqa: E402
from PySide6.QtWidgets import QApplication  # noqa: E402


class User:
    """Does one action at a time and counts them."""

    def __init__(self, app, window, folder: Path):
        self.app, self.window, self.bench, self.folder = app, window, window.bench, folder
        self.done: list[str] = []

    def wait(self, ready, seconds: float = 120.0) -> None:
        end = time.monotonic() + seconds
        while not ready():
            if time.monotonic() > end:
                raise TimeoutError(f"after {self.done}")
            self.app.processEvents()
            time.sleep(0.002)
        self.window.repaint()

    def key(self, name: str) -> None:
        """A shortcut or key, to whatever has the keyboard."""
        self.done.append(name)
        self._send(name)

    def _send(self, name: str) -> None:
        from PySide6.QtGui import QKeySequence

        if QApplication.activeWindow() is None:  # without a desktop nothing keeps it active
            self.window.activateWindow()
            self.app.processEvents()
        pressed = QKeySequence(name)[0]
        target = QApplication.activeModalWidget() or QApplication.focusWidget() or self.window
        QTest.keyClick(target, pressed.key(), pressed.keyboardModifiers())

    def type(self, text: str) -> None:
        self.done.append(f"type '{text}'")
        QTest.keyClicks(QApplication.focusWidget(), text)

    def click(self, widget, place=None, words: str = "") -> None:
        self.done.append(f"click {words}")
        where = widget.rect().center() if place is None else place
        QTest.mouseClick(widget, Qt.MouseButton.LeftButton, pos=where)

    def dialog(self, shortcut: str, suffix: str) -> Path:
        """A shortcut that asks for a file, answered with Return: the name offered is taken."""
        names: list[str] = []

        def accept() -> None:
            dialog = QApplication.activeModalWidget()
            if dialog is None:
                QTimer.singleShot(100, accept)
                return
            names.append(dialog.selectedFiles()[0])
            self.done.append("Return")
            field = dialog.focusWidget() or dialog
            QTest.keyClick(field, Qt.Key.Key_Return)

        QTimer.singleShot(100, accept)
        self.key(shortcut)
        path = Path(names[0])
        self.wait(path.exists)
        assert path.suffix == suffix or path.name.endswith(suffix), path
        return path

    def column_of(self, row: int) -> QPoint:
        """Where a feature's flux column is on the spectrum lane."""
        view = self.window.spectrum_view
        place = view.feature_rect(int(self.bench.session.features.number[row])).center()
        return view.plot.mapFrom(view, place)


def first_row(user, wanted) -> int:
    """A well separated feature for which ``wanted(claim)`` holds, brought into view."""
    import numpy as np

    from linewright.spectra.medium import to_medium

    session = user.bench.session
    wave = to_medium(session.features.wave, user.bench.medium)
    apart = np.minimum(np.diff(wave, append=np.inf), np.diff(wave, prepend=-np.inf))
    for row in np.argsort(-apart).tolist():
        if wanted(session.claims[row]):
            user.bench.view.change(span=(wave[row] - 3, wave[row] + 3), selected=None)
            user.wait(lambda: not user.window.refresher.rake._later.isActive())
            return row
    raise LookupError("no such feature")


def claim_of(user, row: int):
    return user.bench.session.claims[row]


def to_table_and_figure(user) -> None:
    """From a double-click on a file to a saved table and figure."""
    from linewright.window.acts import opening

    user.done.append("double-click the file")  # the desktop starts: linewright FILE
    opening.open_files(user.bench, [str(user.file)])
    user.wait(lambda: user.bench.spectrum is not None)
    user.key("F5")
    user.wait(lambda: len(user.bench.session.features) > 0)
    user.wait(lambda: user.window.ledger.model.rowCount() == len(user.bench.session.features))
    user.dialog("Ctrl+E", ".ecsv")
    user.dialog("Ctrl+Shift+E", ".pdf")


def why(user) -> None:
    """Why this species here?"""
    row = first_row(user, lambda c: c.standing == "firm" and len(c.candidates) > 1)
    user.restart()
    user.click(user.window.spectrum_view.plot, user.column_of(row), "the feature")
    rows = user.window.space.evidence.rows
    user.wait(lambda: rows[0].isVisible() and "+ " in rows[0].why.text())


def another_candidate(user) -> None:
    """Correct a wrong claim: the second candidate is right."""
    row = first_row(user, lambda c: len(c.candidates) > 1 and c.by == "machine"
                    and c.candidates[1].species != c.species)
    second = claim_of(user, row).candidates[1].species
    user.restart()
    user.click(user.window.spectrum_view.plot, user.column_of(row), "the feature")
    user.click(user.window.space.evidence.rows[1], words="the second candidate")
    user.key("Ctrl+Return")
    user.wait(lambda: claim_of(user, row).species == second)


def another_species(user) -> None:
    """Correct a wrong claim: name the species (the feature is selected)."""
    row = first_row(user, lambda c: c.by == "machine" and c.species == "Fe I")
    user.bench.view.select(int(user.bench.session.features.number[row]))
    user.restart()
    user.key("F2")
    user.type("Ti II")
    user.key("Return")
    user.wait(lambda: claim_of(user, row).species == "Ti II")


def slide(user) -> None:
    """See where the lines would be at another velocity, then come back."""
    groove = user.window.space.track.groove
    before = user.bench.view.now.velocity
    user.click(groove, QPoint(groove.width() * 3 // 4, groove.height() // 2), "in the groove")
    user.wait(lambda: user.bench.view.now.velocity != before)
    user.key("Ctrl+Z")
    user.wait(lambda: user.bench.view.now.velocity == before)


def measure(user) -> None:
    """Measure a trough the machine left out (here: one that was removed)."""
    row = first_row(user, lambda c: c.standing == "firm")
    number = int(user.bench.session.features.number[row])
    place = user.column_of(row)
    user.bench.view.select(number)
    user.bench.run("claim.remove")
    user.wait(lambda: number not in user.bench.session.features.number)
    count = len(user.bench.session.features)
    user.restart()
    user.click(user.window.spectrum_view.plot, place, "the bare trough")
    user.wait(lambda: len(user.bench.session.features) == count + 1)
    user.note = f"{user.seconds():.1f} s until measured, then weighed"
    user.wait(lambda: not user.bench.weighing)


def cosmic_ray(user) -> None:
    """Set aside a cosmic ray."""
    row = first_row(user, lambda c: c.standing == "unclaimed")
    user.restart()
    user.click(user.window.spectrum_view.plot, user.column_of(row), "the feature")
    user.key("Shift+Del")
    user.wait(lambda: claim_of(user, row).standing == "set aside")


def all_of_a_species(user) -> None:
    """List every feature of one species."""
    ledger = user.window.ledger
    user.key("Ctrl+F")
    user.type("ti ii")
    user.wait(lambda: 0 < ledger.model.rowCount() < len(user.bench.session.features))
    user.bench.run("edit.clear")


def go_there(user) -> None:
    """Look at the magnesium triplet."""
    user.key("Ctrl+G")
    user.type("5160:5190")
    user.key("Return")
    user.wait(lambda: abs(user.bench.view.now.span[0] - 5160) < 0.5)


def save_and_continue(user) -> None:
    """Save, close, open again and go on."""
    from linewright.window.acts import opening

    number = len(user.bench.session.features)
    saved = user.dialog("Ctrl+S", ".linewright.json")
    user.wait(lambda: user.bench.desk.saved)
    user.key("Ctrl+W")
    user.wait(lambda: user.bench.desk is None)
    user.done.append("double-click the session")
    opening.open_files(user.bench, [str(saved)])
    user.wait(lambda: user.bench.session is not None and user.bench.spectrum is not None)
    assert len(user.bench.session.features) == number


TASKS = ((to_table_and_figure, 6), (why, 1), (another_candidate, 3), (another_species, 3),
         (slide, 2), (measure, 1), (cosmic_ray, 2), (all_of_a_species, 2), (go_there, 3),
         (save_and_continue, 4))


class Timed(User):
    """Restarts count and clock where a task has prepared its scene."""

    note = ""

    def restart(self) -> None:
        self.done, self.note, self._start = [], "", time.perf_counter()

    def seconds(self) -> float:
        return time.perf_counter() - self._start


def main() -> int:
    from linewright.resources import samples_dir
    from linewright.window.app import application, new_window

    source = Path(sys.argv[1]) if len(sys.argv) > 1 else samples_dir() / "g_dwarf.fits"
    folder = Path(tempfile.mkdtemp())
    QSettings.setPath(QSettings.Format.IniFormat, QSettings.Scope.UserScope, str(folder / "s"))
    app, status = application([]), 0
    window = new_window()
    window.resize(1600, 900)
    window.show()
    window.activateWindow()
    if not QTest.qWaitForWindowActive(window, 5000):
        print("the window does not get the keyboard on this platform")
        return 1
    user = Timed(app, window, folder)
    user.file = Path(shutil.copy(source, folder))
    print("| task | actions | allowed | seconds | |\n| --- | --- | --- | --- | --- |")
    for task, allowed in TASKS:
        user.restart()
        task(user)
        status |= len(user.done) > allowed
        name = task.__doc__.strip().rstrip(".")
        print(f"| {name} | {len(user.done)} ({', '.join(user.done)}) | {allowed} | "
              f"{user.seconds():.1f} | {user.note} |", flush=True)
    window._leaving = True
    window.close()
    return status


if __name__ == "__main__":
    sys.exit(main())
