"""Predicted depths and coverage against the predicted masks of arve 0.8.3. Run by hand.

    python tests/studies/lines_masks.py FOLDER_OF_arve-0.8.3 [K5 F5 | G2 | damping]

The masks (MIT; line data extracted from VALD: test-only, never shipped) give vacuum wavelength
and central depth of the lines of dwarfs. Tuned on K5 and F5; G2 is scored with the conditions
interpolated between theirs. Spearman over lines deeper than 0.1 that have a counterpart (same
species within 0.02 A, the deepest predicted one); counterparts over lines deeper than 0.2,
3000-12000 A, atoms only: among the lines alone, and among the lines and the fine-structure,
hyperfine and isotopic components kept with them (the masks list H I by components).
"""

from __future__ import annotations

import csv
import io
import sys
import zipfile
from collections import Counter
from pathlib import Path

import numpy as np

ROOT = Path(__file__).resolve().parents[2]
sys.path.insert(0, str(ROOT / "app"))

from linewright.errors import InputRefused  # noqa: E402
from linewright.lines.components import component_waves  # noqa: E402
from linewright.lines.depths import catalogue_depths  # noqa: E402
from linewright.lines.loading import load_catalogue  # noqa: E402
from linewright.lines.species import normal_name  # noqa: E402

# mask: excitation temperature (0.86, 0.85 and 0.83 of 4400, 5770 and 6500 K), log10 of electron
# pressure (dyn cm-2); G2 lies between the two it was tuned on.
CONDITIONS = {"K5": (3785.0, -0.35), "G2": (4905.0, 0.15), "F5": (5380.0, 0.35)}
RANGE = (3000.0, 12000.0)
REACH = 0.02


def _mask_rows(folder: Path, name: str):
    """The rows of a mask as dictionaries of text."""
    path = folder / "arve" / "aux_data" / "masks" / f"{name}.csv.zip"
    with zipfile.ZipFile(path) as archive:
        member = next(n for n in archive.namelist() if not n.startswith("__"))
        yield from csv.DictReader(io.StringIO(archive.read(member).decode()))


def _species(text: str) -> str:
    """The canonical name of an atom; '' for molecules written as 'OH 1'."""
    try:
        return normal_name(text)
    except InputRefused:
        return ""


def read_mask(folder: Path, name: str) -> list[tuple[str, float, float]]:
    """(species, vacuum wavelength, depth) of the atoms of a mask."""
    rows = []
    for row in _mask_rows(folder, name):
        wave, species = float(row["wave_vald"]), _species(row["species"])
        if species and RANGE[0] < wave < RANGE[1]:
            rows.append((species, wave, float(row["depth_vald"])))
    return rows


def has_component(species: str, wave: float) -> bool:
    waves = component_waves(species)
    return bool(len(waves)) and float(np.min(np.abs(waves - wave))) < REACH


def score(folder: Path, name: str, catalogue) -> tuple[float, float, float]:
    """(Spearman, share with a line, share with a line or component); prints what is missing."""
    from scipy.stats import spearmanr

    depth = catalogue_depths(catalogue, *CONDITIONS[name])
    codes = {species: k for k, species in enumerate(catalogue.species_names)}
    seen, predicted, missing, total = [], [], [], 0
    for species, wave, published in read_mask(folder, name):
        first, last = np.searchsorted(catalogue.wave, [wave - REACH, wave + REACH])
        rows = first + np.flatnonzero(catalogue.species[first:last] == codes.get(species, -1))
        total += published > 0.2
        if not len(rows):
            if published > 0.2:
                missing.append((species, wave, published))
        elif published > 0.1:
            seen.append(published)
            predicted.append(np.nanmax(depth[rows]))
    correlation = float(spearmanr(seen, predicted)[0])
    share = 1.0 - len(missing) / total
    still = [row for row in missing if not has_component(*row[:2])]
    with_components = 1.0 - len(still) / total
    print(f"{name}: Spearman {correlation:.4f} ({len(seen)} lines deeper than 0.1); counterparts "
          f"{total - len(missing)} of {total} deeper than 0.2: {share:.4f}, with components {with_components:.4f}")
    print("   missing:", Counter(species for species, _, _ in still).most_common(12))
    return correlation, share, with_components


def damping(folder: Path, catalogue) -> None:
    """Stark widths against those of the F5 mask (log10 per electron), by species."""
    differences: dict[str, list[float]] = {}
    for row in _mask_rows(folder, "F5"):
        published = float(row["damping_stark"] or 0.0)
        species = _species(row["species"])
        if published >= 0.0 or species not in catalogue.species_names:
            continue
        wave, e_low = float(row["wave_vald"]), float(row["E_l"])
        first, last = np.searchsorted(catalogue.wave, [wave - REACH, wave + REACH])
        code = catalogue.species_names.index(species)
        for k in range(first, last):
            same = catalogue.species[k] == code and abs(catalogue.e_low[k] - e_low) < 0.002
            if same and np.isfinite(catalogue.gamma_stark[k]):
                differences.setdefault(species, []).append(catalogue.gamma_stark[k] - published)
    for species, values in sorted(differences.items(), key=lambda item: -len(item[1]))[:15]:
        centre = np.median(values)
        print(f"{species:7} n {len(values):5d}  median {centre:6.2f}  robust scatter "
              f"{1.4826 * np.median(np.abs(values - centre)):.2f} dex")


def main() -> None:
    folder, names = Path(sys.argv[1]), sys.argv[2:] or ["K5", "F5"]
    catalogue = load_catalogue(origins="stellar")
    if names == ["damping"]:
        damping(folder, catalogue)
        return
    for name in names:
        score(folder, name, catalogue)


if __name__ == "__main__":
    main()
