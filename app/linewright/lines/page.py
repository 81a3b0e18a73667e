"""The page of one line: its data, its siblings, its sources; plain data for any display."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..errors import InputRefused
from ..spectra.medium import to_medium
from .catalogue import EV_ANGSTROM, FLAG_NAMES, GRADES, ORIGINS, LineCatalogue
from .citations import bibtex, citation
from .depths import typical_log_pe
from .strengths import absorption_strength

MOST_SIBLINGS = 40


@dataclass(frozen=True)
class Sibling:
    """A related line: row of the catalogue, vacuum wavelength (Angstrom), log gf, strength.

    strength: log10 of opacity less that of the page's line (dex; emission: of emissivity);
    NaN unknown.
    """

    row: int
    wave: float
    loggf: float
    strength: float


@dataclass(frozen=True)
class LinePage:
    """Everything known of one line.

    title: species and air wavelength; entries: (label, value, unit) as text, in reading order
    multiplet: the other lines between the same two terms; strongest: the species' strongest
        other lines within the range asked for
    sources: (key, full citation); bibtex: their BibTeX entries
    """

    row: int
    title: str
    entries: tuple[tuple[str, str, str], ...]
    multiplet: tuple[Sibling, ...]
    strongest: tuple[Sibling, ...]
    sources: tuple[tuple[str, str], ...]
    bibtex: str


def line_page(
    catalogue: LineCatalogue,
    row: int,
    temperature: float = 5800.0,
    wave_range: tuple[float, float] = (3500.0, 10000.0),
) -> LinePage:
    """The page of a line.

    temperature (K) weighs the siblings; wave_range (vacuum Angstrom) bounds them. Raises
    InputRefused for a row the catalogue does not have.
    """
    if not 0 <= row < len(catalogue):
        raise InputRefused(f"line {row}", "no such row", "choose a line of the catalogue")
    keys = [catalogue.source_keys[int(catalogue.source[row])]]
    seconds = (int(catalogue.source_alt[row]), int(catalogue.source_loggf_alt[row]))
    keys += [catalogue.source_keys[code] for code in seconds if code >= 0]
    air = float(to_medium(catalogue.wave[row], "air"))
    related = _related(catalogue, row, temperature, wave_range)
    return LinePage(
        row=row,
        title=f"{catalogue.species_of(row)} {air:.3f}",
        entries=tuple(_entries(catalogue, row, air)),
        multiplet=related[0],
        strongest=related[1],
        sources=tuple((key, citation(key)) for key in dict.fromkeys(keys)),
        bibtex=bibtex(keys),
    )


def _text(value, digits: int) -> str:
    return f"{float(value):.{digits}f}" if np.isfinite(value) else ""


def _spin(value) -> str:
    if not np.isfinite(value):
        return ""
    doubled = round(2 * float(value))
    return f"{doubled}/2" if doubled % 2 else str(doubled // 2)


def _level(catalogue: LineCatalogue, row: int, upper: bool) -> str:
    configuration, term = catalogue.term_of(row, upper)
    return " ".join(part for part in (configuration, term) if part)


def _entries(catalogue: LineCatalogue, row: int, air: float) -> list[tuple[str, str, str]]:
    c = catalogue
    flags = [name for bit, name in FLAG_NAMES.items() if int(c.flags[row]) & bit]
    listed = [
        ("species", c.species_of(row), ""),
        ("origin", ORIGINS[int(c.origin[row])], ""),
        ("wavelength in air", f"{air:.4f}" if c.wave[row] >= 2000.0 else "", "Angstrom"),
        ("wavelength in vacuum", _text(c.wave[row], 4), "Angstrom"),
        ("error", _text(c.wave_err[row], 4), "Angstrom"),
        ("second source, vacuum", _text(c.wave_alt[row], 4), "Angstrom"),
        ("difference", _text(c.wave_alt[row] - c.wave[row], 4), "Angstrom"),
        ("lower level", _level(c, row, False), ""),
        ("upper level", _level(c, row, True), ""),
        ("J", " - ".join(filter(None, (_spin(c.j_low[row]), _spin(c.j_up[row])))), ""),
        ("E_low", _text(c.e_low[row], 4), "eV"),
        ("E_up", _text(c.e_low[row] + EV_ANGSTROM / c.wave[row], 4), "eV"),
        ("log gf", _text(c.loggf[row], 3), ""),
        ("error of log gf", _text(c.loggf_err[row], 2), "dex"),
        ("log gf, second source", _text(c.loggf_alt[row], 3), ""),
        ("difference of log gf", _text(c.loggf_alt[row] - c.loggf[row], 3), "dex"),
        ("grade", GRADES[int(c.grade[row])], ""),
        ("log emissivity (H beta = 2)", _text(c.emission[row], 2), ""),
        ("optical depth, air mass 1", _text(c.depth_ref[row], 4), ""),
        ("log radiative damping", _text(c.gamma_rad[row], 2), "rad/s"),
        ("log van der Waals damping", _text(c.gamma_waals[row], 2), "rad/s cm3"),
        ("log Stark damping, approximate", _text(c.gamma_stark[row], 2), "rad/s cm3"),
        ("spread of components", _text(c.spread[row] or np.nan, 4), "Angstrom"),
        ("flags", ", ".join(flags), ""),
    ]
    return [entry for entry in listed if entry[1]]


def _strengths(part: LineCatalogue, row_origin: int, temperature: float) -> np.ndarray:
    """Strength that ranks lines of one kind: emissivity, telluric depth or opacity (log10)."""
    origin = ORIGINS[row_origin]
    if origin == "telluric":
        return np.log10(part.depth_ref)
    if origin in ("nebular", "sky", "lamp"):
        return part.emission
    return absorption_strength(part, temperature, typical_log_pe(temperature))


def _related(catalogue: LineCatalogue, row: int, temperature: float, wave_range):
    """(multiplet members, strongest lines of the species), without the line itself."""
    same = (catalogue.species == catalogue.species[row]) & (
        catalogue.origin == catalogue.origin[row]
    )
    rows = np.flatnonzero(same)
    part = catalogue.take(rows)
    strength = _strengths(part, int(catalogue.origin[row]), temperature)
    here = int(np.searchsorted(rows, row))
    relative = strength - strength[here]
    others = rows != row
    key = part.multiplet
    members = np.flatnonzero(others & (key == key[here]) & (key >= 0))[:MOST_SIBLINGS]
    inside = others & (part.wave >= wave_range[0]) & (part.wave <= wave_range[1])
    ranked = np.flatnonzero(inside & np.isfinite(strength))
    ranked = ranked[np.argsort(-strength[ranked], kind="stable")][:12]

    def sibling(k: int) -> Sibling:
        return Sibling(int(rows[k]), float(part.wave[k]), float(part.loggf[k]), float(relative[k]))

    return tuple(map(sibling, members)), tuple(map(sibling, ranked))
