"""Components of lines the catalogue enters as one, for spectra that resolve them."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from ..resources import tables_dir
from .catalogue import LineCatalogue

TABLES = ("atomic_components", "hydrogen_components")
SAME_LINE = 0.006  # Angstrom at 5000 A


@dataclass(frozen=True)
class Components:
    """Vacuum wavelengths (Angstrom) of a line's components and their shares of its gf."""

    wave: np.ndarray
    share: np.ndarray


@lru_cache(maxsize=1)
def _stored() -> dict[str, tuple[np.ndarray, np.ndarray, np.ndarray]]:
    """Species -> (parent, offset, share), parents rising."""
    found = {}
    for name in TABLES:
        path = tables_dir() / f"{name}.npz"
        if not path.is_file():
            continue
        with np.load(path) as table:
            columns = [table[key].astype(float) for key in ("parent", "offset", "share")]
            for code, species in enumerate(table["species_names"]):
                mine = table["species"] == code
                found[str(species)] = tuple(column[mine] for column in columns)
    return found


def components_of(catalogue: LineCatalogue, row: int) -> Components:
    """Hyperfine, isotopic or fine-structure components of a line; empty where it has none."""
    parent, offset, share = _stored().get(catalogue.species_of(row), (np.empty(0),) * 3)
    wave = float(catalogue.wave[row])
    near = np.abs(parent - wave) < SAME_LINE * wave / 5000.0
    if near.any():
        near &= np.abs(parent - parent[near][np.argmin(np.abs(parent[near] - wave))]) < 1e-6
    return Components(wave + offset[near], share[near])


def component_waves(species: str) -> np.ndarray:
    """Vacuum wavelengths of all components of a species, rising (Angstrom)."""
    parent, offset, _ = _stored().get(species, (np.empty(0),) * 3)
    return np.sort(parent + offset)
