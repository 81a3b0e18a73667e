"""Blind velocity from few features of the K giant's list, +-500 km/s. Slow: run by hand.

    python tests/studies/velocity_study.py [TRIALS] [FEATURES:SIGMA ...] [keep]

FEATURES random published lines (Hinkle et al. 2000) moved by noise of SIGMA Angstrom and by a
velocity drawn within +-450 km/s; right: within 2 km/s. Declared: the margin over the best rival
sufficed. A temperature of 4,300 K is given.
"""

from __future__ import annotations

import sys

import numpy as np
from kept import keep, wanted
from simulated import rate
from truths import kgiant_table

from linewright.job.options import SolveOptions
from linewright.job.solve import solve_features

TRIALS, RIGHT = 500, 2.0
CELLS = ("5:0.01", "10:0.01", "20:0.01", "20:0.02", "20:0.05")


def cell(features: int, sigma: float, trials: int):
    """(right, declared, falsely declared, errors in km/s of the right ones)."""
    rng = np.random.default_rng([features, round(1e4 * sigma)])
    right = declared = false = 0
    errors = []
    for seed in range(trials):
        v = float(rng.uniform(-450, 450))
        table, _ = kgiant_table(
            np.random.default_rng(seed), sigma=sigma, velocity=v, keep=features, invented=0.0
        )
        found = solve_features(table, options=SolveOptions(temperature=4300.0)).velocity
        good = abs(found.velocity - v) < RIGHT
        right, declared = right + good, declared + found.declared
        false += found.declared and not good
        if good:
            errors.append(found.velocity - v)
    return right, declared, false, np.array(errors)


if __name__ == "__main__":
    words, cells = sys.argv[1:], {}
    stored = wanted(words)
    trials = int(words.pop(0)) if words and ":" not in words[0] else TRIALS
    total = wrong = 0
    for word in words or CELLS:
        features, _, sigma = word.partition(":")
        right, declared, false, errors = cell(int(features), float(sigma), trials)
        print(f"{features} features, {sigma} A: right {rate(right, trials)}, declared "
              f"{declared / trials:.3f}, falsely {false}, rms {np.std(errors):.3f} km/s", flush=True)
        total, wrong = total + trials, wrong + false
        cells[word] = {"right": right, "declared": declared, "falsely": false, "trials": trials}
    print(f"falsely declared {rate(wrong, total)}")
    if stored:
        keep("velocity", cells)
