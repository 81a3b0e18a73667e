"""Pseudo-continuum: noise, crowded absorption, emission, slopes, broad dips."""

from __future__ import annotations

import numpy as np
import pytest
from measure_simulation import Lines, spectrum_of

from linewright.measure.core import measure_spectrum
from linewright.measure.continuum import bridge_dips, smooth_run
from linewright.measure.options import MeasureOptions

WAVE = 5000 + 0.02 * np.arange(30_000)


def _bias(flux, truth, options=None):
    measured = measure_spectrum(spectrum_of(WAVE, flux), *([options] if options else []))
    level = measured.segments[0].continuum_at(WAVE)
    return level / truth - 1.0, measured


@pytest.mark.parametrize("snr", [10.0, 100.0])
def test_pure_noise_is_not_climbed(snr):
    rng = np.random.default_rng(21)
    bias, _ = _bias(1 + rng.standard_normal(len(WAVE)) / snr, np.ones(len(WAVE)))
    assert abs(np.mean(bias)) < 0.1 / snr
    assert np.std(bias) < 0.15 / snr


def test_crowded_absorption_is_followed_along_its_upper_edge():
    """Lines drawn as in a cool dwarf: one per 3 FWHM, depths with a power law down to
    nothing, so that few samples are free of any line."""
    rng = np.random.default_rng(22)
    y = np.zeros(len(WAVE))
    for centre in rng.uniform(WAVE[0], WAVE[-1], 1500):
        depth = 0.9 * rng.uniform() ** 3
        a, b = np.searchsorted(WAVE, [centre - 0.6, centre + 0.6])
        y[a:b] = 1 - (1 - y[a:b]) * (1 - depth * np.exp(-0.5 * ((WAVE[a:b] - centre) / 0.057) ** 2))
    bias, measured = _bias(1 - y + 0.01 * rng.standard_normal(len(WAVE)), np.ones(len(WAVE)))
    assert abs(np.median(bias)) < 0.005
    assert np.mean(measured.features.sign > 0) > 0.98


def test_lines_near_the_threshold_do_not_draw_the_level_down():
    """Lines of 4.5 sigmas, 25 FWHM apart: 2 noise in depth, lost among single samples. The
    level was 0.07 per cent low; the mean over 400 lines is known to about 0.005."""
    spectrum, centres = Lines(6.0, 0.0212, 100.0, 400, 25.0).build(with_errors=True)
    measured = measure_spectrum(spectrum, MeasureOptions(threshold=4.0, resolution=5e4))
    level = measured.segments[0].continuum_at(centres)
    assert abs(np.mean(level) / 1000.0 - 1.0) < 2.5e-4


def test_emission_lines_lift_nothing():
    rng = np.random.default_rng(23)
    flux = 2.0 + 0.02 * rng.standard_normal(len(WAVE))
    centres = np.arange(5003, 5598, 5.0)
    heights = 10 ** rng.uniform(-0.5, 3.3, len(centres))
    for centre, height in zip(centres, heights, strict=True):
        flux += height * np.exp(-0.5 * ((WAVE - centre) / 0.08) ** 2)
    bias, measured = _bias(flux, np.full(len(WAVE), 2.0))
    assert np.max(np.abs(bias)) < 0.01
    f = measured.features
    for centre, height in zip(centres, heights, strict=True):
        k = np.argmin(np.abs(f.wave - centre))
        assert abs(f.wave[k] - centre) < 0.02 and f.sign[k] == -1
        assert f.depth[k] == pytest.approx(-height / 2.0, rel=0.1)


def test_the_edge_of_a_recombination_continuum_is_followed():
    """A drop of 40 per cent within 80 A, as at the Paschen limit of a nebula seen at R 3000,
    with bright lines on both sides: no trough is made of it."""
    rng = np.random.default_rng(25)
    wave = 4600 + 0.85 * np.arange(5600)
    level = 1.2 - 0.5 / (1 + np.exp(-(wave - 8300) / 20))
    flux = level * (1 + 0.004 * rng.standard_normal(len(wave)))
    for centre in rng.uniform(4620, 9340, 160):
        flux += 10 ** rng.uniform(-1.5, 2) * np.exp(-0.5 * ((wave - centre) / 1.1) ** 2)
    measured = measure_spectrum(spectrum_of(wave, flux))
    found = measured.segments[0].continuum_at(wave)
    far = np.abs(wave - 8300) > 90
    assert np.percentile(np.abs(found / level - 1)[far], 95) < 0.02
    troughs = measured.features.wave[measured.features.sign > 0]
    assert len(troughs) <= 3  # one false feature is expected


def test_a_blaze_is_followed():
    rng = np.random.default_rng(24)
    blaze = 1e4 * np.sinc((WAVE - 5300) / 700) ** 2
    flux = blaze * (1 + 0.01 * rng.standard_normal(len(WAVE)))
    bias, _ = _bias(flux, blaze)
    assert np.max(np.abs(bias)) < 0.015
    assert abs(np.mean(bias)) < 0.003


def test_an_isolated_dip_of_nodes_is_bridged_and_a_slope_is_not():
    centre = np.arange(20.0)
    level = 1 + 0.01 * centre + 0.0005 * np.random.default_rng(1).standard_normal(20)
    dipped = level.copy()
    dipped[9] *= 0.97
    assert bridge_dips(centre, dipped)[9] == pytest.approx(level[9], rel=2e-3)
    assert np.allclose(bridge_dips(centre, level), level, rtol=2e-3)


def test_the_cubic_is_monotone_between_nodes():
    centre, level = np.array([0.0, 1, 2, 3, 4]), np.array([1.0, 1.0, 5.0, 5.2, 9.0])
    curve = smooth_run(np.linspace(0, 4, 401), centre, level)
    assert np.all(np.diff(curve) >= -1e-12)
    assert np.allclose(smooth_run(centre, centre, level), level)
