"""User catalogues: ECSV or CSV tables of lines, with or instead of the shipped one."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from ..errors import InputRefused
from ..spectra.medium import from_medium
from .catalogue import ORIGINS, LineCatalogue
from .species import parse_species

REQUIRED = ("species", "wave")
OPTIONAL = ("wave_err", "e_low", "loggf", "loggf_err", "emission", "spread", "j_low", "j_up")
DEFAULT_ERROR = 0.01  # Angstrom, where the table gives none
_CURE = "give a CSV or ECSV table with the columns species and wave (Angstrom)"


@dataclass(frozen=True)
class UserCatalogue:
    """A catalogue read from a file and the rows that could not be used.

    problems: one text per bad row, beginning with its number (1 is the first data row).
    """

    catalogue: LineCatalogue
    problems: tuple[str, ...]


def read_user_rows(
    path: str | Path, medium: str = "unknown", source: str = "user", origin: str = "stellar"
) -> UserCatalogue:
    """Usable lines of a CSV or ECSV file, and what is wrong with the other rows.

    medium: 'air' or 'vacuum' of the column ``wave``; 'unknown' asks the file's metadata
    entry ``medium``. Raises InputRefused where the medium stays unknown, a required column
    is missing or no row can be used.
    """
    table = _read_table(Path(path))
    medium = _medium(path, medium, table.meta)
    if origin not in ORIGINS:
        raise InputRefused(f"origin '{origin}'", "unknown", f"one of {', '.join(ORIGINS)}")
    good, species, problems = _check_rows(table)
    if not good:
        raise InputRefused(path, f"no usable row; {problems[0]}" if problems else "no rows", _CURE)
    columns = {name: _numbers(table, name)[good] for name in ("wave", *OPTIONAL)}
    return UserCatalogue(
        _assemble(columns, species, medium, (source, origin), Path(path)), tuple(problems)
    )


def read_user_catalogue(paths, medium: str = "unknown") -> LineCatalogue:
    """The lines of one or several user files as one catalogue.

    paths: a path or a sequence of paths; medium as in ``read_user_rows``. A file with bad
    rows is refused with their numbers (InputRefused), so that none is dropped silently.
    """
    paths = [paths] if isinstance(paths, (str, Path)) else list(paths)
    merged = None
    for path in paths:
        found = read_user_rows(path, medium, source=f"user:{Path(path).name}")
        if found.problems:
            shown = "; ".join(found.problems[:5])
            more = len(found.problems) - 5
            shown += f"; and {more} more" if more > 0 else ""
            raise InputRefused(path, shown, "correct or delete these rows")
        merged = found.catalogue if merged is None else merge_catalogues(merged, found.catalogue)
    if merged is None:
        raise InputRefused("catalogue", "no file named", _CURE)
    return merged


def merge_catalogues(first: LineCatalogue, second: LineCatalogue) -> LineCatalogue:
    """All rows of both, sorted by wavelength; names and sources joined."""
    names = {name: k for k, name in enumerate(first.species_names)}
    keys = {name: k for k, name in enumerate(first.source_keys)}
    terms = {name: k for k, name in enumerate(first.term_names)}
    species = np.array([names.setdefault(n, len(names)) for n in second.species_names], int)
    sources = np.array([keys.setdefault(n, len(keys)) for n in second.source_keys], int)
    places = np.array([terms.setdefault(n, len(terms)) for n in second.term_names], int)
    order = np.argsort(np.concatenate([first.wave, second.wave]), kind="stable")
    recoded = {
        "species": species, "source": sources, "source_alt": np.append(sources, -1),
        "term_low": places, "term_up": places,
    }
    columns = {}
    for name, values in vars(first).items():
        if isinstance(values, np.ndarray):
            other = getattr(second, name)
            other = recoded[name][other] if name in recoded else other
            columns[name] = np.concatenate([values, other])[order].astype(values.dtype)
    return LineCatalogue(
        **columns,
        species_names=tuple(names),
        source_keys=tuple(keys),
        term_names=tuple(terms),
        identity=f"{first.identity}+{second.identity}",
    )


def _read_table(path: Path):
    from astropy.table import Table

    if not path.is_file():
        raise InputRefused(path, "no such file", _CURE)
    format_name = "ascii.ecsv" if path.suffix.lower() == ".ecsv" else "ascii.csv"
    try:
        table = Table.read(path, format=format_name)
    except Exception as error:  # astropy raises many kinds for a malformed table
        reason = str(error).strip().splitlines()
        raise InputRefused(path, f"not a table: {reason[0] if reason else error!r}", _CURE) from None
    missing = [name for name in REQUIRED if name not in table.colnames]
    if missing:
        raise InputRefused(path, f"the column {missing[0]} is missing", _CURE)
    return table


def _medium(path, asked: str, meta) -> str:
    found = asked if asked != "unknown" else str(meta.get("medium", "unknown"))
    if found not in ("air", "vacuum"):
        raise InputRefused(path, "air or vacuum wavelengths?", "name the medium: air or vacuum")
    return found


def _numbers(table, name: str) -> np.ndarray:
    """A column as floats; NaN where missing, masked or no number."""
    if name not in table.colnames:
        return np.full(len(table), np.nan)
    cells = table[name].tolist()
    values = np.full(len(cells), np.nan)
    for k, cell in enumerate(cells):
        try:
            values[k] = np.nan if cell is None else float(cell)
        except (TypeError, ValueError):
            continue
    return values


def _given(table, name: str) -> np.ndarray:
    """Where a column holds anything at all."""
    if name not in table.colnames:
        return np.zeros(len(table), bool)
    return np.array([c is not None and str(c).strip() != "" for c in table[name].tolist()], bool)


def _check_rows(table) -> tuple[list[int], list[str], list[str]]:
    """Usable rows, their species, and what is wrong with the others."""
    wave = _numbers(table, "wave")
    bad_number = {
        name: _given(table, name) & ~np.isfinite(_numbers(table, name)) for name in OPTIONAL
    }
    good, species, problems = [], [], []
    for k, text in enumerate(table["species"].tolist()):
        try:
            name = str(parse_species("" if text is None else str(text)))
        except InputRefused as refusal:
            problems.append(f"row {k + 1}: {refusal}")
            continue
        wrong = [column for column, flags in bad_number.items() if flags[k]]
        if not (np.isfinite(wave[k]) and wave[k] > 0):
            problems.append(f"row {k + 1}: wave is not a positive number")
        elif wrong:
            problems.append(f"row {k + 1}: {wrong[0]} is not a number")
        else:
            good.append(k)
            species.append(name)
    return good, species, problems


def _assemble(columns, species: list[str], medium: str, labels, path: Path) -> LineCatalogue:
    source, origin = labels
    wave = from_medium(columns.pop("wave"), medium)
    order = np.argsort(wave, kind="stable")
    names = tuple(dict.fromkeys(species))
    error, spread = columns.pop("wave_err"), columns.pop("spread")
    n = len(wave)
    return LineCatalogue(
        wave=wave[order],
        wave_err=np.where(error > 0, error, DEFAULT_ERROR)[order],
        spread=np.where(spread > 0, spread, 0.0)[order],
        species=np.array([names.index(name) for name in species], np.int32)[order],
        origin=np.full(n, ORIGINS.index(origin), np.int8),
        source=np.zeros(n, np.int32),
        depth_ref=np.full(n, np.nan),
        **{name: values[order] for name, values in columns.items()},
        species_names=names,
        source_keys=(source,),
        identity=hashlib.sha256(path.read_bytes()).hexdigest()[:12],
    )
