"""The session of a spectrum that was opened and not yet solved."""

from __future__ import annotations

import numpy as np

from ..measure.features import FeatureTable
from ..session.model import Session, SpectrumReference, VelocityResult
from ..spectra.spectrum import Spectrum


def no_features() -> FeatureTable:
    """A feature table of no rows."""
    whole, real = np.zeros(0, dtype=np.int64), np.zeros(0)
    return FeatureTable(whole, whole, whole, whole, *([real] * 10), flags=())


def reference_of(spectrum: Spectrum) -> SpectrumReference:
    """How a session points at this spectrum; coverage is left to the solve."""
    names = ("path", "name", "sha256", "medium", "medium_from", "frame", "frame_from",
             "layout", "flux_unit", "read_options")
    return SpectrumReference(
        **{name: getattr(spectrum, name) for name in names},
        samples=spectrum.samples,
        segments=len(spectrum.segments),
    )


def unsolved_session(spectrum: Spectrum) -> Session:
    """A session without features: picks and notes can start at once."""
    return Session(
        spectrum=reference_of(spectrum),
        features=no_features(),
        claims=(),
        velocity=VelocityResult(velocity=0.0, how="given"),
        warnings=spectrum.warnings,
    )
