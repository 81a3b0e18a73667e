"""Molecular bands: heads with shading and extent; read once."""

from __future__ import annotations

import json
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from ..errors import InputRefused
from ..resources import tables_dir
from ..spectra.medium import air_to_vacuum

SHADINGS = ("red", "violet", "both")


@dataclass(frozen=True)
class Band:
    """One band of a molecule.

    system: electronic system ('gamma A-X'); band: vibrational numbers (upper-lower)
    head, error: vacuum Angstrom; shading: the side the band reaches to ('both': no head,
        ``head`` is its middle); low, high: vacuum range covered
    strength: log10 of relative opacity within the molecule, NaN unknown
    source: bibliographic key; from_memory: the head is not recomputed from lines
    """

    molecule: str
    system: str
    band: str
    head: float
    error: float
    shading: str
    low: float
    high: float
    strength: float
    source: str
    from_memory: bool


def _band(row: dict) -> Band:
    head, extent, shading = float(air_to_vacuum(row["air"])), row["extent"], row["shading"]
    below = {"red": 0.0, "violet": extent, "both": extent / 2}[shading]
    level = float("nan") if row["strength"] is None else row["strength"]
    return Band(
        row["molecule"], row["system"], row["band"], head, row["error"], shading, head - below,
        head - below + extent, level, row["source"], row["from_memory"],
    )


@lru_cache(maxsize=1)
def load_bands() -> tuple[Band, ...]:
    """All shipped bands by rising head. Raises InputRefused where the table is missing."""
    path = tables_dir() / "bands.json"
    try:
        rows = json.loads(path.read_text())
    except (OSError, ValueError):
        raise InputRefused(
            path, "the table of molecular bands is missing or damaged", "install Linewright again"
        ) from None
    return tuple(_band(row) for row in rows)


def bands_between(low: float, high: float, molecules: tuple[str, ...] = ()) -> tuple[Band, ...]:
    """Bands that reach into low-high (vacuum Angstrom), of these molecules (all when empty)."""
    return tuple(
        band for band in load_bands()
        if band.low <= high and band.high >= low
        and (not molecules or band.molecule in molecules)
    )


def in_bands(wave, molecules: tuple[str, ...] = ()) -> np.ndarray:
    """Whether vacuum wavelengths (Angstrom) lie inside a band; same shape as ``wave``."""
    wave = np.asarray(wave, dtype=float)
    inside = np.zeros(wave.shape, bool)
    for band in load_bands():
        if not molecules or band.molecule in molecules:
            inside |= (wave >= band.low) & (wave <= band.high)
    return inside
