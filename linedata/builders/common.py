"""What the builders share: paths, deterministic archives, the manifest, air to vacuum."""

from __future__ import annotations

import argparse
import hashlib
import io
import json
import sys
import zipfile
from pathlib import Path

import numpy as np

LINEDATA = Path(__file__).resolve().parent.parent
TABLES = LINEDATA / "tables"
sys.path.insert(0, str(LINEDATA.parent / "app"))

from linewright.spectra.medium import air_to_vacuum, vacuum_to_air  # noqa: E402

from merging import merge  # noqa: E402

__all__ = ["air_to_vacuum", "vacuum_to_air"]

ORIGIN_CODE = {"stellar": 0, "nebular": 1, "telluric": 2, "interstellar": 3, "sky": 4, "lamp": 5}
EV_PER_CM = 1.0 / 8065.543937
_EPOCH = (1980, 1, 1, 0, 0, 0)


def source_file(folder: Path, pattern: str) -> Path:
    """The one file below ``folder`` that fits ``pattern``; raises FileNotFoundError."""
    hits = sorted(Path(folder).glob(pattern))
    if not hits:
        raise FileNotFoundError(f"{folder}: no {pattern}; unpack the source package there")
    return hits[0]


def write_table(name: str, columns: dict[str, np.ndarray], out: Path | None = None) -> Path:
    """Stored (uncompressed) .npz with fixed time stamps: same arrays, same bytes."""
    folder = Path(out) if out else TABLES
    folder.mkdir(parents=True, exist_ok=True)
    path = folder / f"{name}.npz"
    with zipfile.ZipFile(path, "w", zipfile.ZIP_STORED) as archive:
        for key in sorted(columns):
            buffer = io.BytesIO()
            np.lib.format.write_array(buffer, np.ascontiguousarray(columns[key]), version=(1, 0))
            entry = zipfile.ZipInfo(f"{key}.npy", _EPOCH)
            entry.external_attr = 0o644 << 16
            entry.create_system = 3
            archive.writestr(entry, buffer.getvalue())
    enter_in_manifest(path)
    return path


def enter_in_manifest(path: Path) -> None:
    """Notes size and SHA-256 of a table in the manifest beside it."""
    manifest = path.parent / "manifest.json"
    entries = json.loads(manifest.read_text()) if manifest.is_file() else {}
    data = path.read_bytes()
    entries[path.name] = {"bytes": len(data), "sha256": hashlib.sha256(data).hexdigest()}
    manifest.write_text(json.dumps(entries, indent=1, sort_keys=True) + "\n")


def _used(codes, names: list[str]) -> tuple[np.ndarray, list[str]]:
    """Codes and names without the names no row uses."""
    present, recoded = np.unique(np.asarray(codes).astype(int), return_inverse=True)
    return recoded, [names[code] for code in present]


def pack_lines(lines: dict[str, np.ndarray], names: list[str], keys: list[str]) -> dict:
    """Compact columns of a line table, repeats merged, sorted by wavelength.

    ``lines`` holds wave, wave_err, species, origin, source and any of e_low, loggf,
    loggf_err, emission, depth_ref, j_low, j_up, spread, grade (NaN or missing: unknown).
    """
    lines = dict(lines) if "depth_ref" in lines else dict(merge(lines))
    lines["species"], names = _used(lines["species"], names)
    lines["source"], keys = _used(lines["source"], keys)
    n = len(lines["wave"])
    blank = np.full(n, np.nan)
    order = np.lexsort((lines.get("e_low", blank), lines["species"], lines["wave"]))

    def column(key, dtype, fallback=blank):
        return np.asarray(lines.get(key, fallback))[order].astype(dtype)

    def doubled(key):
        j = np.asarray(lines.get(key, blank), float)[order]
        return np.where(np.isfinite(j), np.round(2 * np.nan_to_num(j)), -1).astype(np.int8)

    return {
        "wave": column("wave", "<f8"),
        "wave_err": column("wave_err", "<f4"),
        "species": column("species", "<i2"),
        "origin": column("origin", "u1"),
        "e_low": column("e_low", "<f4"),
        "loggf": column("loggf", "<f4"),
        "loggf_err": column("loggf_err", "<f2"),
        "emission": column("emission", "<f2"),
        "depth_ref": column("depth_ref", "<f4"),
        "j_low2": doubled("j_low"),
        "j_up2": doubled("j_up"),
        "spread": column("spread", "<f2", np.zeros(n)),
        "source": column("source", "<i2"),
        "species_names": np.array(names, dtype="<U16"),
        "source_keys": np.array(keys, dtype="<U48"),
    }


def script_arguments(description: str) -> argparse.Namespace:
    """SOURCE_DIR and --out of a builder run as a script."""
    parser = argparse.ArgumentParser(description=description)
    parser.add_argument("source_dir", type=Path, help="folder of the unpacked source packages")
    parser.add_argument("--out", type=Path, default=None, help="where to write (default: tables/)")
    return parser.parse_args()
