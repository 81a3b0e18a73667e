"""How the line width runs along a segment: simulated truths and real spectra. By hand.

    python tests/studies/measure_width_law.py
"""

from __future__ import annotations

import sys
from collections import Counter
from pathlib import Path

import numpy as np

TESTS = Path(__file__).resolve().parents[1]
sys.path[:0] = [str(TESTS), str(TESTS.parent / "app")]

from measure_simulation import wood  # noqa: E402
from truths import SPECTRA  # noqa: E402

from linewright import read_spectrum  # noqa: E402
from linewright.measure import MeasureOptions, measure_spectrum  # noqa: E402
from linewright.measure.prepare import prepare  # noqa: E402

SPAN = (5000.0, 7000.0)


def ready(spectrum):
    return [prepare(s, MeasureOptions(), []) for s in spectrum.segments]


def doubling():
    print("R from 30,000 to 60,000 (last row: down): law, worst departure of the width")
    for even, snr, apart in ((True, 100, 8), (True, 100, 2), (True, 100, 40), (True, 25, 8),
                             (False, 100, 8)):
        spectrum, power = wood(30e3, 60e3, 0, even, snr, SPAN, apart)
        show(f"even in ln wavelength {even}, S/N {snr}, {apart} widths apart", spectrum, power)
    show("60,000 to 30,000, even in wavelength, S/N 100, 8 widths", *wood(60e3, 30e3, 0, False,
                                                                          100, SPAN))


def show(name, spectrum, power):
    one = ready(spectrum)[0]
    worst = np.max(np.abs(one.trace.width * power / one.trace.wave - 1.0))
    print(f"  {name}: {one.level.law.kind}, {100 * worst:.1f} per cent")


def constant():
    laws, worst = Counter(), 0.0
    for seed in range(40):
        spectrum, power = wood(40e3, 40e3, seed, seed % 2 == 0, (30, 100, 300)[seed // 3 % 3],
                               (5000.0, 6500.0), (3, 8, 25)[seed % 3])
        one = ready(spectrum)[0]
        laws[one.level.law.kind] += 1
        worst = max(worst, float(np.max(np.abs(one.trace.width * 40e3 / one.trace.wave - 1))))
    print(f"R 40,000 throughout, 40 spectra: {dict(laws)}, worst {100 * worst:.1f} per cent")


def real():
    for name in ("sun_r47000.txt", "fstar_hband_r22500.fits", "mdwarf_r115000_s1d.fits"):
        for i, one in enumerate(ready(read_spectrum(SPECTRA / name))):
            law, power = one.level.law, one.trace.wave / one.trace.width
            said = "not measured" if law is None else (
                f"{law.kind}, {law.blocks} blocks, +- {100 * law.error:.1f} per cent")
            print(f"{name} segment {i}: {said}, R {power[0]:.0f} to {power[-1]:.0f}")


def oxygen():
    """The Sun's spectrum about the O2 band: its own lines and the air's."""
    found = measure_spectrum(read_spectrum(SPECTRA / "sun_r47000.txt"),
                             MeasureOptions(ranges=((6276.0, 6320.0),))).features
    deep = (found.depth > 0.1) & (found.fwhm_err < 0.02 * found.fwhm)
    power = np.sort((found.wave / found.fwhm)[deep])
    print(f"Sun 6276-6320 A, {deep.sum()} lines deeper than 0.1: wavelength/FWHM "
          + " ".join(f"{p / 1e3:.0f}" for p in power) + " thousand")


if __name__ == "__main__":
    doubling()
    constant()
    if SPECTRA.exists():
        real()
        oxygen()
