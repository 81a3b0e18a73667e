"""Equivalent widths on the Sun against published ones, by bin, outliers listed, by hand.

    python tests/studies/measure_solar_widths.py

Melendez et al. 2014 (ApJ 791, 14, table 1), measured by hand on a solar spectrum; ours at
R 47,000. Needs the shared data beside the checkout.
"""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np

TESTS = Path(__file__).resolve().parents[1]
sys.path[:0] = [str(TESTS), str(TESTS.parent / "app")]

from truths import PUBLISHED, SPECTRA, rows_of  # noqa: E402

from linewright.measure import measure_spectrum  # noqa: E402
from linewright.spectra.medium import C_KM_S, air_to_vacuum  # noqa: E402
from linewright.spectra.spectrum import Segment, Spectrum  # noqa: E402

VELOCITY = 0.42  # km/s: gravitational redshift less convective blueshift


def main():
    wave, flux = np.loadtxt(SPECTRA / "sun_r47000.txt").T
    wave, first = np.unique(wave, return_index=True)
    segment = Segment(air_to_vacuum(wave), flux[first], None, np.zeros(len(wave), dtype=bool))
    f = measure_spectrum(Spectrum((segment,), medium="air", name="Sun"))
    coverage, f = f.coverage, f.features
    rows = rows_of(PUBLISHED / "solar_ew.csv")
    air, published = np.array([(float(r[0]), float(r[4])) for r in rows]).T
    line = air_to_vacuum(air)
    trough = np.flatnonzero(f.sign > 0)
    rest = f.wave[trough] / (1 + VELOCITY / C_KM_S)
    near = np.argmin(np.abs(rest[None] - line[:, None]), axis=1)
    covered = np.any([(line > a) & (line < b) for a, b in coverage], axis=0)
    found = covered & (np.abs(rest[near] - line) < 0.05)
    print(f"{covered.sum()} lines in coverage, {found.sum()} found")
    ratio = f.ew[trough[near]] / published
    for low, high in ((0, 1e9), (0, 20), (20, 50), (50, 100), (100, 1e9)):
        r = ratio[found & (published >= low) & (published < high)]
        if len(r):
            scatter = 1.4826 * np.median(np.abs(r - np.median(r)))
            print(f"{low:4.0f}-{high:<6.0f} mA  n {len(r):3d}  median {np.median(r):.3f}  "
                  f"robust scatter {scatter:.3f}")
    for i in np.flatnonzero(found & (np.abs(ratio - 1) > 0.15)):
        k = trough[near[i]]
        print(f"  outlier {air[i]:.3f} {rows[i][1]:6s} published {published[i]:.1f} ours "
              f"{f.ew[k]:.1f} +- {f.ew_err[k]:.1f} mA  {f.flags[k]}")


if __name__ == "__main__":
    main()
