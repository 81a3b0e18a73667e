"""A session from the parts of its file (already checked against the schema)."""

from __future__ import annotations

import itertools
import os
from dataclasses import fields
from pathlib import Path

import numpy as np

from ..measure.features import FeatureTable
from .encode import NESTED_CLAIM_FIELDS
from .model import (
    Candidate,
    Claim,
    ContinuumNodes,
    HandFit,
    HistoryEntry,
    Orphan,
    RollRow,
    Session,
    SpectrumReference,
    TemperatureReading,
    VelocityResult,
)
from .plain import INTEGER_COLUMNS, candidate_from, contributors_from, fill, frozen, real


def session_from(parts: dict, folder) -> Session:
    """The Session of a parsed file lying in ``folder``.

    Raises ValueError, in words, where parts that must agree do not.
    """
    features = _features(parts["features"])
    claims = _claims(parts, len(features))
    return Session(
        spectrum=_spectrum(parts["spectrum"], Path(folder)),
        features=features,
        claims=claims,
        velocity=_velocity(parts["velocity"]),
        options=parts["options"],
        components=tuple((o, real(v), real(e)) for o, v, e in parts["components"]),
        temperature_k=real(parts["temperature_k"]),
        log_pe=real(parts["log_pe"]),
        temperatures=tuple(
            fill(TemperatureReading, t, "temperatures") for t in parts["temperatures"]
        ),
        roll_call=tuple(fill(RollRow, r, "roll_call") for r in parts["roll_call"]),
        orphans=tuple(fill(Orphan, o, "orphans") for o in parts["orphans"]),
        continuum=tuple(_nodes(c) for c in parts["continuum"]),
        anchors=tuple(_nodes(a) for a in parts["anchors"]),
        fits=_fits(parts["fits"], features),
        measurement=parts["measurement"],
        catalogue_id=parts["catalogue_id"],
        version=parts["linewright_version"],
        seed=parts["seed"],
        warnings=tuple(parts["warnings"]),
        history=tuple(fill(HistoryEntry, h, "history") for h in parts["history"]),
    )


def _floats(values: list) -> np.ndarray:
    return np.array(values, dtype=object).astype(float) if values else np.zeros(0)


def _features(part: dict) -> FeatureTable:
    columns = {
        name: np.array(values, dtype=np.int64) if name in INTEGER_COLUMNS else _floats(values)
        for name, values in part.items()
        if name != "flags"
    }
    _same_length("features", {**columns, "flags": part["flags"]})
    if len(set(part["number"])) != len(part["number"]):
        raise ValueError("features: a number is used twice")
    return FeatureTable(**columns, flags=tuple(part["flags"]))


def _same_length(what: str, columns: dict, wanted: int | None = None) -> int:
    lengths = {len(values) for values in columns.values()}
    if len(lengths) != 1 or (wanted is not None and lengths != {wanted}):
        raise ValueError(f"{what}: columns differ in length")
    return lengths.pop()


def _claims(parts: dict, count: int) -> tuple[Claim, ...]:
    part = parts["claims"]
    _same_length("claims", part, count)
    names = [f.name for f in fields(Claim) if f.name not in NESTED_CLAIM_FIELDS]
    columns = [_typed(Claim, name, part[name]) for name in names]
    rows = zip(*columns, strict=True)
    candidates = _candidates(parts["candidates"], count)
    return tuple(
        Claim(
            **dict(zip(names, row, strict=True)),
            candidates=lines,
            chosen=candidate_from(chosen),
            blend=contributors_from(blend) if blend else (),
        )
        for row, lines, chosen, blend in zip(
            rows, candidates, part["chosen"], part["blend"], strict=True
        )
    )


def _typed(cls, name: str, values: list) -> list:
    kind = next(f.type for f in fields(cls) if f.name == name)
    if kind.startswith("tuple"):
        return [frozen(v) for v in values]
    return [real(v) for v in values] if kind == "float" else values


def _candidates(part: dict, count: int) -> list[tuple[Candidate, ...]]:
    part = {**part, "weights": part.get("weights") or [()] * sum(part["count"])}
    names = [f.name for f in fields(Candidate)]
    total = _same_length("candidates", {name: part[name] for name in names})
    counts = part["count"]
    if len(counts) != count or sum(counts) != total:
        raise ValueError("candidates: their counts do not fit the features")
    columns = [_typed(Candidate, name, part[name]) for name in names]
    every = [Candidate(*row) for row in zip(*columns, strict=True)]
    ends = np.cumsum([0, *counts]).tolist()
    return [tuple(every[a:b]) for a, b in itertools.pairwise(ends)]


def _velocity(part: dict) -> VelocityResult:
    values = dict(part)
    grid, score = _floats(values.pop("grid")), _floats(values.pop("score"))
    _same_length("velocity", {"grid": grid, "score": score})
    rivals = tuple((real(v), real(d)) for v, d in values.pop("rivals"))
    numbers = {name: real(values.pop(name)) for name in ("velocity", "error", "margin")}
    return VelocityResult(**values, **numbers, rivals=rivals, grid=grid, score=score)


def _fits(rows: list, features: FeatureTable) -> tuple[HandFit, ...]:
    fits = tuple(fill(HandFit, row, "fits") for row in rows)
    known = set(features.number.tolist())
    if any(not set(fit.features) <= known for fit in fits):
        raise ValueError("fits: a component is no feature of the session")
    return fits


def _nodes(part: dict) -> ContinuumNodes:
    wave, value = _floats(part["wave"]), _floats(part["value"])
    _same_length("continuum", {"wave": wave, "value": value})
    return ContinuumNodes(wave, value)


def _spectrum(part: dict, folder: Path) -> SpectrumReference:
    path = part["path"]
    if path:
        path = os.path.normpath(Path(os.path.abspath(folder)) / path)
    coverage = tuple(frozen(pair) for pair in part["coverage"])
    return SpectrumReference(**{**part, "path": path, "coverage": coverage})
