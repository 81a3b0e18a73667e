"""Pulls of simulated lines over S/N, depth, sampling and crowding, by hand.

    python tests/studies/measure_pulls.py [LINES PER CELL] [SEED]

Cells are conditioned on the injected significance (at least 8), never on detection.
"""

from __future__ import annotations

import sys
import time
from pathlib import Path

import numpy as np

TESTS = Path(__file__).resolve().parents[1]
sys.path[:0] = [str(TESTS), str(TESTS.parent / "app")]

from measure_simulation import Lines, pulls_of  # noqa: E402


def injected(lines: Lines) -> float:
    """Significance of an ideal matched filter that knows shape and place (white noise)."""
    sigma = lines.pixels / 2.3548
    return abs(lines.depth) * lines.snr * np.sqrt(np.sqrt(np.pi) * sigma)


def cells(count: int, seed: int):
    for apart in (25.0, 3.0):
        for pixels in (2.0, 3.0, 6.0, 12.0):
            for depth, snr in ((0.1, 100.0), (0.3, 30.0), (0.3, 100.0), (0.7, 50.0)):
                yield Lines(pixels, depth, snr, count, apart, 0.0, seed)
        yield Lines(6.0, 0.3, 100.0, count, apart, 1.0, seed)
        yield Lines(12.0, 0.3, 100.0, count, apart, 1.5, seed)


def main(count: int = 2000, seed: int = 0):
    print("lines 3 FWHM apart: with the uncertainty array given (all samples lie in lines)")
    print("apart px depth S/N blur | injected found extra | mean and width of pulls, robust width")
    for lines in cells(count, seed):
        if injected(lines) < 8:
            continue
        start = time.process_time()
        pulls, found, measured = pulls_of(lines, with_errors=lines.apart < 10)
        text = "  ".join(
            f"{name} {np.mean(p):+.2f} {np.std(p):.2f} "
            f"{1.4826 * np.median(np.abs(p - np.median(p))):.2f}"
            for name, p in pulls.items()
        )
        extra = len(measured.features) - round(found * lines.count)
        print(f"{lines.apart:4g} {lines.pixels:3g} {lines.depth:4g} {lines.snr:4g} {lines.blur:3g} | "
              f"{injected(lines):5.1f} {found:.4f} {extra:3d} | {text} | "
              f"{time.process_time() - start:.1f} s", flush=True)


if __name__ == "__main__":
    main(*(int(a) for a in sys.argv[1:3]))
