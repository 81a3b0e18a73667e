"""Themes: readable, Okabe-Ito, and never by colour alone."""

from __future__ import annotations

import dataclasses
import re

import pytest

from linewright.publish.families import FAMILIES, FOREIGN, family_of
from linewright.window.plot.marks import FILL, MARKERS, marker_polygon
from linewright.window.plot.tick_strokes import STROKES
from linewright.window.theme import (
    DARK,
    LIGHT,
    _matplotlib_fonts,
    contrast,
    ensure_fonts,
    theme_named,
)

# Okabe & Ito 2008, Color Universal Design: the eight colours (values from memory).
OKABE_ITO = {
    "#000000", "#e69f00", "#56b4e9", "#009e73", "#f0e442", "#0072b2", "#d55e00", "#cc79a7",
}
SPECIES = ("H I", "He II", "Na I", "Mg I", "Fe I", "Fe II", "Ti II", "Ba II", "TiO", "[O III]")
THEMES = (LIGHT, DARK)


@pytest.mark.parametrize("theme", THEMES, ids=lambda t: t.name)
def test_text_can_be_read(theme):
    """4.5:1 is the minimum contrast of WCAG 2.1, criterion 1.4.3; 3:1 of 1.4.11."""
    for species in SPECIES:
        assert contrast(theme.text_colour(species), theme.base) >= 4.5
    for ground in (theme.base, theme.window, theme.raised):
        assert contrast(theme.ink, ground) >= 7
        assert contrast(theme.muted, ground) >= 4.5
        assert contrast(theme.accent, ground) >= 3
    assert contrast(theme.accent_ink, theme.accent) >= 4.5
    for notice in (theme.good, theme.caution, theme.bad):
        assert contrast(notice, theme.window) >= 4.5


def test_contrast_of_black_and_white_is_21():
    """WCAG 2.1, definition of contrast ratio."""
    assert contrast("#000000", "#ffffff") == pytest.approx(21.0)


def test_family_colours_are_okabe_ito_and_shapes_differ():
    for family in FAMILIES:
        if family is not FOREIGN:
            assert {family.light, family.dark} <= OKABE_ITO
    shapes = [family.marker for family in FAMILIES]
    assert len(set(shapes)) == len(shapes) and set(shapes) == set(MARKERS)
    outlines = {
        tuple((round(p.x(), 2), round(p.y(), 2)) for p in marker_polygon(name, 0, 0, 1))
        for name in MARKERS
    }
    assert len(outlines) == len(MARKERS)


def test_standing_shows_in_fill_and_stroke():
    assert len(set(FILL.values())) == 3
    assert len(set(STROKES.values())) == 5


@pytest.mark.parametrize(
    "species, origin, title",
    [
        ("Fe I", "stellar", "iron peak"),
        ("Fe II", "stellar", "iron peak"),
        ("Mg I", "stellar", "alpha elements"),
        ("Ti II", "stellar", "scandium to vanadium"),
        ("Eu II", "stellar", "neutron capture"),
        ("[O III]", "nebular", "nebular, forbidden"),
        ("TiO", "molecular", "molecules"),
        ("C2", "molecular", "molecules"),
        ("H I", "nebular", "hydrogen and helium"),
        ("O2", "telluric", "air, sky, interstellar"),
        ("Na I", "interstellar", "air, sky, interstellar"),
    ],
)
def test_families(species, origin, title):
    assert family_of(species, origin).title == title


@pytest.mark.parametrize("theme", THEMES, ids=lambda t: t.name)
def test_style_sheet_is_whole_and_accepted(theme, qapp):
    sheet = theme.style_sheet()
    assert "$" not in sheet and sheet.count("{") == sheet.count("}")
    used = set(re.findall(r"#[0-9a-f]{6}", sheet))
    assert used <= {v for v in dataclasses.asdict(theme).values() if isinstance(v, str)}


def test_names():
    assert theme_named("light") is LIGHT and theme_named("dark") is DARK
    with pytest.raises(KeyError):
        theme_named("sepia")


def test_there_are_letters_even_on_a_bare_machine(qapp):
    assert ensure_fonts(qapp)
    assert any(path.name == "DejaVuSans.ttf" for path in _matplotlib_fonts())
