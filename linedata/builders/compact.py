"""A large table in few bytes a line, in two files; linewright.lines.packed is the way back."""

from __future__ import annotations

import numpy as np

from linewright.lines.packed import CODED, LOGGF_STEPS, WAVE_STEP

# Columns few lines have are stored as rows and values; the value of all others.
SPARSE = {"spread": 0.0, "gamma_waals": np.nan, "loggf_alt_shift": np.nan, "source_loggf_alt": -1}
# Columns of the second file.
DETAILS = (
    "alt_shift", "source_alt", "gamma_rad", "gamma_stark", "gamma_waals", "spread", "loggf_alt_shift",
    "source_loggf_alt", "up_code", "j_up2", "term_up",
)


def _smallest(codes: np.ndarray) -> np.ndarray:
    """Codes in the smallest unsigned type that holds them."""
    return codes.astype(np.min_scalar_type(int(codes.max())))


def _coded(stored: dict, names: tuple[str, ...]) -> tuple[np.ndarray, list[np.ndarray]]:
    """Codes of the combinations of values of some columns, and the lists they point into."""
    numbers = []
    for name in names:
        values, code = np.unique(stored[name], return_inverse=True)
        numbers.append((values, code))
    joined = np.zeros(len(stored["wave"]), np.int64)
    for values, code in numbers:
        joined = joined * len(values) + code
    _, first, place = np.unique(joined, return_index=True, return_inverse=True)
    return _smallest(place), [stored[name][first] for name in names]


def compacted(stored: dict[str, np.ndarray]) -> tuple[dict, dict]:
    """(lines, details): the columns of a packed table, split into two files."""
    packed = {key: values for key, values in stored.items() if key not in ("wave", "loggf", "grade")}
    packed["wave_steps"] = np.round(stored["wave"] / WAVE_STEP).astype("<u4")
    packed["loggf_steps"] = np.round(stored["loggf"] * LOGGF_STEPS).astype("<i2")
    packed["wave_err"] = stored["wave_err"].astype("<f2")
    for key in ("species", "source"):
        packed[key] = _smallest(stored[key])
    for code, names in CODED.items():
        packed[code], lists = _coded(stored, names)
        for name, values in zip(names, lists, strict=True):
            packed[f"{name}_list"] = values
            del packed[name]
    for name, unknown in SPARSE.items():
        _thin_out(packed, name, unknown)
    details = {key: packed.pop(key) for key in list(packed) if _is_detail(key)}
    return packed, details


def _is_detail(key: str) -> bool:
    return any(key == name or key.startswith(f"{name}_") for name in DETAILS)


def _thin_out(packed: dict, name: str, unknown) -> None:
    if name not in packed:
        return
    values = packed.pop(name)
    known = np.isfinite(values) & (values != unknown)
    packed[f"{name}_rows"] = np.flatnonzero(known).astype("<u4")
    packed[f"{name}_values"] = values[known]
    packed[f"{name}_unknown"] = np.array(unknown, values.dtype)
