"""Stored tables of lines back to plain columns.

A large table stores wavelengths as whole steps of 1e-5 A, log gf in thousandths, columns of few
values and the levels of its lines as codes into short lists; grades follow from the errors.
"""

from __future__ import annotations

import numpy as np

WAVE_STEP = 1e-5  # Angstrom
LOGGF_STEPS = 1000  # per dex
# Upper limits of the error (dex) of the grades A to D; beyond, and where nominal, E.
GRADE_LIMITS = (0.05, 0.12, 0.25, 0.5)
NOMINAL_FLAG = 2
NOMINAL_GRADE = 5
# Coded columns: name of the code, names of the lists it points into.
CODED = {
    "low_code": ("e_low", "j_low2", "term_low"),
    "up_code": ("j_up2", "term_up"),
    "loggf_err_code": ("loggf_err",),
    "origin_code": ("origin",),
}


def grade_codes(error, nominal) -> np.ndarray:
    """Grade (0 none, 1 A to 5 E) of strength errors in dex; 5 where ``nominal``."""
    error = np.asarray(error, float)
    code = 1 + np.searchsorted(GRADE_LIMITS, np.nan_to_num(error, nan=9.0) - 1e-6)
    return np.where(nominal, NOMINAL_GRADE, np.where(np.isfinite(error), code, 0)).astype(np.uint8)


def is_packed(stored: dict) -> bool:
    return "wave_steps" in stored


def expand(stored: dict[str, np.ndarray]) -> dict[str, np.ndarray]:
    """The columns of a packed table; a plain table is returned as it is."""
    if not is_packed(stored):
        return stored
    columns = dict(stored)
    columns["wave"] = columns.pop("wave_steps") * WAVE_STEP
    columns["loggf"] = np.divide(columns.pop("loggf_steps"), LOGGF_STEPS, dtype=np.float32)
    for code, names in CODED.items():
        place = columns.pop(code)
        for name in names:
            columns[name] = columns.pop(f"{name}_list")[place]
    for name in [key[: -len("_rows")] for key in stored if key.endswith("_rows")]:
        columns[name] = _filled(len(columns["wave"]), columns, name)
    # Grades of the few values errors take, then by code.
    graded = grade_codes(stored["loggf_err_list"], False)[stored["loggf_err_code"]]
    graded[(columns["flags"] & NOMINAL_FLAG) > 0] = NOMINAL_GRADE
    columns["grade"] = graded
    return columns


def _filled(n: int, columns: dict, name: str) -> np.ndarray:
    """A column stored as rows and values; the rest is the value of an unknown."""
    rows, values = columns.pop(f"{name}_rows"), columns.pop(f"{name}_values")
    unknown = columns.pop(f"{name}_unknown")
    filled = np.full(n, unknown, values.dtype)
    filled[rows] = values
    return filled
