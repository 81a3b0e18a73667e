"""Blind velocity from few features of the K giant's list, +-500 km/s. Slow: run by hand.

    python tests/studies/velocity_study.py [TRIALS] [FEATURES:SIGMA ...] [seeds=FIRST] [keep]

FEATURES random published lines (Hinkle et al. 2000) moved by noise of SIGMA Angstrom and by a
velocity drawn within +-450 km/s; right: within 2 km/s. Declared: the margin over the best rival
sufficed; falsely: and farther off than 2 km/s; elsewhere: farther off, too, than a rival must
stand (six errors of one feature), so that another peak was declared. A temperature of 4,300 K is given. Seeds from 10,000 on set the constants of the
scattered vote; the others are scored.
"""

from __future__ import annotations

import sys

import numpy as np
from kept import keep, wanted
from simulated import rate
from truths import kgiant_table

from linewright.job.options import SolveOptions
from linewright.job.solve import solve_features
from linewright.spectra.medium import C_KM_S

TRIALS, RIGHT = 500, 2.0
CELLS = ("5:0.01", "10:0.01", "20:0.01", "20:0.02", "20:0.05")


def cell(features: int, sigma: float, trials: int, first: int = 0):
    """(right, declared, (falsely, elsewhere), errors in km/s of the right ones)."""
    rng = np.random.default_rng([features, round(1e4 * sigma), *([first] if first else [])])
    right = declared = false = elsewhere = 0
    errors = []
    for seed in range(first, first + trials):
        v = float(rng.uniform(-450, 450))
        table, _ = kgiant_table(
            np.random.default_rng(seed), sigma=sigma, velocity=v, keep=features, invented=0.0
        )
        found = solve_features(table, options=SolveOptions(temperature=4300.0)).velocity
        good = abs(found.velocity - v) < RIGHT
        right, declared = right + good, declared + found.declared
        false += found.declared and not good
        apart = 6.0 * sigma / 6000.0 * C_KM_S
        elsewhere += found.declared and abs(found.velocity - v) > max(apart, RIGHT)
        if good:
            errors.append(found.velocity - v)
    return right, declared, (false, elsewhere), np.array(errors)


if __name__ == "__main__":
    words, cells = sys.argv[1:], {}
    stored = wanted(words)
    first = sum(int(w.removeprefix("seeds=")) for w in words if w.startswith("seeds="))
    words = [w for w in words if not w.startswith("seeds=")]
    trials = int(words.pop(0)) if words and ":" not in words[0] else TRIALS
    total = wrong = 0
    for word in words or CELLS:
        features, _, sigma = word.partition(":")
        right, declared, (false, elsewhere), errors = cell(int(features), float(sigma), trials, first)
        print(f"{features} features, {sigma} A: right {rate(right, trials)}, declared "
              f"{declared / trials:.3f}, falsely {false}, elsewhere {elsewhere}, rms {np.std(errors):.3f} km/s", flush=True)
        total, wrong = total + trials, wrong + false
        cells[word] = {"right": right, "declared": declared, "falsely": false, "trials": trials}
    print(f"falsely declared {rate(wrong, total)}")
    if stored:
        keep("velocity", cells)
