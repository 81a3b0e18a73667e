"""Which catalogue rows pass the filter: array work only."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ...lines.catalogue import ORIGINS, LineCatalogue
from ...spectra.medium import from_medium, to_medium


@dataclass(frozen=True)
class CatalogueFilter:
    """species: lower-case names or their beginnings; low, high: own-medium Angstrom"""

    species: tuple[str, ...] = ()
    low: float = 0.0
    high: float = float("inf")
    text: str = ""
    depth: float = 0.0
    medium: str = "air"


def ranges_of(text: str, whole, view) -> tuple[float, float]:
    """(low, high) of 'LO:HI', 'view' or 'all'; the spectrum's range when empty or unread."""
    text = text.strip().lower()
    if text == "view" and view is not None:
        return view
    everything = (0.0, float("inf"))
    if text == "all":
        return everything
    parts = text.replace("–", ":").replace("..", ":").split(":")
    try:
        low, high = (float(p) for p in parts)
    except ValueError:
        return whole or everything
    return (low, high) if low < high else (high, low)


def passing(catalogue: LineCatalogue, depth, wanted: CatalogueFilter) -> np.ndarray:
    """Ascending row numbers of the lines that pass."""
    low, high = wanted.low, wanted.high
    ends = [float(from_medium(e, wanted.medium)) if np.isfinite(e) and e > 0 else e
            for e in (low, high)]
    first, last = np.searchsorted(catalogue.wave, ends)
    part = slice(int(first), int(last))
    keep = np.ones(part.stop - part.start, dtype=bool)
    if wanted.species:
        keep &= _species_codes(catalogue, wanted.species)[catalogue.species[part]]
    if wanted.depth > 0 and depth is not None:
        keep &= np.nan_to_num(np.abs(depth[part])) >= wanted.depth
    if wanted.text:
        keep &= _text_mask(catalogue, part, wanted)
    return np.nonzero(keep)[0] + part.start


def _species_codes(catalogue: LineCatalogue, names: tuple[str, ...]) -> np.ndarray:
    """A full name means that species; a beginning ('fe') all that begin so."""
    known = [n.lower() for n in catalogue.species_names]
    mask = np.zeros(len(known), dtype=bool)
    for name in names:
        exact = [n == name for n in known]
        if any(exact):
            mask |= exact
        else:
            mask |= [n.lstrip("[").startswith(name.lstrip("[")) for n in known]
    return mask


def _text_mask(catalogue: LineCatalogue, part: slice, wanted: CatalogueFilter) -> np.ndarray:
    sources = np.array([wanted.text in k.lower() for k in catalogue.source_keys] or [False])
    origins = np.array([wanted.text in o for o in ORIGINS])
    mask = sources[catalogue.source[part]] | origins[catalogue.origin[part]]
    if wanted.text.replace(".", "").isdigit():
        wave = to_medium(catalogue.wave[part], wanted.medium)
        mask |= np.array([f"{w:.3f}".startswith(wanted.text) for w in wave], dtype=bool)
    return mask
