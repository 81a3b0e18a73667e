"""Catalogue rows as an astropy table, for files and the terminal."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from ..spectra.medium import to_medium
from .catalogue import ORIGINS, LineCatalogue

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
)


def _values(catalogue: LineCatalogue, medium: str) -> dict[str, np.ndarray]:
    named = {
        "species": np.array(catalogue.species_names)[catalogue.species],
        "source": np.array(catalogue.source_keys)[catalogue.source],
        "origin": np.array(ORIGINS)[catalogue.origin],
        "wave": to_medium(catalogue.wave, medium),
    }
    return {name: named.get(name, getattr(catalogue, name)) for name, _, _ in _COLUMNS}


def catalogue_table(
    catalogue: LineCatalogue, medium: str = "air", depth: np.ndarray | None = None
) -> Table:
    """Astropy table of a catalogue, unknown numbers masked.

    medium: 'air' or 'vacuum', of the column ``wave``; depth: optional predicted central
    depths, one per line, added as a last column.
    """
    from astropy.table import MaskedColumn, Table

    table = Table(meta={"medium": medium, "catalogue": catalogue.identity})
    values = _values(catalogue, medium)
    for name, unit, description in _COLUMNS:
        column = values[name]
        numeric = column.dtype.kind == "f"
        mask = ~np.isfinite(column) if numeric else np.zeros(len(column), bool)
        table[name] = MaskedColumn(column, mask=mask, unit=unit, description=description)
    for name, digits in (("wave", ".4f"), ("wave_err", ".4f"), ("e_low", ".4f"), ("loggf", ".3f")):
        table[name].info.format = digits
    if depth is not None:
        column = MaskedColumn(depth, mask=~np.isfinite(depth), description="predicted depth")
        table["depth"] = column
        table["depth"].info.format = ".3f"
    return table
