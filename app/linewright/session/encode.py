"""A session as the parts of its file."""

from __future__ import annotations

import os
from dataclasses import fields
from pathlib import Path

from ..measure.features import FeatureTable
from .json_text import Columns, Rows, column, compact, document
from .model import Candidate, Claim, Session
from .plain import plain

FORMAT = "linewright-session"
VERSION = 2
WAVELENGTHS = "vacuum, Angstrom, in the frame of the spectrum"
NESTED_CLAIM_FIELDS = ("candidates", "chosen", "blend")


def session_bytes(session: Session, folder) -> bytes:
    """The bytes of the session's file in ``folder`` (the spectrum's path is relative to it).

    The same session gives the same bytes: sorted keys, exact floats, no times.
    """
    parts = {
        "format": FORMAT,
        "version": VERSION,
        "wavelengths": WAVELENGTHS,
        "linewright_version": session.version,
        "spectrum": _spectrum(session, Path(folder)),
        "features": _features(session.features),
        "claims": _claims(session.claims),
        "candidates": _candidates(session.claims),
        "velocity": Columns({k: _column_or_plain(v) for k, v in _fields(session.velocity)}),
        "continuum": Rows(plain(c) for c in session.continuum),
        "anchors": Rows(plain(a) for a in session.anchors),
        "fits": Rows(plain(fit) for fit in session.fits),
        "history": Rows(plain(h) for h in session.history),
        "roll_call": Rows(plain(r) for r in session.roll_call),
        "orphans": Rows(plain(o) for o in session.orphans),
        "temperatures": Rows(plain(t) for t in session.temperatures),
    }
    for name in _SIMPLE:
        parts[name] = plain(getattr(session, name))
    return document(parts).encode("utf-8")


_SIMPLE = (
    "options",
    "components",
    "temperature_k",
    "log_pe",
    "measurement",
    "catalogue_id",
    "seed",
    "warnings",
)


def _fields(item):
    return ((f.name, getattr(item, f.name)) for f in fields(item))


def _column_or_plain(value) -> str:
    """JSON text of a column or of a single value."""
    return column(value) if hasattr(value, "tolist") else compact(plain(value))


def relative_path(path: str, folder: Path) -> str:
    """``path`` as seen from ``folder``, with forward slashes; absolute on another drive."""
    if not path:
        return ""
    try:
        return Path(os.path.relpath(path, folder)).as_posix()
    except ValueError:
        return Path(path).as_posix()


def _spectrum(session: Session, folder: Path) -> dict:
    reference = plain(session.spectrum)
    return {**reference, "path": relative_path(session.spectrum.path, folder)}


def _features(table: FeatureTable) -> Columns:
    return Columns({name: column(values) for name, values in _fields(table)})


def _claims(claims: tuple[Claim, ...]) -> Columns:
    columns = {}
    for field in fields(Claim):
        if field.name not in NESTED_CLAIM_FIELDS:
            values = [getattr(claim, field.name) for claim in claims]
            columns[field.name] = column(
                list(map(float, values)) if field.type == "float" else values
            )
    columns["blend"] = column([plain(c.blend) for c in claims])
    columns["chosen"] = column([plain(c.chosen) for c in claims])
    return Columns(columns)


def _candidates(claims: tuple[Claim, ...]) -> Columns:
    every = [candidate for claim in claims for candidate in claim.candidates]
    columns = {"count": column([len(claim.candidates) for claim in claims])}
    for field in fields(Candidate):
        values = [getattr(candidate, field.name) for candidate in every]
        columns[field.name] = column(list(map(float, values)) if field.type == "float" else values)
    return Columns(columns)
