"""Noise from the pixels: published values and correlated samples of known autocorrelation."""

from __future__ import annotations

import numpy as np
import pytest
from measure_simulation import smooth_noise, spectrum_of

from linewright.measure.core import measure_spectrum
from linewright.measure.noise import der_snr, estimate_noise, second_difference

# Worked value of the formula in Stoehr et al. 2008, ASP Conf. 394, 505.
TOY = [100, 101, 99, 102, 98, 100, 103, 97, 101, 99, 100, 102, 98, 101, 99, 100]


def test_der_snr_of_the_toy_vector():
    snr, noise = der_snr(TOY)
    assert noise == pytest.approx(1.210539, abs=1e-6)
    # specutils.snr_derived gives 82.607803 with its factor rounded to 0.6052697.
    assert snr == pytest.approx(82.607803, rel=1e-7)


def test_der_snr_of_seeded_normal_samples():
    flux = np.random.default_rng(42).normal(1, 0.01, 10000)
    assert der_snr(flux)[0] == pytest.approx(102.167, abs=1e-3)


def test_second_difference_keeps_white_noise_and_removes_a_slope():
    x = np.arange(100_000.0)
    noise = np.random.default_rng(1).standard_normal(len(x))
    for lag in (1, 2, 5):
        assert np.std(second_difference(noise + 3.0 * x, lag)) == pytest.approx(1.0, abs=0.01)


@pytest.mark.parametrize("blur", [0.0, 1.0, 1.5])
def test_level_and_autocorrelation_of_smooth_noise(blur):
    rng = np.random.default_rng(3)
    flux = 50.0 + 2.0 * smooth_noise(rng, 200_000, blur)
    runs = [slice(0, len(flux))]
    good = np.ones(len(flux), dtype=bool)
    noise = estimate_noise(flux, good, runs, good, 12.0, True)
    assert np.median(noise.sigma) == pytest.approx(2.0, rel=0.02)
    for lag, r in enumerate(noise.correlation[1:], 1):
        truth = np.exp(-0.25 * (lag / blur) ** 2) if blur else 0.0
        assert r == pytest.approx(truth, abs=0.04)
    if blur:
        # plain DER_SNR, made for independent samples, sees less than the noise there is
        assert der_snr(flux)[1] < 0.8 * 2.0


def test_strong_lines_do_not_inflate_the_noise():
    rng = np.random.default_rng(5)
    wave = 5000 + 0.01 * np.arange(40_000)
    flux = 1 + 0.01 * rng.standard_normal(len(wave))
    for centre in np.arange(5001, 5399, 2.0):
        flux -= 0.8 * np.exp(-0.5 * ((wave - centre) / 0.05) ** 2)
    measured = measure_spectrum(spectrum_of(wave, flux))
    assert np.median(measured.segments[0].noise) == pytest.approx(0.01, rel=0.05)


def test_a_wrong_uncertainty_array_is_rescaled_and_said():
    rng = np.random.default_rng(6)
    wave = 5000 + 0.01 * np.arange(20_000)
    flux = 1 + 0.02 * rng.standard_normal(len(wave))
    right = measure_spectrum(spectrum_of(wave, flux, np.full(len(wave), 0.02)))
    assert right.warnings == ()
    wrong = measure_spectrum(spectrum_of(wave, flux, np.full(len(wave), 0.005)))
    factor = float(wrong.warnings[0].split("off by a factor ")[1].split()[0])
    assert factor == pytest.approx(4.0, rel=0.03)
    assert np.median(wrong.segments[0].noise) == pytest.approx(0.02, rel=0.03)
