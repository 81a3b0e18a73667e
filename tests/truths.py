"""Published identifications as feature tables, and invented features among them.

The tables themselves stay outside the project; each reader names its source.
"""

from __future__ import annotations

from dataclasses import fields, replace
from pathlib import Path

import numpy as np

from linewright.measure.features import FeatureTable
from linewright.measure.features_from import features_from_columns
from linewright.spectra.medium import C_KM_S, air_to_vacuum, vacuum_to_air

SHARED = Path(__file__).resolve().parents[1].parent / "shared"
PUBLISHED, SPECTRA = SHARED / "published", SHARED / "spectra"
# Hinkle, Wallace, Valenti & Harmer 2000 list nothing over 6069.3-6078.5 A.
KGIANT_COVERAGE = ((5501.3, 6069.3), (6078.5, 6499.8))
FORBIDDEN_OXYGEN = (5577.34, 6300.30, 6363.78)  # air; NIST ASD: [O I], printed there as O I
SUN_GAPS = ((5759.0, 5828.5), (6065.5, 6074.5))
# Air ranges where telluric lines stand among solar ones in the Sun's spectrum.
TELLURIC_WINDOWS = ((5880.0, 6000.0), (6275.0, 6320.0))


def rows_of(path):
    """Comma-separated rows that begin with a digit."""
    return [
        [cell.strip() for cell in line.split(",")]
        for line in path.read_text().splitlines()
        if line[:1].isdigit()
    ]


def kgiant_lines():
    """(air wavelength, species) inside the coverage.

    Hinkle, Wallace, Valenti & Harmer 2000, Visible and Near Infrared Atlas of the Arcturus
    Spectrum 3727-9300 A, Appendix I.
    """
    rows = rows_of(PUBLISHED / "kgiant_ids_5500_6500.csv")
    wave = np.array([float(r[0]) for r in rows])
    species = np.array([r[1] for r in rows])
    apart = np.min(np.abs(wave[:, None] - np.array(FORBIDDEN_OXYGEN)), axis=1)
    species = np.where((species == "O I") & (apart < 0.02), "[O I]", species)
    keep = within(wave, KGIANT_COVERAGE)
    return wave[keep], species[keep]


def within(wave, ranges):
    """True inside any of the (low, high) ranges."""
    wave = np.asarray(wave, dtype=float)
    return np.any([(wave >= low) & (wave <= high) for low, high in ranges], axis=0)


def kgiant_table(rng, *, sigma=0.01, velocity=0.0, invented=0.1, keep=None):
    """(FeatureTable, truth) of the K giant's list with noise and invented features.

    sigma: position noise, Angstrom; invented: their number as a share of the real ones, at
    least 0.1 A (a line width) from any listed line; keep: use so many random lines only;
    truth: species, '' for invented ones. Sorted by wavelength.
    """
    wave, species = kgiant_lines()
    listed = wave
    if keep is not None:
        chosen = np.sort(rng.choice(len(wave), keep, replace=False))
        wave, species = wave[chosen], species[chosen]
    extra = scatter_inside(rng, round(invented * len(wave)), KGIANT_COVERAGE, listed, 0.1)
    x = np.concatenate([wave + rng.normal(0, sigma, len(wave)), extra])
    truth = np.concatenate([species, [""] * len(extra)])
    order = np.argsort(x)
    vacuum = air_to_vacuum(x[order]) * (1 + velocity / C_KM_S)
    return features_from_columns(vacuum, wave_err=sigma), truth[order]


def seen_ranges(ranges, velocity):
    """Air ranges of a source at rest as they are seen at ``velocity`` km/s."""
    return tuple(
        tuple(vacuum_to_air(air_to_vacuum(np.array(r)) * (1 + velocity / C_KM_S)).tolist())
        for r in ranges
    )


def scatter_inside(rng, count, ranges, taken, distance):
    """``count`` places drawn inside ``ranges``, each ``distance`` away from ``taken``."""
    ranges = np.asarray(ranges, dtype=float)
    lengths = ranges[:, 1] - ranges[:, 0]
    places: list[float] = []
    while len(places) < count:
        low, high = ranges[rng.choice(len(ranges), p=lengths / lengths.sum())]
        x = rng.uniform(low, high)
        if np.min(np.abs(np.asarray(taken) - x)) >= distance:
            places.append(x)
    return np.array(places)


SYMBOLS = {
    6: "C", 8: "O", 11: "Na", 12: "Mg", 13: "Al", 14: "Si", 16: "S", 19: "K", 20: "Ca",
    21: "Sc", 22: "Ti", 23: "V", 24: "Cr", 25: "Mn", 26: "Fe", 27: "Co", 28: "Ni", 29: "Cu",
    30: "Zn", 38: "Sr", 39: "Y", 40: "Zr", 56: "Ba", 57: "La", 58: "Ce", 60: "Nd", 62: "Sm",
    63: "Eu",
}  # fmt: skip


def solar_lines(minimum_ew=10.0):
    """(air wavelength, equivalent width mA, set of species) of both solar tables.

    Moore, Minnaert & Houtgast 1966, NBS Monograph 61, and Melendez et al. 2014, ApJ 791,
    14, table 1; lines in the gaps of the Sun's file are left out.
    """
    lines = []
    for row in rows_of(PUBLISHED / "solar_ids.csv"):
        names = {name.split("(")[0].strip(' "') for name in row[2:]}
        lines.append((float(row[0]), float(row[1]), names))
    for row in rows_of(PUBLISHED / "solar_ew.csv"):
        code = row[1]
        name = f"{SYMBOLS[int(float(code))]} {'I' if code.endswith('.0') else 'II'}"
        lines.append((float(row[0]), float(row[4]), {name}))
    return [
        line
        for line in lines
        if line[1] > minimum_ew and 4836 < line[0] < 6722 and not within([line[0]], SUN_GAPS)[0]
    ]


def with_invented(features: FeatureTable, coverage, rng, share=0.1):
    """(FeatureTable, is_invented): features with ``share`` more absorption features, their
    depths and widths those of real ones, at least one FWHM from any other."""
    donors = np.nonzero(features.sign > 0)[0]
    ranges = np.asarray(coverage)
    lengths = ranges[:, 1] - ranges[:, 0]
    taken, source = list(features.wave), []
    places: list[float] = []
    while len(places) < round(share * len(features)):
        donor = donors[rng.integers(len(donors))]
        low, high = ranges[rng.choice(len(ranges), p=lengths / lengths.sum())]
        x = rng.uniform(low, high)
        if np.min(np.abs(np.array(taken) - x)) > features.fwhm[donor]:
            places.append(x)
            taken.append(x)
            source.append(donor)
    extra = replace(features.take(np.array(source)), wave=np.array(places))
    columns = {}
    for field in fields(FeatureTable):
        one, two = getattr(features, field.name), getattr(extra, field.name)
        columns[field.name] = one + two if field.name == "flags" else np.concatenate([one, two])
    joined = FeatureTable(**columns)
    order = np.argsort(joined.wave, kind="stable")
    invented = (np.arange(len(joined)) >= len(features))[order]
    joined = replace(joined.take(order), number=np.arange(1, len(joined) + 1))
    return joined, invented


def upper_bound(hits: int, trials: int) -> float:
    """95 % one-sided upper bound of a rate (Clopper-Pearson)."""
    from scipy.stats import beta

    return 1.0 if hits >= trials else float(beta.ppf(0.95, hits + 1, trials - hits))
