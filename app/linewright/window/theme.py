"""Light and dark colours of the window, and its style sheet."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from string import Template

from ..publish.families import family_of

TEXT_CONTRAST = 4.5


@dataclass(frozen=True)
class Theme:
    """Colours as '#rrggbb'; ``dark`` says which way text must contrast.

    window: behind panels; base: behind plots and tables; raised: buttons and fields
    ink: text and spectrum; muted: secondary text; faint: axes of strips, grids
    edge: borders; accent: selection and focus; accent_ink: text on accent
    continuum, profile: lines in the plot; good, caution, bad: notices
    """

    name: str
    dark: bool
    window: str
    base: str
    raised: str
    ink: str
    muted: str
    faint: str
    edge: str
    accent: str
    accent_ink: str
    continuum: str
    profile: str
    good: str
    caution: str
    bad: str

    def colour(self, species: str, origin: str = "stellar") -> str:
        """Colour of a species' family for lines and marks."""
        family = family_of(species, origin)
        return family.dark if self.dark else family.light

    def text_colour(self, species: str, origin: str = "stellar") -> str:
        """The same hue with at least 4.5:1 contrast against ``base``."""
        return _readable(self.colour(species, origin), self.base)

    def marker(self, species: str, origin: str = "stellar") -> str:
        """Shape of the family: a name that ``plot.marks.marker_polygon`` knows."""
        return family_of(species, origin).marker

    def style_sheet(self) -> str:
        """Qt style sheet for the whole window."""
        colours = {name: getattr(self, name) for name in self.__dataclass_fields__}
        return _SHEET.substitute(colours)


def luminance(colour: str) -> float:
    """Relative luminance of '#rrggbb' (WCAG 2.1, definition of relative luminance)."""
    channels = [int(colour[i : i + 2], 16) / 255 for i in (1, 3, 5)]
    linear = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in channels]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def contrast(one: str, other: str) -> float:
    """Contrast ratio of two colours, 1 to 21 (WCAG 2.1)."""
    low, high = sorted((luminance(one), luminance(other)))
    return (high + 0.05) / (low + 0.05)


@lru_cache(maxsize=256)
def _readable(colour: str, ground: str) -> str:
    """The colour mixed with black or white just far enough to be read as text."""
    towards = 0.0 if luminance(ground) > 0.18 else 255.0
    channels = [int(colour[i : i + 2], 16) for i in (1, 3, 5)]
    for percent in range(0, 101, 4):
        mixed = [round(c + (towards - c) * percent / 100) for c in channels]
        text = "#" + "".join(f"{c:02x}" for c in mixed)
        if contrast(text, ground) >= TEXT_CONTRAST:
            break
    return text


LIGHT = Theme(
    name="light",
    dark=False,
    window="#f5f7f9",
    base="#ffffff",
    raised="#ffffff",
    ink="#1b1f24",
    muted="#5d6773",
    faint="#9aa3ad",
    edge="#d3d9df",
    accent="#0072b2",
    accent_ink="#ffffff",
    continuum="#e69f00",
    profile="#d55e00",
    good="#007a59",
    caution="#8a5f00",
    bad="#b04a00",
)
DARK = Theme(
    name="dark",
    dark=True,
    window="#1d2128",
    base="#14171b",
    raised="#262b33",
    ink="#e6e9ed",
    muted="#9ca6b2",
    faint="#6b7580",
    edge="#363d47",
    accent="#56b4e9",
    accent_ink="#10151a",
    continuum="#e69f00",
    profile="#f0803c",
    good="#2fbf97",
    caution="#e0b040",
    bad="#f08a4b",
)


def theme_named(name: str) -> Theme:
    """LIGHT or DARK; KeyError for another name."""
    return {"light": LIGHT, "dark": DARK}[name]


def ensure_fonts(app) -> bool:
    """On a machine without fonts load matplotlib's DejaVu Sans; True when text can be shown.

    Call once after the QApplication is made: without it every character is an empty box.
    """
    from PySide6.QtGui import QFont, QFontDatabase, QFontInfo

    if QFontInfo(app.font()).family() and QFontDatabase.families():
        return True
    for path in _matplotlib_fonts():
        number = QFontDatabase.addApplicationFont(str(path))
        families = QFontDatabase.applicationFontFamilies(number) if number >= 0 else []
        if families:
            app.setFont(QFont(families[0], max(app.font().pointSize(), 9)))
            return True
    return False


def _matplotlib_fonts():
    """DejaVu Sans as installed with matplotlib, without importing it (that takes long)."""
    from importlib.util import find_spec
    from pathlib import Path

    spec = find_spec("matplotlib")
    if spec is None or spec.origin is None:
        return []
    folder = Path(spec.origin).parent / "mpl-data" / "fonts" / "ttf"
    return sorted(folder.glob("DejaVuSans.ttf")) + sorted(folder.glob("DejaVuSans-Bold.ttf"))


