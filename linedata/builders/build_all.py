"""Rebuilds every table in order, from an empty folder.

Usage: python linedata/builders/build_all.py SOURCE_DIR [--out FOLDER]
"""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

from common import TABLES, script_arguments

# level_lines reads the finished atomic_lines.
ORDER = (
    "level_physics", "atomic_lines", "hydrogen_helium", "level_lines", "level_gaps",
    "rare_gases", "nebular_lines",
    "interstellar_sky", "telluric_lines", "bands", "citations",
)


def main() -> None:
    arguments = script_arguments(__doc__.splitlines()[0])
    out = arguments.out or TABLES
    (out / "manifest.json").unlink(missing_ok=True)
    for name in ORDER:
        script = Path(__file__).with_name(f"{name}.py")
        command = [sys.executable, str(script), str(arguments.source_dir), "--out", str(out)]
        subprocess.run(command, check=True)


if __name__ == "__main__":
    main()
