"""Simulated double-lined spectra: both velocities, and whose line is whose. Slow: run by hand.

    python tests/studies/doubles_study.py [SEEDS] [RATIO:SEPARATION ...]

Two solar-type stars (6,000 and 5,500 K), R 40,000, S/N 100, 5000-5500 A; seeds 7000 on; flux ratio
0.5 and 60 km/s apart unless other pairs are given. Lines are perturbed and 5 % are missing from
the engine's list. A feature belongs to the star with the larger share of its true depths; strict:
claimed at that star's velocity; tolerant: or at the other's, which has a fifth of it or more.
"""

from __future__ import annotations

import sys

import numpy as np
from simulated import engine_list, named_right, observed, rate, scene, shares, star

from linewright.job.solve import solve

SEEDS = 10
PAIRS = ("0.5:60",)
WINDOW, RESOLUTION, SN = (5000.0, 5500.0), 40000.0, 100.0


def case(ratio: float, apart: float, seed: int):
    """(Observed, Session, the two true velocities) of one pair; ratio: faint over bright."""
    number = 7000 + seed
    first = float(np.random.default_rng(number).uniform(-80, 80))
    stars = [
        star(6000.0, first, 5.0, 1 / (1 + ratio)),
        star(5500.0, first + apart, 4.0, ratio / (1 + ratio)),
    ]
    seen = observed(scene(f"pair {number}", number, stars, [WINDOW], RESOLUTION, SN))
    return seen, solve(seen.spectrum, engine_list(number)), (first, first + apart)


def sharing(seen, session, velocities):
    """Counts: features of a star that are claimed (P >= 0.5), strictly of the right star,
    tolerantly, named right; all features of a star."""
    n, f = np.zeros(5, int), session.features
    for i, claim in enumerate(session.claims):
        by = shares(seen, f.wave[i], f.fwhm[i], by="component")
        n[4] += bool(by)
        if not by or claim.probability < 0.5 or claim.line is None:
            continue
        here = int(np.argmin([abs(claim.line.velocity - v) for v in velocities])) + 1
        main = int(max(by, key=by.get))
        tolerant = by.get(str(here), 0.0) >= 0.2
        species = shares(seen, f.wave[i], f.fwhm[i])
        n[:4] += (1, here == main, tolerant, named_right(claim, species))
    return n


def run(ratio: float, apart: float, seeds: int) -> None:
    total, both, errors = np.zeros(5, int), 0, []
    for seed in range(seeds):
        seen, session, truth = case(ratio, apart, seed)
        stars = [v for origin, v, _ in session.components if origin == "stellar"]
        if len(stars) == 2:
            error = np.array(sorted(stars)) - np.array(sorted(truth))
            errors.append(np.max(np.abs(error)))
            both += errors[-1] < 1.0
            total += sharing(seen, session, truth)
        else:
            print(f"   seed {seed}: stars {stars}, truth {truth}")
    worst = max(errors, default=float("nan"))
    print(
        f"ratio {ratio:g}, {apart:g} km/s apart: both within 1 km/s {rate(both, seeds)}, worst "
        f"{worst:.3f} km/s; claimed {total[0]} of {total[4]}"
    )
    if total[0]:
        print(f"   shared out right, strict {rate(total[1], total[0])}, tolerant "
              f"{rate(total[2], total[0])}; named right {rate(total[3], total[0])}", flush=True)


if __name__ == "__main__":
    words = sys.argv[1:]
    seeds = int(words.pop(0)) if words and ":" not in words[0] else SEEDS
    for word in words or PAIRS:
        ratio, _, apart = word.partition(":")
        run(float(ratio), float(apart), seeds)
