"""User catalogues: tables of lines (ECSV, CSV, VOTable, fixed width), with ours or instead."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from ..errors import InputRefused
from ..spectra.medium import from_medium
from .catalogue import ORIGINS, LineCatalogue
from .species import parse_species
from .user_layout import (
    CURE,
    OPTIONAL,
    WAVENUMBERS,
    Cells,
    Layout,
    in_angstrom,
    in_ev,
    read_cells,
)

DEFAULT_ERROR = 0.01  # Angstrom, where the table gives none


@dataclass(frozen=True)
class UserCatalogue:
    """A catalogue read from a file and the rows that could not be used.

    problems: one text per bad row, beginning with its number (1 is the first data row).
    """

    catalogue: LineCatalogue
    problems: tuple[str, ...]


def questions(path: str | Path, layout: Layout = Layout()) -> tuple[str, ...]:
    """What the file does not say and should be asked: 'medium', 'unit of wave', 'citation'.

    Raises InputRefused as ``read_user_rows`` for a file that is no table of lines.
    """
    cells = read_cells(Path(path), layout)
    asked = [] if cells.meta.get("medium") in ("air", "vacuum") else ["medium"]
    if not (layout.units.get("wave") or cells.units.get("wave")):
        asked.append("unit of wave")
    if not (layout.citation or cells.meta.get("citation")):
        asked.append("citation")
    return tuple(asked)


def read_user_rows(
    path: str | Path,
    medium: str = "unknown",
    source: str = "user",
    origin: str = "stellar",
    layout: Layout = Layout(),
) -> UserCatalogue:
    """Usable lines of a CSV, ECSV, VOTable or fixed-width file, and what is wrong with the rest.

    medium: 'air' or 'vacuum' of the column ``wave``; 'unknown' asks the file's metadata
    entry ``medium``. layout: columns, units and citation the file does not give itself (units
    default to Angstrom and eV; a citation becomes the lines' source instead of ``source``).
    Raises InputRefused where the medium stays unknown, a required column is missing or no row
    can be used.
    """
    path = Path(path)
    cells = read_cells(path, layout)
    medium = _medium(path, medium, cells.meta)
    if origin not in ORIGINS:
        raise InputRefused(f"origin '{origin}'", "unknown", f"one of {', '.join(ORIGINS)}")
    good, species, problems = _check_rows(cells)
    if not good:
        raise InputRefused(path, f"no usable row; {problems[0]}" if problems else "no rows", CURE)
    columns = {name: cells.numeric(name)[good] for name in ("wave", *OPTIONAL)}
    units = cells.units | layout.units
    columns["wave_err"] = _errors(columns["wave"], columns["wave_err"], units)
    columns["wave"] = in_angstrom(columns["wave"], units.get("wave", ""))
    columns["e_low"] = in_ev(columns["e_low"], units.get("e_low", ""))
    key = layout.citation or cells.meta.get("citation", "") or source
    return UserCatalogue(_assemble(columns, species, medium, (key, origin), path), tuple(problems))


def _errors(wave: np.ndarray, error: np.ndarray, units: dict[str, str]) -> np.ndarray:
    """Wavelength errors in Angstrom, given in the unit of the wavelengths or their own."""
    unit = units.get("wave_err") or units.get("wave", "")
    if unit.strip().lower() in WAVENUMBERS:
        return error / wave * (1e8 / wave)
    return in_angstrom(error, unit)


def read_user_catalogue(
    paths, medium: str = "unknown", layout: Layout = Layout()
) -> LineCatalogue:
    """The lines of one or several user files as one catalogue.

    paths: a path or a sequence of paths; medium, layout as in ``read_user_rows``. A file with bad
    rows is refused with their numbers (InputRefused), so that none is dropped silently.
    """
    paths = [paths] if isinstance(paths, (str, Path)) else list(paths)
    merged = None
    for path in paths:
        found = read_user_rows(path, medium, f"user:{Path(path).name}", layout=layout)
        if found.problems:
            shown = "; ".join(found.problems[:5])
            more = len(found.problems) - 5
            shown += f"; and {more} more" if more > 0 else ""
            raise InputRefused(path, shown, "correct or delete these rows")
        merged = found.catalogue if merged is None else merge_catalogues(merged, found.catalogue)
    if merged is None:
        raise InputRefused("catalogue", "no file named", CURE)
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
        "source_loggf_alt": np.append(sources, -1), "term_low": places, "term_up": places,
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


def _medium(path, asked: str, meta) -> str:
    found = asked if asked != "unknown" else str(meta.get("medium", "unknown"))
    if found not in ("air", "vacuum"):
        raise InputRefused(path, "air or vacuum wavelengths?", "name the medium: air or vacuum")
    return found


def _check_rows(cells: Cells) -> tuple[list[int], list[str], list[str]]:
    """Usable rows, their species, and what is wrong with the others."""
    wave = cells.numeric("wave")
    bad_number = {
        name: cells.given(name) & ~np.isfinite(cells.numeric(name)) for name in OPTIONAL
    }
    good, species, problems = [], [], []
    for k, text in enumerate(cells.columns["species"]):
        number = cells.numbers[k]
        try:
            name = str(parse_species("" if text is None else str(text)))
        except InputRefused as refusal:
            problems.append(f"row {number}: {refusal}")
            continue
        wrong = [column for column, flags in bad_number.items() if flags[k]]
        if not (np.isfinite(wave[k]) and wave[k] > 0):
            problems.append(f"row {number}: wave is not a positive number")
        elif wrong:
            problems.append(f"row {number}: {wrong[0]} is not a number")
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
