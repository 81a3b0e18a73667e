"""Temperatures of simulated stars against the truth. By hand:

    python tests/studies/temperature_study.py [seeds=3,4] [starts=1] [only=10000,15000] [wide=1]

Stars of 4,000 to 15,000 K, sharp-lined and rotating (tests/star_simulation.py: wavelengths and
log gf perturbed by their errors, 5 % of the lines kept from the engine, electron pressure 0.3
dex off the usual, elements 0.1 dex off solar). Seeds 1, 2 and 5 to 10 set the constants in
claims/temperature.py, claims/readings.py and claims/ionisation.py; 3 and 4 score them. starts=1
adds, for the first seed, what is found when the search begins 3,000 K too low or too high
(never below 3,000 K). 4380-5400 A, or with wide=1 3800-6800 A without Balmer lines.
"""

from __future__ import annotations

import sys
from dataclasses import replace
from pathlib import Path

import numpy as np

ROOT = Path(__file__).resolve().parents[2]
sys.path[:0] = [str(ROOT / "app"), str(ROOT / "tests")]

from star_simulation import Star, simulate  # noqa: E402

from linewright.claims import identify as engine  # noqa: E402
from linewright.claims.readings import BALANCE, GROWTH, PROFILE, STAGES  # noqa: E402
from linewright.claims.temperature import electron_pressure  # noqa: E402
from linewright.job.options import SolveOptions  # noqa: E402
from linewright.job.solve import solve  # noqa: E402
from linewright.lines.loading import load_catalogue  # noqa: E402

TEMPERATURES = (4000, 5000, 5800, 6500, 8000, 10000, 15000)
ROTATIONS = (0, 15, 50)
WRONG = 3000.0  # K
WIDE = {"low": 3800.0, "high": 6800.0}  # vacuum Angstrom


def options_of(star: Star) -> SolveOptions:
    return SolveOptions(vsini=star.vsini or None)


def solved_from(star: Star, catalogue, start: float):
    """The session when the profile's search begins at ``start`` (K), not at the vote's best."""
    spectrum, kept = simulate(star, catalogue)
    find = engine.find_components

    def misled(setting, progress):
        return replace(find(setting, progress), temperature=float(start))

    engine.find_components = misled
    try:
        return solve(spectrum, kept, options_of(star))
    finally:
        engine.find_components = find


def words(session, truth) -> tuple[str, float, float]:
    """(line of the table, adopted less truth, pull)."""
    read = {r.label: r for r in session.temperatures}
    first = session.temperatures[0]
    cells = [f"{first.value - truth:+6.0f} +- {first.error:4.0f}"]
    for label in (PROFILE, STAGES, GROWTH):
        r = read.get(label)
        cell = "none" if r is None else f"{r.value - truth:+6.0f} +- {r.error:4.0f}"
        cells.append(cell + ("" if r is None or r.used else " unused"))
    return " | ".join(cells), first.value - truth, (first.value - truth) / first.error


def main(seeds, starts: bool, temperatures, window) -> None:
    catalogue, off, pulls, hints, moved = load_catalogue(), [], [], [], []
    print("T, v sin i, seed | adopted - true | profile - true | excitation and ionisation - true"
          " | curve of growth - true | log Pe - true")
    for temperature in temperatures:
        for vsini in ROTATIONS:
            for seed in seeds:
                star = Star(temperature, vsini, 0.3 if seed % 2 else -0.3, seed=seed, **window)
                spectrum, kept = simulate(star, catalogue)
                session = solve(spectrum, kept, options_of(star))
                text, gap, pull = words(session, temperature)
                off.append((temperature, vsini, gap))
                pulls.append(pull)
                hint = next((r for r in session.temperatures if r.label == BALANCE), None)
                if hint is not None:
                    wrong = hint.value - electron_pressure(temperature) - star.pressure
                    hints.append(wrong / hint.error)
                    text += f" | {wrong:+.2f} +- {hint.error:.2f}"
                print(f"{temperature} {vsini} {seed} | {text}", flush=True)
                wrong = (temperature - WRONG, temperature + WRONG) if starts and seed == seeds[0] else ()
                for start in wrong:
                    misled = solved_from(star, catalogue, start)
                    text, other, _ = words(misled, temperature)
                    moved.append(other - gap)
                    print(f"   from {start:.0f} | {text}", flush=True)
    summary(np.array(off), np.array(pulls), np.array(hints))
    if moved:
        shift = np.abs(np.array(moved))
        print(f"starts 3,000 K off: {len(shift)}, moved the result by rms "
              f"{np.sqrt(np.mean(shift**2)):.0f} K, most {shift.max():.0f} K")


def summary(off, pulls, hints) -> None:
    for name, keep in (
        ("to 8,000 K, v sin i 0 and 15", (off[:, 0] <= 8000) & (off[:, 1] < 50)),
        ("to 8,000 K, v sin i 50", (off[:, 0] <= 8000) & (off[:, 1] == 50)),
        ("10,000 K", off[:, 0] == 10000),
        ("15,000 K", off[:, 0] == 15000),
        ("10,000 and 15,000 K", off[:, 0] > 8000),
    ):
        gap = off[keep, 2]
        if len(gap) == 0:
            continue
        inside = [np.mean(np.abs(gap) <= limit) for limit in (100, 300)]
        print(
            f"{name}: {len(gap)} stars, mean {gap.mean():+.0f} K, rms {np.sqrt(np.mean(gap**2)):.0f}"
            f" K, worst {gap[np.argmax(np.abs(gap))]:+.0f} K, within 100 K {inside[0]:.2f}, within"
            f" 300 K {inside[1]:.2f}, rms of (T/true - 1) "
            f"{np.sqrt(np.mean((gap / off[keep, 0]) ** 2)):.3f}"
        )
    print(f"pulls of the adopted temperature: mean {pulls.mean():+.2f}, rms "
          f"{np.sqrt(np.mean(pulls**2)):.2f}, beyond 2: {np.sum(np.abs(pulls) > 2)} of {len(pulls)}")
    print(f"pulls of log Pe: mean {hints.mean():+.2f}, rms {np.sqrt(np.mean(hints**2)):.2f}, "
          f"beyond 2: {np.sum(np.abs(hints) > 2)} of {len(hints)}")


if __name__ == "__main__":
    given = dict(word.split("=") for word in sys.argv[1:])
    main(
        [int(s) for s in given.get("seeds", "3,4").split(",")],
        given.get("starts") == "1",
        [int(t) for t in given["only"].split(",")] if "only" in given else TEMPERATURES,
        WIDE if given.get("wide") == "1" else {},
    )
