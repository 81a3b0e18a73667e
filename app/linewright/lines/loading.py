"""The shipped catalogue: tables merged, sorted by vacuum wavelength, read once."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterable
from functools import lru_cache

import numpy as np

from ..errors import InputRefused
from ..resources import tables_dir
from .catalogue import ORIGINS, LineCatalogue

# Every table of lines; 'level_physics' holds no lines.
LINE_TABLES = (
    "atomic_lines",
    "hydrogen_helium",
    "level_lines",
    "nebular_lines",
    "interstellar_sky",
    "telluric_lines",
)
_FLOATS = ("wave", "wave_err", "e_low", "loggf", "loggf_err", "emission", "depth_ref", "spread")


def manifest_text() -> str:
    """The manifest of the shipped tables (name -> bytes, SHA-256), as stored."""
    return (tables_dir() / "manifest.json").read_text()


def _names(which: str | None) -> list[str]:
    shipped = json.loads(manifest_text())
    present = [name for name in LINE_TABLES if f"{name}.npz" in shipped]
    if which is None:
        return present
    if which not in present:
        raise InputRefused(f"catalogue '{which}'", "no such table", f"one of {', '.join(present)}")
    return [which]


def _read(name: str) -> dict[str, np.ndarray]:
    with np.load(tables_dir() / f"{name}.npz") as stored:
        return {key: stored[key] for key in stored.files}


def _merged_names(tables: list[dict], column: str, key: str) -> tuple[tuple[str, ...], list]:
    """All names of a column over the tables and, per table, the recoded column."""
    index: dict[str, int] = {}
    coded = []
    for table in tables:
        place = np.array([index.setdefault(str(n), len(index)) for n in table[key]], np.int32)
        coded.append(place[table[column]])
    return tuple(index), coded


def _spin(doubled: np.ndarray) -> np.ndarray:
    return np.where(doubled < 0, np.float32(np.nan), doubled * np.float32(0.5))


@lru_cache(maxsize=8)
def _load(which: str | None) -> LineCatalogue:
    tables = [_read(name) for name in _names(which)]
    species_names, species = _merged_names(tables, "species", "species_names")
    source_keys, source = _merged_names(tables, "source", "source_keys")
    wave = np.concatenate([table["wave"] for table in tables])
    order = np.argsort(wave, kind="stable")

    def column(parts, dtype):
        return np.concatenate(parts)[order].astype(dtype, copy=False)

    floats = {key: column([t[key] for t in tables], np.float64) for key in _FLOATS}
    catalogue = LineCatalogue(
        **floats,
        j_low=_spin(column([t["j_low2"] for t in tables], np.int8)),
        j_up=_spin(column([t["j_up2"] for t in tables], np.int8)),
        species=column(species, np.int32),
        source=column(source, np.int32),
        origin=column([t["origin"] for t in tables], np.int8),
        species_names=species_names,
        source_keys=source_keys,
        identity=hashlib.sha256(manifest_text().encode()).hexdigest()[:12],
    )
    for values in vars(catalogue).values():
        if isinstance(values, np.ndarray):
            values.flags.writeable = False
    return catalogue


def load_catalogue(
    which: str | None = None, *, origins: Iterable[str] | None = None
) -> LineCatalogue:
    """The shipped lines, sorted by vacuum wavelength; arrays are read-only and shared.

    which: one table of LINE_TABLES (all when None); origins: only these of ORIGINS.
    ``identity`` is the start of the SHA-256 of the tables' manifest. Raises InputRefused
    for an unknown table or origin.
    """
    catalogue = _load(which)
    if origins is None:
        return catalogue
    wanted = (origins,) if isinstance(origins, str) else tuple(origins)
    for name in wanted:
        if name not in ORIGINS:
            raise InputRefused(f"origin '{name}'", "unknown", f"one of {', '.join(ORIGINS)}")
    codes = [ORIGINS.index(name) for name in wanted]
    return catalogue.take(np.isin(catalogue.origin, codes))
