"""Is the medium decided rightly? Simulated feature lists with a tilted calibration.

Lists of the strongest predicted lines of a 5,000 K star (catalogue wavelengths moved by their
own error), 10 % invented features, position error 0.01 A, a velocity within +-100 km/s, a tilt
drawn from N(0, 0.3 km/s) over half the range, read as air or as vacuum at random. Prints, per
range and number of lines, how often the odds passed 0.95 and how often they were then right.

    python tests/studies/spectra_medium_study.py [trials]
"""

from __future__ import annotations

import sys

import numpy as np

from linewright.job.medium_odds import medium_odds, tilted
from linewright.job.options import SolveOptions
from linewright.lines.loading import load_catalogue
from linewright.lines.strengths import absorption_strength
from linewright.measure.features import FeatureTable
from linewright.spectra.medium import C_KM_S, vacuum_to_air

CASES = ((3800.0, 9000.0, 50), (4000.0, 6500.0, 200), (5000.0, 5500.0, 50), (5000.0, 5500.0, 100))
SIGMA = 0.01


def table(wave, depth) -> FeatureTable:
    """Absorption features at vacuum wavelengths, Angstrom, sorted."""
    order = np.argsort(wave)
    wave, depth = np.asarray(wave, float)[order], np.asarray(depth, float)[order]
    size = len(wave)
    fwhm = wave / 40000.0
    nothing = np.full(size, np.nan)
    return FeatureTable(
        np.arange(1, size + 1), np.zeros(size, int), np.zeros(size, int), np.ones(size, int),
        wave, np.full(size, SIGMA), 100 * depth, depth, 0.01 * depth, fwhm, 0.05 * fwhm,
        1064.0 * depth * fwhm, nothing, np.ones(size), ("",) * size)


def simulated(catalogue, case, rng, tilt: float, air: bool):
    """Features whose ``wave`` holds the file's own numbers in the medium asked for."""
    low, high, count = case
    near = catalogue.between(low, high)
    strength = np.nan_to_num(absorption_strength(near, 5000.0, 0.8), nan=-99.0)
    best = np.argsort(-strength)[: 2 * count]
    rows = rng.choice(best, count, replace=False)
    velocity = rng.uniform(-100.0, 100.0)
    real = near.wave[rows] + rng.normal(0, near.wave_err[rows])
    invented = rng.uniform(low, high, count // 10)
    wave = np.concatenate([real, invented]) * (1 + velocity / C_KM_S)
    wave += rng.normal(0, SIGMA, len(wave))
    depth = np.concatenate([10 ** np.clip(0.3 * (strength[rows] - strength[best[0]]), -1.5, -0.1),
                            rng.uniform(0.03, 0.5, len(invented))])
    seen = tilted(table(wave, depth), -tilt)
    if not air:
        return seen
    return table(vacuum_to_air(seen.wave), seen.depth)


def run(catalogue, case, trials: int, seed: int = 0):
    """(share decided, share of the decided that are right, mean odds of the truth)."""
    rng = np.random.default_rng(seed)
    decided, right, odds = 0, 0, []
    for _ in range(trials):
        air = bool(rng.integers(2))
        features = simulated(catalogue, case, rng, rng.normal(0, 0.3), air)
        found = medium_odds(features, catalogue, SolveOptions())
        odds.append(found.air if air else found.vacuum)
        if found.decided:
            decided += 1
            right += found.decided == ("air" if air else "vacuum")
    return decided / trials, right / max(decided, 1), float(np.mean(odds))


def main() -> None:
    trials = int(sys.argv[1]) if len(sys.argv) > 1 else 30
    catalogue = load_catalogue()
    print("range            lines  decided  right when decided  mean odds of the truth")
    for case in CASES:
        share, right, odds = run(catalogue, case, trials)
        print(f"{case[0]:.0f}-{case[1]:.0f} {case[2]:8d} {share:8.2f} {right:12.2f} {odds:14.2f}",
              flush=True)


if __name__ == "__main__":
    main()
