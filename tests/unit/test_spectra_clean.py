"""The stated rules for order, repeats, bad samples, gaps and coverage."""

from __future__ import annotations

import numpy as np
import pytest

from linewright.errors import InputRefused
from linewright.spectra.clean import clean_segments, merge_repeats, zero_filled
from linewright.spectra.coverage import coverage, gaps
from linewright.spectra.raw import RawSegment
from linewright.spectra.spectrum import Segment, Spectrum
from linewright.spectra.uncertainty import bad_uncertainty, mask_from_flags, sigma_from_ivar
from linewright.spectra.units import ANGSTROM


def _clean(wave, flux, sigma=None, mask=None):
    raw = RawSegment(np.asarray(wave, float), np.asarray(flux, float), sigma, mask)
    segments, notes = clean_segments((raw,), ANGSTROM, "vacuum", "test")
    return segments, notes


def test_repeats_without_errors_are_plain_means():
    wave = np.array([1.0, 2.0, 2.0, 2.0, 3.0])
    flux = np.array([1.0, 2.0, 4.0, 6.0, 1.0])
    out = merge_repeats(wave, flux, None, np.zeros(5, bool))
    assert out[0].tolist() == [1, 2, 3] and out[1].tolist() == [1, 4, 1] and out[4] == 2


def test_repeats_with_errors_are_weighted_by_inverse_variance():
    """Mean of 1 +- 1 and 4 +- 2: (1 + 4/4)/(1 + 1/4) = 1.6, sigma = 1/sqrt(1.25), by hand."""
    wave, flux = np.array([5.0, 5.0, 6.0]), np.array([1.0, 4.0, 2.0])
    out = merge_repeats(wave, flux, np.array([1.0, 2.0, 0.5]), np.zeros(3, bool))
    assert out[1].tolist() == pytest.approx([1.6, 2.0])
    assert out[2].tolist() == pytest.approx([1 / np.sqrt(1.25), 0.5])


def test_a_masked_twin_does_not_spoil_the_mean():
    wave, flux = np.array([5.0, 5.0, 6.0]), np.array([1.0, np.nan, 2.0])
    out = merge_repeats(wave, flux, None, np.array([False, True, False]))
    assert out[1].tolist() == [1.0, 2.0] and not out[3].any()


def test_runs_of_five_zeros_are_masked_and_four_are_not():
    flux = np.array([1, 0, 0, 0, 0, 1, 0, 0, 0, 0, 0, 1.0])
    assert zero_filled(flux).tolist() == [False] * 6 + [True] * 5 + [False]


def test_bad_samples_are_masked_and_reported():
    wave = np.arange(5000.0, 5020.0)
    flux = np.ones(20)
    flux[3], sigma = np.nan, np.full(20, 0.1)
    sigma[5], sigma[6] = 0.0, 1e9
    segments, notes = _clean(wave, flux, sigma)
    assert np.flatnonzero(segments[0].mask).tolist() == [3, 5, 6]
    assert "1 samples with no finite flux masked" in notes
    assert "2 samples without a valid error masked" in notes


def test_a_sigma_that_is_never_valid_is_dropped():
    segments, notes = _clean(np.arange(5000.0, 5020.0), np.ones(20), np.zeros(20))
    assert segments[0].uncertainty is None and not segments[0].mask.any()
    assert any("no valid error" in n for n in notes)


def test_an_honest_error_of_a_bright_stretch_is_kept():
    flux = np.concatenate((np.full(5, 1e6), np.ones(20)))
    sigma = 0.01 * flux
    assert not bad_uncertainty(sigma, flux).any()


def test_inverse_variance():
    """sigma = 1/sqrt(ivar): ivar 4 is sigma 0.5; zero and negative mean no information."""
    sigma = sigma_from_ivar([4.0, 0.0, -1.0])
    assert sigma[0] == 0.5 and np.isnan(sigma[1:]).all()


def test_flags():
    mask, note = mask_from_flags([0, 1, 0, 0], "", False)
    assert mask.tolist() == [False, True, False, False] and not note
    mask, note = mask_from_flags([1, 1, 0, 1], "Data quality: 1=good, 0=bad", False)
    assert mask.tolist() == [False, False, True, False]
    mask, note = mask_from_flags([0, 64, 0, 2], "", False)
    assert mask is None and "2 of 4" in note
    mask, _ = mask_from_flags([0, 64, 0, 2], "", True)
    assert mask.tolist() == [False, True, False, True]


