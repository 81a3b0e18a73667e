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
from ..claims.heard import Ground
from ..claims.identify import Setting, weigh
from ..claims.model import Claim, Orphan, RollRow
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


@dataclass(frozen=True, eq=False)
class Told:
    """What a person's words make of the rest: claims by row where they differ from those
    without the words; the Roll call, without what it carries over; the Orphans."""

    claims: tuple[tuple[int, Claim], ...]
    roll_call: tuple[RollRow, ...]
    orphans: tuple[Orphan, ...]


def reweigh(session: Session, catalogue=None, progress=None) -> tuple[Session, tuple[Change, ...]]:
    """The session with its machine claims weighed again, and what changed.

    Claims a person made or locked stay untouched, word for word; features they named or set
    aside inform the rest. A claim changes only where the weighing with the person's words
    differs from the same weighing without them: the solve's own may have gone another way, and
    that is no news. Velocity and temperature are kept. Catalogue: the shipped one by default.
    """
    if len(session.features) == 0:
        return session, ()
    return with_told(session, told(session, catalogue, progress))


def told(session: Session, catalogue=None, progress=None) -> Told:
    """What the words in a session's claims tell. Of the claims only a person's, locked ones and
    those on molecular bands count, of the rest features, velocity, temperature and options."""
    catalogue = load_catalogue() if catalogue is None else catalogue
    progress = progress or Progress()
    ground = _kept.ground(session, catalogue, progress.part(0.0, 0.9))
    progress.report("weighing your claims", 0.9)
    heard = ground.hearing(_said(session, catalogue))
    claims = tuple(
        (row, claim)
        for row, claim in heard.claims.items()
        if not _kept_as_is(session.claims[row]) and _differs(claim, ground.claims[row])
    )
    return Told(claims, heard.roll_call, heard.orphans)


def prepare(session: Session, catalogue=None, progress=None) -> None:
    """Weighs a session without words and keeps that for the next word on it."""
    catalogue = load_catalogue() if catalogue is None else catalogue
    if len(session.features):
        _kept.ground(session, catalogue, progress or Progress())


def with_told(session: Session, told: Told) -> tuple[Session, tuple[Change, ...]]:
    """The session with what its words tell, and what changed; other claims stay as they are."""
    claims, changes = list(session.claims), []
    for row, new in told.claims:
        old = claims[row]
        if _kept_as_is(old):
            continue
        new = replace(new, note=old.note, flags=old.flags)
        claims[row] = old if new == old else new
        before, after = (old.species, old.standing), (new.species, new.standing)
        if before != after:
            changes.append(Change(int(session.features.number[row]), before, after))
    entry = HistoryEntry("reweigh", {"changed": len(changes)}, "machine")
    weighed = replace(
        session,
        claims=tuple(claims),
        roll_call=carried(told.roll_call, session.roll_call),
        orphans=told.orphans,
        history=(*session.history, entry),
    )
    return weighed, tuple(changes)


def _kept_as_is(claim: Claim) -> bool:
    return claim.by == "person" or claim.locked


def _differs(new: Claim, mute: Claim) -> bool:
    """Whether the person's words made a difference to a claim."""
    same = (new.species, new.standing) == (mute.species, mute.standing)
    return not same or abs(new.probability - mute.probability) >= MOVED


class _Kept:
    """What the last session's spectrum says before a person speaks."""

    def __init__(self):
        self._lock, self._key, self._ground = Lock(), None, None

    def ground(self, session: Session, catalogue, progress) -> Ground:
        coverage, complete = _coverage(session)
        bands = band_ranges(session.features, session.claims)
        key = (session.features, catalogue, coverage, _options(session, complete), bands)
        with self._lock:
            if self._key is not None and self._same(key):
                return self._ground
        setting = Setting(session.features, catalogue, coverage, key[3])
        setting.said = with_spikes(session.features, None)
        ground = Ground(weigh_banded(weigh(setting, progress), bands))
        with self._lock:
            self._key, self._ground = key, ground
        return ground

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
