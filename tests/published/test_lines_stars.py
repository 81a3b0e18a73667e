"""Coverage of published identifications in cool stars, read where the data lie.

Sources: Hinkle, Wallace, Valenti & Harmer 2000 (K giant, 5500-6500 A); Moore, Minnaert &
Houtgast 1966; Melendez et al. 2014, ApJ 791, 14 (solar lines).
"""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pytest

from linewright.errors import InputRefused
from linewright.lines.loading import load_catalogue
from linewright.lines.species import parse_species
from linewright.spectra.medium import vacuum_to_air

PUBLISHED = Path(__file__).resolve().parents[2].parent / "shared" / "published"
pytestmark = pytest.mark.skipif(
    not PUBLISHED.is_dir(), reason="the published identifications are not beside this checkout"
)


def coverage(name, column, reach=0.05):
    """Share of the rows with an absorption line of the same ion near, and median offset."""
    catalogue = load_catalogue(origins="stellar")
    air = vacuum_to_air(catalogue.wave)
    ions = [parse_species(n).ion for n in catalogue.species_names]
    found, offsets, total = 0, [], 0
    with open(PUBLISHED / name, encoding="utf-8") as stream:
        rows = list(csv.DictReader(line for line in stream if not line.startswith("#")))
    for row in rows:
        try:
            ion = parse_species(row[column]).ion
        except InputRefused:
            continue
        total += 1
        first, last = np.searchsorted(air, [float(row["wave"]) - reach, float(row["wave"]) + reach])
        same = [k for k in range(first, last) if ions[catalogue.species[k]] == ion]
        if same:
            found += 1
            offsets.append(min((float(row["wave"]) - air[k] for k in same), key=abs))
    return found / total, float(np.median(offsets)), total


def test_k_giant_identifications():
    share, offset, total = coverage("kgiant_ids_5500_6500.csv", "species")
    assert total > 1300
    assert share > 0.95
    assert abs(offset) < 0.002


def test_solar_identifications():
    share, _, total = coverage("solar_ids.csv", "species")
    assert total > 100
    assert share > 0.98


def test_solar_equivalent_width_lines():
    share, offset, _ = coverage("solar_ew.csv", "ion")
    assert share == 1.0
    assert abs(offset) < 0.002
