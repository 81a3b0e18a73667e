"""Template velocities at low resolution and in rotators, with their errors. Slow: run by hand.

    python tests/studies/template_study.py [STARS]

Simulated dwarfs (tests/star_simulation.py, 4,600-6,400 K, 4380-5400 A, three samples a
resolution element, wavelengths and log gf moved by their errors, 5 % of the lines kept from the
engine) at velocities drawn within +-200 km/s, solved with everything blind but the resolving
power (and v sin i). S/N is per sample. Pulls: (found less true)/stated error.
"""

from __future__ import annotations

import sys
from dataclasses import replace

import numpy as np
from simulated import rate
from star_simulation import Star, observe

from linewright.job.options import SolveOptions
from linewright.job.solve import solve
from linewright.lines.loading import load_catalogue

TEMPERATURES = (4600.0, 5200.0, 5800.0, 6400.0)
# R, v sin i, S/N, the method's prototype (km/s)
CELLS = (
    (5000.0, 0.0, 100.0, 0.06), (5000.0, 0.0, 20.0, 0.3),
    (2000.0, 0.0, 100.0, 0.6), (2000.0, 0.0, 20.0, 3.0),
    (1000.0, 0.0, 100.0, 2.6), (1000.0, 0.0, 20.0, 13.0),
    (20000.0, 200.0, 100.0, 1.0), (20000.0, 200.0, 20.0, 5.0),
)  # fmt: skip


def one(cell, k: int, catalogue):
    """(session, true velocity) of the k-th star of a cell."""
    resolution, vsini, snr, _ = cell
    velocity = float(np.random.default_rng([61, k]).uniform(-200.0, 200.0))
    star = Star(TEMPERATURES[k % len(TEMPERATURES)], vsini=vsini, resolution=resolution, snr=snr,
                seed=800 + k)
    star = replace(star, velocity=velocity)
    spectrum, kept, _ = observe(star, catalogue)
    return solve(spectrum, kept, SolveOptions(resolution=resolution, vsini=vsini or None)), velocity


def main(stars: int) -> None:
    catalogue = load_catalogue()
    print("| R, v sin i, S/N | by template | declared | mean, rms (km/s) | stated error | pulls "
          "mean, rms | beyond 3 | method |")
    print("| --- | --- | --- | --- | --- | --- | --- | --- |")
    false = trials = 0
    for cell in CELLS:
        off, errors, template, declared = [], [], 0, 0
        for k in range(stars):
            session, true = one(cell, k, catalogue)
            v = session.velocity
            template += v.how == "template"
            declared += v.declared
            if v.declared:
                off.append(v.velocity - true)
                errors.append(v.error)
        off, errors = np.array(off), np.array(errors)
        pulls = off / errors
        false, trials = false + int(np.sum(np.abs(pulls) > 5)), trials + stars
        print(f"| {cell[0]:.0f}, {cell[1]:.0f}, {cell[2]:.0f} | {template}/{stars} | {declared} | "
              f"{np.mean(off):+.2f}, {np.sqrt(np.mean(off**2)):.2f} | {np.median(errors):.2f} | "
              f"{np.mean(pulls):+.2f}, {np.sqrt(np.mean(pulls**2)):.2f} | "
              f"{int(np.sum(np.abs(pulls) > 3))} | {cell[3]} |", flush=True)
    print("declared and over five errors off", rate(false, trials))


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 12)
