"""The Catalogue's columns: texts are made for the rows on the screen only."""

from __future__ import annotations

from functools import lru_cache

import numpy as np

from ...lines.catalogue import ORIGINS, LineCatalogue
from ...spectra.medium import to_medium
from . import words
from .column_model import Column, ColumnModel


class CatalogueModel(ColumnModel):
    """Rows by index from the arrays of the catalogue."""


def catalogue_columns(c: LineCatalogue, depth, medium: str) -> list[Column]:
    """laboratory, error, species, E_low, log gf, predicted depth, origin, source"""
    lab = in_medium(c, medium)
    names = np.array(c.species_names, dtype=str)
    sources = np.array(c.source_keys, dtype=str)
    predicted = np.full(len(c), np.nan) if depth is None else depth
    return [
        Column(f"laboratory ({medium}, Å)", "Laboratory wavelength in the spectrum's own medium",
               lambda i: words.with_error(lab[i], c.wave_err[i], 4), lambda: lab, True, 168),
        Column("species", "Ion or molecule", lambda i: c.species_of(i),
               lambda: names[c.species], False, 90),
        Column("E_low (eV)", "Energy of the lower level",
               lambda i: words.number(c.e_low[i], 3), lambda: c.e_low, True, 84),
        Column("log gf", "Statistical weight times oscillator strength, dex",
               lambda i: words.number(c.loggf[i], 2, True), lambda: c.loggf, True, 70),
        Column("predicted depth", "At the present temperature and electron pressure",
               lambda i: words.number(predicted[i], 3), lambda: predicted, True, 118),
        Column("origin", "Where such lines arise", lambda i: ORIGINS[int(c.origin[i])],
               lambda: c.origin, False, 90),
        Column("source", "Bibliographic key of the values",
               lambda i: str(sources[c.source[i]]) if len(sources) else "",
               lambda: sources[c.source], False, 180),
    ]


@lru_cache(maxsize=2)
def in_medium(c: LineCatalogue, medium: str) -> np.ndarray:
    """All laboratory wavelengths in a medium, computed once a catalogue."""
    return to_medium(c.wave, medium)
