"""Profiles: derivatives, published values of the Voigt function, fits chosen by criterion."""

from __future__ import annotations

import numpy as np
import pytest
from measure_simulation import spectrum_of

from linewright.errors import InputRefused
from linewright.measure import choose_region, fit_region, measure_spectrum
from linewright.measure.shapes import EXTRA, profile, width_and_area

PARAMS = {
    "gaussian": [0.6, 0.1, np.log(0.2)],
    "voigt": [0.6, 0.1, np.log(0.2), np.log(0.15)],
    "rotational": [0.6, 0.1, np.log(0.1), np.log(0.8)],
    "core-wings": [0.6, 0.1, np.log(0.1), np.log(0.5)],
}
WAVE = 5000 + 0.02 * np.arange(12_000)


@pytest.mark.parametrize("kind", EXTRA)
def test_derivatives_against_differences(kind):
    x, p = np.linspace(-2, 2, 101), np.array(PARAMS[kind])
    value, slopes = profile(kind, x, p)
    assert profile(kind, np.array([p[1]]), p)[0][0] == pytest.approx(p[0], rel=1e-9)
    assert np.max(value) <= p[0] + 1e-12
    for k in range(len(p)):
        up, down = p.copy(), p.copy()
        up[k] += 1e-6
        down[k] -= 1e-6
        numeric = (profile(kind, x, up)[0] - profile(kind, x, down)[0]) / 2e-6
        assert np.allclose(slopes[:, k], numeric, atol=1e-7)


def test_voigt_width_against_published_values():
    """FWHM 1.2937760 for Gaussian FWHM 1 and Lorentzian FWHM 0.5 (scipy.special.voigt_profile;
    Olivero & Longbothum 1977, JQSRT 17, 233, approximate it by 1.2940181)."""
    p = np.array([1.0, 0.0, np.log(1.0 / 2.3548200450309493), np.log(0.25)])
    fwhm, area = width_and_area("voigt", p)
    assert fwhm == pytest.approx(1.2937760, abs=2e-5)
    # unit-area profile of that shape peaks at 0.6212212
    assert area == pytest.approx(1.0 / 0.6212212, rel=1e-3)


def test_rotation_reaches_its_half_width_and_no_farther():
    """Gray's profile without instrument: zero at v, flat-bottomed; width at half height of
    the limb-darkened (0.6) profile 1.58 v (numerically from the formula)."""
    v = 1.0
    t = np.linspace(-1, 1, 20001)
    g = 2 * 0.4 * np.sqrt(1 - t**2) + 0.5 * np.pi * 0.6 * (1 - t**2)
    half = t[g >= 0.5 * g.max()]
    p = np.array([1.0, 0.0, np.log(0.02), np.log(v)])
    fwhm, area = width_and_area("rotational", p)
    assert fwhm == pytest.approx(half[-1] - half[0], rel=0.01)
    assert area == pytest.approx(np.sum(g) * (t[1] - t[0]) / g.max(), rel=0.01)
    assert abs(profile("rotational", np.array([1.15]), p)[0][0]) < 1e-6


def _spectrum(y, noise=0.004, seed=5):
    rng = np.random.default_rng(seed)
    sparse = sum(0.3 * np.exp(-0.5 * ((WAVE - c) / 0.06) ** 2) for c in range(5004, 5236, 8))
    error = np.full(len(WAVE), noise)
    spectrum = spectrum_of(WAVE, 1 - sparse - y + noise * rng.standard_normal(len(WAVE)), error)
    return spectrum, measure_spectrum(spectrum)


@pytest.mark.parametrize("kind", ["voigt", "rotational"])
def test_the_criterion_finds_the_true_shape_and_its_numbers(kind):
    p = np.array({"voigt": [0.7, 5120.0, np.log(0.15), np.log(0.2)],
                  "rotational": [0.4, 5120.0, np.log(0.06), np.log(1.0)]}[kind])
    spectrum, measured = _spectrum(profile(kind, WAVE, p)[0])
    limits = (5117.0, 5123.0)
    one = choose_region(spectrum, measured, limits, [([5120.0], s) for s in EXTRA])
    assert one.profile == kind
    fwhm, area = width_and_area(kind, p)
    f = one.features
    assert abs(f.wave[0] - 5120.0) < 4 * f.wave_err[0]
    assert abs(f.depth[0] - p[0]) < 4 * f.depth_err[0]
    assert abs(f.ew[0] - 1e3 * p[0] * area) < 4 * f.ew_err[0]
    assert f.fwhm[0] == pytest.approx(fwhm, rel=0.05)
    assert f.flags[0].split()[-1] == "hand" and kind in f.flags[0].split()


def test_the_criterion_counts_components():
    """Split and merge: two lines 1.2 widths apart want two components, one line only one."""
    pair = sum(d * np.exp(-0.5 * ((WAVE - c) / 0.06) ** 2) for d, c in ((0.4, 5100.0),
                                                                        (0.25, 5100.17)))
    spectrum, measured = _spectrum(pair)
    choices = [([5100.06], "gaussian"), ([5100.0, 5100.17], "gaussian")]
    best = choose_region(spectrum, measured, (5099.5, 5100.7), choices)
    assert len(best.features) == 2
    assert np.allclose(best.features.wave, [5100.0, 5100.17], atol=0.01)
    lone = [([5092.0], "gaussian"), ([5091.95, 5092.05], "gaussian")]
    assert len(choose_region(spectrum, measured, (5091.4, 5092.6), lone).features) == 1


def test_p_cygni_is_a_peak_and_a_trough_fitted_together():
    y = 0.5 * np.exp(-0.5 * ((WAVE - 5055.7) / 0.3) ** 2)
    y -= 1.5 * np.exp(-0.5 * ((WAVE - 5056.7) / 0.4) ** 2)
    spectrum, measured = _spectrum(y)
    f = fit_region(spectrum, measured, (5053.5, 5058.8), [5055.6, 5056.8]).features
    assert f.sign.tolist() == [1, -1]
    assert np.all(np.abs(f.wave - [5055.7, 5056.7]) < 4 * f.wave_err)
    assert np.all(np.abs(f.depth - [0.5, -1.5]) < 5 * f.depth_err)


def test_hand_fits_outside_reason_are_refused():
    spectrum, measured = _spectrum(0 * WAVE)
    with pytest.raises(InputRefused, match="not known"):
        fit_region(spectrum, measured, (5100, 5101), [5100.5], "triangle")
    with pytest.raises(InputRefused, match="outside"):
        fit_region(spectrum, measured, (5100, 5101), [5102.0])
    with pytest.raises(InputRefused, match="samples"):
        fit_region(spectrum, measured, (5100, 5100.05), [5100.02])
