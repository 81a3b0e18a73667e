"""Simulated telluric lines over stars, at three barycentric shifts. Slow: run by hand.

    python tests/studies/telluric_study.py [SEEDS]

A solar-type, a cool and a hot star in the windows of O2 and H2O, the air's lines at -28, 0 and
+20 km/s in the spectrum's barycentric frame, stars at random velocities. The air's wavelengths
and strengths are perturbed by their errors, its air mass and water column differ from the list's,
and 5 % of all lines are missing from the engine's list.

A feature belongs to the air where telluric lines are its main contributor (share of the true
depths above 0.5), else to the star. 'Blend-tolerant' counts an error only where the claimed
origin has less than a fifth of the feature.
"""

from __future__ import annotations

import sys

import numpy as np
from simulated import engine_list, observed, rate, scene, shares, star
from studio.scenes import Air

from linewright.job.solve import solve

# Vacuum Angstrom: H2O and Na D; O2 gamma; O2 B; H2O.
WINDOWS = ((5862.0, 6022.0), (6242.0, 6352.0), (6842.0, 6982.0), (7152.0, 7332.0))
SHIFTS = (-28.0, 0.0, 20.0)
STARS = {"solar": (5800.0, 4.0), "cool": (4200.0, 3.0), "hot": (20000.0, 40.0)}
SEEDS = 5
COUNTS = ("telluric", "told", "called stellar", "so, tolerant", "stellar", "called telluric",
          "so, tolerant", "so, confident", "so, confident, tolerant")


def case(kind: str, shift: float, seed: int):
    """(Observed, Session, true stellar velocity) of one simulation."""
    temperature, vsini = STARS[kind]
    number = 1000 * (1 + list(STARS).index(kind)) + 100 * SHIFTS.index(shift) + seed
    rng = np.random.default_rng(number)
    one = star(temperature, float(rng.uniform(-60, 60)), vsini)
    air = Air(shift, air_mass=float(rng.uniform(1.3, 2.2)), water=float(rng.choice([0.3, 1.8])))
    made = scene(f"{kind} {shift:+.0f}", number, [one], WINDOWS, 60000.0, 150.0, air)
    seen = observed(made)
    return seen, solve(seen.spectrum, engine_list(number)), one.velocity


def tally(seen, session):
    """COUNTS as an array; prints every feature of pure origin that is called wrongly."""
    n, f = np.zeros(len(COUNTS), int), session.features
    for i, claim in enumerate(session.claims):
        by = shares(seen, f.wave[i], f.fwhm[i], by="origin")
        if not by or f.sign[i] < 0:
            continue
        air, sure = by.get("telluric", 0.0), claim.probability >= 0.95
        if air > 0.5:
            wrong = sure and claim.origin == "stellar"
            n[:4] += (1, sure and claim.origin == "telluric", wrong, wrong and air > 0.8)
            pure = wrong and air > 0.8
        else:
            wrong = claim.probability >= 0.5 and claim.origin == "telluric"
            pure = wrong and air < 0.2
            n[4:] += (1, wrong, pure, wrong and sure, pure and sure)
        if pure:
            print(f"      {f.wave[i]:.3f} depth {f.depth[i]:.3f}, air's share {air:.2f}, called "
                  f"{claim.species} {claim.origin} P {claim.probability:.3f}")
    return n


def main(seeds: int = SEEDS) -> None:
    whole = np.zeros(len(COUNTS), int)
    for kind in STARS:
        for shift in SHIFTS:
            total = np.zeros(len(COUNTS), int)
            for seed in range(seeds):
                seen, session, velocity = case(kind, shift, seed)
                found = [(o, round(v, 2)) for o, v, _ in session.components]
                print(f"   {kind} seed {seed} star {velocity:+.1f}: found {found}, "
                      f"declared {session.velocity.declared}")
                total += tally(seen, session)
            report(f"{kind}, air at {shift:+.0f} km/s", total)
            whole += total
    report("all", whole)


def report(label, n):
    print(f"{label}: {n[0]} telluric features, {n[1] / n[0]:.3f} confidently told")
    print(f"   telluric confidently called stellar {rate(n[2], n[0])}; tolerant {rate(n[3], n[0])}")
    print(f"   stellar called telluric {rate(n[5], n[4])}; tolerant {rate(n[6], n[4])}")
    print(f"   confidently {rate(n[7], n[4])}; tolerant {rate(n[8], n[4])}", flush=True)


if __name__ == "__main__":
    main(*(int(word) for word in sys.argv[1:]))
