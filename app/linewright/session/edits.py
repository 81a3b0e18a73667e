"""What a person may do to a session: plain functions Session -> Session.

Every edit appends a HistoryEntry whose detail is plain data, so that the same act can be
written in an edit script (``apply_edit``). The machine's probabilities and candidates are
never overwritten. Feature numbers are permanent; wavelengths are vacuum Angstrom. All
raise InputRefused for an unknown feature or an argument that makes no sense.
"""

from __future__ import annotations

import math
from dataclasses import replace

from ..errors import InputRefused
from ..lines.species import normal_name
from ..spectra.medium import C_KM_S
from .model import (
    STANDINGS,
    Candidate,
    Claim,
    HistoryEntry,
    Session,
    standing_of,
)
from .plain import candidate_from, contributors_from, plain

# What of a claim a person's act may change, kept in the history for `restore`; the two
# probabilities (which no act changes) tell whether that record is of the present claim or
# of an earlier solve, whose numbers may mean other features.
MACHINE_PROOF = ("probability", "p_line")
MACHINE_FIELDS = (
    "species",
    "standing",
    "origin",
    "blend",
    "runner_up",
    "flags",
    "chosen",
)


def row_of(session: Session, number: int) -> int:
    """Row of a feature by its permanent number; InputRefused when there is none."""
    try:
        return session.index_of(number)
    except KeyError:
        raise InputRefused(
            f"feature {number}",
            "no such feature in this session",
            "see the Ledger for the numbers",
        ) from None


def noted(session: Session, action: str, detail: dict, **changes) -> Session:
    """``session`` with ``changes`` and one more history entry by a person."""
    entry = HistoryEntry(action, plain(detail), "person")
    return replace(session, **changes, history=(*session.history, entry))


def _edit_claim(session: Session, action: str, detail: dict, **changes) -> Session:
    row = row_of(session, detail["feature"])
    old = session.claims[row]
    new = replace(old, **changes)
    if old.by == "machine" and new.by == "person":
        # kept beside the act, so that `restore` finds what the machine had said
        names = (*MACHINE_FIELDS, *MACHINE_PROOF)
        detail = {**detail, "machine": {name: getattr(old, name) for name in names}}
    claims = (*session.claims[:row], new, *session.claims[row + 1 :])
    return noted(session, action, detail, claims=claims)


def _claim(session: Session, number: int) -> Claim:
    return session.claims[row_of(session, number)]


def _name_line(claim: Claim, line: Candidate) -> dict:
    """Changes that make ``line`` the claimed one, said by a person."""
    best = claim.candidates[0] if claim.candidates else None
    others = (b for b in claim.blend if b[0] != line.species or abs(b[1] - line.wave) > 1e-6)
    demoted = best.species if best and claim.runner_up == line.species else claim.runner_up
    return {
        "species": line.species,
        "origin": line.origin or "unknown",
        "chosen": None if plain(line) == plain(best) else line,
        "blend": tuple(others),
        "runner_up": "" if demoted == line.species else demoted,
        "standing": "firm",
        "by": "person",
    }


def accept_candidate(session: Session, number: int, rank: int) -> Session:
    """Claim the candidate of this rank (1 is the machine's best); standing becomes firm."""
    claim = _claim(session, number)
    if not 1 <= rank <= len(claim.candidates):
        raise InputRefused(
            f"feature {number}",
            f"no candidate of rank {rank}",
            f"it has {len(claim.candidates)} candidates, counted from 1",
        )
    changes = _name_line(claim, claim.candidates[rank - 1])
    return _edit_claim(session, "accept_candidate", {"feature": number, "rank": rank}, **changes)


def set_species(
    session: Session, number: int, species: str, line: Candidate | None = None
) -> Session:
    """Claim a species by name; its best candidate is taken when no line is given.

    Where the feature has no candidate of that species and no line is given, the claim
    names the species alone (its line is a Candidate of NaN numbers). Spellings such as
    'fe1' are understood; InputRefused for a name that is no species.
    """
    claim = _claim(session, number)
    species = species.strip()
    if not species:
        raise InputRefused(f"feature {number}", "no species given", "name it, such as Fe I")
    if all(species != c.species for c in (*claim.candidates, *([line] if line else ()))):
        species = normal_name(species)
    if line is not None and line.species != species:
        raise InputRefused(f"feature {number}", f"the line belongs to {line.species}")
    detail = {"feature": number, "species": species, "line": line}
    chosen = line or _best_of(claim, species) or _bare_line(species)
    return _edit_claim(session, "set_species", detail, **_name_line(claim, chosen))


