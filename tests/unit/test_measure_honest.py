"""Noise believed or refuted, spikes set aside, crowded spectra without an uncertainty array."""

from __future__ import annotations

import warnings
from pathlib import Path

import numpy as np
import pytest
from measure_simulation import Lines, pulls_of, smooth_noise, spectrum_of


from linewright.measure import MeasureOptions, measure_spectrum
from linewright.measure.broad import _area
from linewright.measure.floor import noise_floor
from linewright.measure.groups import Trace
from linewright.spectra.reading import read_spectrum

SAMPLES = Path(__file__).resolve().parents[2] / "sample_spectra"


def _trace(n: int) -> Trace:
    one = np.ones(n)
    wave = 5000 + 0.6 * np.arange(n)
    y = 0.5 * np.exp(-0.5 * ((wave - wave[-1]) / 4.0) ** 2)
    return Trace(wave, y, 0.005 * one, one > 0, 2.5 * one, 0.001 * one, np.array([1.0]), 0 * one)


@pytest.mark.parametrize("index", [0, 59, 60, 119])
def test_a_centre_fitted_beyond_its_stretch_still_has_feet(index):
    """A broad line cut by the end of a stretch may be fitted with its centre outside."""
    trace = _trace(120)
    area, error = _area(trace, trace.y, index, 1, 10.0, np.array([60, 110]))
    assert np.isfinite(area) and error > 0


def test_the_floor_tells_white_noise_from_correlated():
    rng = np.random.default_rng(31)
    good, runs = np.ones(20_000, dtype=bool), [slice(0, 20_000)]
    white = noise_floor(100 + smooth_noise(rng, 20_000, 0.0), good, runs)
    assert white.flat and np.median(white.sigma) == pytest.approx(1.0, rel=0.06)
    smooth = noise_floor(100 + smooth_noise(rng, 20_000, 0.8), good, runs)
    assert not smooth.white and np.median(smooth.sigma) < 0.5


@pytest.mark.parametrize("pixels", [3.0, 4.0, 6.0])
def test_crowded_lines_do_not_refute_a_true_uncertainty_array(pixels):
    lines = Lines(pixels, 0.3, 100.0, 400, 3.0)
    measured = measure_spectrum(lines.build(with_errors=True)[0])
    assert measured.warnings == ()
    assert np.median(measured.segments[0].noise) == pytest.approx(0.01, rel=0.03)


def test_correlated_samples_do_not_lower_a_true_uncertainty_array():
    rng = np.random.default_rng(32)
    wave = 5000 + 0.5 * np.arange(6000)
    flux = 1 + 0.02 * smooth_noise(rng, 6000, 1.0)
    measured = measure_spectrum(spectrum_of(wave, flux, np.full(6000, 0.02)))
    assert measured.warnings == ()


@pytest.mark.parametrize("pixels", [2.0, 3.0, 4.0])
def test_crowds_without_an_uncertainty_array_are_found_all_the_same(pixels):
    """One line per 3 FWHM, no sample free of lines: the noise is the floor's."""
    pulls, found, measured = pulls_of(Lines(pixels, 0.3, 100.0, 500, 3.0))
    assert found >= 0.99
    assert len(measured.features) <= 510
    assert np.median(measured.segments[0].noise) == pytest.approx(0.01, rel=0.15)
    assert 0.8 < np.std(pulls["wave"]) < 1.2


def test_hits_beside_lines_are_set_aside_as_spikes():
    lines = Lines(4.5, 0.5, 150.0, 100, 12.0, seed=4)
    spectrum, centres = lines.build(with_errors=True)
    segment = spectrum.segments[0]
    flux = segment.flux.copy()
    at = np.searchsorted(segment.wave, centres[5:95:10] + 0.4 * lines.fwhm)
    flux[at] += 700.0
    flux[at[::2] + 1] += 400.0
    hit = spectrum_of(segment.wave, flux, segment.uncertainty)
    f = measure_spectrum(hit, MeasureOptions(resolution=50_000)).features
    spikes = np.flatnonzero(["spike" in words for words in f.flags])
    assert len(spikes) == len(at)
    assert np.allclose(np.sort(f.wave[spikes]), segment.wave[at], atol=1e-6)
    assert np.all(f.sign[spikes] == -1)
    lone = np.setdiff1d(np.arange(len(f)), spikes)
    near = [lone[np.argmin(np.abs(f.wave[lone] - c))] for c in centres[5:95:10]]
    assert np.all(np.abs(f.wave[near] - centres[5:95:10]) < 5 * f.wave_err[near])
    assert np.all(np.abs(f.depth[near] - 0.5) < 5 * f.depth_err[near])


