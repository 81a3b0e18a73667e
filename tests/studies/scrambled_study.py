"""Scrambled spectra, in which no species is: how many the Roll call names. Slow: run by hand.

    python tests/studies/scrambled_study.py [SPECTRA]

Features of the Sun at R 47,000 put at random places of a random 300 A window, 0.45 per Angstrom,
each with the depth, width and errors it has. Every second table is told the star's velocity, the
others find one of their own; a temperature of 5,200 K is given. Tested: a species with a verdict
other than 'not testable'.
"""

from __future__ import annotations

import sys
from collections import Counter
from dataclasses import replace

import numpy as np
from simulated import rate
from truths import SPECTRA

from linewright.claims.identify import identify
from linewright.claims.options import ClaimOptions
from linewright.job.solve import solve
from linewright.lines.loading import load_catalogue
from linewright.spectra.reading import read_spectrum

NUMBER, WINDOW, DENSITY = 1000, 300.0, 0.45


def scrambled(features, coverage, rng):
    """(FeatureTable, coverage) of one window."""
    low, high = coverage[rng.choice(len(coverage), p=_lengths(coverage))]
    start = rng.uniform(low, max(high - WINDOW, low))
    end = min(start + WINDOW, high)
    places = np.sort(rng.uniform(start, end, int(DENSITY * (end - start))))
    rows = np.sort(rng.permutation(len(features))[: len(places)])
    table = replace(
        features.take(rows), wave=places, number=np.arange(1, len(rows) + 1),
        segment=np.zeros(len(rows), dtype=int),
    )
    return table, ((start, end),)


def _lengths(coverage):
    lengths = np.array([b - a for a, b in coverage])
    lengths = np.where(lengths > WINDOW, lengths, 0.0)
    return lengths / lengths.sum()


def main(number: int = NUMBER) -> None:
    session = solve(read_spectrum(SPECTRA / "sun_r47000.txt", medium="air"))
    catalogue, rows = load_catalogue(), {True: Counter(), False: Counter()}
    false = Counter()
    for k in range(number):
        given = k % 2 == 0
        rng = np.random.default_rng([9, k])
        table, coverage = scrambled(session.features, session.spectrum.coverage, rng)
        options = ClaimOptions(velocity=0.0 if given else None, temperature=5200.0)
        found = identify(table, coverage, catalogue, options)
        n = rows[given]
        for row in found.roll_call:
            n["species"] += 1
            n["tested"] += row.verdict != "not testable"
            n["present"] += row.verdict == "present"
            false[row.species] += row.verdict == "present"
        n["claims"] += len(found.claims)
        n["firm"] += sum(c.probability >= 0.95 for c in found.claims)
        n["declared"] += found.velocity.declared
    for given, n in rows.items():
        print(f"velocity {'given' if given else 'blind'}: 'present' {rate(n['present'], n['tested'])} "
              f"of those tested ({n['species']} called); firm claims {rate(n['firm'], n['claims'])}"
              + ("" if given else f"; velocities declared {n['declared']}"))
    both = rows[True] + rows[False]
    print(f"all: 'present' {rate(both['present'], both['tested'])}")
    print("falsely present:", {s: c for s, c in false.most_common() if c})


if __name__ == "__main__":
    main(*(int(word) for word in sys.argv[1:]))
