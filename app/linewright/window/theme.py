"""Light and dark colours of the window, and its style sheet."""

from __future__ import annotations

from dataclasses import dataclass

from .plot.families import family_of


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
        raise NotImplementedError

    def text_colour(self, species: str, origin: str = "stellar") -> str:
        """The same hue with at least 4.5:1 contrast against ``base``."""
        raise NotImplementedError

    def marker(self, species: str, origin: str = "stellar") -> str:
        """Shape of the family: a name that ``plot.marks.marker_polygon`` knows."""
        return family_of(species, origin).marker

    def style_sheet(self) -> str:
        """Qt style sheet for the whole window."""
        raise NotImplementedError


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
    """On a machine without fonts load matplotlib's DejaVu Sans; True when text can be shown."""
    raise NotImplementedError
