"""Edits that put a person's fit, or a person's continuum, in the place of the machine's.

A fit is measured on the spectrum (``job.hand_fit``, ``job.hand_anchors``) and arrives here as
plain data, so that a history can be applied again without the spectrum. Wavelengths are
vacuum Angstrom. Every refusal is an InputRefused and leaves the session as it was.
"""

from __future__ import annotations

import math
from dataclasses import fields as fields_of
from dataclasses import replace

import numpy as np

from ..errors import InputRefused
from ..measure.features import FeatureTable
from .edits import noted, row_of
from .feature_edits import joined, next_number, ordered
from .model import Claim, ContinuumNodes, HandFit, Session
from .plain import row_from, row_to_plain

PROFILES = ("gaussian", "voigt", "rotational", "core-wings", "double-peaked", "p-cygni")


def fit_features(session: Session, features, fit: dict) -> Session:
    """The features ``features`` as fitted together by hand.

    fit: {"limits": [low, high], "profile": one of PROFILES, "params": [[...], ...],
    "rows": [{...}, ...]}, as ``job.hand_fit`` measures it. Rows that carry the number of one
    of ``features`` keep its claim; others are new features with numbers never used before;
    features without a row leave the session.
    """
    return _fitted(session, "fit_features", {"features": list(features)}, features, fit)


def split_feature(session: Session, feature: int, parts: int, fit: dict) -> Session:
    """One feature as ``parts`` components fitted together; the nearest keeps its number."""
    if len(fit.get("rows") or ()) != parts or parts < 2:
        raise InputRefused(f"feature {feature}", f"{parts} parts do not fit these rows",
                           "split into two or more, a row for each")
    detail = {"feature": feature, "parts": parts}
    return _fitted(session, "split_feature", detail, (feature,), fit)


def merge_features(session: Session, features, fit: dict) -> Session:
    """Several features as one; it keeps the number of the most significant of them."""
    if len(set(features)) < 2 or len(fit.get("rows") or ()) != 1:
        raise InputRefused("merge", "needs two or more features and the one row they become",
                           "name the features to merge")
    return _fitted(session, "merge_features", {"features": list(features)}, features, fit)


def set_anchors(session: Session, segment: int, anchors, level: dict) -> Session:
    """Continuum anchors of a segment, and what follows from them.

    anchors: (wave, value) each, none to give the continuum back to the machine; level:
    {"wave": [...], "value": [...], "rows": [{...}, ...], "fits": [...]}: the continuum they
    make, the features measured again under it, by their numbers, and the fits by hand.
    """
    wave, value = _points("anchors", anchors)
    run = _points("continuum", list(zip(level.get("wave", ()), level.get("value", ()))))
    if not 0 <= segment < session.spectrum.segments or len(run[0]) < 2:
        raise InputRefused("anchors", f"the spectrum has no continuum in segment {segment}",
                           "solve it first, or name another segment")
    detail = {"segment": segment, "anchors": [list(a) for a in zip(wave.tolist(), value.tolist())],
              "level": level}
    table = session.features
    for row in level.get("rows", ()):
        table = _replaced(table, row_of(session, int(row.get("number", 0))), row_from(row))
    table, claims = ordered(table, session.claims)
    return noted(session, "set_anchors", detail, features=table, claims=claims,
                 fits=_again(session, level.get("fits", ())),
                 continuum=_put(session.continuum, session, segment, ContinuumNodes(*run)),
                 anchors=_put(session.anchors, session, segment, ContinuumNodes(wave, value)))


def _fitted(session: Session, action: str, detail: dict, features, fit: dict) -> Session:
    numbers = [int(n) for n in features]
    rows = [row_of(session, number) for number in numbers]
    if not rows or len(set(numbers)) < len(numbers):
        raise InputRefused("fit", "the features are not all different", "name each of them once")
    if len(set(session.features.segment[rows].tolist())) > 1:
        raise InputRefused("fit", "the features lie in different segments", "fit each by itself")
    limits, profile = _checked(fit)
    fresh, claims = _rows(session, numbers, fit.get("rows") or ())
    away = np.isin(session.features.number, numbers)
    kept = tuple(c for c, gone in zip(session.claims, away.tolist()) if not gone)
    table = joined(session.features.take(~away), fresh)
    table, claims = ordered(table, (*kept, *claims))
    made = tuple(fresh.number.tolist())
    params = tuple(tuple(float(x) for x in p) for p in fit.get("params") or ())
    others = tuple(f for f in session.fits if not set(f.features) & set(numbers))
    gone = set(numbers) - set(made)
    detail = {**detail, "fit": {**fit, "rows": [row_to_plain(fresh.take([k]))
                                                for k in range(len(fresh))]}}
    return noted(session, action, detail, features=table, claims=claims,
                 fits=(*others, HandFit(made, limits, profile, params)),
                 orphans=tuple(o for o in session.orphans if o.feature not in gone))


