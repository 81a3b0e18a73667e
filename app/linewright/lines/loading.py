"""The shipped catalogue: tables merged, sorted by vacuum wavelength, read once."""

from __future__ import annotations

import hashlib
import json
import zipfile
from collections.abc import Iterable
from functools import lru_cache
from pathlib import Path

import numpy as np

from ..errors import InputRefused
from ..resources import tables_dir
from .catalogue import OPTIONAL_COLUMNS, ORIGINS, LineCatalogue
from .packed import expand

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
# Tables whose rarer columns stand in a second file.
WITH_DETAILS = {"atomic_lines": "atomic_details"}
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


def _read_file(path) -> dict[str, np.ndarray]:
    try:
        with np.load(path) as stored:
            return {key: stored[key] for key in stored.files}
    except (OSError, ValueError, EOFError, KeyError, zipfile.BadZipFile):
        raise InputRefused(path, "the line table is missing or damaged", _CURE) from None


def read_table(folder: Path, name: str) -> dict[str, np.ndarray]:
    """The columns of one stored table, of both its files where it has two.

    Raises InputRefused where a file is missing or damaged.
    """
    columns = _read_file(folder / f"{name}.npz")
    if name in WITH_DETAILS:
        columns |= _read_file(folder / f"{WITH_DETAILS[name]}.npz")
    try:
        return expand(columns)
    except (KeyError, IndexError):
        raise InputRefused(folder / name, "the line table is damaged", _CURE) from None


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
            low.append(None)
            up.append(None)
            continue
        names = table["term_text"].tobytes().decode().split("\n")
        place = np.array([index.setdefault(name, len(index)) for name in names], np.int32)
        low.append(place[table["term_low"]])
        up.append(place[table["term_up"]])
    return tuple(index), low, up


def _spin(doubled: np.ndarray) -> np.ndarray:
    return np.where(doubled < 0, np.float32(np.nan), doubled * np.float32(0.5))


def _places(tables: list[dict]) -> list[np.ndarray]:
    """For each table, where its rows stand among all rows sorted by wavelength."""
    order = np.argsort(np.concatenate([table["wave"] for table in tables]), kind="stable")
    place = np.empty(len(order), np.intp)
    place[order] = np.arange(len(order))
    return np.split(place, np.cumsum([len(table["wave"]) for table in tables])[:-1])


def _spread(parts: list, places: list[np.ndarray], unknown, dtype) -> np.ndarray:
    """Parts of a column at their places; ``unknown`` where a table (None) does not store it."""
    column = np.full(sum(map(len, places)), unknown, dtype)
    for part, place in zip(parts, places, strict=True):
        if part is not None:
            column[place] = part
    return column


def _joined(tables: list[dict], places: list[np.ndarray]) -> dict[str, np.ndarray]:
    """Columns that need no recoding, joined and sorted."""

    def column(key, unknown, dtype):
        return _spread([table.get(key) for table in tables], places, unknown, dtype)

    joined = {key: column(key, 0.0 if key == "spread" else np.nan, np.float64) for key in _FLOATS}
    joined["j_low"] = _spin(column("j_low2", -1, np.int8))
    joined["j_up"] = _spin(column("j_up2", -1, np.int8))
    joined["origin"] = column("origin", 0, np.int8)
    for key in ("grade", "flags", "gamma_rad", "gamma_waals", "gamma_stark"):
        joined[key] = column(key, *OPTIONAL_COLUMNS[key])
    joined["wave_alt"] = joined["wave"] + column("alt_shift", np.nan, np.float64)
    shift = column("loggf_alt_shift", np.nan, np.float32)
    joined["loggf_alt"] = joined["loggf"].astype(np.float32) + shift
    return joined


_SOURCES = ("source", "source_alt", "source_loggf_alt")


def _merged_sources(tables: list[dict]) -> tuple[tuple[str, ...], dict[str, list]]:
    """Keys over the tables and, for each column of sources, the recoded parts."""
    index: dict[str, int] = {}
    recoded: dict[str, list] = {name: [] for name in _SOURCES}
    for table in tables:
        names = table["source_keys"]
        # The last entry serves code -1, no source.
        place = np.array([index.setdefault(str(n), len(index)) for n in names] + [-1], np.int32)
        for name, parts in recoded.items():
            parts.append(place[table[name]] if name in table else None)
    return tuple(index), recoded


@lru_cache(maxsize=8)
def _load(which: str | None) -> LineCatalogue:
    tables = [read_table(tables_dir(), name) for name in _names(which)]
    species_names, species = _merged_names(tables, "species", "species_names")
    source_keys, sources = _merged_sources(tables)
    term_names, term_low, term_up = _merged_terms(tables)
    places = _places(tables)
    recoded = {"species": species, "term_low": term_low, "term_up": term_up, **sources}
    unknown = {"source_alt": -1, "source_loggf_alt": -1}
    catalogue = LineCatalogue(
        **_joined(tables, places),
        **{
            key: _spread(parts, places, unknown.get(key, 0), np.int32)
            for key, parts in recoded.items()
        },
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
