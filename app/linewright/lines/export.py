"""Catalogue rows as an astropy table, for files and the terminal."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from ..errors import InputRefused
from ..spectra.medium import from_medium, to_medium
from .catalogue import FLAG_NAMES, GRADES, ORIGINS, LineCatalogue
from .depths import catalogue_depths

if TYPE_CHECKING:
    from astropy.table import Table

# Column, unit, description; these first and in this order.
_COLUMNS = (
    ("species", None, "atom, ion, molecule or diffuse band"),
    ("wave", "Angstrom", "wavelength in the medium named in the metadata"),
    ("wave_err", "Angstrom", "one-sigma error of wave"),
    ("e_low", "eV", "lower-level energy"),
    ("loggf", None, "log10 of statistical weight times oscillator strength"),
    ("source", None, "bibliographic key"),
    ("loggf_err", None, "one-sigma error of loggf, dex"),
    ("origin", None, "where the line is formed"),
    ("j_low", None, "total angular momentum of the lower level"),
    ("j_up", None, "total angular momentum of the upper level"),
    ("spread", "Angstrom", "rms spread of unresolved components"),
    ("emission", None, "log10 of nebular emissivity, H beta = 100"),
    ("depth_ref", None, "telluric optical depth at line centre, air mass 1"),
    ("e_up", "eV", "upper-level energy"),
    ("grade", None, "of the strength: A 0.05 dex, B 0.12, C 0.25, D 0.5, E worse or nominal"),
    ("term_low", None, "configuration and term of the lower level"),
    ("term_up", None, "configuration and term of the upper level"),
    ("wave_alt", "Angstrom", "wavelength of the second source"),
    ("gamma_rad", None, "log10 of the radiative damping constant, rad/s"),
    ("gamma_waals", None, "log10 of van der Waals damping per hydrogen atom, 10,000 K, rad/s cm3"),
    ("gamma_stark", None, "log10 of Stark damping per electron, 10,000 K, rad/s cm3, approximate"),
    ("loggf_alt", None, "log gf of the second source"),
    ("flags", None, "non-LTE, nominal strength, components collapsed"),
)

# Decimals written.
_DIGITS = {
    "wave": 4, "wave_err": 4, "e_low": 4, "loggf": 3, "loggf_err": 2, "spread": 4, "emission": 2,
    "depth_ref": 5, "depth": 3, "e_up": 4, "wave_alt": 4, "gamma_rad": 2, "gamma_waals": 2,
    "gamma_stark": 2, "loggf_alt": 3,
}


def _levels(catalogue: LineCatalogue) -> np.ndarray:
    return np.array([name.replace("|", " ").strip() for name in catalogue.term_names])


def _flag_words(flags: np.ndarray) -> np.ndarray:
    """The flags of every line in words."""
    words = [
        ", ".join(name for bit, name in FLAG_NAMES.items() if code & bit)
        for code in range(sum(FLAG_NAMES) + 1)
    ]
    return np.array(words)[flags]


def _values(catalogue: LineCatalogue, medium: str) -> dict[str, np.ndarray]:
    named = {
        "species": np.array(catalogue.species_names)[catalogue.species],
        "source": np.array(catalogue.source_keys)[catalogue.source],
        "origin": np.array(ORIGINS)[catalogue.origin],
        "wave": to_medium(catalogue.wave, medium),
        "wave_alt": to_medium(catalogue.wave_alt, medium),
        "grade": np.array(GRADES)[catalogue.grade],
        "flags": _flag_words(catalogue.flags),
        "term_low": _levels(catalogue)[catalogue.term_low],
        "term_up": _levels(catalogue)[catalogue.term_up],
    }
    return {name: named.get(name, getattr(catalogue, name)) for name, _, _ in _COLUMNS}


def select_lines(catalogue: LineCatalogue, wave_range, medium: str, species=()) -> LineCatalogue:
    """Rows with wave_range[0] <= wave <= wave_range[1] in ``medium`` and of the named species.

    wave_range None and empty species leave everything; species are canonical names.
    """
    if wave_range is not None:
        low, high = (float(from_medium(edge, medium)) for edge in wave_range)
        catalogue = catalogue.between(low, high)
    if species:
        wanted = [k for k, name in enumerate(catalogue.species_names) if name in set(species)]
        catalogue = catalogue.take(np.isin(catalogue.species, wanted))
    return catalogue


def catalogue_table(
    catalogue: LineCatalogue,
    wave_range: tuple[float, float] | None = None,
    medium: str = "air",
    species: tuple[str, ...] = (),
    depth_above: float | None = None,
    temperature: float | None = None,
) -> Table:
    """Astropy table of lines in a range, unknown numbers masked.

    wave_range in ``medium`` ('air' or 'vacuum', also of the column ``wave``); species:
    canonical names, all when empty; temperature (K) adds a column of predicted depths, and
    depth_above keeps only lines predicted deeper (it needs a temperature).
    Raises InputRefused for depth_above without temperature.
    """
    if depth_above is not None and temperature is None:
        raise InputRefused("depth above", "depths need a temperature", "give the temperature in K")
    lines = select_lines(catalogue, wave_range, medium, species)
    depth = None
    if temperature is not None:
        depth = catalogue_depths(lines, temperature)
        if depth_above is not None:
            keep = np.nan_to_num(depth, nan=-1.0) > depth_above
            lines, depth = lines.take(keep), depth[keep]
    return _table(lines, medium, depth)


def _table(catalogue: LineCatalogue, medium: str, depth: np.ndarray | None) -> Table:
    from astropy.table import MaskedColumn, Table

    table = Table(meta={"medium": medium, "catalogue": catalogue.identity})
    values = _values(catalogue, medium)
    for name, unit, description in _COLUMNS:
        column = values[name]
        numeric = column.dtype.kind == "f"
        mask = ~np.isfinite(column) if numeric else np.zeros(len(column), bool)
        if name in _DIGITS:
            column = np.round(column, _DIGITS[name])
        table[name] = MaskedColumn(column, mask=mask, unit=unit, description=description)
    if depth is not None:
        description = "predicted central depth at the temperature asked for"
        rounded = np.round(depth, _DIGITS["depth"])
        table["depth"] = MaskedColumn(rounded, mask=~np.isfinite(depth), description=description)
    for name in set(_DIGITS) & set(table.colnames):
        table[name].info.format = f".{_DIGITS[name]}f"
    return table
