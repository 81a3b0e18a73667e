"""Detection: stated false-alarm rate, blends, broad cores, gaps and masks."""

from __future__ import annotations

import numpy as np
import pytest
from measure_simulation import smooth_noise, spectrum_of

from linewright.errors import Cancelled, InputRefused
from linewright.measure.core import measure_spectrum
from linewright.measure.matched import exceed_rate, expected_false, threshold_for
from linewright.measure.options import MeasureOptions
from linewright.progress import Progress


@pytest.mark.parametrize("blur", [0.7, 2.0])
def test_crossing_rate_against_simulation(blur):
    """Rice 1945 in its discrete form, against counts in 4e6 filtered samples."""
    z = smooth_noise(np.random.default_rng(11), 4_000_000, blur)
    rho = float(np.mean(z[1:] * z[:-1]))
    for level in (2.5, 3.5):
        counted = np.sum((z[:-1] < level) & (z[1:] >= level))
        wanted = len(z) * exceed_rate(level, rho)
        assert abs(counted - wanted) < 4.5 * np.sqrt(wanted)


def test_threshold_expects_one_false_feature():
    pieces = [(1e5, 0.7), (2e5, 0.9)]
    assert expected_false(threshold_for(pieces), pieces) == pytest.approx(1.0, rel=1e-3)


@pytest.mark.parametrize("blur", [0.0, 1.0])
def test_false_features_in_pure_noise(blur):
    """A million samples: counts over 3.5 and 4 sigma within Poisson errors of the rate
    stated, peaks and troughs together (the rate is per excursion of the filter's output)."""
    n = 1_000_000
    wave = 5000 + 0.01 * np.arange(n)
    flux = 1 + 0.02 * smooth_noise(np.random.default_rng(12), n, blur)
    options = MeasureOptions(threshold=3.5, resolution=5000 / 0.06)
    measured = measure_spectrum(spectrum_of(wave, flux), options)
    wanted = measured.expected_false
    counted = len(measured.features)
    assert abs(counted - wanted) < 0.15 * wanted + 3 * np.sqrt(wanted)
    ratio = np.exp(0.5 * (3.5**2 - 4.0**2))
    high = np.sum(measured.features.significance >= 4.0)
    assert abs(high - ratio * wanted) < 0.25 * ratio * wanted + 3 * np.sqrt(ratio * wanted)


def _with(profile, n=6000, noise=0.004, seed=13):
    wave = 6000 + 0.02 * np.arange(n)
    rng = np.random.default_rng(seed)
    return wave, 1 - profile(wave) + noise * rng.standard_normal(n)


def test_a_flat_broad_core_is_one_feature():
    wave, flux = _with(lambda w: 0.8 * np.exp(-(((w - 6060) / 0.9) ** 4)) + 0.4 * np.exp(
        -0.5 * ((w - 6030) / 0.06) ** 2))
    f = measure_spectrum(spectrum_of(wave, flux), MeasureOptions(resolution=6000 / 0.14)).features
    near = np.abs(f.wave - 6060) < 1.3
    assert near.sum() == 1
    assert f.wave[near][0] == pytest.approx(6060, abs=0.05)
    # half depth where ((w - c)/0.9)^4 = ln 2
    assert f.fwhm[near][0] == pytest.approx(2 * 0.9 * np.log(2) ** 0.25, rel=0.05)
    assert np.sum(np.abs(f.wave - 6030) < 0.1) == 1


def test_members_of_a_close_blend_are_separate():
    sigma = 0.14 / 2.35482

    def pair(w):
        return sum(0.4 * np.exp(-0.5 * ((w - c) / sigma) ** 2) for c in (6060.0, 6060.18))

    wave, flux = _with(pair)
    f = measure_spectrum(spectrum_of(wave, flux), MeasureOptions(resolution=6060 / 0.14)).features
    near = np.abs(f.wave - 6060.09) < 0.3
    assert near.sum() == 2
    assert np.allclose(f.wave[near], [6060.0, 6060.18], atol=0.01)
    assert np.array_equal(f.component[near], [1, 2])
    assert all("blend" in f.flags[i] for i in np.flatnonzero(near))


def test_gaps_masks_and_filler_are_left_out_of_coverage():
    wave, flux = _with(lambda w: 0.5 * np.exp(-0.5 * ((w - 6020) / 0.08) ** 2))
    mask = np.zeros(len(wave), dtype=bool)
    mask[3000:3200] = True
    flux[3000:3200] = np.nan
    flux[4000:4300] = 0.0
    keep = np.r_[0:5000, 5400:6000]
    measured = measure_spectrum(spectrum_of(wave[keep], flux[keep], mask=mask[keep]))
    bounds = np.array(measured.coverage)
    assert np.allclose(bounds[:, 1], [wave[2999], wave[3999], wave[4999], wave[5999]], atol=1e-6)
    assert np.allclose(bounds[:, 0], [wave[0], wave[3200], wave[4300], wave[5400]], atol=1e-6)
    assert np.sum(np.abs(measured.features.wave - 6020) < 0.1) == 1
    for low, high in ((wave[3000], wave[3199]), (wave[4000], wave[4299])):
        assert not np.any((measured.features.wave > low) & (measured.features.wave < high))


def test_ranges_restrict_the_search():
    wave, flux = _with(lambda w: sum(
        0.5 * np.exp(-0.5 * ((w - c) / 0.08) ** 2) for c in (6020, 6080)))
    options = MeasureOptions(ranges=((6060.0, 6100.0),))
    measured = measure_spectrum(spectrum_of(wave, flux), options)
    assert measured.coverage[0][0] >= 6060.0 and measured.coverage[-1][1] <= 6100.0
    assert np.all(measured.features.wave >= 6060.0)
    assert np.any(np.abs(measured.features.wave - 6080) < 0.05)


def test_nothing_usable_is_refused_in_one_line():
    wave = 5000 + 0.1 * np.arange(200)
    empty = spectrum_of(wave, np.full(200, np.nan), mask=np.ones(200, dtype=bool))
    with pytest.raises(InputRefused) as refused:
        measure_spectrum(empty)
    assert "\n" not in str(refused.value) and "mask" in str(refused.value)


def test_progress_is_reported_and_cancel_heeded():
    wave, flux = _with(lambda w: 0 * w)
    seen = []
    measure_spectrum(spectrum_of(wave, flux), progress=Progress(lambda s, f: seen.append(f)))
    assert seen == sorted(seen) and seen[-1] == 1.0
    stopped = Progress()
    stopped.cancel()
    with pytest.raises(Cancelled):
        measure_spectrum(spectrum_of(wave, flux), progress=stopped)
