"""What sets the automatic flux scale: lines do, hits of one sample do not."""

from __future__ import annotations

import numpy as np

from linewright.spectra.spectrum import Segment, Spectrum
from linewright.window.plot import SpectrumView


def test_a_hit_of_one_sample_does_not_set_the_flux_scale(qtbot):
    """A cosmic ray is drawn cut off; an emission line two samples wide sets the scale."""
    wave = np.linspace(5000.0, 5100.0, 40_000)
    calm = 1.0 + 0.01 * np.random.default_rng(3).standard_normal(len(wave))
    hit, line = calm.copy(), calm.copy()
    hit[20_000] += 50.0
    # critically sampled: FWHM of two samples
    line += 1.0 * np.exp(-4 * np.log(2) * ((np.arange(len(wave)) - 20_000.3) / 2.0) ** 2)
    shown = []
    for flux in (calm, hit, line):
        view = SpectrumView()
        qtbot.addWidget(view)
        view.resize(900, 500)
        segment = Segment(wave, flux, None, np.zeros(len(wave), dtype=bool))
        view.set_spectrum(Spectrum((segment,), medium="vacuum"))
        with qtbot.waitExposed(view):
            view.show()
        view.plot.repaint()
        assert view.plot.failed == ""
        shown.append(view.plot.flux_shown)
    assert shown[1][1] < 1.2 * shown[0][1] < 2.0
    assert shown[2][1] > 1.8
