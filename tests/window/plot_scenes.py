"""Small spectra, sessions and rakes for the drawing tests."""

from __future__ import annotations

import numpy as np

from linewright.measure.features import FeatureTable
from linewright.session.model import (
    Candidate,
    Claim,
    ContinuumNodes,
    Session,
    SpectrumReference,
    VelocityResult,
)
from linewright.spectra.medium import air_to_vacuum
from linewright.spectra.spectrum import Segment, Spectrum


def spectrum(low=5000.0, high=5100.0, samples=20_000, medium="air", dips=()) -> Spectrum:
    """A flat spectrum with narrow dips, linear in its own medium."""
    own = np.linspace(low, high, samples)
    flux = np.ones(samples)
    for place in dips:
        flux -= 0.6 * np.exp(-(((own - place) / 0.06) ** 2))
    wave = air_to_vacuum(own) if medium == "air" else own
    return Spectrum((Segment(wave, flux, None, np.zeros(samples, bool)),), medium=medium)


def claim(species: str, wave: float, standing="firm", origin="stellar") -> Claim:
    line = Candidate(species, origin, wave, 0.001, 1.0, -1.0, 0.0, 0.99, 1.0, 0.0, 0.5, "")
    return Claim(species, 0.99, 0.99, 0.01, standing, origin=origin, candidates=(line,))


def session(own_waves, medium="air", standings=None, species=None) -> Session:
    """Features at own-medium wavelengths, numbered from 1, each claimed."""
    own_waves = np.asarray(own_waves, dtype=float)
    wave = air_to_vacuum(own_waves) if medium == "air" else own_waves
    count = len(wave)
    one, nan = np.ones(count), np.full(count, np.nan)
    table = FeatureTable(
        number=np.arange(1, count + 1),
        segment=np.zeros(count, int),
        component=np.zeros(count, int),
        sign=one.astype(int),
        wave=wave,
        wave_err=nan,
        significance=20 * one,
        depth=0.6 * one,
        depth_err=nan,
        fwhm=nan,
        fwhm_err=nan,
        ew=nan,
        ew_err=nan,
        continuum=one,
        flags=("",) * count,
    )
    names = species or ["Fe I", "Ti II", "Mg I", "Ba II"]
    standings = standings or ["firm"] * count
    claims = tuple(
        claim(names[i % len(names)], float(w), standings[i]) for i, w in enumerate(wave)
    )
    reference = SpectrumReference(
        path="", name="", sha256="", medium=medium, medium_from="", frame="rest", frame_from="",
        layout="", flux_unit="", samples=0, segments=1,
    )
    nodes = ContinuumNodes(np.array([wave[0] - 50, wave[-1] + 50]), np.ones(2))
    return Session(reference, table, claims, VelocityResult(), continuum=(nodes,))


def pixels(widget) -> np.ndarray:
    """The widget as shown, RGB, shape (height, width, 3), logical pixels at ratio 1."""
    image = widget.grab().toImage()
    image = image.convertToFormat(image.Format.Format_RGB32)
    data = np.frombuffer(image.constBits(), np.uint8).reshape(
        image.height(), image.bytesPerLine() // 4, 4
    )
    return data[:, : image.width(), 2::-1].copy()


def rgb(colour: str) -> np.ndarray:
    return np.array([int(colour[i : i + 2], 16) for i in (1, 3, 5)])
