"""Session parts as plain data (dict, list, str, number, None) and back.

NaN becomes None and None in a float field becomes NaN; wavelengths stay vacuum Angstrom.
"""

from __future__ import annotations

import math
from dataclasses import MISSING, Field, fields, is_dataclass

import numpy as np

from ..errors import InputRefused
from ..measure.features import FeatureTable
from .model import Candidate, Claim

INTEGER_COLUMNS = ("number", "segment", "component", "sign")


def plain(value):
    """Plain data of a dataclass, array, mapping, sequence or number; NaN gives None."""
    if value is None or isinstance(value, (str, bool, int)):
        return value
    if isinstance(value, (float, np.floating)):
        number = float(value)
        return None if math.isnan(number) else number
    if isinstance(value, np.bool_):
        return bool(value)
    if isinstance(value, np.integer):
        return int(value)
    if is_dataclass(value):
        return {f.name: plain(getattr(value, f.name)) for f in fields(value)}
    if isinstance(value, dict):
        return {str(key): plain(item) for key, item in value.items()}
    if isinstance(value, np.ndarray):
        return plain(value.tolist())
    if isinstance(value, (list, tuple, set, frozenset)):
        items = sorted(value) if isinstance(value, (set, frozenset)) else value
        return [plain(item) for item in items]
    return str(value)


def real(value) -> float:
    """A float of plain data; None stands for NaN."""
    return math.nan if value is None else float(value)


def frozen(value):
    """Lists inside plain data as tuples, for the fields of frozen classes."""
    return tuple(frozen(item) for item in value) if isinstance(value, (list, tuple)) else value


def _absent(field: Field):
    if field.default is not MISSING:
        return field.default
    return math.nan if field.type == "float" else ""


def fill(cls, data: dict, what: str):
    """``cls`` from plain data; fields left out take their default (NaN, empty text).

    Raises InputRefused for an unknown field or a value of the wrong kind.
    """
    names = {f.name for f in fields(cls)}
    if not isinstance(data, dict) or not set(data) <= names:
        unknown = sorted(set(data) - names) if isinstance(data, dict) else [repr(data)]
        raise InputRefused(
            what, f"not understood: {', '.join(unknown)}", f"use {', '.join(sorted(names))}"
        )
    return cls(**{f.name: _field(f, data, what) for f in fields(cls)})


def _field(field: Field, data: dict, what: str):
    if field.name not in data:
        return _absent(field)
    value = data[field.name]
    try:
        if field.type == "float":
            return real(value)
    except (TypeError, ValueError):
        raise InputRefused(what, f"'{field.name}' is not a number: {value!r}") from None
    wanted = {"str": str, "bool": bool, "int": int}.get(field.type)
    if wanted and not isinstance(value, wanted):
        raise InputRefused(what, f"'{field.name}' must be {field.type}, not {value!r}")
    return frozen(value)


def candidate_from(data: dict | None, what: str = "line") -> Candidate | None:
    """A Candidate of plain data; None stays None."""
    return None if data is None else fill(Candidate, data, what)


def claim_from(data: dict, what: str = "claim") -> Claim:
    """A Claim of plain data, its candidates and chosen line included."""
    if not isinstance(data, dict):
        raise InputRefused(what, "must be an object with named fields")
    data = dict(data)
    candidates = tuple(candidate_from(item, what) for item in data.pop("candidates", ()))
    chosen = candidate_from(data.pop("chosen", None), what)
    blend = contributors_from(data.pop("blend", ()), what)
    bare = fill(Claim, data, what)
    kept = {f.name: getattr(bare, f.name) for f in fields(Claim)}
    return Claim(**{**kept, "candidates": candidates, "chosen": chosen, "blend": blend})


def contributors_from(items, what: str = "blend") -> tuple[tuple[str, float, float], ...]:
    """Blend contributors (species, vacuum wavelength, share) of plain triples."""
    try:
        return tuple((_text(s), real(wave), real(share)) for s, wave, share in items)
    except (TypeError, ValueError):
        raise InputRefused(
            what, "contributors are not understood", "give [species, vacuum wavelength, share]"
        ) from None


def _text(value) -> str:
    if not isinstance(value, str) or not value.strip():
        raise ValueError(value)
    return value


def row_to_plain(table: FeatureTable) -> dict:
    """The only row of a one-row table as a dict of its columns."""
    return {f.name: plain(getattr(table, f.name)[0]) for f in fields(FeatureTable)}


def row_from(data: dict, what: str = "row") -> FeatureTable:
    """A one-row table; ``wave`` (vacuum Angstrom) and ``sign`` are needed, others may lack."""
    names = {f.name for f in fields(FeatureTable)}
    if not isinstance(data, dict) or not {"wave", "sign"} <= set(data) <= names:
        raise InputRefused(
            what, "needs wave and sign and only feature columns", f"use {', '.join(sorted(names))}"
        )
    try:
        columns = {n: _cell(n, data.get(n)) for n in names - {"flags"}}
        return FeatureTable(**columns, flags=(str(data.get("flags") or ""),))
    except (TypeError, ValueError):
        raise InputRefused(what, "holds a value that is not a number") from None


def _cell(name: str, value) -> np.ndarray:
    if name in INTEGER_COLUMNS:
        return np.array([0 if value is None else int(value)], dtype=np.int64)
    return np.array([real(value)])
