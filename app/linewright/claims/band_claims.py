"""Bands as rows of the Ledger: a feature at each head, claimed for its molecule."""

from __future__ import annotations

import numpy as np

from ..lines.bands import load_bands
from ..measure.features import FeatureTable
from ..spectra.medium import C_KM_S
from .added_rows import BAND, flagged_as, with_rows
from .model import Candidate, Claim, standing_of
from .molecules import SeenBand

HEAD_ERROR = 1.0  # Angstrom: the head is a step, not a line


def with_band_rows(features: FeatureTable, claims, bands, velocity: float):
    """(features, claims) with one row for each band seen, numbered on from the last.

    depth: the drop at the head; fwhm and equivalent width are not measured. bands: SeenBand;
    velocity: km/s, of the star.
    """
    if not bands:
        return features, claims
    return with_rows(
        features, claims, _rows(features, bands), [_claim(b, velocity) for b in bands]
    )


def _rows(features: FeatureTable, bands) -> FeatureTable:
    n, nothing = len(bands), np.full(len(bands), np.nan)
    wave = np.array([b.band.head * b.low / b.band.low for b in bands])
    nearest = [int(np.argmin(np.abs(features.wave - x))) for x in wave]
    return FeatureTable(
        number=np.zeros(n, dtype=int), segment=features.segment[nearest],
        component=np.zeros(n, dtype=int), sign=np.ones(n, dtype=int), wave=wave,
        wave_err=np.array([max(b.band.error, HEAD_ERROR) for b in bands]),
        significance=np.array([b.sigma for b in bands]),
        depth=np.array([b.step for b in bands]),
        depth_err=np.array([b.step / b.sigma for b in bands]),
        fwhm=nothing, fwhm_err=nothing, ew=nothing, ew_err=nothing,
        continuum=features.continuum[nearest], flags=(BAND,) * n,
    )  # fmt: skip


def _claim(seen: SeenBand, velocity: float) -> Claim:
    """Probability: of the molecule (the chance that a displaced set of heads does as well) and
    of this head's step among the spectrum's own."""
    p = (1.0 - _tail(seen.significance)) * (1.0 - _tail(seen.sigma))
    line = Candidate(
        seen.band.molecule, "molecular", seen.band.head, seen.band.error, float("nan"),
        float("nan"), velocity, p, 1.0, 0.0, float("nan"), seen.band.source,
    )  # fmt: skip
    return Claim(seen.band.molecule, p, p, 1.0 - p, standing_of(p), origin="molecular",
                 candidates=(line,))


def _tail(sigma: float) -> float:
    """One-sided normal tail."""
    from math import erfc, sqrt

    return 0.5 * erfc(sigma / sqrt(2.0))


def is_band(features: FeatureTable):
    """True where a row stands for a band's head; (f,)."""
    return flagged_as(features, (BAND,))


def band_ranges(features: FeatureTable, claims) -> tuple[tuple[float, float], ...]:
    """Observed vacuum ranges of the bands that rows of a table stand for, but for those that a
    person set aside."""
    return tuple((band.low * factor, band.high * factor)
                 for band, factor, _row in _seen(features, claims))


def named_bands(features: FeatureTable, claims):
    """(molecule, head, low, high, step seen) of the same bands; rest vacuum Angstrom."""
    return [(band.molecule, band.head, band.low, band.high, float(features.depth[row]))
            for band, _factor, row in _seen(features, claims)]


def _seen(features: FeatureTable, claims):
    """(Band, 1 + v/c, row) of the rows that stand for a band."""
    known = {(b.molecule, round(b.head, 3)): b for b in load_bands()}
    for i in np.nonzero(is_band(features))[0].tolist():
        line = claims[i].candidates[0] if claims[i].candidates else None
        band = known.get((line.species, round(line.wave, 3))) if line else None
        if band is not None and claims[i].standing != "set aside":
            yield band, 1.0 + line.velocity / C_KM_S, i


def band_warning(bands) -> tuple[str, ...]:
    """A sentence on the molecules seen and what that means."""
    if not bands:
        return ()
    names = sorted({b.band.molecule for b in bands})
    return (
        f"bands of {', '.join(names)} are seen ({len(bands)} heads): inside them shallow features "
        "are not claimed firmly",
    )
