"""A simulated K dwarf at low resolution and broadened by rotation. Slow: run by hand.

    python tests/studies/kdwarf_study.py [R ...] [vsini=KM_S ...] [seed=N] [keep]

4,700 K, 4850-6700 A, S/N 200 a pixel; lines perturbed, 5 % missing from the engine's list. Each
degraded spectrum is scored against the claims of the full-resolution one (R 60,000), as the Sun
is in lowres_study.py, and against the simulation: the species with the largest share of the true
depths within the feature, or one of the claim's contributors.
"""

from __future__ import annotations

import sys

import numpy as np
from kept import keep, wanted
from lowres_study import report
from simulated import engine_list, observed, rate, scene, shares, star

from linewright.job.options import SolveOptions
from linewright.job.solve import solve
from linewright.spectra.medium import C_KM_S

TEMPERATURE, VELOCITY, SN, FULL_R = 4700.0, 12.0, 200.0, 60000.0
RANGE = (4850.0, 6700.0)
CASES = ("10000", "5000", "2000", "vsini=50", "vsini=100")


def simulated(seed: int, resolution: float = FULL_R, vsini: float = 2.0):
    one = star(TEMPERATURE, VELOCITY, vsini)
    return observed(scene("K dwarf", 3000 + seed, [one], [RANGE], resolution, SN))


def against_truth(seen, session, words: str) -> None:
    """Top-1, the same without iron, confident, agreement, against the simulated lines."""
    main, right, p = [], [], []
    f = session.features
    for i, claim in enumerate(session.claims):
        by = shares(seen, f.wave[i], f.fwhm[i])
        if not by or f.sign[i] < 0:
            continue
        main.append(max(by, key=by.get))
        right.append(claim.species == main[-1] or any(b[0] == main[-1] for b in claim.blend))
        p.append(claim.probability)
    main, right, sure = np.array(main), np.array(right), np.array(p) >= 0.95
    other = main != "Fe I"
    print(
        f"   {words} against the simulation: top-1 {rate(right.sum(), len(right))}, not iron "
        f"{rate(right[other].sum(), other.sum())}, confident {sure.mean():.3f}, agreement "
        f"{rate(right[sure].sum(), sure.sum())}",
        flush=True,
    )


def main(words) -> None:
    seed, stored, results = 0, wanted(words), {}
    for word in [w for w in words if w.startswith("seed=")]:
        seed = int(word.partition("=")[2])
    cases = [w for w in words if not w.startswith("seed=")] or CASES
    seen, listed = simulated(seed), engine_list(seed)
    full = solve(seen.spectrum, listed)
    print(f"K dwarf {seed} at R {FULL_R:.0f}: {len(full.claims)} features, velocity "
          f"{full.velocity.velocity:+.3f} ({VELOCITY:+.1f}), T {full.temperature_k:.0f}")
    against_truth(seen, full, f"R {FULL_R:.0f}")
    for word in cases:
        name, _, value = word.rpartition("=")
        number = float(value)
        made = {"vsini": number} if name == "vsini" else {"resolution": number}
        seen = simulated(seed, **made)
        session = solve(seen.spectrum, listed, SolveOptions(**made))
        half = number / C_KM_S if name == "vsini" else 0.5 / number
        results[word] = report(word if name else f"R {number:.0f}", full, session, half)
        against_truth(seen, session, word if name else f"R {number:.0f}")
    if stored:
        keep("resolution K dwarf", results)


if __name__ == "__main__":
    main(sys.argv[1:])
