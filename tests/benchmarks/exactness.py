"""Target 7: no extreme of any pixel column lost (numbers), none displaced (picture)."""

from __future__ import annotations

import numpy as np
import scenes
from PySide6.QtGui import QImage
from targets import Row

from linewright.spectra.spectrum import Segment, Spectrum
from linewright.window.plot.extremes import PYRAMID_ABOVE, Extremes, PixelScale


def lost_extremes(samples: int) -> int:
    """Columns whose lowest or highest differs from a plain search through the samples."""
    part = scenes.spectrum(samples).segments[0]
    reduced = Extremes(part.wave, part.flux)
    scale = PixelScale(scenes.LOW + 17.3, scenes.HIGH - 211.7, 58.37, 1123.71)
    found = reduced.columns(scale)
    by_column = {c: (low, high) for c, low, high in zip(found.column, found.low, found.high)}
    bounds = np.searchsorted(part.wave, scale.edges())
    lost = 0
    for k, (start, stop) in enumerate(zip(bounds[:-1], bounds[1:])):
        if stop > start:
            inside = part.flux[start:stop]
            wanted = (inside.min(), inside.max())
            lost += by_column.get(scale.first_column() + k) != wanted
    return lost


def displaced_spikes(drain, samples: int = 400_000, spikes: int = 40) -> int:
    """One-sample spikes whose drawn column is absent or more than one pixel away."""
    rng = np.random.default_rng(5)
    wave = np.linspace(scenes.LOW, scenes.HIGH, samples)
    flux = np.ones(samples)
    at = np.sort(rng.choice(np.arange(samples // 50, samples - samples // 50), spikes, False))
    flux[at] = 0.0
    view = scenes.view(1000)
    view.set_spectrum(
        Spectrum((Segment(wave, flux, None, np.zeros(samples, bool)),), medium="vacuum")
    )
    view.set_flux_range(-0.1, 1.2)
    drain()
    picture = view.plot.grab().toImage().convertToFormat(QImage.Format.Format_Grayscale8)
    y = int(view.plot.labels.height + 0.5 * (view.plot.height() - view.plot.labels.height))
    row = np.array([picture.pixelColor(x, y).value() for x in range(picture.width())])
    dark = np.nonzero(row < 128)[0]
    places = view.plot.scale().pixels(wave[at])
    wrong = sum(np.min(np.abs(dark - np.floor(p)), initial=1e9) > 1 for p in places)
    view.close()
    return int(wrong)


def rows(drain) -> list[Row]:
    """Counts that must be zero, with no tolerance."""
    counts = [
        ("columns with a lost extreme, 1e5 samples", lost_extremes(100_000)),
        ("the same through the pyramid", lost_extremes(int(1.7 * PYRAMID_ABOVE))),
        ("spikes drawn more than a column away", displaced_spikes(drain)),
    ]
    return [
        Row("7", what, count, 0, 0, "aim" if count == 0 else "missed") for what, count in counts
    ]
