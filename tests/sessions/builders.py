"""Invented sessions for tests of containers, tables and figures; no science in the numbers."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from linewright.measure.features import FeatureTable
from linewright.session.model import (
    Candidate,
    Claim,
    ContinuumNodes,
    Orphan,
    RollRow,
    Session,
    SpectrumReference,
    TemperatureReading,
    VelocityResult,
    standing_of,
)
from linewright.spectra.medium import air_to_vacuum
from linewright.spectra.spectrum import Segment, Spectrum

SPECIES = ("Fe I", "Fe II", "Ti I", "Ti II", "Ca I", "Na I", "H I", "[O III]", "O2")


def feature_table(count: int, rng, segments: int = 1, low=5000.0, high=5400.0) -> FeatureTable:
    """``count`` features spread over ``segments``, some numbers unmeasured (NaN)."""
    segment = np.sort(rng.integers(0, segments, count))
    wave = rng.uniform(low, high, count)
    order = np.lexsort((wave, segment))
    sign = np.where(rng.random(count) < 0.1, -1, 1)
    depth = sign * rng.uniform(0.02, 0.9, count)
    fwhm = np.where(rng.random(count) < 0.1, np.nan, rng.uniform(0.08, 0.3, count))
    return FeatureTable(
        number=np.arange(1, count + 1),
        segment=segment,
        component=np.zeros(count, dtype=int),
        sign=sign,
        wave=wave[order],
        wave_err=rng.uniform(0.001, 0.01, count),
        significance=rng.uniform(5, 300, count),
        depth=depth,
        depth_err=np.abs(depth) * 0.02,
        fwhm=fwhm,
        fwhm_err=fwhm * 0.03,
        ew=depth * fwhm * 1064.0,
        ew_err=np.abs(depth) * fwhm * 30.0,
        continuum=np.ones(count),
        flags=tuple("blend" if rng.random() < 0.2 else "" for _ in range(count)),
    )


def candidate(rng, wave: float, probability: float) -> Candidate:
    species = SPECIES[int(rng.integers(len(SPECIES)))]
    loggf = float("nan") if species.startswith("[") else float(rng.uniform(-4, 0))
    return Candidate(
        species=species,
        origin="telluric" if species == "O2" else "stellar",
        wave=wave + float(rng.normal(0, 0.01)),
        wave_err=0.002,
        e_low=float(rng.uniform(0, 5)),
        loggf=loggf,
        velocity=12.5,
        probability=probability,
        share=float(rng.uniform(0.2, 1)),
        offset_sigma=float(rng.normal()),
        depth_predicted=float(rng.uniform(0, 1)),
        source="test2026",
    )


def claim(rng, wave: float) -> Claim:
    count = int(rng.integers(0, 5))
    if count == 0:
        return Claim()
    weights = np.sort(rng.dirichlet(np.ones(count + 1)))[::-1]
    candidates = tuple(candidate(rng, wave, float(w)) for w in weights[:count])
    best = candidates[0]
    blended = count > 2 and rng.random() < 0.5
    return Claim(
        species=best.species,
        probability=float(weights[0]),
        p_line=float(weights[0]),
        p_unlisted=float(weights[-1]),
        standing=standing_of(float(weights[0])),
        origin=best.origin,
        candidates=candidates,
        blend=((candidates[1].species, candidates[1].wave, 0.3),) if blended else (),
        runner_up=candidates[1].species if count > 1 else "",
    )


def session(count: int = 12, seed: int = 1, segments: int = 1, path: str = "", sha: str = ""):
    """A Session of ``count`` features in air, reproducible by ``seed``."""
    rng = np.random.default_rng(seed)
    features = feature_table(count, rng, segments)
    grid = np.linspace(-500, 500, 401)
    reference = SpectrumReference(
        path=path,
        name="invented",
        sha256=sha or "0" * 64,
        medium="air",
        medium_from="test",
        frame="barycentric",
        frame_from="test",
        layout="text columns",
        flux_unit="",
        samples=1000,
        segments=segments,
        read_options={"columns": {"wave": 1, "flux": 2}},
        coverage=((5000.0, 5200.0), (5210.0, 5400.0)),
    )
    return Session(
        spectrum=reference,
        features=features,
        claims=tuple(claim(rng, float(w)) for w in features.wave),
        velocity=VelocityResult(
            12.5, 0.05, 40.0, True, ((-88.0, -40.0),), grid, -((grid - 12.5) ** 2) / 100
        ),
        options={"velocity_range": (-500.0, 500.0), "seed": 0, "temperature": None},
        components=(("stellar", 12.5, 0.05), ("telluric", 0.1, float("nan"))),
        temperature_k=5500.0,
        log_pe=float("nan"),
        temperatures=(
            TemperatureReading("adopted", 5500.0, 90.0, used=True),
            TemperatureReading("curve of growth", 5480.0, float("nan"), used=True, note="40 lines"),
        ),
        roll_call=(RollRow("Fe I", 30, 28, 2, 1e-9, 0.05, 0.02, "present"),),
        orphans=(Orphan(3, 0.97, "Fe I 5100.0", "no line within 0.05 A"),) if count > 2 else (),
        continuum=(ContinuumNodes(np.array([5000.0, 5400.0]), np.array([1.0, 1.1])),),
        measurement={"significance_cut": 4.2, "noise": np.float64(0.01)},
        catalogue_id="test-catalogue",
        version="0.0.test",
        seed=0,
        warnings=("an invented warning",),
    )


def spectrum_of(made: Session, step: float = 0.02) -> Spectrum:
    """A noiseless spectrum with a Gaussian for each feature of the session."""
    low, high = float(made.features.wave.min()) - 5, float(made.features.wave.max()) + 5
    wave = np.arange(low, high, step)
    flux = np.ones_like(wave)
    features = made.features
    width = np.nan_to_num(features.fwhm, nan=0.15) / 2.3548
    for centre, depth, sigma in zip(features.wave, features.depth, width, strict=True):
        flux -= depth * np.exp(-0.5 * ((wave - centre) / sigma) ** 2)
    segment = Segment(wave, flux, None, np.zeros(len(wave), dtype=bool))
    return Spectrum((segment,), medium="air", frame="barycentric", name="invented")


def named_session(lines, medium: str = "air", spread: float = 0.2, emission: bool = False):
    """A Session whose features are the given (species, own-medium wavelength, depth)."""
    made = session(len(lines), seed=5)
    waves = np.array([wave for _, wave, _ in lines])
    vacuum = air_to_vacuum(waves) if medium == "air" else waves
    count = len(lines)
    features = replace(
        made.features,
        wave=vacuum,
        depth=np.array([-depth if emission else depth for _, _, depth in lines]),
        sign=np.full(count, -1 if emission else 1),
        fwhm=np.full(count, spread),
    )
    claims = tuple(
        Claim(
            species=species,
            probability=0.99,
            p_line=0.99,
            p_unlisted=0.01,
            standing="firm",
            origin="stellar",
            candidates=(
                Candidate(
                    species,
                    "stellar",
                    float(w),
                    0.001,
                    1.0,
                    -1.0,
                    0.0,
                    0.99,
                    1.0,
                    0.0,
                    0.5,
                    "t",
                ),
            ),
        )
        for (species, _, _), w in zip(lines, vacuum, strict=True)
    )
    return replace(
        made,
        spectrum=replace(made.spectrum, medium=medium),
        features=features,
        claims=claims,
        orphans=(),
    )
