"""Lines of hot stars: well-known lines against the catalogue; strongest predicted. Run by hand.

    python tests/studies/lines_hot_stars.py

Sources of the published values: tests/hot_lines.py. Scatter of log gf (catalogue - published) is
given by ion for lines whose strength was computed (published ones carried over left out).
"""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np

ROOT = Path(__file__).resolve().parents[2]
sys.path[:0] = [str(ROOT / "app"), str(ROOT / "tests")]

from hot_lines import EXPECTED, HOT_LINES  # noqa: E402

from linewright.lines.catalogue import GRADES, NONLTE  # noqa: E402
from linewright.lines.depths import zero_point  # noqa: E402
from linewright.lines.loading import load_catalogue  # noqa: E402
from linewright.lines.strengths import absorption_strength  # noqa: E402
from linewright.spectra.medium import vacuum_to_air  # noqa: E402

CARRIED_OVER = ("Fe III", "Al II")


def nearest(catalogue, air, species: str, wave: float) -> int:
    """Row of the strongest line of a species within 0.12 A; -1 without one."""
    if species not in catalogue.species_names:
        return -1
    near = np.abs(air - wave) < 0.12
    rows = np.flatnonzero(near & (catalogue.species == catalogue.species_names.index(species)))
    return int(rows[np.argmax(catalogue.loggf[rows])]) if len(rows) else -1


def table(catalogue, air) -> None:
    """Prints every well-known line and the scatter of log gf by ion."""
    offsets: dict[str, list[float]] = {}
    found = within = 0
    print("species    air      catalogue  err    log gf  grade  published  flags")
    for species, wave, loggf in HOT_LINES:
        row = nearest(catalogue, air, species, wave)
        if row < 0:
            print(f"{species:8} {wave:9.2f}  missing")
            continue
        found += 1
        within += abs(air[row] - wave) < max(0.05, 2 * catalogue.wave_err[row])
        shown = "" if loggf is None else f"{loggf:7.3f}"
        flag = "non-LTE" if catalogue.flags[row] & NONLTE else ""
        print(f"{species:8} {wave:9.2f} {air[row]:10.3f} {catalogue.wave_err[row]:6.3f} "
              f"{catalogue.loggf[row]:7.3f}    {GRADES[catalogue.grade[row]]}    {shown:8} {flag}")
        if loggf is not None and species not in CARRIED_OVER:
            offsets.setdefault(species, []).append(float(catalogue.loggf[row]) - loggf)
    print(f"{found} of {len(HOT_LINES)} listed, {within} within 0.05 A or two errors")
    for species, values in offsets.items():
        print(f"  log gf {species:7} n {len(values):3d} mean {np.mean(values):6.3f} "
              f"rms {np.sqrt(np.mean(np.square(values))):.3f} worst {max(values, key=abs):6.3f}")
    every = np.concatenate(list(offsets.values()))
    print(f"  all: n {len(every)}, rms {np.sqrt(np.mean(every**2)):.3f}, robust "
          f"{1.4826 * np.median(np.abs(every)):.3f} dex")


def features(catalogue, air, order) -> list[int]:
    """Rows of the strongest line of each feature, strongest first.

    Lines of one species within 0.5 A make one feature, as a hot star's line widths do.
    """
    kept: list[int] = []
    for row in order:
        taken = any(
            catalogue.species[row] == catalogue.species[k] and abs(air[row] - air[k]) < 0.5
            for k in kept
        )
        if not taken:
            kept.append(int(row))
    return kept


def strongest(catalogue, air) -> None:
    """Prints the 25 strongest predicted features at each temperature, and the expected ranks."""
    optical = (air > 3900) & (air < 6800)
    for temperature, log_pe, expected in EXPECTED:
        strength = absorption_strength(catalogue, temperature, log_pe)
        strength = strength - zero_point(catalogue.wave, temperature, log_pe)
        strength = np.where(optical & np.isfinite(strength), strength, -np.inf)
        order = features(catalogue, air, np.argsort(-strength)[:150])
        print(f"\n{temperature} K:", ", ".join(
            f"{catalogue.species_of(k)} {air[k]:.1f}" for k in order[:25]))
        ranks = [1 + min(
            place for place, k in enumerate(order)
            if catalogue.species_of(k) == species and abs(air[k] - wave) < 0.5
        ) for species, wave in expected]
        print("  expected:", ", ".join(
            f"{s} {w} (rank {r})" for (s, w), r in zip(expected, ranks, strict=True)))


def main() -> None:
    catalogue = load_catalogue(origins="stellar")
    air = vacuum_to_air(catalogue.wave)
    table(catalogue, air)
    strongest(catalogue, air)


if __name__ == "__main__":
    main()
