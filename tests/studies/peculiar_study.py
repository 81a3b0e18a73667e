"""Are peculiar stars recognised, not refused? Simulated feature tables. By hand:

    python tests/studies/peculiar_study.py

Lines are drawn from the catalogue with wavelengths perturbed by their errors and strengths
by 0.2 dex, 5 % left out; blends closer than 0.07 A merge; the engine is told nothing of the
abundances. Prints, per case, the share named right and the offsets found.
"""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np

ROOT = Path(__file__).resolve().parents[2]
sys.path[:0] = [str(ROOT / "app")]

from linewright.claims.temperature import electron_pressure  # noqa: E402
from linewright.job.options import SolveOptions  # noqa: E402
from linewright.job.solve import solve_features  # noqa: E402
from linewright.lines.catalogue import ORIGINS  # noqa: E402
from linewright.lines.loading import load_catalogue  # noqa: E402
from linewright.lines.strengths import absorption_strength  # noqa: E402
from linewright.measure.features_from import features_from_columns  # noqa: E402
from linewright.spectra.medium import C_KM_S, to_medium  # noqa: E402

RANGE = (4000.0, 5000.0)  # vacuum Angstrom


def simulate(temperature, detectable, rng, metallicity=0.0, **excess):
    """(FeatureTable, species of the strongest contributor) with ``detectable`` lines/Angstrom
    of a solar mixture setting the threshold."""
    cat = load_catalogue().between(*RANGE)
    cat = cat.take(cat.origin == ORIGINS.index("stellar"))
    pe = electron_pressure(temperature)
    solar = absorption_strength(cat, temperature, pe)
    zero = np.sort(solar[np.isfinite(solar)])[::-1][int(detectable * (RANGE[1] - RANGE[0]))]
    real = absorption_strength(cat, temperature, pe, metallicity, excess) - zero
    real = real + rng.normal(0, 0.2, len(real))
    keep = np.isfinite(real) & (real > -1.0) & (rng.random(len(real)) > 0.05)
    wave = (cat.wave + rng.normal(0, 1, len(cat)) * cat.wave_err)[keep]
    real, names = real[keep], cat.species[keep]
    order = np.argsort(wave)
    wave, real, names = wave[order], real[order], names[order]
    cluster = np.concatenate(([0], np.cumsum(np.diff(wave) > 0.07)))
    places, depths, truth = [], [], []
    for k in range(cluster[-1] + 1):
        here = cluster == k
        power = 10.0 ** real[here]
        if np.log10(power.sum()) < 0:
            continue
        m = 0.65 * (np.log10(power.sum()) - 1.2) + rng.normal(0, 0.08)
        places.append(np.sum(power * wave[here]) / power.sum() + rng.normal(0, 0.006))
        depths.append(1 / (1 + 10**-m))
        truth.append(cat.species_names[names[here][np.argmax(power)]])
    table = features_from_columns(
        np.array(places), wave_err=0.006, depth=np.array(depths), depth_err=0.005, fwhm=0.12
    )
    return table, np.array(truth)


def case(label, temperature, detectable, watch, **abundances):
    rng = np.random.default_rng(7)
    table, truth = simulate(temperature, detectable, rng, **abundances)
    moved = table.wave * (1 + 23.0 / C_KM_S)
    table = features_from_columns(
        moved, wave_err=0.006, depth=table.depth, depth_err=0.005, fwhm=0.12
    )
    span = tuple(float(x) for x in to_medium(np.array(RANGE) * (1 + 23.0 / C_KM_S), "vacuum"))
    session = solve_features(table, options=SolveOptions(coverage=(span,)), medium="vacuum")
    right = np.array([c.species == t for c, t in zip(session.claims, truth)])
    sure = np.array([c.probability >= 0.95 for c in session.claims])
    print(
        f"{label}: {len(truth)} features, velocity {session.velocity.velocity:+.2f} (23.00), "
        f"T {session.temperature_k:.0f} ({temperature:.0f}), right {right.mean():.3f}, confident "
        f"{sure.mean():.3f}, agreement {right[sure].mean():.4f}"
    )
    offsets = {r.species: r.offset_dex for r in session.roll_call}
    for name in watch:
        mine = truth == name
        if mine.any():
            print(f"   {name}: {mine.sum()} lines, right {right[mine].mean():.3f}, confident "
                  f"{sure[mine].mean():.3f}, offset {offsets.get(name, float('nan')):+.2f} dex")


if __name__ == "__main__":
    case("solar mixture, 8000 K", 8000.0, 0.6, ["Fe I", "Fe II", "Cr II"])
    case("Eu, Cr, Sr +2 dex, 8000 K", 8000.0, 0.6, ["Eu II", "Cr I", "Cr II", "Sr II", "Fe I"],
         Eu=2.0, Cr=2.0, Sr=2.0)
    case("[M/H] -2, 5000 K", 5000.0, 2.0, ["Fe I", "Ti II", "Cr I"], metallicity=-2.0)
    case("Ba, La, Ce, Nd +1.5, 4500 K", 4500.0, 2.0, ["Ba II", "La II", "Ce II", "Nd II"],
         Ba=1.5, La=1.5, Ce=1.5, Nd=1.5)