def _checked(fit: dict) -> tuple[tuple[float, float], str]:
    profile = fit.get("profile", "gaussian")
    if profile not in PROFILES:
        raise InputRefused(f"profile '{profile}'", "is not known", f"choose {', '.join(PROFILES)}")
    return checked_limits(fit.get("limits")), profile


def checked_limits(limits) -> tuple[float, float]:
    """(low, high); InputRefused unless they are two numbers that ascend."""
    try:
        low, high = (float(x) for x in limits)
    except (TypeError, ValueError):
        raise InputRefused("limits", "are not two wavelengths", "give [low, high]") from None
    if not (math.isfinite(low) and math.isfinite(high) and 0 < low < high):
        raise InputRefused("limits", f"{low:.3f} to {high:.3f} A do not ascend",
                           "the lower limit must lie below the upper one")
    return low, high


def _rows(session: Session, numbers, plain_rows) -> tuple[FeatureTable, tuple[Claim, ...]]:
    """The new rows with their numbers, in order of wavelength, and their claims."""
    if not plain_rows:
        raise InputRefused("fit", "holds no measured rows", "measure it on the spectrum")
    tables = sorted((row_from(r, "fit") for r in plain_rows), key=lambda t: float(t.wave[0]))
    segment = session.features.segment[row_of(session, numbers[0])]
    left, free, out, claims = set(numbers), next_number(session), [], []
    for table in tables:
        number = int(table.number[0])
        known = number in left
        claims.append(session.claims[row_of(session, number)] if known else Claim())
        left.discard(number)
        if not known:
            number, free = free, free + 1
        if not (np.isfinite(table.wave[0]) and abs(int(table.sign[0])) == 1):
            raise InputRefused("fit", "a row lacks a wavelength or a sign", "measure it again")
        out.append(replace(table, number=np.array([number]), segment=np.array([segment])))
    whole = out[0]
    for table in out[1:]:
        whole = joined(whole, table)
    return whole, tuple(claims)


def _again(session: Session, plain_fits) -> tuple[HandFit, ...]:
    """The fits by hand with the parameters measured again."""
    fresh = {}
    for fit in plain_fits:
        limits, profile = _checked(fit)
        numbers = tuple(int(row["number"]) for row in fit["rows"])
        fresh[frozenset(numbers)] = HandFit(
            numbers, limits, profile, tuple(tuple(float(x) for x in p) for p in fit["params"]))
    return tuple(fresh.get(frozenset(fit.features), fit) for fit in session.fits)


def _replaced(table: FeatureTable, at: int, row: FeatureTable) -> FeatureTable:
    columns = {}
    for name in (f.name for f in fields_of(FeatureTable) if f.name != "flags"):
        columns[name] = getattr(table, name).copy()
        if name not in ("number", "segment"):
            columns[name][at] = getattr(row, name)[0]
    flags = (*table.flags[:at], row.flags[0], *table.flags[at + 1:])
    return FeatureTable(**columns, flags=flags)


def _points(what: str, pairs) -> tuple[np.ndarray, np.ndarray]:
    try:
        points = np.array([(float(w), float(v)) for w, v in pairs]).reshape(-1, 2)
    except (TypeError, ValueError):
        raise InputRefused(what, "are not pairs of numbers", "give [wavelength, flux] each") from None
    wave, value = points[:, 0].copy(), points[:, 1].copy()
    if not (np.all(np.isfinite(points)) and np.all(value > 0) and np.all(np.diff(wave) > 0)):
        raise InputRefused(what, "must ascend in wavelength, with fluxes above zero",
                           "sort them and leave out what is not positive")
    return wave, value


def _put(known: tuple, session: Session, segment: int, nodes: ContinuumNodes) -> tuple:
    none = ContinuumNodes(np.zeros(0), np.zeros(0))
    every = list(known) or [none] * session.spectrum.segments
    every[segment] = nodes
    return tuple(every)