def test_descending_and_disordered():
    wave = np.arange(5000.0, 5020.0)
    segments, notes = _clean(wave[::-1], wave[::-1])
    assert np.array_equal(segments[0].wave, segments[0].flux) and "turned round" in notes[0]
    order = np.random.default_rng(1).permutation(20)
    segments, notes = _clean(wave[order], wave[order])
    assert np.array_equal(segments[0].wave, segments[0].flux) and "sorted" in notes[0]


def test_samples_without_wavelength_are_dropped():
    wave = np.arange(5000.0, 5020.0)
    wave[4], wave[5] = np.nan, -1.0
    segments, notes = _clean(wave, np.ones(20))
    assert len(segments[0].wave) == 18 and "2 samples without a valid wavelength" in notes[0]


@pytest.mark.parametrize("wave", [np.linspace(0.001, 0.5, 50), np.linspace(1e10, 2e10, 50)])
def test_absurd_scales_are_refused(wave):
    with pytest.raises(InputRefused, match="make no sense"):
        _clean(wave, np.ones(50))


def _spectrum(wave, mask=None):
    wave = np.asarray(wave, float)
    mask = np.zeros(len(wave), bool) if mask is None else mask
    return Spectrum((Segment(wave, np.ones(len(wave)), None, mask),), medium="vacuum")


def test_a_step_of_more_than_three_and_a_half_medians_is_a_gap():
    wave = np.concatenate((np.arange(0, 100), np.arange(103.4, 200)))
    assert gaps(_spectrum(wave + 5000)) == ((5099.0, 5103.4),)
    wave = np.concatenate((np.arange(0, 100), np.arange(102, 200)))
    assert gaps(_spectrum(wave + 5000)) == ()


def test_the_local_step_follows_a_changing_dispersion():
    wave = np.concatenate((5000 + 0.01 * np.arange(500), 5010 + 0.05 * np.arange(500)))
    found = gaps(_spectrum(wave))
    assert found == ((pytest.approx(5004.99), pytest.approx(5010.0)),)


def test_long_masks_cut_coverage_and_single_bad_samples_do_not():
    mask = np.zeros(200, bool)
    mask[50] = mask[100:110] = mask[:4] = True
    spectrum = _spectrum(5000.0 + np.arange(200), mask)
    assert coverage(spectrum) == ((5004.0, 5099.0), (5110.0, 5199.0))
    assert gaps(spectrum) == ((5099.0, 5110.0),)


def test_overlapping_segments_unite():
    a, b = _spectrum(5000.0 + np.arange(100)), _spectrum(5090.0 + np.arange(100))
    both = Spectrum(a.segments + b.segments, medium="vacuum")
    assert coverage(both) == ((5000.0, 5189.0),)


@pytest.mark.parametrize("sigma", [True, False])
def test_the_quick_look_changes_nothing(monkeypatch, sigma):
    """What passes the quick look comes out as the full repair would leave it."""
    import linewright.spectra.clean as clean

    rng = np.random.default_rng(3)
    wave = 5000 + np.cumsum(rng.uniform(0.01, 0.02, 100_000))
    raw = RawSegment(wave, rng.normal(1, 0.1, len(wave)),
                     rng.uniform(0.05, 0.2, len(wave)) if sigma else None)
    quick = clean.clean_segments((raw,), ANGSTROM, "air", "x")
    monkeypatch.setattr(clean, "spotless", lambda *_: False)
    full = clean.clean_segments((raw,), ANGSTROM, "air", "x")
    assert quick[1] == full[1] == []
    for name in ("wave", "flux", "uncertainty", "mask"):
        assert np.array_equal(getattr(quick[0][0], name), getattr(full[0][0], name)), name


@pytest.mark.parametrize(("what", "at", "value"), [
    ("wave", 40_000, 5000.0), ("wave", 0, -1.0), ("wave", 99_999, np.inf), ("wave", 50, np.nan),
    ("flux", 70_000, np.nan), ("flux", 3, 0.0), ("flux", 32_768, np.inf), ("sigma", 9, 0.0),
    ("sigma", 65_535, np.nan), ("sigma", 99_999, 1e9), ("mask", 5, True)])
def test_the_quick_look_sees_every_blemish(what, at, value):
    from linewright.spectra.spotless import spotless

    arrays = {"wave": 5000 + 0.01 * np.arange(100_000), "flux": np.ones(100_000),
              "sigma": np.full(100_000, 0.1), "mask": np.zeros(100_000, bool)}
    assert spotless(*arrays.values())
    arrays[what][at] = value
    assert not spotless(*arrays.values())
