"""Time to measure 8,000 features on 500,000 samples, one core, by hand.

    python tests/studies/measure_speed.py
"""

from __future__ import annotations

import sys
import time
from pathlib import Path

TESTS = Path(__file__).resolve().parents[1]
sys.path[:0] = [str(TESTS), str(TESTS.parent / "app")]

from measure_simulation import Lines  # noqa: E402

from linewright.measure import fit_region, measure_at, measure_spectrum  # noqa: E402
from linewright.progress import Progress  # noqa: E402


def main():
    lines = Lines(6.0, 0.3, 100.0, 8000, 10.4)
    spectrum, centres = lines.build(with_errors=True)
    marks = []
    start, wall = time.process_time(), time.perf_counter()
    measured = measure_spectrum(
        spectrum, progress=Progress(lambda *_: marks.append(time.perf_counter())))
    print(f"{spectrum.samples} samples, {len(measured.features)} features: "
          f"{time.process_time() - start:.2f} s of one core, {time.perf_counter() - wall:.2f} s wall")
    print(f"longest time between two reports of progress: "
          f"{max(b - a for a, b in zip(marks, marks[1:])):.2f} s")
    for name, act in (
        ("pick", lambda: measure_at(spectrum, measured, centres[4000] + 0.02)),
        ("fit of a drawn region", lambda: fit_region(
            spectrum, measured, (centres[4000] - 0.4, centres[4000] + 0.4), [centres[4000]])),
    ):
        act()
        start = time.perf_counter()
        for _ in range(10):
            act()
        print(f"{name}: {(time.perf_counter() - start) * 100:.1f} ms")


if __name__ == "__main__":
    main()
