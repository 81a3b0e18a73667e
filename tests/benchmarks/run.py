"""Print the drawing targets as a table: python tests/benchmarks/run.py [--quick] [-o FILE]

Gates are ratios within this run; absolute times are notes. The platform is whatever Qt
finds (offscreen where there is no display). Exit status 1 when a target is missed on a
steady run or an exactness check fails, else 0.
"""

from __future__ import annotations

import argparse
import importlib.util
import os
import sys
from pathlib import Path

HERE = Path(__file__).resolve().parent
sys.path[:0] = [str(HERE), str(HERE.parent.parent / "app")]
if not (os.environ.get("DISPLAY") or os.environ.get("WAYLAND_DISPLAY")):
    os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")

# Later targets bring their own module with ``rows(rounds, drain) -> list[Row]``.
EXTRA = ("startup", "frames")


def measured(quick: bool) -> tuple[list, str]:
    """(rows, platform name)."""
    import exactness
    import targets
    from PySide6.QtWidgets import QApplication

    app = QApplication.instance() or QApplication([])

    def drain() -> None:
        for _ in range(3):
            app.processEvents()

    rounds = 21 if quick else 61
    rows = targets.pan(1_000_000 if quick else 10_000_000, rounds, drain)
    rows += targets.velocity(100_000, rounds, drain)
    rows += targets.labels(100, rounds, drain)
    rows += exactness.rows(drain)
    for name in EXTRA:
        if importlib.util.find_spec(name) is not None:
            rows += importlib.import_module(name).rows(rounds, drain)
    return rows, app.platformName()


def table(rows: list, platform: str) -> str:
    """Plain text, one line a row."""
    lines = [f"platform {platform}", f"{'':2} {'what':44} {'ratio':>7} {'first':>6} {'aim':>6}"]
    for row in rows:
        lines.append(
            f"{row.target:2} {row.what:44} {row.value:7.2f} {row.first:6.2f} {row.going:6.2f}"
            f"  {row.verdict:7} {row.note}"
        )
    return "\n".join(lines) + "\n"


def main() -> int:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--quick", action="store_true", help="1e6 samples, 21 rounds")
    parser.add_argument("-o", "--output", type=Path, help="also write the table here")
    options = parser.parse_args()
    rows, platform = measured(options.quick)
    text = table(rows, platform)
    sys.stdout.write(text)
    if options.output:
        options.output.write_text(text, encoding="utf-8")
    return 1 if any(row.verdict == "missed" for row in rows) else 0


if __name__ == "__main__":
    raise SystemExit(main())
