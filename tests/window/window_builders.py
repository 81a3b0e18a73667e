"""A synthetic spectrum, catalogue and solved session for tests of the window."""

from __future__ import annotations

import numpy as np

from linewright.lines.catalogue import LineCatalogue
from linewright.measure.features import FeatureTable
from linewright.session.model import (
    Candidate,
    Claim,
    Orphan,
    RollRow,
    Session,
    SpectrumReference,
    VelocityResult,
    standing_of,
)
from linewright.spectra.medium import C_KM_S, air_to_vacuum, vacuum_to_air
from linewright.spectra.spectrum import Segment, Spectrum

SPECIES = ("Fe I", "Ti II", "Mg I", "Ca I", "Cr I", "Ni I")
VELOCITY = 12.0


def lines_of(count: int, low: float = 5100.0, high: float = 5300.0, seed: int = 1):
    """(vacuum wavelengths, species index, depth) of invented lines, ascending."""
    rng = np.random.default_rng(seed)
    wave = np.sort(rng.uniform(low, high, count))
    keep = np.concatenate([[True], np.diff(wave) > 0.12 * (high - low) / count])
    wave = wave[keep]
    return wave, rng.integers(0, len(SPECIES), len(wave)), rng.uniform(0.1, 0.7, len(wave))


def catalogue_of(count: int = 400, **more) -> LineCatalogue:
    wave, species, depth = lines_of(count, **more)
    n = len(wave)
    nan = np.full(n, np.nan)
    return LineCatalogue(
        wave=wave, wave_err=np.full(n, 0.002), species=species.astype(np.int32),
        origin=np.zeros(n, dtype=np.int8), e_low=np.full(n, 2.5), loggf=np.log10(depth) - 1.0,
        loggf_err=np.full(n, 0.1), emission=nan, depth_ref=nan, j_low=nan, j_up=nan,
        spread=np.zeros(n), source=np.zeros(n, dtype=np.int32), species_names=SPECIES,
        source_keys=("Invented2024",), identity="invented",
    )


def spectrum_of(catalogue: LineCatalogue, medium: str = "air", samples: int = 20000,
                path: str = "") -> Spectrum:
    """A normalised spectrum whose lines stand at VELOCITY."""
    low, high = float(catalogue.wave[0]) - 2, float(catalogue.wave[-1]) + 2
    wave = np.linspace(low, high, samples)
    flux = np.ones(samples)
    depth = 10.0 ** (catalogue.loggf + 1.0)
    for centre, d in zip(catalogue.wave * (1 + VELOCITY / C_KM_S), depth, strict=True):
        near = slice(*np.searchsorted(wave, [centre - 1, centre + 1]))
        flux[near] *= 1 - d * np.exp(-0.5 * ((wave[near] - centre) / 0.05) ** 2)
    flux += np.random.default_rng(2).normal(0, 0.002, samples)
    segment = Segment(wave, flux, np.full(samples, 0.002), np.zeros(samples, dtype=bool))
    return Spectrum((segment,), medium, "test", "rest", "test", "relative", "invented.txt", path,
                    "0" * 64, "text")


def write_text(spectrum: Spectrum, path, medium: str = "air") -> None:
    """The spectrum as two columns (flux, wavelength in a medium)."""
    s = spectrum.segments[0]
    wave = vacuum_to_air(s.wave) if medium == "air" else s.wave
    np.savetxt(path, np.column_stack([wave, s.flux]), fmt="%.5f %.6f")


def features_of(catalogue: LineCatalogue) -> FeatureTable:
    n = len(catalogue)
    depth = 10.0 ** (catalogue.loggf + 1.0)
    full = np.full
    return FeatureTable(
        number=np.arange(1, n + 1), segment=np.zeros(n, dtype=int),
        component=np.zeros(n, dtype=int), sign=np.ones(n, dtype=int),
        wave=catalogue.wave * (1 + VELOCITY / C_KM_S), wave_err=full(n, 0.003),
        significance=200 * depth, depth=depth, depth_err=full(n, 0.004), fwhm=full(n, 0.118),
        fwhm_err=full(n, 0.003), ew=depth * 125, ew_err=full(n, 1.2), continuum=full(n, 1.0),
        flags=("",) * n,
    )


def candidate_of(catalogue, row: int, probability: float, share: float, offset: float):
    return Candidate(
        catalogue.species_of(row), "stellar", float(catalogue.wave[row]), 0.002,
        float(catalogue.e_low[row]), float(catalogue.loggf[row]), VELOCITY, probability, share,
        offset, float(10.0 ** (catalogue.loggf[row] + 1.0)), "Invented2024")


def claim_of(catalogue, row: int, rng) -> Claim:
    p = float(rng.beta(4, 0.6))
    other = (row + 1) % len(catalogue)
    candidates = (candidate_of(catalogue, row, p, 0.8, float(rng.normal())),
                  candidate_of(catalogue, other, (1 - p) * 0.7, 0.2, 6.3))
    return Claim(candidates[0].species, p, p, (1 - p) * 0.3, standing_of(p), "machine", "stellar",
                 candidates, None, (), candidates[1].species)


def session_of(spectrum: Spectrum, catalogue: LineCatalogue, seed: int = 3) -> Session:
    """Every line of the catalogue as a feature, claimed for itself with varied probability."""
    rng = np.random.default_rng(seed)
    features = features_of(catalogue)
    claims = tuple(claim_of(catalogue, i, rng) for i in range(len(catalogue)))
    grid = np.linspace(-500, 500, 1001)
    score = 40 * np.exp(-0.5 * ((grid - VELOCITY) / 4) ** 2) + rng.uniform(0, 4, 1001)
    low, high = spectrum.segments[0].wave[[0, -1]]
    return Session(
        spectrum=SpectrumReference(
            spectrum.path, spectrum.name, spectrum.sha256, spectrum.medium, "test", "rest",
            "test", "text", "relative", spectrum.samples, 1,
            coverage=((float(low), float(high)),)),
        features=features, claims=claims,
        velocity=VelocityResult(VELOCITY, 0.05, 30.0, True, ((300.0, 31.0),), grid, score),
        temperature_k=5100.0, log_pe=1.0, roll_call=_roll_call(catalogue),
        orphans=(Orphan(3, 0.8, "Fe I 5102.1", "the nearest line is 5 σ away"),
                 Orphan(9, 0.7, "Ca I 5120.3", "the nearest line is far too weak")),
        catalogue_id="invented")


def _roll_call(catalogue) -> tuple[RollRow, ...]:
    counts = np.bincount(catalogue.species, minlength=len(SPECIES))
    rows = [RollRow(name, int(n), int(n), 0, 1e-9, 0.1, 0.05, "present")
            for name, n in zip(SPECIES, counts, strict=True)]
    return (*rows, RollRow("Ba II", 12, 1, 11, 0.4, float("nan"), float("nan"), "absent"))


def vacuum(wave_air: float) -> float:
    return float(air_to_vacuum(wave_air))
