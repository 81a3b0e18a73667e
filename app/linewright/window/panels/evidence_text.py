"""The sentences of the Evidence panel."""

from __future__ import annotations

import math

from ...claims.profiles import peak_words, peaks_seen
from ...job.view_reasons import Reasons
from ...job.view_width import widths_of
from ...session.model import Candidate, Claim, Session
from ...spectra.medium import to_medium
from . import words

EMPTY = (
    "Evidence explains one feature: what made it, and why.\n\n"
    "Click a feature in the spectrum or a row of the Ledger. A click on a bare trough or "
    "peak measures it."
)
NO_CANDIDATES = "No catalogue line comes near this feature at the present velocity."
WEIGHING = "Picked by hand: unclaimed until its candidates are weighed, in a second or two."
HAND_PICKED = "Picked by hand. Press F5 to solve and weigh its candidates."


def heading(session: Session, row: int) -> str:
    f = session.features
    wave = float(to_medium(f.wave[row], session.spectrum.medium))
    depth = words.number(f.depth[row], 2 if abs(f.depth[row]) < 10 else 0)
    parts = [f"{wave:.3f} Å", f"depth {depth}" if depth else "", _width(float(f.ew[row]))]
    return "   ".join(p for p in parts if p)


def width_words(session: Session, row: int) -> str:
    """The feature's width, what of it is the line's own, and the instrument's."""
    f, widths = session.features, widths_of(session)
    if not math.isfinite(f.fwhm[row]):
        return ""
    said = [f"FWHM {words.with_error(f.fwhm[row], f.fwhm_err[row], 4)} Å"]
    if math.isfinite(widths.intrinsic[row]):
        own = words.with_error(widths.intrinsic[row], widths.intrinsic_err[row], 4)
        said.append(f"without the instrument {own} Å")
    elif math.isfinite(widths.instrument[row]):
        said.append("not significantly broader than the instrument")
    if math.isfinite(widths.instrument[row]):
        said.append(f"instrument {widths.instrument[row]:.4f} Å, from: {widths.source}")
    return "\n".join(said)


def _width(ew: float) -> str:
    """In mÅ; in Å where a strong line over a weak continuum would need seven figures."""
    if not math.isfinite(ew):
        return ""
    if abs(ew) >= 1e5:
        return f"EW {words.number(ew / 1000, 0)} Å"
    return f"EW {words.number(ew, 0 if abs(ew) >= 30 else 1)} mÅ"


def verdict(claim: Claim) -> str:
    """What is claimed, how firmly and by whom."""
    said = f": {claim.species}" if claim.species else ""
    if claim.standing == "unclaimed" and said:
        said = f", best guess {claim.species}"
    parts = [f"{words.standing(claim.standing)}{said}", f"by {claim.by}"]
    if claim.blend:
        names = dict.fromkeys(f"{s} {share:.0%}" if math.isfinite(share) else s
                              for s, _w, share in claim.blend)
        parts.append("blended with " + ", ".join(names))
    if claim.origin not in ("stellar", "unknown"):
        parts.append(claim.origin)
    if claim.locked:
        parts.append("kept when solved again")
    return " · ".join(parts)


def flag_words(session: Session, row: int) -> str:
    """The flags of measurement and claim, what stands out before the others."""
    return " ".join(words.in_order(f"{session.claims[row].flags} {session.features.flags[row]}"))


def peaks_line(session: Session, row: int) -> str:
    """Distance and height ratio of the two peaks the row is part of; empty where there are none."""
    peaks = peaks_seen(session.features, session.claims).get(row)
    return "" if peaks is None else peak_words(peaks)


def remarkable(flags: str) -> str:
    """What stands out explained in short, else the first flag; the others named. The tip has
    it all."""
    named = flags.split()
    told = [w for w in named if w in words.STANDS_OUT] or named[:1]
    others = [w for w in named if w not in told]
    return "; ".join(map(_short, told)) + (f"; also {', '.join(others)}" if others else "")


def stands_out(flags: str) -> bool:
    return any(w in words.STANDS_OUT for w in flags.split())


def _short(flag: str) -> str:
    name, _, meaning = words.flag(flag).partition(": ")
    return f"{name}: {meaning.partition(':')[0]}"


def candidate_name(candidate: Candidate, medium: str) -> str:
    return f"{candidate.species} {float(to_medium(candidate.wave, medium)):.3f}"


def candidate_numbers(candidate: Candidate, depth: float) -> str:
    offset = words.number(candidate.offset_sigma, 1, True)
    seen = words.number(depth, 2)
    predicted = words.number(candidate.depth_predicted, 2)
    parts = [
        f"offset {offset} σ" if offset else "",
        f"depth {seen}, predicted {predicted}" if seen and predicted else "",
        f"share {candidate.share:.2f}" if 0 <= candidate.share < 0.7 else "",
    ]
    return " · ".join(p for p in parts if p)


def line_facts(candidate: Candidate) -> str:
    low, gf = words.number(candidate.e_low, 2), words.number(candidate.loggf, 2, True)
    parts = [f"E_low {low} eV" if low else "", f"log gf {gf}" if gf else "",
             candidate.source]
    return " · ".join(p for p in parts if p)


def why(reasons: Reasons) -> str:
    """One line a side; + speaks for the candidate, − against it."""
    sides = (("+", reasons.for_it), ("−", reasons.against))
    return "\n".join(f"{sign} {'; '.join(said)}" for sign, said in sides if said)
