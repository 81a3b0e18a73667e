"""Finding lines: by range, species, multiplet, energy, strength, grade and free text."""

from __future__ import annotations

import re
from dataclasses import dataclass

import numpy as np

from ..errors import InputRefused
from ..spectra.medium import from_medium
from .catalogue import GRADES, ORIGINS, LineCatalogue
from .species import parse_species


@dataclass(frozen=True)
class LineQuery:
    """What to look for; every field left at its default leaves all lines.

    wave_range: (low, high) in ``medium`` ('air' or 'vacuum'), Angstrom
    species: canonical names; origin: of ORIGINS
    e_low: (low, high) eV; loggf_above: dex; grade: worst grade wanted ('A' to 'E')
    multiplet_of: a row of the catalogue whose multiplet is wanted
    text: words that must all fit (species, configuration, term, source key, wavelength digits)
    """

    wave_range: tuple[float, float] | None = None
    medium: str = "air"
    species: tuple[str, ...] = ()
    origin: str = ""
    e_low: tuple[float, float] | None = None
    loggf_above: float | None = None
    grade: str = ""
    multiplet_of: int | None = None
    text: str = ""


def search(catalogue: LineCatalogue, query: LineQuery) -> np.ndarray:
    """Rows of the lines that fit the query, ascending.

    Lines with an unknown value of a column asked for do not fit. Raises InputRefused for an
    unknown origin, grade or row.
    """
    first, last = _span(catalogue, query)
    part = catalogue.take(slice(first, last))
    keep = np.ones(len(part), bool)
    for test in (_by_species, _by_origin, _by_energy, _by_strength, _by_grade):
        test(part, query, keep)
    if query.multiplet_of is not None:
        keep &= part.multiplet == _multiplet(catalogue, query.multiplet_of)
    for word in query.text.split():
        keep &= fits_word(part, word, query.medium)
    return first + np.flatnonzero(keep)


def _span(catalogue: LineCatalogue, query: LineQuery) -> tuple[int, int]:
    if query.wave_range is None:
        return 0, len(catalogue)
    low, high = sorted(float(from_medium(edge, query.medium)) for edge in query.wave_range)
    first, last = np.searchsorted(catalogue.wave, [low, np.nextafter(high, np.inf)])
    return int(first), int(last)


def _codes(names: tuple[str, ...], wanted) -> np.ndarray:
    return np.array([name in wanted for name in names], bool)


def _by_species(part: LineCatalogue, query: LineQuery, keep: np.ndarray) -> None:
    if query.species:
        keep &= _codes(part.species_names, set(query.species))[part.species]


def _by_origin(part: LineCatalogue, query: LineQuery, keep: np.ndarray) -> None:
    if not query.origin:
        return
    if query.origin not in ORIGINS:
        raise InputRefused(f"origin '{query.origin}'", "unknown", f"one of {', '.join(ORIGINS)}")
    keep &= part.origin == ORIGINS.index(query.origin)


def _by_energy(part: LineCatalogue, query: LineQuery, keep: np.ndarray) -> None:
    if query.e_low is not None:
        low, high = query.e_low
        keep &= (part.e_low >= low) & (part.e_low <= high)


def _by_strength(part: LineCatalogue, query: LineQuery, keep: np.ndarray) -> None:
    if query.loggf_above is not None:
        keep &= part.loggf > query.loggf_above


def _by_grade(part: LineCatalogue, query: LineQuery, keep: np.ndarray) -> None:
    if not query.grade:
        return
    if query.grade not in GRADES:
        raise InputRefused(f"grade '{query.grade}'", "unknown", "one of A, B, C, D, E")
    keep &= (part.grade > 0) & (part.grade <= GRADES.index(query.grade))


def _multiplet(catalogue: LineCatalogue, row: int) -> int:
    if not 0 <= row < len(catalogue):
        raise InputRefused(f"line {row}", "no such row", "choose a line of the catalogue")
    return int(catalogue.take(slice(row, row + 1)).multiplet[0])


def fits_word(part: LineCatalogue, word: str, medium: str = "air") -> np.ndarray:
    """Whether each line fits one word; upper and lower case are the same.

    Digits with a point ('6173.3') are a wavelength in ``medium``, cut or rounded; anything
    else is part of a species, configuration, term or source key ('FeI' is 'Fe I').
    """
    if re.fullmatch(r"\d{3,6}\.?\d*", word):
        return _fits_wavelength(part, word, medium)
    lowered = word.lower()
    named = np.array([_names_species(name, lowered) for name in part.species_names], bool)
    terms = np.array([bool(t) and lowered in t.lower() for t in part.term_names], bool)
    keys = np.array([lowered in key.lower() for key in part.source_keys], bool)
    found = named[part.species] | keys[part.source] if len(keys) else named[part.species]
    return found | terms[part.term_low] | terms[part.term_up]


def _names_species(name: str, lowered: str) -> bool:
    squeezed = name.lower().replace(" ", "")
    return lowered == squeezed or lowered in (name.lower(), parse_species(name).element.lower())


def _fits_wavelength(part: LineCatalogue, word: str, medium: str) -> np.ndarray:
    """Wavelengths whose written form begins with the digits of ``word`` or rounds to them."""
    step = 10.0 ** -len(word.partition(".")[2])
    bounds = (float(word) - 0.5 * step, float(word) + step)
    edges = [float(from_medium(value, medium)) for value in bounds]
    return (part.wave >= edges[0]) & (part.wave < edges[1])
