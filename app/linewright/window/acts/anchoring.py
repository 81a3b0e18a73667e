"""A continuum anchor by its numbers, for those who would rather type than click."""

from __future__ import annotations

from ...spectra.medium import from_medium
from ..notices import Notice


def add(bench, text: str) -> None:
    """'5187.2 1.013': wavelength in the spectrum's own medium, then flux."""
    try:
        wave, flux = (float(part) for part in text.replace(";", " ").split())
    except ValueError:
        bench.notify(Notice(f"'{text}' is no anchor; type wavelength and flux, such as "
                            "5187.2 1.013", "refused", seconds=8, topic="anchor"))
        return
    own = bench.session.spectrum.medium
    bench.window.refresher.anchors.add(float(from_medium(wave, own)), flux)
