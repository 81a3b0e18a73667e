"""Which species the rake shows, and their predicted lines as sorted columns."""

from __future__ import annotations

from collections import Counter

import numpy as np

from ..lines.catalogue import LineCatalogue
from ..session.model import Session
from ..spectra.medium import to_medium

FOREGROUND = ("telluric", "sky")


def most_claimed(session: Session, low: float, high: float, count: int = 5) -> tuple[str, ...]:
    """Species most often claimed for features between low and high, own-medium Angstrom.

    Only standings from tentative up count. Species of the air and sky come after those of
    the object; ties go by name.
    """
    wave = to_medium(session.features.wave, session.spectrum.medium)
    inside = np.nonzero((wave >= low) & (wave <= high))[0]
    tally = Counter(
        (session.claims[i].origin in FOREGROUND, session.claims[i].species)
        for i in inside
        if session.claims[i].species and session.claims[i].standing in (
            "firm", "likely", "tentative")
    )
    ranked = sorted(tally.items(), key=lambda item: (item[0][0], -item[1], item[0][1]))
    return tuple(dict.fromkeys(name for (_air, name), _n in ranked))[:count]


def rake_columns(
    catalogue: LineCatalogue,
    depth: np.ndarray,
    species: tuple[str, ...],
    low: float,
    high: float,
    least: float = 0.01,
) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """(wave, depth, row) of the lines of ``species`` between low and high, vacuum Angstrom.

    depth: predicted depth of every catalogue line; lines below ``least`` are left out;
    row: index into ``species``
    """
    first, last = np.searchsorted(catalogue.wave, [low, high])
    row_of = np.full(len(catalogue.species_names) + 1, -1)
    for k, name in enumerate(species):
        if name in catalogue.species_names:
            row_of[catalogue.species_names.index(name)] = k
    row = row_of[catalogue.species[first:last]]
    strength = np.nan_to_num(np.abs(depth[first:last]), nan=0.0)
    keep = (row >= 0) & (strength >= least)
    return catalogue.wave[first:last][keep], np.clip(strength[keep], 0, 1), row[keep]