def _best_of(claim: Claim, species: str) -> Candidate | None:
    return next((c for c in claim.candidates if c.species == species), None)


def _bare_line(species: str) -> Candidate:
    nan = math.nan
    return Candidate(species, "unknown", nan, nan, nan, nan, nan, nan, nan, nan, nan, "")


def mark_blend(session: Session, number: int, contributors) -> Session:
    """Say which other lines contribute: (species, vacuum wavelength, share) each.

    Shares lie between 0 and 1 (NaN when unknown); no contributors unmarks the blend.
    """
    claim = _claim(session, number)
    blend = contributors_from(contributors, f"feature {number}")
    if any(not (0.0 <= share <= 1.0 or math.isnan(share)) for _, _, share in blend):
        raise InputRefused(f"feature {number}", "a blend share is outside 0 to 1")
    detail = {"feature": number, "contributors": blend}
    flags = _with_word(claim.flags, "blend", bool(blend))
    return _edit_claim(session, "mark_blend", detail, blend=blend, flags=flags, by="person")


def _with_word(flags: str, word: str, present: bool) -> str:
    words = [w for w in flags.split() if w != word]
    return " ".join([*words, word] if present else words)


def set_aside(session: Session, number: int, reason: str) -> Session:
    """Not a spectral line: 'artefact', 'cosmic ray', 'gap edge' or words of one's own.

    The reason joins the claim's flags, its words hyphenated.
    """
    claim = _claim(session, number)
    word = "-".join(reason.lower().split())
    if not word:
        raise InputRefused(f"feature {number}", "no reason given", "say why, such as cosmic ray")
    return _edit_claim(
        session,
        "set_aside",
        {"feature": number, "reason": reason},
        standing="set aside",
        origin="artefact",
        flags=_with_word(claim.flags, word, True),
        by="person",
    )


def restore(session: Session, number: int) -> Session:
    """Back to the machine's claim; note and lock stay. Nothing happens where it stands."""
    claim = _claim(session, number)
    if claim.by == "machine":
        return session
    said = _machine_said(session, number, claim) or _machine_would_say(claim)
    return _edit_claim(session, "restore", {"feature": number}, by="machine", **said)


def _machine_said(session: Session, number: int, claim: Claim) -> dict | None:
    proof = {name: plain(getattr(claim, name)) for name in MACHINE_PROOF}
    for entry in reversed(session.history):
        said = entry.detail.get("machine")
        if entry.detail.get("feature") == number and said:
            if any(said[name] != value for name, value in proof.items()):
                return None
            changes = {name: said[name] for name in MACHINE_FIELDS}
            changes["chosen"] = candidate_from(said["chosen"])
            changes["blend"] = contributors_from(said["blend"])
            return changes
    return None


def _machine_would_say(claim: Claim) -> dict:
    best = claim.candidates[0] if claim.candidates else None
    return {
        "species": best.species if best else "",
        "origin": best.origin if best else "unknown",
        "standing": standing_of(claim.probability),
        "chosen": None,
    }


def set_standing(session: Session, number: int, standing: str) -> Session:
    """Set the standing by hand: one of STANDINGS."""
    if standing not in STANDINGS:
        raise InputRefused(
            f"feature {number}",
            f"no standing '{standing}'",
            f"use {', '.join(STANDINGS)}",
        )
    detail = {"feature": number, "standing": standing}
    return _edit_claim(session, "set_standing", detail, standing=standing, by="person")


def set_note(session: Session, number: int, note: str) -> Session:
    """Replace the note; who said the claim does not change."""
    detail = {"feature": number, "note": note}
    return _edit_claim(session, "set_note", detail, note=" ".join(note.split()))


def lock(session: Session, number: int, locked: bool = True) -> Session:
    """Keep (or release) this claim as it stands when the spectrum is solved again."""
    return _edit_claim(
        session,
        "lock",
        {"feature": number, "locked": bool(locked)},
        locked=bool(locked),
    )


def set_velocity(session: Session, km_s: float) -> Session:
    """Set the velocity by hand (km/s, receding positive); claims stay until solved again."""
    if not (math.isfinite(km_s) and abs(km_s) < C_KM_S):
        raise InputRefused("velocity", f"{km_s} km/s is no velocity", "give km/s below light's")
    velocity = replace(
        session.velocity,
        velocity=float(km_s),
        error=math.nan,
        declared=True,
        how="given",
    )
    return noted(session, "set_velocity", {"km_s": float(km_s)}, velocity=velocity)
