"""Species families of figures: each has one colour of the Okabe-Ito set and one marker shape.

Colours: Okabe M. & Ito K. 2008, Color Universal Design (values from memory). The shape
repeats what the colour says, so that neither is needed alone; where two families share a
colour they seldom meet in one spectrum and the shape tells them apart.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache


@dataclass(frozen=True)
class Family:
    """title for legends; ``light``/``dark``: colour on a light or dark ground; marker shape."""

    title: str
    light: str
    dark: str
    marker: str


HYDROGEN_HELIUM = Family("hydrogen and helium", "#000000", "#f0e442", "diamond")
LIGHT_ODD = Family("light and odd elements", "#e69f00", "#e69f00", "triangle")
ALPHA = Family("alpha elements", "#d55e00", "#d55e00", "square")
TITANIUM = Family("scandium to vanadium", "#009e73", "#009e73", "hexagon")
IRON_PEAK = Family("iron peak", "#0072b2", "#56b4e9", "circle")
HEAVY = Family("neutron capture", "#cc79a7", "#cc79a7", "cross")
MOLECULE = Family("molecules", "#56b4e9", "#0072b2", "bar")
FORBIDDEN = Family("nebular, forbidden", "#009e73", "#009e73", "star")
FOREIGN = Family("air, sky, interstellar", "#6b7280", "#9aa3ad", "vee")
FAMILIES = (
    HYDROGEN_HELIUM,
    LIGHT_ODD,
    ALPHA,
    TITANIUM,
    IRON_PEAK,
    HEAVY,
    MOLECULE,
    FORBIDDEN,
    FOREIGN,
)

_BY_ELEMENT = {
    **dict.fromkeys("H He D".split(), HYDROGEN_HELIUM),
    **dict.fromkeys("Li Be B C N O F Na Al P Cl K Ne Ar".split(), LIGHT_ODD),
    **dict.fromkeys("Mg Si S Ca".split(), ALPHA),
    **dict.fromkeys("Sc Ti V".split(), TITANIUM),
    **dict.fromkeys("Cr Mn Fe Co Ni Cu Zn".split(), IRON_PEAK),
}
_FOREIGN_ORIGINS = ("telluric", "sky", "interstellar", "lamp", "artefact")


@lru_cache(maxsize=4096)
def family_of(species: str, origin: str = "stellar") -> Family:
    """Family of a species name such as 'Fe I', '[O III]', 'TiO'."""
    if origin in _FOREIGN_ORIGINS:
        return FOREIGN
    name = species.strip()
    if name.startswith("["):
        return FORBIDDEN
    element, _, stage = name.rstrip("]").partition(" ")
    if not stage and element not in _BY_ELEMENT:
        return MOLECULE
    return _BY_ELEMENT.get(element, HEAVY)