_SHEET = Template("""
QWidget { background: $window; color: $ink; }
QWidget:disabled { color: $faint; }
QToolTip { background: $raised; color: $ink; border: 1px solid $edge; padding: 4px; }
QMenuBar, QMenu, QStatusBar { background: $window; color: $ink; }
QMenuBar::item { padding: 4px 9px; background: transparent; }
QMenuBar::item:selected, QMenu::item:selected { background: $accent; color: $accent_ink; }
QMenu { border: 1px solid $edge; padding: 4px 0; }
QMenu::item { padding: 4px 24px; }
QMenu::item:disabled { color: $faint; }
QMenu::separator { height: 1px; background: $edge; margin: 4px 8px; }
QPushButton, QToolButton, QComboBox {
    background: $raised; border: 1px solid $edge; border-radius: 4px; padding: 4px 12px; }
QToolButton { padding: 4px 6px; }
QComboBox::drop-down { border: 0; width: 20px; }
QComboBox::down-arrow { width: 0; height: 0; border-left: 4px solid $raised;
    border-right: 4px solid $raised; border-top: 5px solid $muted; }
QCheckBox::indicator, QRadioButton::indicator, QAbstractItemView::indicator {
    width: 12px; height: 12px; border: 1px solid $muted; background: $raised; }
QCheckBox::indicator, QAbstractItemView::indicator { border-radius: 3px; }
QRadioButton::indicator { border-radius: 7px; }
QCheckBox::indicator:checked, QRadioButton::indicator:checked,
QAbstractItemView::indicator:checked { background: $accent; border: 1px solid $ink; }
QPushButton:hover, QToolButton:hover, QComboBox:hover { border-color: $accent; }
QPushButton:pressed, QToolButton:pressed, QToolButton:checked, QPushButton:checked {
    background: $accent; color: $accent_ink; }
QPushButton:disabled, QToolButton:disabled { color: $faint; background: $window; }
QPushButton:focus, QToolButton:focus, QComboBox:focus, QLineEdit:focus, QSpinBox:focus,
QDoubleSpinBox:focus, QPlainTextEdit:focus, QAbstractItemView:focus {
    border: 1px solid $accent; }
QLineEdit, QSpinBox, QDoubleSpinBox, QPlainTextEdit, QTextBrowser {
    background: $raised; color: $ink; border: 1px solid $edge; border-radius: 4px;
    padding: 3px 5px; selection-background-color: $accent;
    selection-color: $accent_ink; }
QAbstractItemView { background: $base; color: $ink; border: 1px solid $edge;
    selection-background-color: $accent; selection-color: $accent_ink;
    gridline-color: $edge; alternate-background-color: $window; }
QHeaderView { background: $window; }
QHeaderView::section { background: $window; color: $ink; border: 0;
    border-right: 1px solid $edge; border-bottom: 1px solid $edge; padding: 4px 6px; }
QTableCornerButton::section { background: $window; border: 0; }
QTabWidget::pane { border: 0; border-top: 1px solid $edge; }
QTabBar { background: $window; }
QTabBar::tab { background: $window; color: $muted; border: 0; padding: 6px 14px;
    border-bottom: 2px solid transparent; }
QTabBar::tab:selected { color: $ink; border-bottom: 2px solid $accent; }
QTabBar::tab:hover { color: $ink; }
QTabBar::tab:focus { border-bottom: 2px solid $ink; }
QSplitter::handle { background: $window; }
QSplitter::handle:hover { background: $edge; }
QProgressBar { background: $base; border: 1px solid $edge; border-radius: 4px;
    text-align: center; color: $ink; }
QProgressBar::chunk { background: $accent; border-radius: 3px; }
QAbstractSpinBox::up-button, QAbstractSpinBox::down-button { width: 0; border: 0; }
QScrollBar { background: $window; border: 0; }
QScrollBar:vertical { width: 12px; }
QScrollBar:horizontal { height: 12px; }
QScrollBar::handle { background: $faint; border-radius: 4px; margin: 2px;
    min-height: 24px; min-width: 24px; }
QScrollBar::handle:hover { background: $muted; }
QScrollBar::add-line, QScrollBar::sub-line { width: 0; height: 0; }
QScrollBar::add-page, QScrollBar::sub-page { background: transparent; }
QCheckBox:focus, QRadioButton:focus { color: $accent; }
QDockWidget::title { background: $window; padding: 4px; }
QLabel { background: transparent; }
""")
