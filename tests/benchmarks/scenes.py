"""Synthetic spectra, sessions and rakes of any size, and the widgets that show them."""

from __future__ import annotations

import numpy as np

from linewright.measure.features import FeatureTable
from linewright.session.model import (
    Candidate,
    Claim,
    Session,
    SpectrumReference,
    VelocityResult,
)
from linewright.spectra.spectrum import Segment, Spectrum
from linewright.window.plot import RakeData, SpectrumView

LOW, HIGH = 4000.0, 9000.0
SIZE = (1600, 900)
SPECIES = ("Fe I", "Ti II", "Mg I", "Ni I", "Ba II", "Cr I", "Na I", "Ca I")


def spectrum(samples: int, seed: int = 0) -> Spectrum:
    """Noise and absorption lines on a non-uniform vacuum wavelength grid."""
    rng = np.random.default_rng(seed)
    wave = np.cumsum(rng.uniform(0.5, 1.5, samples))
    wave = LOW + (HIGH - LOW) * (wave - wave[0]) / (wave[-1] - wave[0])
    flux = 1.0 + 0.01 * rng.standard_normal(samples)
    for place in rng.uniform(LOW, HIGH, 400):
        first, last = np.searchsorted(wave, [place - 1.0, place + 1.0])
        part = wave[first:last]
        flux[first:last] -= rng.uniform(0.1, 0.8) * np.exp(-(((part - place) / 0.15) ** 2))
    return Spectrum((Segment(wave, flux, None, np.zeros(samples, bool)),), medium="vacuum")


def session(features: int, claimed: bool) -> Session:
    """Evenly strewn features; ``claimed`` gives each a firm claim and so a label."""
    wave = np.linspace(LOW, HIGH, features + 2)[1:-1]
    ones, nan = np.ones(features), np.full(features, np.nan)
    table = FeatureTable(
        number=np.arange(1, features + 1),
        segment=np.zeros(features, int),
        component=np.zeros(features, int),
        sign=ones.astype(int),
        wave=wave,
        wave_err=nan,
        significance=50 * ones,
        depth=0.5 * ones,
        depth_err=nan,
        fwhm=nan,
        fwhm_err=nan,
        ew=nan,
        ew_err=nan,
        continuum=ones,
        flags=("",) * features,
    )
    reference = SpectrumReference(
        path="", name="synthetic", sha256="", medium="vacuum", medium_from="", frame="rest",
        frame_from="", layout="", flux_unit="", samples=0, segments=1,
    )
    claims = tuple(_claim(i, float(w)) if claimed else Claim() for i, w in enumerate(wave))
    return Session(reference, table, claims, VelocityResult())


def _claim(index: int, wave: float) -> Claim:
    species = SPECIES[index % len(SPECIES)]
    line = Candidate(species, "stellar", wave, 0.001, 1.0, -1.0, 0.0, 0.99, 1.0, 0.0, 0.5, "")
    return Claim(species, 0.99, 0.99, 0.01, "firm", origin="stellar", candidates=(line,))


def rake(teeth: int, rows: int = 4) -> RakeData:
    """Teeth strewn at random over the range."""
    rng = np.random.default_rng(1)
    wave = np.sort(rng.uniform(LOW, HIGH, teeth))
    row = rng.integers(0, rows, teeth)
    return RakeData(wave, rng.exponential(0.15, teeth).clip(0, 1), row, SPECIES[:rows])


def view(samples: int) -> SpectrumView:
    """A shown SpectrumView of the standard size."""
    widget = SpectrumView()
    widget.resize(*SIZE)
    widget.set_spectrum(spectrum(samples))
    widget.show()
    return widget


def lanes(widget: SpectrumView) -> tuple:
    return widget.strip, widget.plot, widget.rake, widget.axis
