"""Lines seen more than once: core reversals, P Cygni profiles, double peaks.

Each part is a feature with a claim, a sign and a velocity of its own; what they make
together is said in a flag on each and in a sentence.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

LEAST = 0.5  # probability of claims that are looked at together
INSIDE = 0.5  # of the wider part's FWHM: how far off centre a reversal may stand
CORE_REVERSAL, P_CYGNI = "core-reversal", "p-cygni"
INVERSE, DOUBLE_PEAK = "inverse-p-cygni", "double-peak"
NAMES = {
    CORE_REVERSAL: "a core reversal",
    P_CYGNI: "a P Cygni profile",
    INVERSE: "an inverse P Cygni profile",
    DOUBLE_PEAK: "a double peak",
}


def shaped(features, claims):
    """The claims with the shape they are part of added to their flags.

    features: FeatureTable; claims: parallel to it. Only a star's own lines count: clouds and
    air repeat lines too, and their origin says so.
    """
    words: dict[int, list[str]] = {}
    for rows in _repeated(features, claims).values():
        for a, b in ((a, b) for i, a in enumerate(rows) for b in rows[i + 1 :]):
            shape = _shape(features, a, b)
            for row in (a, b) if shape else ():
                words.setdefault(row, []).append(shape)
    return tuple(
        replace(c, flags=" ".join(dict.fromkeys([*c.flags.split(), *words[i]])))
        if i in words
        else c
        for i, c in enumerate(claims)
    )


def _repeated(features, claims) -> dict:
    """Rows of claims on one line of the star in one segment, by line."""
    found: dict[tuple, list[int]] = {}
    for i, claim in enumerate(claims):
        if claim.origin == "stellar" and claim.probability >= LEAST:
            key = (claim.species, claim.candidates[0].wave, int(features.segment[i]))
            found.setdefault(key, []).append(i)
    return {key: rows for key, rows in found.items() if len(rows) > 1}


def _shape(features, a: int, b: int) -> str:
    """What two features of one line make; empty for two absorptions (two stars)."""
    if features.sign[a] > 0 and features.sign[b] > 0:
        return ""
    if features.sign[a] < 0 and features.sign[b] < 0:
        return DOUBLE_PEAK
    bright, dark = (a, b) if features.sign[a] < 0 else (b, a)
    apart = features.wave[bright] - features.wave[dark]
    wide = np.nanmax([features.fwhm[bright], features.fwhm[dark], 0.0])
    if abs(apart) <= INSIDE * wide:
        return CORE_REVERSAL
    return P_CYGNI if apart > 0 else INVERSE


def shape_warning(claims) -> tuple[str, ...]:
    """One sentence that names the shapes and the species that show them."""
    found: dict[str, set] = {}
    for claim in claims:
        for word in claim.flags.split():
            if word in NAMES:
                found.setdefault(word, set()).add(claim.species)
    said = [f"{NAMES[word]} in {', '.join(sorted(found[word]))}" for word in NAMES if word in found]
    return (f"lines of the star show {'; '.join(said)}",) if said else ()
