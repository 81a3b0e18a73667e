"""Limits, errors apart, anchors, the same ledger again, several continua."""

from __future__ import annotations

import numpy as np
import pytest
from measure_simulation import AREA, Lines, spectrum_of

from linewright.errors import InputRefused
from linewright.measure import (
    Anchors,
    MeasureOptions,
    add_anchor,
    anchors_of,
    equivalent_width,
    measure_again,
    measure_spectrum,
    move_anchor,
    refit,
    remove_anchor,
    rest_width,
    upper_limit,
    upper_limits,
)


def test_upper_limit_has_the_fisher_coefficient():
    """Centre and width known: sigma_W = 1.226941 sqrt(FWHM dx)/(S/N) (Fisher matrix of a
    Gaussian's height; Cayrel 1988 has 1.5 for all three free)."""
    n, step, snr, fwhm = 40_000, 0.02, 100.0, 0.2
    wave = 5000 + step * np.arange(n)
    flux = 1 + np.random.default_rng(3).standard_normal(n) / snr
    measured = measure_spectrum(spectrum_of(wave, flux, np.full(n, 1 / snr)))
    sigma = upper_limit(measured, 5400.0, fwhm, 1.0) / 1e3
    assert sigma == pytest.approx(1.226941 * np.sqrt(fwhm * step) / snr, rel=0.1)
    assert np.isnan(upper_limit(measured, 9000.0))
    both = upper_limit(measured, np.array([5300.0, 4000.0]), fwhm)
    assert both[0] == pytest.approx(3e3 * sigma, rel=0.1) and np.isnan(both[1])


def test_upper_limits_of_a_moving_source_are_those_of_its_own_frame():
    """W_rest = W / (1 + v/c); widths in km/s, none below the narrowest lines'."""
    n, step = 40_000, 0.02
    wave = 5000 + step * np.arange(n)
    flux = 1 + np.random.default_rng(3).standard_normal(n) / 100
    measured = measure_spectrum(spectrum_of(wave, flux, np.full(n, 0.01)))
    z = 30_000 / 299792.458
    rest = np.array([5200.0, 5300.0, 9000.0]) / (1 + z)
    own = upper_limits(measured, rest, 30_000.0, 50.0)
    there = upper_limit(measured, rest * (1 + z), rest * (1 + z) * 50.0 / 299792.458)
    assert own[:2] == pytest.approx(there[:2] / (1 + z), rel=1e-12) and np.isnan(own[2])
    least = upper_limits(measured, rest, 30_000.0)
    assert upper_limits(measured, rest, 30_000.0, 1e-3)[:2] == pytest.approx(least[:2], rel=1e-12)


def test_upper_limit_is_three_sigma_of_what_noise_gives():
    """Heights fitted to pure noise at random places scatter as the limit says."""
    n, step = 60_000, 0.02
    wave = 5000 + step * np.arange(n)
    flux = 1 + np.random.default_rng(4).standard_normal(n) / 50
    measured = measure_spectrum(spectrum_of(wave, flux, np.full(n, 0.02)))
    k = np.exp(-0.5 * (np.arange(-20, 21) * step / 0.1) ** 2)
    height = np.convolve(1 - flux, k, "valid")[200:-200:45] / np.sum(k**2)
    ew = 1e3 * height * np.sqrt(2 * np.pi) * 0.1
    limit = upper_limit(measured, np.median(wave), 0.1 * 2.3548)
    assert 3 * np.std(ew) == pytest.approx(limit, rel=0.08)


def test_errors_of_equivalent_widths_come_apart():
    lines = Lines(5.0, 0.4, 80.0, 40, 25.0)
    spectrum, centres = lines.build(with_errors=True)
    measured = measure_spectrum(spectrum)
    k = int(np.argmin(np.abs(measured.features.wave - centres[20])))
    w = equivalent_width(spectrum, measured, k)
    truth = 1e3 * AREA * 0.4 * lines.fwhm
    assert w.fitted == measured.features.ew[k]
    assert abs(w.integrated - truth) < 4 * np.hypot(w.integrated_photon, w.continuum)
    # Cayrel's coefficient, 1.503 sqrt(FWHM dx) / (S/N), for the fit
    assert w.photon == pytest.approx(1e3 * 1.503 * np.sqrt(lines.fwhm * lines.step) / 80, rel=0.1)
    assert w.blend < 0.05 * w.photon < w.integrated_photon
    assert np.hypot(w.photon, w.continuum) == pytest.approx(measured.features.ew_err[k], rel=0.1)
    wave, sigma = spectrum.segments[0].wave, lines.fwhm / 2.3548
    pairs = np.r_[centres, centres + 1.4 * lines.fwhm]
    y = sum(0.4 * np.exp(-0.5 * ((wave - c) / sigma) ** 2) for c in pairs)
    flux = 1000 * (1 - y + np.random.default_rng(9).standard_normal(len(wave)) / 80)
    blend = spectrum_of(wave, flux, np.full(len(wave), 12.5))
    crowded = measure_spectrum(blend)
    k = int(np.argmin(np.abs(crowded.features.wave - centres[20])))
    parts = equivalent_width(blend, crowded, k)
    assert parts.blend > 0.05 * parts.photon
    total = np.sqrt(parts.photon**2 + parts.blend**2 + parts.continuum**2)
    assert total == pytest.approx(crowded.features.ew_err[k], rel=0.15)


