"""The shipped catalogue: tables merged, sorted by vacuum wavelength, read once."""

from __future__ import annotations

import hashlib
import json
import zipfile
from collections.abc import Iterable
from functools import lru_cache

import numpy as np

from ..errors import InputRefused
from ..resources import tables_dir
from .catalogue import OPTIONAL_COLUMNS, ORIGINS, LineCatalogue

# Every table of lines; 'level_physics' holds no lines.
LINE_TABLES = (
    "atomic_lines",
    "hydrogen_helium",
    "level_lines",
    "gap_lines",
    "rare_gases",
    "nebular_lines",
    "interstellar_sky",
    "telluric_lines",
)
_FLOATS = ("wave", "wave_err", "e_low", "loggf", "loggf_err", "emission", "depth_ref", "spread")
_CURE = "install Linewright again, or rebuild linedata/tables"


def manifest_text() -> str:
    """The manifest of the shipped tables (name -> bytes, SHA-256), as stored.

    Raises InputRefused where there is none.
    """
    path = tables_dir() / "manifest.json"
    try:
        return path.read_text()
    except OSError as error:
        raise InputRefused(path, f"the line tables cannot be read ({error})", _CURE) from None


def _names(which: str | None) -> list[str]:
    path = tables_dir() / "manifest.json"
    try:
        shipped = json.loads(manifest_text())
        present = [name for name in LINE_TABLES if f"{name}.npz" in shipped]
    except (ValueError, TypeError):
        raise InputRefused(path, "the list of line tables is empty or damaged", _CURE) from None
    if not present:
        raise InputRefused(path, "the list of line tables names none", _CURE)
    if which is None:
        return present
    if which not in present:
        raise InputRefused(f"catalogue '{which}'", "no such table", f"one of {', '.join(present)}")
    return [which]


def _read(name: str) -> dict[str, np.ndarray]:
    path = tables_dir() / f"{name}.npz"
    try:
        with np.load(path) as stored:
            return {key: stored[key] for key in stored.files}
    except (OSError, ValueError, EOFError, KeyError, zipfile.BadZipFile):
        raise InputRefused(path, "the line table is missing or damaged", _CURE) from None


def _merged_names(tables: list[dict], column: str, key: str) -> tuple[tuple[str, ...], list]:
    """All names of a column over the tables and, per table, the recoded column."""
    index: dict[str, int] = {}
    coded = []
    for table in tables:
        place = np.array([index.setdefault(str(n), len(index)) for n in table[key]], np.int32)
        coded.append(place[table[column]])
    return tuple(index), coded


def _merged_terms(tables: list[dict]) -> tuple[tuple[str, ...], list, list]:
    """Term names over the tables and, per table, the recoded lower and upper terms."""
    index: dict[str, int] = {"": 0}
    low, up = [], []
    for table in tables:
        if "term_text" not in table:
            zeros = np.zeros(len(table["wave"]), np.int32)
            low.append(zeros)
            up.append(zeros)
            continue
        names = table["term_text"].tobytes().decode().split("\n")
        place = np.array([index.setdefault(name, len(index)) for name in names], np.int32)
        low.append(place[table["term_low"]])
        up.append(place[table["term_up"]])
    return tuple(index), low, up


def _stored(tables: list[dict], key: str, unknown, dtype) -> list[np.ndarray]:
    """A column of every table; filled with ``unknown`` where a table does not store it."""
    return [
        table[key] if key in table else np.full(len(table["wave"]), unknown, dtype)
        for table in tables
    ]


def _spin(doubled: np.ndarray) -> np.ndarray:
    return np.where(doubled < 0, np.float32(np.nan), doubled * np.float32(0.5))


def _joined(tables: list[dict], order: np.ndarray) -> dict[str, np.ndarray]:
    """Columns that need no recoding, joined and sorted."""

    def column(key, unknown, stored, dtype):
        parts = _stored(tables, key, unknown, stored)
        return np.concatenate(parts)[order].astype(dtype, copy=False)

    joined = {
        key: column(key, 0.0 if key == "spread" else np.nan, np.float32, np.float64)
        for key in _FLOATS
    }
    joined["j_low"] = _spin(column("j_low2", -1, np.int8, np.int8))
    joined["j_up"] = _spin(column("j_up2", -1, np.int8, np.int8))
    joined["origin"] = column("origin", 0, np.int8, np.int8)
    for key in ("grade", "flags", "gamma_rad", "gamma_waals"):
        unknown, dtype = OPTIONAL_COLUMNS[key]
        joined[key] = column(key, unknown, dtype, dtype)
    joined["wave_alt"] = joined["wave"] + column("alt_shift", np.nan, np.float16, np.float64)
    return joined


def _merged_sources(tables: list[dict]) -> tuple[tuple[str, ...], list, list]:
    index: dict[str, int] = {}
    preferred, second = [], []
    for table in tables:
        names = table["source_keys"]
        place = np.array([index.setdefault(str(n), len(index)) for n in names], np.int32)
        preferred.append(place[table["source"]])
        codes = table.get("source_alt", np.full(len(table["wave"]), -1, np.int8))
        second.append(np.where(codes >= 0, place[codes], -1).astype(np.int32))
    return tuple(index), preferred, second


@lru_cache(maxsize=8)
def _load(which: str | None) -> LineCatalogue:
    tables = [_read(name) for name in _names(which)]
    species_names, species = _merged_names(tables, "species", "species_names")
    source_keys, source, source_alt = _merged_sources(tables)
    term_names, term_low, term_up = _merged_terms(tables)
    order = np.argsort(np.concatenate([table["wave"] for table in tables]), kind="stable")
    recoded = {
        "species": species, "source": source, "source_alt": source_alt, "term_low": term_low,
        "term_up": term_up,
    }
    catalogue = LineCatalogue(
        **_joined(tables, order),
        **{key: np.concatenate(parts)[order] for key, parts in recoded.items()},
        species_names=species_names,
        source_keys=source_keys,
        term_names=term_names,
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
