"""The help page, made from the command table and a list of words."""

from __future__ import annotations

from html import escape

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QTextBrowser, QVBoxLayout, QWidget

from .commands import MENUS

FIRST_STEPS = (
    "Open a spectrum: Ctrl+O, drop its file on the window, or name it on the command line.",
    "Solve it: F5. The Ledger fills; claims are written over the spectrum.",
    "Ask why: click a feature or a Ledger row; Evidence shows candidates and reasons.",
    "Correct: mark another candidate and press Ctrl+Return, or F2 and type a species. What that "
    "changes elsewhere is looked up; F7 takes it over.",
    "Look a line up: Ctrl+Shift+L, then words such as Fe I 5160:5200 grade B; Ctrl+Shift+H lists "
    "the lines about the selected feature, Ctrl+Shift+Return claims it with the chosen one.",
    "Slide: drag the mark in the Velocity track or type km/s; the rake follows.",
    "Save the session with Ctrl+S; export a table with Ctrl+E, a figure with Ctrl+Shift+E.",
)
MOUSE = (
    ("wheel", "zoom the wavelength about the pointer; with Shift, the flux"),
    ("drag", "move along the spectrum; in the strip on top, move or resize the bracket"),
    ("click on a feature", "select it everywhere"),
    ("drag a bracket of the selected feature", "set the limits of its fit; the curve follows"),
    ("drag a diamond", "move a continuum anchor (Fit menu, Continuum anchors)"),
    ("click on a bare trough or peak", "measure it and add it to the Ledger"),
)
WORDS = (
    ("Rake", "the lane under the spectrum in which predicted lines of the chosen species hang as "
     "teeth; a tooth is as long as its predicted depth; the rake slides with the velocity"),
    ("Ledger", "the table of features, one row a component, with what each is said to be"),
    ("Standing", "● firm (probability 0.95 and more), ◕ likely (0.80), ◑ tentative (0.50), "
     "○ unclaimed, ⊗ set aside. Your own act sets the standing and never the probability"),
    ("Evidence", "what speaks for and against each candidate of one feature"),
    ("Odds", "the four bars of the marked candidate: how readily such a line shows, how well it "
     "is placed, how well its strength fits, and how free it is of other features; to the right "
     "for it, to the left against it, beside a line that no catalogue lists"),
    ("What would change this", "the one or two facts that would carry the probability over the "
     "next bound, found by weighing the claim again"),
    ("Siblings", "the other lines of a candidate's species that must be there if it is right"),
    ("Changes", "the claims that your own claims change elsewhere, before and after"),
    ("Roll call", "species by species: lines expected, seen, missing, and the odds of chance"),
    ("Orphans", "significant features that no catalogue line explains"),
    ("Velocity track", "the velocity slider; its groove shows how well each velocity matches"),
)


def help_html(commands) -> str:
    """One page: first steps, mouse, every command with its keys, words."""
    parts = ["<h2>First steps</h2><ol>", *(f"<li>{escape(s)}</li>" for s in FIRST_STEPS), "</ol>"]
    parts += ["<h2>Mouse</h2>", _pairs(MOUSE), "<h2>Commands</h2>"]
    for menu in MENUS:
        rows = [(" or ".join(c.keys) or "menu", f"{c.title}. {c.tip}.")
                for c in commands.values() if c.menu == menu]
        parts += [f"<h3>{menu}</h3>", _pairs(rows)]
    return "".join([*parts, "<h2>Words</h2>", _pairs(WORDS)])


def _pairs(rows) -> str:
    cells = "".join(
        f"<tr><td><b>{escape(a)}</b>&nbsp;&nbsp;</td><td>{escape(b)}</td></tr>" for a, b in rows)
    return f"<table cellpadding='3'>{cells}</table>"


class HelpPage(QWidget):
    """A window of its own that stays beside the work."""

    def __init__(self, commands, parent):
        super().__init__(parent, Qt.WindowType.Window)
        self.setWindowTitle("Linewright help")
        self.browser = QTextBrowser(self)
        self.browser.setAccessibleName("Help")
        self.browser.setHtml(help_html(commands))
        box = QVBoxLayout(self)
        box.setContentsMargins(0, 0, 0, 0)
        box.addWidget(self.browser)
        self.resize(680, 640)

    def keyPressEvent(self, event) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.close()
        else:
            super().keyPressEvent(event)
