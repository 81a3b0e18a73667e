"""A second, independent log gf of lines of the general list.

Coulomb approximation (Bates & Damgaard 1949) for atoms of one electron outside a core, where it
scatters by 0.25 dex or less about the list; it fails where the radial integral cancels or
configurations mix, so a value that departs by more than WORST is not entered. Ti II and Fe I (540
strong lines): transition probabilities of NIST ASD (copies of 2014 and 2013), recopied by hand into
``probabilities/`` from the plasma code Cloudy, data/stout (zlib licence): each row a lower level,
then upper levels and A (s-1), levels numbered by energy from 1. Those of Ti II are preferred to the
list, which has older values; for Fe I the list is preferred, newer for the lines that differ (10 %
by over 0.15 dex; most are the same measurements).
"""

from __future__ import annotations

from pathlib import Path

import numpy as np

from decays import A_FROM_GF
from level_pairs import permitted_lines
from level_physics import ionisation_energies
from symbols import ELEMENTS

COULOMB_IONS = {
    ("Li", 1), ("C", 1), ("Na", 1), ("Mg", 1), ("S", 1), ("K", 1), ("Cu", 1), ("Zn", 1), ("Rb", 1),
    ("Ag", 1), ("Ca", 2), ("Sc", 2), ("Sr", 2),
}
LEAST, WORST = -2.0, 0.5  # dex
FOLDER = Path(__file__).with_name("probabilities")
# File and kind: a preferred value takes the place of the list's.
PUBLISHED = {("Ti", 2): ("ti_2", "preferred"), ("Fe", 1): ("fe_1", "published")}
KEYS = {"coulomb": "BatesDamgaard1949", "published": "NIST_ASD", "preferred": "NIST_ASD"}


def coulomb_strengths(source: Path, ion: tuple[str, int]) -> dict[tuple[float, float], float]:
    """log gf by lower and upper energy (cm-1, rounded to 0.01)."""
    limit = ionisation_energies(source)[ELEMENTS.index(ion[0]), ion[1] - 1]
    return {
        (round(line["low"].energy, 2), round(line["up"].energy, 2)): line["loggf"]
        for line in permitted_lines(source, *ion, limit)
        if line["loggf"] > LEAST
    }


def published_probabilities(name: str) -> dict[tuple[int, int], float]:
    """A (s-1) by rows of the lower and the upper level."""
    found = {}
    for text in (FOLDER / f"{name}.txt").read_text().splitlines():
        low, _, ups = text.partition(" ")
        for entry in ups.split(","):
            up, value = entry.split()
            found[int(low) - 1, int(up) - 1] = float(value)
    return found


def second_strengths(source: Path, ion: tuple[str, int], levels, matches, loggf) -> tuple:
    """(log gf less that of the list, kind) of each line; NaN and '' without a second value.

    levels, matches: as of ritz.match_lines; kind: a key of KEYS.
    """
    shift = np.full(len(matches.low), np.nan)
    kind = np.full(len(matches.low), "", dtype=object)
    computed = coulomb_strengths(source, ion) if ion in COULOMB_IONS else {}
    name, rank = PUBLISHED.get(ion, ("", ""))
    published = published_probabilities(name) if name else {}
    for k in np.flatnonzero(matches.low >= 0):
        low, up = int(matches.low[k]), int(matches.up[k])
        pair = (round(levels.energy[low], 2), round(levels.energy[up], 2))
        if (low, up) in published:
            weight = 2 * levels.j[up] + 1
            gf = A_FROM_GF * weight * published[low, up] * matches.wave[k] ** 2
            shift[k], kind[k] = np.log10(gf) - loggf[k], rank
        elif abs(computed.get(pair, np.inf) - loggf[k]) < WORST:
            shift[k], kind[k] = computed[pair] - loggf[k], "coulomb"
    return shift, kind
