"""How well origins are told apart on the samples, whose truth tables name them. By hand:

    python tests/studies/origins_study.py [clouds [FIRST LAST] | velocities [FIRST LAST]]

Prints confident claims of the wrong origin, by true origin, for every sample.

'clouds' counts interstellar clouds claimed in simulated single stars that have none: 3,800-30,000
K, R 15,000-100,000, S/N 30-300 (log-uniform), velocities within 200 km/s, half rotating at 10-200
km/s, air over 7 of 10, one of three sets of windows about interstellar lines; seed 7000 + number.

'velocities' compares the star's velocity with the truth and its error: 5,800-12,000 K, v sin i 4,
15, 22, 38 km/s, 4400-4800 A, R 45,000, S/N 100, velocity by voting at the true temperature.
"""

from __future__ import annotations

import json
import sys
from itertools import product
from pathlib import Path

import numpy as np

ROOT = Path(__file__).resolve().parents[2]
sys.path[:0] = [str(ROOT / "app")]

from astropy.table import Table  # noqa: E402

from linewright.job.solve import solve  # noqa: E402
from linewright.resources import samples_dir  # noqa: E402
from linewright.spectra.medium import C_KM_S, from_medium  # noqa: E402
from linewright.spectra.reading import read_spectrum  # noqa: E402


def strongest_truth(truth, place, wave, width):
    """Row of the deepest true line within half a width of ``wave``, or None."""
    near = np.nonzero(np.abs(place - wave) < 0.5 * width)[0]
    strength = np.abs(np.asarray(truth["depth" if "depth" in truth.colnames else "flux"]))
    return int(near[np.argmax(strength[near])]) if len(near) else None


def confusion(entry):
    spectrum = read_spectrum(samples_dir() / entry["file"], **entry.get("read_options", {}))
    session = solve(spectrum)
    truth = Table.read(samples_dir() / entry["truth"])
    vacuum = from_medium(np.asarray(truth["wave"], dtype=float), spectrum.medium)
    place = vacuum * (1 + np.asarray(truth["velocity"], dtype=float) / C_KM_S)
    counts: dict = {}
    for wave, width, claim in zip(session.features.wave, session.features.fwhm, session.claims):
        row = strongest_truth(truth, place, wave, width)
        if row is None:
            continue
        origin = str(truth["origin"][row])
        tally = counts.setdefault(origin, [0, 0, 0, 0])
        sure = claim.probability >= 0.95
        tally[0] += 1
        tally[1] += sure
        tally[2] += sure and claim.origin != origin
        tally[3] += sure and claim.species != str(truth["species"][row])
    return session, counts


# Vacuum Angstrom: Ca II, CH+, CH, Na I, K I; Na I and K I in the air's bands; Ca II to CH.
WINDOWS = (
    ((3925.0, 3985.0), (4225.0, 4240.0), (4295.0, 4310.0), (5880.0, 5905.0), (7660.0, 7705.0)),
    ((5780.0, 6020.0), (7590.0, 7710.0)),
    ((3900.0, 4340.0),),
)


def cloudless(number: int):
    """(Observed, star) of one simulated single star before no cloud."""
    from simulated import observed, scene, star
    from studio.scenes import Air

    rng = np.random.default_rng(7000 + number)

    def log_uniform(low, high):
        return float(np.exp(rng.uniform(np.log(low), np.log(high))))

    temperature, resolution = log_uniform(3800, 30000), log_uniform(15000, 100000)
    sn, velocity = log_uniform(30, 300), float(rng.uniform(-200, 200))
    vsini = float(rng.uniform(10, 200)) if rng.random() < 0.5 else float(rng.uniform(1, 10))
    air = None
    if rng.random() < 0.7:
        air = Air(float(rng.uniform(-30, 30)), float(rng.uniform(1.0, 2.2)), float(rng.choice([0.3, 1.8])))
    one = star(temperature, velocity, vsini)
    windows = WINDOWS[number % len(WINDOWS)]
    return observed(scene(f"star {number}", 7000 + number, [one], windows, resolution, sn, air)), one


def clouds(first: int = 0, last: int = 200) -> None:
    from simulated import engine_list, rate

    false, declared = 0, 0
    for number in range(first, last):
        seen, one = cloudless(number)
        session = solve(seen.spectrum, engine_list(number))
        found = [(round(v, 1), round(e, 1)) for o, v, e in session.components if o == "interstellar"]
        false, declared = false + bool(found), declared + session.velocity.declared
        if found:
            print(f"   star {number} at {one.velocity:+.1f} km/s, {one.temperature:.0f} K, v sin i "
                  f"{one.vsini:.0f}: clouds {found}, velocity {session.velocity.velocity:+.1f}")
        if (number + 1) % 20 == 0:
            print(f"{number + 1 - first} stars, {declared} declared, {false} with clouds", flush=True)
    print(f"stars {first} to {last - 1}: velocity declared for {declared}; a cloud claimed before "
          f"{rate(false, last - first)}")


def velocities(first: int = 0, last: int = 4) -> None:
    from simulated import engine_list, observed, scene, star

    from linewright.claims.identify import identify
    from linewright.claims.options import ClaimOptions
    from linewright.measure.core import measure_spectrum

    for vsini in (4.0, 15.0, 22.0, 38.0):
        rows = []
        for seed, temperature in product(range(first, last), (5800.0, 7500.0, 9200.0, 12000.0)):
            number = 9000 + int(temperature) + int(vsini) + 1000 * seed
            truth = float(np.random.default_rng(number).uniform(-60, 60))
            one = star(temperature, truth, vsini)
            seen = observed(scene(f"v{number}", number, [one], ((4400.0, 4800.0),), 45000.0, 100.0))
            m = measure_spectrum(seen.spectrum)
            options = ClaimOptions(frame="barycentric", temperature=temperature)
            v = identify(m.features, m.coverage, engine_list(number), options).velocity
            rows.append((v.velocity - truth, v.error))
        off, error = np.array(rows).T
        print(f"v sin i {vsini:.0f}: {len(off)} stars, off by {off.mean():+.3f} on the mean, rms "
              f"{np.sqrt(np.mean(off**2)):.3f}, median error {np.median(error):.3f} km/s, rms pull "
              f"{np.sqrt(np.mean((off / error) ** 2)):.2f}, largest {np.max(np.abs(off / error)):.2f}",
              flush=True)


def samples() -> None:
    listed = json.loads((samples_dir() / "samples.json").read_text())
    for entry in listed if isinstance(listed, list) else listed["samples"]:
        session, counts = confusion(entry)
        print(entry["file"], [(o, round(v, 2)) for o, v, _ in session.components])
        for origin, (n, sure, other, wrong) in sorted(counts.items()):
            print(f"   {origin:13s} {n:5d} features, {sure:5d} confident, {other:3d} of another "
                  f"origin, {wrong:3d} of another species")


if __name__ == "__main__":
    word, *numbers = sys.argv[1:] or ["samples"]
    {"samples": samples, "clouds": clouds, "velocities": velocities}[word](*map(int, numbers))
