"""What the builders share: paths, deterministic archives, the manifest, air to vacuum."""

from __future__ import annotations

import argparse
import hashlib
import io
import json
import os
import sys
import zipfile
from pathlib import Path

import numpy as np

LINEDATA = Path(__file__).resolve().parent.parent
TABLES = LINEDATA / "tables"
sys.path.insert(0, str(LINEDATA.parent / "app"))

from linewright.spectra.medium import air_to_vacuum, vacuum_to_air  # noqa: E402

from packing import pack_lines  # noqa: E402

__all__ = ["air_to_vacuum", "pack_lines", "vacuum_to_air"]

ORIGIN_CODE = {"stellar": 0, "nebular": 1, "telluric": 2, "interstellar": 3, "sky": 4, "lamp": 5}
EV_PER_CM = 1.0 / 8065.543937
_EPOCH = (1980, 1, 1, 0, 0, 0)


def source_file(folder: Path, pattern: str) -> Path:
    """The one file below ``folder`` that fits ``pattern``; raises FileNotFoundError.

    Source archives keep their package below src/, wheels do not; both are found.
    """
    package, _, rest = pattern.partition("/")
    hits = [hit for part in ("", "src/") for hit in sorted(Path(folder).glob(f"{package}/{part}{rest}"))]
    if not hits:
        raise FileNotFoundError(f"{folder}: no {pattern}; unpack the source package there")
    return hits[0]


def write_table(name: str, columns: dict[str, np.ndarray], out: Path | None = None) -> Path:
    """Stored (uncompressed) .npz with fixed time stamps: same arrays, same bytes."""
    folder = Path(out) if out else TABLES
    folder.mkdir(parents=True, exist_ok=True)
    path = folder / f"{name}.npz"
    stored = io.BytesIO()
    with zipfile.ZipFile(stored, "w", zipfile.ZIP_STORED) as archive:
        for key in sorted(columns):
            buffer = io.BytesIO()
            np.lib.format.write_array(buffer, np.ascontiguousarray(columns[key]), version=(1, 0))
            entry = zipfile.ZipInfo(f"{key}.npy", _EPOCH)
            entry.external_attr = 0o644 << 16
            entry.create_system = 3
            archive.writestr(entry, buffer.getvalue())
    replace_bytes(path, stored.getvalue())
    enter_in_manifest(path)
    return path


def replace_bytes(path: Path, data: bytes) -> None:
    """Writes beside the file and moves into place: a reader never meets half a table."""
    beside = path.with_name(f".{path.name}.new")
    beside.write_bytes(data)
    os.replace(beside, path)


def enter_in_manifest(path: Path) -> None:
    """Notes size and SHA-256 of a table in the manifest beside it."""
    manifest = path.parent / "manifest.json"
    entries = json.loads(manifest.read_text()) if manifest.is_file() else {}
    data = path.read_bytes()
    entries[path.name] = {"bytes": len(data), "sha256": hashlib.sha256(data).hexdigest()}
    replace_bytes(manifest, (json.dumps(entries, indent=1, sort_keys=True) + "\n").encode())


def script_arguments(description: str) -> argparse.Namespace:
    """SOURCE_DIR and --out of a builder run as a script."""
    parser = argparse.ArgumentParser(description=description)
    parser.add_argument("source_dir", type=Path, help="folder of the unpacked source packages")
    parser.add_argument("--out", type=Path, default=None, help="where to write (default: tables/)")
    return parser.parse_args()
