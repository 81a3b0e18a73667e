"""Lines seen more than once: core reversals, P Cygni profiles, double peaks.

Each part is a feature with a claim, a sign and a velocity of its own; what they make
together is said in a flag on each and in a sentence. Parts that were measured as one profile
(``measure/complexes.py``) are one line: what no other line explains goes with the rest.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from ..measure.drawn import Peaks, compound_groups, peaks_of
from ..spectra.medium import C_KM_S
from .model import standing_of

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
    claims = gathered(features, claims)
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


def gathered(features, claims):
    """The claims, parts of one measured profile on the line that explains the surest of them.

    A part that no line explains with LEAST probability gets that line at the surest part's
    probability, times that of no other line having made it.
    """
    out = list(claims)
    for rows in compound_groups(features):
        own = [i for i in rows if out[i].origin == "stellar" and out[i].probability >= LEAST]
        if not own:
            continue
        best = max(own, key=lambda i: (out[i].probability, -i))
        for i in rows:
            if out[i].probability < LEAST:
                out[i] = _joined(out[i], out[best], float(features.wave[i]))
    return tuple(out)


def _joined(claim, best, wave: float):
    """The claim of a part on the line of ``best``; wave: of the part, vacuum Angstrom."""
    line = best.candidates[0]
    p = best.probability * (1.0 - min(max(claim.probability, 0.0), 1.0))
    own = replace(line, velocity=C_KM_S * (wave / line.wave - 1.0), probability=p,
                  offset_sigma=float("nan"), depth_predicted=float("nan"), weights=())
    others = tuple(c for c in claim.candidates if (c.species, c.wave) != (line.species, line.wave))
    rival = next((c.species for c in others if c.species != line.species), "")
    return replace(claim, species=line.species, probability=p, p_line=p, p_unlisted=1.0 - p,
                   standing=standing_of(p), origin=line.origin, candidates=(own, *others),
                   blend=(), runner_up=rival)


def peaks_seen(features, claims) -> dict[int, Peaks]:
    """The two emission peaks of lines that show them, by each row of the line.

    Of a measured profile they are the highest points of its curve, else the two strongest
    features of a double peak themselves.
    """
    found: dict[int, Peaks] = {}
    for rows in compound_groups(features):
        if any(w in claims[i].flags.split() for i in rows for w in (DOUBLE_PEAK, CORE_REVERSAL)):
            peaks = peaks_of(features, rows)
            found |= {int(i): peaks for i in rows if peaks is not None}
    for rows in _repeated(features, claims).values():
        bright = [i for i in rows if DOUBLE_PEAK in claims[i].flags.split() and features.sign[i] < 0]
        if len(bright) > 1 and not any(i in found for i in bright):
            bright = sorted(bright, key=lambda i: -abs(features.depth[i]))[:2]
            pair = _two(features, *sorted(bright, key=lambda i: features.wave[i]))
            found |= dict.fromkeys(bright, pair)
    return found


def _two(features, blue: int, red: int) -> Peaks:
    f = features
    return Peaks(float(f.wave[blue]), float(f.wave_err[blue]), float(f.wave[red]),
                 float(f.wave_err[red]), -float(f.depth[blue]), float(f.depth_err[blue]),
                 -float(f.depth[red]), float(f.depth_err[red]))


def separation(peaks: Peaks) -> tuple[float, float]:
    """Distance of the two peaks and its error, km/s."""
    middle = 0.5 * (peaks.blue + peaks.red)
    return C_KM_S * peaks.apart / middle, C_KM_S * peaks.apart_err / middle


def peak_words(peaks: Peaks) -> str:
    """Distance and heights in one clause."""
    apart, error = separation(peaks)
    return (f"peaks {apart:.1f} ± {error:.1f} km/s apart, V/R {peaks.ratio:.2f} ± "
            f"{peaks.ratio_err:.2f}")


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