def test_rest_width():
    assert rest_width(150.0, 299792.458 * 0.5) == pytest.approx(100.0)


def test_anchors_are_added_moved_and_removed():
    a = Anchors(np.array([1.0, 2.0, 4.0]), np.array([10.0, 11.0, 12.0]))
    b = add_anchor(a, 3.0, 20.0)
    assert b.wave.tolist() == [1.0, 2.0, 3.0, 4.0] and b.value.tolist() == [10, 11, 20, 12]
    assert move_anchor(b, 2, 3.5, 5.0).value.tolist() == [10, 11, 5, 12]
    assert remove_anchor(b, 2).wave.tolist() == a.wave.tolist()
    assert a.at(2.0) == pytest.approx(11.0)
    for bad in (lambda: add_anchor(a, 2.0, 1.0), lambda: add_anchor(a, 3.0, -1.0),
                lambda: remove_anchor(a, 7), lambda: remove_anchor(remove_anchor(a, 0), 0)):
        with pytest.raises(InputRefused):
            bad()


def test_features_follow_a_lifted_continuum():
    spectrum, _ = Lines(6.0, 0.3, 100.0, 40, 25.0).build(with_errors=True)
    measured = measure_spectrum(spectrum)
    s = measured.segments[0]
    same = anchors_of(s.node_wave, s.node_flux)
    again = refit(spectrum, measured, [same])
    assert np.allclose(again.features.depth, measured.features.depth, atol=2e-3)
    assert np.array_equal(again.features.number, measured.features.number)
    lifted = refit(spectrum, measured, [Anchors(same.wave, 1.02 * same.value)])
    rise = np.median(lifted.features.depth - measured.features.depth)
    assert 0.005 < rise < 0.02  # part of 2 per cent: the profile takes the rest as width
    assert np.median(lifted.features.ew) > 1.05 * np.median(measured.features.ew)


def test_the_same_ledger_on_another_spectrum():
    lines = Lines(5.0, 0.3, 80.0, 300, 25.0)
    first, centres = lines.build(with_errors=True)
    table = measure_spectrum(first).features
    segment = first.segments[0]
    rng = np.random.default_rng(77)
    y = sum(0.3 * 1.2 * np.exp(-0.5 * ((segment.wave - c) / (lines.fwhm / 2.3548)) ** 2)
            for c in centres)
    flux = 500.0 * (1 - y + rng.standard_normal(len(y)) / 120.0)
    factor = 1 + 12.0 / 299792.458
    second = spectrum_of(segment.wave * factor, flux, np.full(len(y), 500.0 / 120.0))
    d, measured = measure_again(table, second, 12.0)
    assert np.array_equal(d.features.number, table.number)
    fine = table.significance > 8
    pulls = (d.wave / d.wave_err)[fine]
    assert np.std(pulls) == pytest.approx(1.0, abs=0.15) and abs(np.mean(pulls)) < 0.25
    deeper = (d.depth / d.depth_err)[fine] - 0.06 / d.depth_err[fine]
    assert np.std(deeper) == pytest.approx(1.0, abs=0.15) and abs(np.mean(deeper)) < 0.3
    beyond, _ = measure_again(table, second, 30_000.0)
    assert np.isnan(beyond.depth[-1])


@pytest.mark.parametrize("method", ["levels", "quantile", "clipped", "asymmetric"])
def test_every_continuum_method_follows_a_slope_with_lines(method):
    n = 12_000
    wave = 5000 + 0.03 * np.arange(n)
    truth = 800.0 * (1 + 0.001 * (wave - 5000))
    y = sum(0.5 * np.exp(-0.5 * ((wave - c) / 0.08) ** 2) for c in np.arange(5003, 5357, 3.0))
    flux = truth * (1 - y + np.random.default_rng(8).standard_normal(n) / 100)
    options = MeasureOptions(continuum=method)
    level = measure_spectrum(spectrum_of(wave, flux, truth / 100), options).segments[0]
    bias = level.continuum_at(wave) / truth - 1
    assert abs(np.median(bias)) < (0.002 if method == "levels" else 0.006)
    assert np.max(np.abs(bias)) < 0.03


def test_an_unknown_continuum_method_is_refused():
    spectrum, _ = Lines(count=20).build()
    with pytest.raises(InputRefused, match="levels"):
        measure_spectrum(spectrum, MeasureOptions(continuum="ruler"))
