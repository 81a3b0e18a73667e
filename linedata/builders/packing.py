"""Columns of a line table in their stored form: sorted, compact, nothing stored that is empty."""

from __future__ import annotations

import numpy as np

from merging import merge
from nonlte import mark_nonlte

# Grades of a log gf (or transition probability) by its stated error in dex; '' unknown.
GRADES = ("", "A", "B", "C", "D", "E")
GRADE_LIMITS = (0.05, 0.12, 0.25, 0.5)
FLAG_NONLTE, FLAG_NOMINAL, FLAG_COLLAPSED = 1, 2, 4
_FLOATS = {
    "e_low": "<f4", "loggf": "<f4", "loggf_err": "<f2", "emission": "<f2", "depth_ref": "<f4",
    "spread": "<f2", "alt_shift": "<f2", "gamma_rad": "<f2",
    "gamma_waals": "<f2",
}


def _used(codes, names: list[str]) -> tuple[np.ndarray, list[str]]:
    """Codes and names without the names no row uses; code -1 stays."""
    codes = np.asarray(codes).astype(int)
    present = np.unique(codes[codes >= 0])
    recoded = np.where(codes >= 0, np.searchsorted(present, codes), -1)
    return recoded, [names[code] for code in present]


def grade_codes(error, nominal=None) -> np.ndarray:
    """Index into GRADES of strength errors (dex); 0 where there is none, 5 where nominal."""
    error = np.asarray(error, float)
    code = 1 + np.searchsorted(GRADE_LIMITS, np.nan_to_num(error, nan=9.0) - 1e-6)
    code = np.where(np.isfinite(error), code, 0)
    return code if nominal is None else np.where(nominal, 5, code)


def _terms(lines: dict, order: np.ndarray) -> dict[str, np.ndarray]:
    """term_low, term_up as codes into the '\\n'-joined names (code 0 is the empty name)."""
    if "term_low" not in lines:
        return {}
    both = [np.asarray(lines[key], dtype=object)[order] for key in ("term_low", "term_up")]
    names = sorted({str(n) for column in both for n in column} | {""})
    index = {name: k for k, name in enumerate(names)}
    coded = [np.array([index[str(n)] for n in column], "<u2") for column in both]
    text = np.frombuffer("\n".join(names).encode(), np.uint8)
    return {"term_low": coded[0], "term_up": coded[1], "term_text": text}


def _doubled(j, order) -> np.ndarray:
    j = np.asarray(j, float)[order]
    return np.where(np.isfinite(j), np.round(2 * np.nan_to_num(j)), -1).astype(np.int8)


def _flags(lines: dict, names: list[str]) -> np.ndarray:
    flags = mark_nonlte(lines["wave"], lines["species"], names) * FLAG_NONLTE
    flags |= np.asarray(lines.get("nominal", np.zeros(len(flags))), bool) * FLAG_NOMINAL
    return flags | (np.asarray(lines.get("spread", np.zeros(len(flags)))) > 0) * FLAG_COLLAPSED


def pack_lines(lines: dict[str, np.ndarray], names: list[str], keys: list[str]) -> dict:
    """Stored columns of a line table, repeats merged, sorted by wavelength.

    ``lines`` holds wave, wave_err, species, origin, source and any of the columns of _FLOATS,
    j_low, j_up, term_low, term_up ('configuration|term'), source_alt (-1 none), nominal.
    Columns without a single value are left out.
    """
    lines = dict(lines) if "depth_ref" in lines else dict(merge(lines))
    lines["species"], names = _used(lines["species"], names)
    n = len(lines["wave"])
    blank = np.full(n, np.nan)
    alternative = np.asarray(lines.get("source_alt", np.full(n, -1))).astype(int)
    both, keys = _used(np.concatenate([lines["source"], alternative]), keys)
    order = np.lexsort((lines.get("e_low", blank), lines["species"], lines["wave"]))
    stored = {
        "wave": np.asarray(lines["wave"])[order].astype("<f8"),
        "wave_err": np.asarray(lines["wave_err"])[order].astype("<f4"),
        "species": np.asarray(lines["species"])[order].astype("<i2"),
        "origin": np.asarray(lines["origin"])[order].astype("u1"),
        "source": both[:n][order].astype("<i2"),
        "species_names": np.array(names, dtype="<U16"),
        "source_keys": np.array(keys, dtype="<U48"),
        **_terms(lines, order),
    }
    for key, dtype in _FLOATS.items():
        column = np.asarray(lines.get(key, blank), float)[order].astype(dtype)
        if np.isfinite(column).any() and np.any(column != 0):
            stored[key] = column
    for key in ("j_low", "j_up"):
        if key in lines and np.isfinite(np.asarray(lines[key], float)).any():
            stored[f"{key}2"] = _doubled(lines[key], order)
    if (alternative >= 0).any():
        stored["source_alt"] = both[n:][order].astype("i1")
    grade = grade_codes(lines.get("loggf_err", blank), lines.get("nominal"))[order]
    if grade.any():
        stored["grade"] = grade.astype("u1")
    flags = _flags(lines, names)[order]
    if flags.any():
        stored["flags"] = flags.astype("u1")
    return stored
