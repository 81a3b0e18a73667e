"""Rebuilds every table in order, from an empty folder.

Usage: python linedata/builders/build_all.py SOURCE_DIR [--out FOLDER]
"""

from __future__ import annotations

import os
import subprocess
import sys
import tempfile
from pathlib import Path

from common import TABLES, script_arguments

# level_lines reads the finished atomic_lines.
ORDER = (
    "level_physics", "atomic_lines", "hydrogen_helium", "level_lines", "level_gaps",
    "rare_gases", "nebular_lines",
    "interstellar_sky", "telluric_lines", "bands", "citations",
)


def build(source: Path, out: Path) -> None:
    """Every table into an empty folder."""
    for name in ORDER:
        script = Path(__file__).with_name(f"{name}.py")
        command = [sys.executable, str(script), str(source), "--out", str(out)]
        subprocess.run(command, check=True)


def move_in(fresh: Path, tables: Path) -> None:
    """Replaces the tables by fresh ones within moments, the manifest last; drops stale files."""
    tables.mkdir(parents=True, exist_ok=True)
    names = sorted(path.name for path in fresh.iterdir() if path.name != "manifest.json")
    for name in [*names, "manifest.json"]:
        os.replace(fresh / name, tables / name)
    for path in tables.iterdir():
        if path.name not in {*names, "manifest.json"}:
            path.unlink()


def main() -> None:
    arguments = script_arguments(__doc__.splitlines()[0])
    tables = arguments.out or TABLES
    tables.parent.mkdir(parents=True, exist_ok=True)
    with tempfile.TemporaryDirectory(dir=tables.parent) as folder:
        build(arguments.source_dir, Path(folder))
        move_in(Path(folder), tables)


if __name__ == "__main__":
    main()
