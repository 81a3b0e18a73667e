"""Columns of a line table in their stored form: sorted, compact, nothing stored that is empty."""

from __future__ import annotations

import numpy as np

from linewright.lines.packed import grade_codes
from merging import merge
from nonlte import mark_nonlte

FLAG_NONLTE, FLAG_NOMINAL, FLAG_COLLAPSED = 1, 2, 4
_FLOATS = {
    "e_low": "<f4", "loggf": "<f4", "loggf_err": "<f2", "emission": "<f2", "depth_ref": "<f4",
    "spread": "<f2", "alt_shift": "<f2", "gamma_rad": "<f2",
    "gamma_waals": "<f2", "gamma_stark": "<f2", "loggf_alt_shift": "<f2",
}


def _used(codes, names: list[str]) -> tuple[np.ndarray, list[str]]:
    """Codes and names without the names no row uses; code -1 stays."""
    codes = np.asarray(codes).astype(int)
    present = np.unique(codes[codes >= 0])
    recoded = np.where(codes >= 0, np.searchsorted(present, codes), -1)
    return recoded, [names[code] for code in present]


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
    j_low, j_up, term_low, term_up ('configuration|term'), source_alt and source_loggf_alt (-1
    none), nominal.
    Columns without a single value are left out.
    """
    lines = dict(lines) if "depth_ref" in lines else dict(merge(lines))
    lines["species"], names = _used(lines["species"], names)
    n = len(lines["wave"])
    blank = np.full(n, np.nan)
    alternative, strength = (
        np.asarray(lines.get(key, np.full(n, -1))).astype(int)
        for key in ("source_alt", "source_loggf_alt")
    )
    every, keys = _used(np.concatenate([lines["source"], alternative, strength]), keys)
    order = np.lexsort((lines.get("e_low", blank), lines["species"], lines["wave"]))
    stored = {
        "wave": np.asarray(lines["wave"])[order].astype("<f8"),
        "wave_err": np.asarray(lines["wave_err"])[order].astype("<f4"),
        "species": np.asarray(lines["species"])[order].astype("<i2"),
        "origin": np.asarray(lines["origin"])[order].astype("u1"),
        "source": every[:n][order].astype("<i2"),
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
        stored["source_alt"] = every[n : 2 * n][order].astype("i1")
    if (strength >= 0).any():
        stored["source_loggf_alt"] = every[2 * n :][order].astype("i1")
    nominal = np.asarray(lines.get("nominal", np.zeros(n)), bool)
    grade = grade_codes(lines.get("loggf_err", blank), nominal)[order]
    if grade.any():
        stored["grade"] = grade.astype("u1")
    flags = _flags(lines, names)[order]
    if flags.any():
        stored["flags"] = flags.astype("u1")
    return stored