def test_sharp_lines_are_no_spikes():
    spectrum, centres = Lines(3.0, -30.0, 100.0, 60, 30.0).build()
    f = measure_spectrum(spectrum).features
    assert not any("spike" in words for words in f.flags)
    assert all(np.min(np.abs(f.wave - c)) < 0.01 for c in centres)


@pytest.mark.skipif(not SAMPLES.exists(), reason="the sample spectra are absent")
def test_samples_keep_their_uncertainties_and_show_their_cosmic_rays():
    from astropy.table import Table

    for name in ("double_lined.fits", "metal_poor.fits"):
        assert not [w for w in measure_spectrum(read_spectrum(SAMPLES / name)).warnings
                    if "rescaled" in w]
    spectrum = read_spectrum(SAMPLES / "cool_giant.fits")
    measured = measure_spectrum(spectrum, MeasureOptions(resolution=spectrum.resolution))
    f = measured.features
    spikes = f.wave[["spike" in words for words in f.flags]]
    truth = Table.read(SAMPLES / "cool_giant_truth.ecsv", format="ascii.ecsv")
    hits = np.array(truth["wave"][truth["origin"] == "artefact"])
    inside = np.any([(hits > a) & (hits < b) for a, b in measured.coverage], axis=0)
    seen = [np.min(np.abs(spikes - w)) < 0.1 for w in hits[inside]]
    assert np.mean(seen) >= 0.85
    away = [np.min(np.abs(hits - w)) > 0.2 for w in spikes]
    assert sum(away) <= 0.15 * len(spikes)


def test_odd_little_spectra_raise_no_numpy_warnings():
    rng = np.random.default_rng(33)
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        for n in (31, 45, 64, 200):
            wave = 6000 + 0.5 * np.arange(n)
            measure_spectrum(spectrum_of(wave, 3 + 0.1 * rng.standard_normal(n)))
            measure_spectrum(spectrum_of(wave, 3 + 1e-9 * rng.standard_normal(n), np.ones(n)))


@pytest.mark.parametrize("resolution", [50_000, None])
def test_few_shallow_lines_are_searched_for_at_their_own_width(resolution):
    """Lines of eight sigmas, seen singly by no block, must not pass for broad ones."""
    lines = Lines(3.0, 0.0533, 100.0, 100, 25.0, seed=1)
    spectrum, centres = lines.build(with_errors=True)
    measured = measure_spectrum(spectrum, MeasureOptions(threshold=4.0, resolution=resolution))
    assert np.median(measured.segments[0].width_pixels) == pytest.approx(3.0, rel=0.25)
    f = measured.features
    assert np.mean([np.min(np.abs(f.wave - c)) < 0.7 * lines.fwhm for c in centres]) >= 0.97


def test_noise_correlated_in_a_crowd_is_not_taken_for_lines_nor_lines_for_noise():
    """One line per 3 FWHM, noise 1 per cent smoothed over 1 and 1.5 samples, no array: the
    estimate keeps within a factor 1.7 of the truth, and says that it is one."""
    for blur in (1.0, 1.5):
        spectrum, _ = Lines(12.0, 0.3, 100.0, 200, 3.0, blur, 1).build()
        measured = measure_spectrum(spectrum)
        noise = float(np.median(measured.segments[0].noise))
        assert 0.01 / 1.7 < noise < 0.017, blur
        assert any("no uncertainty array" in w for w in measured.warnings)
        with_errors, _ = Lines(12.0, 0.3, 100.0, 200, 3.0, blur, 1).build(True)
        assert not measure_spectrum(with_errors).warnings


def test_calcium_k_behind_two_clouds_is_one_line_with_two_on_it():
    """Sample A star: the truth table has depth 0.8163 at 41.3 km/s, and clouds at -27.9 and
    9.6 km/s of depth 0.39 and 0.38 (3933.6634 A in air, 3934.7770 in vacuum)."""
    star = read_spectrum(SAMPLES / "a_star.txt.gz")
    f = measure_spectrum(star, MeasureOptions(ranges=((3900.0, 4060.0),))).features
    line = 3934.7770 * (1 + np.array([41.3, -27.9, 9.6]) / 299792.458)
    strong, one, two = (int(np.argmin(np.abs(f.wave - w))) for w in line)
    assert np.abs(f.wave[[strong, one, two]] - line).max() < 0.05
    assert f.depth[strong] == pytest.approx(0.8163, abs=0.03)
    assert {"voigt", "core-wings", "rotational"} & set(f.flags[strong].split())
    assert f.depth[[one, two]] == pytest.approx([0.39, 0.38], abs=0.1)
    near = (np.abs(f.wave - line[0]) < 1.0) & (f.depth > 0.2)
    assert near.sum() == 3
    assert not np.any((f.sign > 0) & (f.depth < 0))
