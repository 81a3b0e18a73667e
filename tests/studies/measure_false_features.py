"""False features in pure noise against the rate stated, by hand.

    python tests/studies/measure_false_features.py [SAMPLES] [SEED]

The expectation is the number of upward crossings of the threshold by the matched filter's
output (Rice 1945, discrete form), peaks and troughs together. For comparison the last
column gives SAMPLES times the one-sided Gaussian tail, the count of independent samples.
"""

from __future__ import annotations

import sys
import time
from math import erfc, sqrt
from pathlib import Path

import numpy as np

TESTS = Path(__file__).resolve().parents[1]
sys.path[:0] = [str(TESTS), str(TESTS.parent / "app")]

from measure_simulation import smooth_noise, spectrum_of  # noqa: E402

from linewright.measure.core import filtered_runs_of, measure_spectrum  # noqa: E402
from linewright.measure.matched import expected_false  # noqa: E402
from linewright.measure.options import MeasureOptions  # noqa: E402

LEVELS = (3.5, 4.0, 4.5)


def count(samples: int, blur: float, pixels: float, seed: int):
    """(counts, expectations) over LEVELS in pieces of at most a million samples."""
    counts, wanted = np.zeros(3), np.zeros(3)
    for piece in range(max(1, samples // 1_000_000)):
        n = min(samples, 1_000_000)
        wave = 5000 + 0.01 * np.arange(n)
        rng = np.random.default_rng((seed, piece, int(10 * blur), int(10 * pixels)))
        spectrum = spectrum_of(wave, 1 + 0.02 * smooth_noise(rng, n, blur))
        options = MeasureOptions(threshold=3.5, resolution=5000 / (0.01 * pixels))
        measured = measure_spectrum(spectrum, options)
        z = measured.features.significance
        pieces = filtered_runs_of(spectrum, options)
        for i, level in enumerate(LEVELS):
            counts[i] += np.sum(z >= level)
            wanted[i] += expected_false(level, pieces)
    return counts, wanted


def main(samples: int = 10_000_000, seed: int = 0):
    print(f"{samples} samples, seed {seed}")
    print("noise        FWHM   level  counted  expected  ratio  independent one-sided")
    for blur, pixels in ((0.0, 3.0), (0.0, 6.0), (1.0, 6.0), (1.5, 12.0)):
        start = time.process_time()
        counts, wanted = count(samples, blur, pixels, seed)
        name = "white" if not blur else f"blur {blur:g}"
        for level, c, w in zip(LEVELS, counts, wanted, strict=True):
            one = samples * 0.5 * erfc(level / sqrt(2))
            print(f"{name:12s} {pixels:4g}px  {level:.1f}  {c:8.0f}  {w:8.1f}  {c / w:.3f}  {one:9.1f}")
        print(f"    {time.process_time() - start:.0f} s of one core")


if __name__ == "__main__":
    main(*(int(a) for a in sys.argv[1:3]))
