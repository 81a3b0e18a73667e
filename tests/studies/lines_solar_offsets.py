"""Offsets of isolated solar lines from the catalogue, per species. Slow: run by hand.

    python tests/studies/lines_solar_offsets.py [--worst]

The Sun at R = 47,000, 4835-6723 A (Gaia-ESO reference). Used: claims of one line with
p_line >= 0.9, share >= 0.9 of the predicted opacity and no blend, features deeper than 0.02 and
significant at 10. Offset = measured - catalogue at the median velocity of Fe I, in
milliangstrom; an outlier lies beyond three stated errors (measured and catalogue, and 0.5 mA for
the depth dependence of the convective shift, in quadrature). Median within 2 mA is asked of every
species; with few lines its error is 1.25 sigma / sqrt(n).
"""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np

ROOT = Path(__file__).resolve().parents[2]
sys.path.insert(0, str(ROOT / "app"))

from linewright.job.solve import solve  # noqa: E402
from linewright.lines.loading import load_catalogue  # noqa: E402
from linewright.spectra.medium import C_KM_S, vacuum_to_air  # noqa: E402
from linewright.spectra.reading import read_spectrum  # noqa: E402

SUN = ROOT.parent / "shared" / "spectra" / "sun_r47000.txt"
CONVECTION = 0.0005  # Angstrom
LEAST_LINES = 3
LIMIT = 0.002  # Angstrom


def isolated(session) -> list[tuple]:
    """(species, catalogue wave, measured wave, error of both) of isolated confident lines."""
    rows = []
    features = session.features
    for k, claim in enumerate(session.claims):
        best = claim.candidates[0] if claim.candidates else None
        if best is None or claim.p_line < 0.9 or best.share < 0.9 or claim.blend:
            continue
        if features.depth[k] < 0.02 or features.significance[k] < 10 or best.origin != "stellar":
            continue
        error = np.sqrt(features.wave_err[k] ** 2 + best.wave_err**2 + CONVECTION**2)
        rows.append((best.species, best.wave, features.wave[k], error, best.source))
    return rows


def offsets_by_species(rows) -> dict[str, np.ndarray]:
    """Species -> array of (offset, error, wave), Angstrom, at the velocity of Fe I."""
    wave, seen = (np.array([row[k] for row in rows]) for k in (1, 2))
    iron = np.array([row[0] == "Fe I" for row in rows])
    velocity = np.median((seen / wave - 1.0)[iron]) * C_KM_S
    print(f"velocity of Fe I {velocity:.3f} km/s, {len(rows)} isolated lines")
    found: dict[str, list] = {}
    for (species, line, measured, error, _) in rows:
        found.setdefault(species, []).append((measured / (1 + velocity / C_KM_S) - line, error, line))
    return {species: np.array(values) for species, values in found.items()}


def report(found: dict[str, np.ndarray], worst: bool) -> int:
    """Prints the table; returns the number of species whose median is beyond the limit."""
    missed = 0
    print(f"{'species':8} {'n':>4} {'median':>7} {'+-':>5} {'sigma':>6} {'>3 err':>6}   (mA)")
    for species, values in sorted(found.items(), key=lambda item: -len(item[1])):
        if len(values) < LEAST_LINES:
            continue
        offset, error, wave = values.T
        median = np.median(offset)
        sigma = 1.4826 * np.median(np.abs(offset - median))
        standard = 1.25 * sigma / np.sqrt(len(offset))
        beyond = np.abs(offset) > 3 * error
        bad = abs(median) > LIMIT
        missed += bad
        print(f"{species:8} {len(offset):4d} {median * 1e3:7.2f} {standard * 1e3:5.2f} "
              f"{sigma * 1e3:6.2f} {beyond.sum():6d} {'  beyond 2 mA' if bad else ''}")
        if worst:
            for k in np.argsort(-np.abs(offset / error))[:3]:
                print(f"      {float(vacuum_to_air(wave[k])):.3f} {offset[k] * 1e3:6.1f} mA, "
                      f"{offset[k] / error[k]:5.1f} errors")
    print(f"{missed} species beyond 2 mA; outliers "
          f"{sum((np.abs(v[:, 0]) > 3 * v[:, 1]).sum() for v in found.values())} "
          f"of {sum(map(len, found.values()))}")
    return missed


def main() -> None:
    session = solve(read_spectrum(SUN, medium="air"), load_catalogue())
    report(offsets_by_species(isolated(session)), "--worst" in sys.argv)


if __name__ == "__main__":
    main()
