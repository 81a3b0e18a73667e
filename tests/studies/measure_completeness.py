"""Completeness over injected signal-to-noise against an ideal matched filter, by hand.

    python tests/studies/measure_completeness.py [LINES PER STEP] [SEED]

The ideal filter knows shape and place and finds a line when its output passes the
threshold: P = Phi(S/N - threshold). Ours has to find the place itself.
"""

from __future__ import annotations

import sys
from math import erf, sqrt
from pathlib import Path

import numpy as np

TESTS = Path(__file__).resolve().parents[1]
sys.path[:0] = [str(TESTS), str(TESTS.parent / "app")]

from measure_simulation import Lines  # noqa: E402

from linewright.measure import MeasureOptions, measure_spectrum  # noqa: E402

THRESHOLD = 4.0


def main(count: int = 2000, seed: int = 0):
    print("px  injected  found  ideal  difference")
    for pixels in (3.0, 6.0):
        for injected in (3.0, 3.5, 4.0, 4.5, 5.0, 6.0, 8.0):
            depth = injected / 100.0 / np.sqrt(np.sqrt(np.pi) * pixels / 2.3548)
            near = []
            for piece in range(count // 100):  # short: the width is nearly constant over it
                lines = Lines(pixels, depth, 100.0, 100, 25.0, 0.0, 1000 * seed + piece)
                spectrum, centres = lines.build(with_errors=True)
                options = MeasureOptions(
                    threshold=THRESHOLD, resolution=np.mean(centres) / lines.fwhm)
                f = measure_spectrum(spectrum, options).features
                near += [np.min(np.abs(f.wave - c), initial=9.0) < 0.7 * lines.fwhm
                         for c in centres]
            ideal = 0.5 * (1 + erf((injected - THRESHOLD) / sqrt(2)))
            print(f"{pixels:2g}  {injected:8.1f}  {np.mean(near):.3f}  {ideal:.3f}  "
                  f"{np.mean(near) - ideal:+.3f}", flush=True)


if __name__ == "__main__":
    main(*(int(a) for a in sys.argv[1:3]))
