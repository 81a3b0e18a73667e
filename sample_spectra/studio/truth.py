"""Truth tables: what was simulated, written as ECSV by our own few lines.

Written by hand so that the bytes do not depend on the version of any writer.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np

# name, unit, format, description
STELLAR = (
    ("wave", "Angstrom", "%.4f", "rest wavelength as simulated, in the spectrum's medium"),
    ("species", "", "%s", "what made the line; 'unlisted' where no catalogue line stands behind"),
    ("origin", "", "%s", "stellar, telluric, interstellar, sky, nebular or artefact"),
    ("component", "", "%d", "star or cloud, from 1"),
    ("velocity", "km / s", "%.2f", "velocity in the spectrum's frame"),
    ("depth", "", "%.4f", "central depth this line alone would show, noise apart"),
    ("status", "", "%s", "listed, unlisted (unknown to the catalogue), absent (catalogue only)"),
    ("listed_wave", "Angstrom", "%.4f", "the catalogue's wavelength, same medium; 0 without"),
    ("log_tau", "", "%.3f", "log10 of the central optical depth before saturation"),
    ("width", "", "%.3f", "Doppler b in km/s; for H I the Stark wing in Angstrom"),
)
EMISSION = (
    *STELLAR[:5],
    ("flux", "", "%.5f", "line flux, H beta = 100 before extinction (0: absent)"),
    *STELLAR[6:8],
)


def empty(count: int, columns) -> dict[str, np.ndarray]:
    """Columns of ``count`` rows to be filled in."""
    kinds = {"%s": "U24", "%d": int}
    return {name: np.zeros(count, kinds.get(form, float)) for name, _, form, _ in columns}


def joined(tables, columns) -> dict[str, np.ndarray]:
    """Tables one after the other, sorted by wavelength, rounded as they will be written."""
    whole = {name: np.concatenate([t[name] for t in tables]) for name, *_ in columns}
    order = np.lexsort((whole["velocity"], whole["wave"]))
    return rounded({name: values[order] for name, values in whole.items()}, columns)


def rounded(table, columns) -> dict[str, np.ndarray]:
    """The numbers a reader of the written table will see."""
    return {
        name: np.array([float(form % v) for v in table[name]]) if form.endswith("f")
        else table[name]
        for name, _, form, _ in columns
    }


def _cell(form: str, value) -> str:
    text = form % value
    return f'"{text}"' if " " in text else text


def ecsv_text(table, columns, meta: dict[str, str]) -> str:
    """The table as ECSV 1.0 text."""
    head = ["%ECSV 1.0", "---", "delimiter: ' '", "datatype:"]
    for name, unit, form, words in columns:
        kind = {"%s": "string", "%d": "int64"}.get(form, "float64")
        shown = f", unit: {unit}" if unit else ""
        head.append(f'- {{name: {name}{shown}, datatype: {kind}, description: "{words}"}}')
    head.append("meta: !!omap")
    head += [f"- {{{key}: '{value}'}}" for key, value in meta.items()]
    lines = [f"# {line}" for line in head] + [" ".join(c[0] for c in columns)]
    formats = [c[2] for c in columns]
    rows = zip(*(table[c[0]] for c in columns), strict=True)
    lines += [" ".join(map(_cell, formats, row)) for row in rows]
    return "\n".join(lines) + "\n"


def read_truth(path: Path) -> tuple[dict[str, np.ndarray], dict[str, str]]:
    """(columns, metadata) of a kept truth table."""
    from astropy.table import Table

    table = Table.read(path, format="ascii.ecsv")
    return {n: np.asarray(table[n]) for n in table.colnames}, dict(table.meta)
