"""Processor time of strengths, searches in the catalogue and saving, as ratios in one run.

    python tests/benchmarks/plain_acts.py [ROUNDS]

Ratios to a sort of a million numbers, each the median over rounds in random order; absolute
times are notes. A control outside 0.9 to 1.1 makes the run noisy.
"""

from __future__ import annotations

import sys
import tempfile
from collections.abc import Callable
from pathlib import Path

import numpy as np

HERE = Path(__file__).resolve().parent
sys.path[:0] = [str(HERE), str(HERE.parent.parent / "app"), str(HERE.parent / "sessions")]

import builders  # noqa: E402
from rounds import Act, measure, show  # noqa: E402

from linewright.lines.loading import load_catalogue  # noqa: E402
from linewright.lines.search import LineQuery, search  # noqa: E402
from linewright.lines.strengths import absorption_strength  # noqa: E402
from linewright.session import file  # noqa: E402

ROUNDS, SORTED, FEATURES = 7, 1_000_000, 3000
NARROW = LineQuery((6000.0, 6100.0), species=("Fe I",), loggf_above=-3.0)
WORDS = {
    "strengths": "strengths of the whole catalogue at one temperature",
    "narrow": "search: Fe I in 100 Angstrom, log gf above -3",
    "words": "search: 'FeI z 7D* NIST' in all lines",
    "save": f"saving a session of {FEATURES:,} features",
}


def acts(catalogue, folder: Path) -> list[Act]:
    numbers, made = np.random.default_rng(1).random(SORTED), builders.session(FEATURES)

    def sort() -> None:
        np.sort(numbers)

    tried: dict[str, Callable[[], object]] = {
        "A": sort,
        "A'": sort,
        "strengths": lambda: absorption_strength(catalogue, 5777.0, 1.2),
        "narrow": lambda: search(catalogue, NARROW),
        "words": lambda: search(catalogue, LineQuery(text="FeI z 7D* NIST")),
        "save": lambda: file.save_session(made, folder / "made.json", force=True),
    }
    return [Act(name, run) for name, run in tried.items()]


def main() -> int:
    rounds = int(sys.argv[1]) if len(sys.argv) > 1 else ROUNDS
    with tempfile.TemporaryDirectory() as folder:
        timing = measure(acts(load_catalogue(), Path(folder)), rounds, lambda: None)
    show(timing, WORDS, f"sort of {SORTED:,} numbers")
    return 0


if __name__ == "__main__":
    raise SystemExit(main())
