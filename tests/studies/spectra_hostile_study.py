"""A thousand hostile files: what opens, what is refused and why, how long the worst takes.

    python tests/studies/spectra_hostile_study.py [files]
"""

from __future__ import annotations

import collections
import re
import sys
import tempfile
import time
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[1] / "faults"))
from hostile import GOOD, hostile, no_spectrum, outcome  # noqa: E402


def main() -> None:
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 1000
    causes, opened, worst, failures = collections.Counter(), collections.Counter(), (0.0, ""), 0
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "hostile"
        for make in GOOD.values():
            path.write_bytes(make())
            assert outcome(path) == "spectrum"
        for number in range(count):
            layout, damage, data = hostile(number)
            path.write_bytes(data)
            start = time.perf_counter()
            try:
                line = outcome(path)
            except Exception as problem:  # the study counts what a test would fail on
                failures += 1
                print(f"FAILED {number} {layout} {damage}: {type(problem).__name__}: {problem}")
                continue
            worst = max(worst, (time.perf_counter() - start, f"{number} {layout} {damage}"))
            if line == "spectrum":
                opened[damage] += 1
            else:
                cause = re.sub(r"\d+", "N", line.removeprefix(str(path)).strip(": "))
                causes[cause[:60]] += 1
        false = 0
        for number in range(120):
            path.write_bytes(no_spectrum(number))
            false += outcome(path) == "spectrum"
    print(f"{count} hostile files: {sum(causes.values())} refused, {sum(opened.values())} opened "
          f"({dict(opened)}), {failures} failures; worst {worst[0]:.2f} s ({worst[1]})")
    print(f"120 files without a spectrum: {false} opened")
    for cause, times in causes.most_common(25):
        print(f"{times:5d}  {cause}")


if __name__ == "__main__":
    main()
