"""A person's firm word is data: the rest is weighed again in its light.

What the spectrum says of itself, before anyone spoke, is weighed once and kept for the next
word on the same session; it depends on the session alone, so the outcome is the same
whether it was kept or not.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from threading import Lock

import numpy as np

from ..claims.artefacts import with_spikes
from ..claims.band_claims import band_ranges
from ..claims.banded import weigh_banded
from ..claims.identify import Setting, Weighing, conclude, weigh, weigh_again
from ..claims.options import ClaimOptions
from ..claims.problem import NOT_SAID, SET_ASIDE
from ..claims.upper_limits import carried
from ..lines.loading import load_catalogue
from ..progress import Progress
from ..session.model import HistoryEntry, Session


MOVED = 0.01  # of a probability: less than this is not put down to what a person said


@dataclass(frozen=True)
class Change:
    """One claim the machine changed: feature number, species and standing before and after."""

    feature: int
    before: tuple[str, str]
    after: tuple[str, str]


def reweigh(session: Session, catalogue=None, progress=None) -> tuple[Session, tuple[Change, ...]]:
    """The session with its machine claims weighed again, and what changed.

    Claims a person made or locked stay untouched, word for word; features they named or set
    aside inform the rest. A claim changes only where the weighing with the person's words
    differs from the same weighing without them: the solve's own may have gone another way, and
    that is no news. Velocity and temperature are kept. Catalogue: the shipped one by default.
    """
    catalogue = load_catalogue() if catalogue is None else catalogue
    progress = progress or Progress()
    if len(session.features) == 0:
        return session, ()
    before, alone = _kept.weighing(session, catalogue, progress.part(0.0, 0.7))
    after = weigh_again(before, _said(session, catalogue), progress.part(0.7, 0.9))
    found = conclude(after, progress)
    claims, changes = _merged(session, found.claims, alone)
    entry = HistoryEntry("reweigh", {"changed": len(changes)}, "machine")
    weighed = replace(
        session,
        claims=claims,
        roll_call=carried(found.roll_call, session.roll_call),
        orphans=found.orphans,
        history=(*session.history, entry),
    )
    return weighed, changes


def _merged(session: Session, found, alone):
    """(claims, changes): new machine claims beside what a person made or locked.

    found, alone: claims with the person's words and without them.
    """
    claims, changes = [], []
    rows = zip(session.features.number, session.claims, found, alone, strict=True)
    for number, old, new, mute in rows:
        if old.by == "person" or old.locked or not _told(new, mute):
            claims.append(old)
            continue
        if (new.note, new.flags) != (old.note, old.flags):
            new = replace(new, note=old.note, flags=old.flags)
        claims.append(new)
        before, after = (old.species, old.standing), (new.species, new.standing)
        if before != after:
            changes.append(Change(int(number), before, after))
    return tuple(claims), tuple(changes)


def _told(new, mute) -> bool:
    """Whether the person's words made a difference to a claim."""
    same = (new.species, new.standing) == (mute.species, mute.standing)
    return not same or abs(new.probability - mute.probability) >= MOVED


class _Kept:
    """The last session's weighing before a person spoke, and the claims it makes."""

    def __init__(self):
        self._lock, self._key, self._weighing = Lock(), None, None

    def weighing(self, session: Session, catalogue, progress) -> tuple[Weighing, tuple]:
        coverage, complete = _coverage(session)
        bands = band_ranges(session.features, session.claims)
        key = (session.features, catalogue, coverage, _options(session, complete), bands)
        with self._lock:
            if self._key is not None and self._same(key):
                return self._weighing
        setting = Setting(session.features, catalogue, coverage, key[3])
        setting.said = with_spikes(session.features, None)
        weighing = weigh_banded(weigh(setting, progress), bands)
        nothing = np.full(len(session.features), NOT_SAID)
        kept = weighing, conclude(weigh_again(weighing, nothing)).claims
        with self._lock:
            self._key, self._weighing = key, kept
        return kept

    def _same(self, key) -> bool:
        """The same tables (not equal ones), ranges and options."""
        return all(a is b for a, b in zip(key[:2], self._key[:2])) and key[2:] == self._key[2:]


_kept = _Kept()


def _coverage(session: Session):
    """(searched ranges, whether every feature in them is listed)."""
    coverage = tuple(tuple(float(x) for x in pair) for pair in session.spectrum.coverage)
    if coverage:
        return coverage, True
    wave = session.features.wave
    return ((float(wave.min()) - 0.5, float(wave.max()) + 0.5),), False


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
