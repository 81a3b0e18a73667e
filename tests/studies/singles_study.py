"""Single stars that must not be called double. Slow: run by hand.

    python tests/studies/singles_study.py [NUMBER_OF_STARS | real]

Stars of 3,800-30,000 K, resolving power 2,000-100,000, S/N 30-300 (all log-uniform), v sin i of
0-200 km/s for half of them, velocities within +-200 km/s; seed 5000 + number. Lines are perturbed
and 5 % are missing from the engine's list. Windows grow with the width of a resolution element.
Nothing is told to the engine; it is given the error array. 'real' solves the real stellar spectra
beside the checkout instead.
"""

from __future__ import annotations

import sys
from collections import Counter

import numpy as np
from simulated import engine_list, observed, rate, scene, star, stellar_velocities
from truths import SPECTRA

from linewright.job.solve import solve
from linewright.spectra.medium import C_KM_S
from linewright.spectra.reading import read_spectrum

STARS = 200
START, LEAST, MOST = 4300.0, 250.0, 800.0  # Angstrom: windows begin here, their lengths
REAL = {
    "sun_r47000.txt": "air", "mdwarf_r115000_s1d.fits": None, "gdwarf_r2000_18hdu.fits": None,
    "ttauri_r40000_blue.fits": None, "fstar_hband_r22500.fits": None,
    "f5star_r1800.fits.gz": None,
}  # fmt: skip


def drawn(number: int, only=lambda what: True):
    """(Observed, what was drawn) of one star; (None, what) where ``only`` says no."""
    rng = np.random.default_rng(5000 + number)

    def log_uniform(low, high):
        return float(np.exp(rng.uniform(np.log(low), np.log(high))))

    what = {
        "temperature": log_uniform(3800, 30000), "resolution": log_uniform(2000, 100000),
        "sn": log_uniform(30, 300), "velocity": float(rng.uniform(-200, 200)),
        "vsini": float(rng.uniform(10, 200)) if rng.random() < 0.5 else float(rng.uniform(1, 10)),
    }  # fmt: skip
    if not only(what):
        return None, what
    element = np.hypot(C_KM_S / what["resolution"], what["vsini"]) / C_KM_S * START
    length = float(np.clip(1500 * element, LEAST, MOST))
    low = START + float(rng.uniform(0, 1200))
    one = star(what["temperature"], what["velocity"], max(what["vsini"], 1.0))
    made = scene(f"star {number}", 5000 + number, [one], [(low, low + length)],
                 what["resolution"], what["sn"])
    return observed(made), what


def simulated(number: int = STARS) -> None:
    double, wrong, tally = [], 0, Counter()
    for k in range(number):
        seen, what = drawn(k)
        session = solve(seen.spectrum, engine_list(k))
        stars = stellar_velocities(session)
        v = session.velocity
        off = abs(v.velocity - what["velocity"]) / np.hypot(1.0, 0.05 * what["vsini"] + 2e4 / what["resolution"])
        tally["declared"] += v.declared
        false = v.declared and off > 5.0
        wrong += false
        if len(stars) > 1:
            double.append(k)
        if len(stars) > 1 or false:
            shown = ", ".join(f"{n} {x:.5g}" for n, x in what.items())
            print(f"   star {k} ({shown}): {len(session.claims)} features, stars {stars}, "
                  f"velocity {v.velocity:.2f} +- {v.error:.2f}, {v.how}", flush=True)
        if (k + 1) % 20 == 0:
            print(f"{k + 1} stars, {len(double)} called double", flush=True)
    print(f"called double {rate(len(double), number)}: {double}")
    print(f"velocity declared for {tally['declared']}, falsely (over five generous sigmas) {wrong}")


def real() -> None:
    for name, medium in REAL.items():
        session = solve(read_spectrum(SPECTRA / name, medium=medium))
        stars = stellar_velocities(session)
        print(f"{name}: stellar components {[round(x, 2) for x in stars]}", flush=True)


if __name__ == "__main__":
    word = sys.argv[1] if len(sys.argv) > 1 else str(STARS)
    real() if word == "real" else simulated(int(word))
