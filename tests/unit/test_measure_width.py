"""Line width along a segment: the law that the blocks follow, where the truth is known."""

from __future__ import annotations

import numpy as np
import pytest
from measure_simulation import spectrum_of, wood
from truths import SPECTRA

from linewright import read_spectrum
from linewright.measure import MeasureOptions
from linewright.measure.prepare import prepare
from linewright.measure.width_law import (
    LINEAR, QUADRATIC, RESOLVING, WidthLaw, bent_law, constant_law,
)


@pytest.mark.parametrize("even_log, snr", [(True, 100.0), (False, 50.0)])
def test_a_resolving_power_that_doubles_is_followed(even_log, snr):
    """R from 30,000 to 60,000; a constant is off by 35 per cent at the ends."""
    spectrum, power = wood(30_000.0, 60_000.0, even_log=even_log, snr=snr)
    ready = prepare(spectrum.segments[0], MeasureOptions(), [])
    assert ready.level.law.kind in (LINEAR, QUADRATIC)
    assert ready.trace.width * power / ready.trace.wave == pytest.approx(1.0, abs=0.1)
    # the filters of detection are those of the local width
    assert ready.fwhm_pixels == pytest.approx(ready.trace.width / np.gradient(ready.trace.wave))


@pytest.mark.parametrize("even_log, snr", [(True, 30.0), (False, 100.0)])
def test_a_constant_resolving_power_has_no_trend(even_log, snr):
    spectrum, power = wood(40_000.0, 40_000.0, 1, even_log, snr)
    ready = prepare(spectrum.segments[0], MeasureOptions(), [])
    assert ready.level.law.kind == RESOLVING
    assert ready.trace.width * power / ready.trace.wave == pytest.approx(1.0, abs=0.05)


def test_scatter_alone_rarely_bends_the_law():
    """40 lists of 60 blocks that scatter by 10 per cent, one in ten blended to 1.5 widths."""
    rng, bent = np.random.default_rng(1), 0
    wave, span = np.linspace(5000.0, 6500.0, 60), (4990.0, 6510.0)
    for _ in range(40):
        fwhm = wave / 4e4 * np.exp(0.1 * rng.standard_normal(60)) * np.where(
            rng.random(60) < 0.1, 1.5, 1.0)
        bent += bent_law(constant_law(wave, fwhm, span, True), wave, fwhm, span).kind != RESOLVING
    assert bent <= 1


def test_no_law_goes_on_beyond_its_blocks_and_none_below_two_samples():
    law = WidthLaw(QUADRATIC, (np.log(0.1), 5.0, 90.0), 5500.0, 5000.0, 6000.0, 0.01, 40)
    ends = law.at(np.array([4000.0, 5000.0, 6000.0, 9000.0]))
    assert ends[0] / 4000.0 == pytest.approx(ends[1] / 5000.0)
    assert ends[3] / 9000.0 == pytest.approx(ends[2] / 6000.0)
    spectrum, _ = wood(60_000.0, 60_000.0, span=(5000.0, 5200.0))
    every = slice(None, None, 2)  # 1.5 samples per FWHM
    segment = spectrum.segments[0]
    coarse = spectrum_of(segment.wave[every], segment.flux[every], segment.uncertainty[every])
    assert prepare(coarse.segments[0], MeasureOptions(), []).fwhm_pixels.min() >= 2.0 - 1e-9


@pytest.mark.skipif(not SPECTRA.exists(), reason="the shared spectra are not here")
def test_the_sun_keeps_one_resolving_power():
    """R ~ 47,000 (the notes beside the spectrum); the Sun's own lines are a little broader."""
    ready = prepare(read_spectrum(SPECTRA / "sun_r47000.txt").segments[0], MeasureOptions(), [])
    assert ready.level.law.kind == RESOLVING
    assert 38_000 < np.median(ready.nodes.resolution_at(ready.nodes.width_wave)) < 49_000
