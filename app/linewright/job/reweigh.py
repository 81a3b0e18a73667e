"""A person's firm word is data: the rest is weighed again in its light."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from ..claims.identify import identify
from ..claims.options import ClaimOptions
from ..claims.problem import NOT_SAID, SET_ASIDE
from ..lines.loading import load_catalogue
from ..session.model import HistoryEntry, Session


@dataclass(frozen=True)
class Change:
    """One claim the machine changed: feature number, species and standing before and after."""

    feature: int
    before: tuple[str, str]
    after: tuple[str, str]


def reweigh(session: Session, catalogue=None, progress=None) -> tuple[Session, tuple[Change, ...]]:
    """The session with its machine claims weighed again, and what changed.

    Claims a person made or locked stay untouched, word for word; features they named or set
    aside inform the rest. Velocity and temperature are kept. Catalogue: the shipped one by
    default.
    """
    catalogue = load_catalogue() if catalogue is None else catalogue
    features, coverage = session.features, session.spectrum.coverage
    complete = len(coverage) > 0
    if not complete:
        coverage = ((float(features.wave.min()) - 0.5, float(features.wave.max()) + 0.5),)
    found = identify(
        features, coverage, catalogue, _options(session, complete), progress, _said(session, catalogue)
    )
    claims, changes = [], []
    for number, old, new in zip(features.number, session.claims, found.claims):
        if old.by == "person" or old.locked:
            claims.append(old)
            continue
        new = replace(new, note=old.note, flags=old.flags)
        claims.append(new)
        before, after = (old.species, old.standing), (new.species, new.standing)
        if before != after:
            changes.append(Change(int(number), before, after))
    entry = HistoryEntry("reweigh", {"changed": len(changes)}, "machine")
    weighed = replace(
        session,
        claims=tuple(claims),
        roll_call=found.roll_call,
        orphans=found.orphans,
        history=(*session.history, entry),
    )
    return weighed, tuple(changes)


def _options(session: Session, complete: bool) -> ClaimOptions:
    kept = session.options
    return ClaimOptions(
        velocity=session.velocity.velocity,
        velocity_range=tuple(kept.get("velocity_range", (-500.0, 500.0))),
        temperature=session.temperature_k,
        log_pe=session.log_pe,
        metallicity=kept.get("metallicity", 0.0),
        abundances=tuple(tuple(pair) for pair in kept.get("abundances", ())),
        species=tuple(kept.get("species", ())),
        frame=session.spectrum.frame,
        complete=complete,
    )


def _said(session: Session, catalogue):
    """Species name index per feature that a person holds firm; set aside ones are marked."""
    index = {name: i for i, name in enumerate(catalogue.species_names)}
    said = np.full(len(session.claims), NOT_SAID)
    for row, claim in enumerate(session.claims):
        if claim.standing == "set aside":
            said[row] = SET_ASIDE
        elif claim.by == "person" and claim.standing == "firm":
            said[row] = index.get(claim.species, NOT_SAID)
    return said
