"""What holds for every spectrum: media, velocities, writing and reading, coverage."""

from __future__ import annotations

import numpy as np
from astropy.io import fits
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from linewright.spectra.clean import clean_segments, merge_repeats
from linewright.spectra.coverage import coverage, gaps
from linewright.spectra.medium import air_to_vacuum, vacuum_to_air
from linewright.spectra.raw import RawSegment
from linewright.spectra.reading import read_spectrum
from linewright.spectra.spectrum import Segment, Spectrum
from linewright.spectra.units import ANGSTROM
from linewright.spectra.velocity import combine, difference, shift, shifted, velocity_of

SETTINGS = settings(max_examples=60, deadline=None,
                    suppress_health_check=[HealthCheck.function_scoped_fixture])
waves = st.floats(2000.1, 30000.0)
velocities = st.floats(-3000.0, 3000.0)


@SETTINGS
@given(waves)
def test_air_and_vacuum_are_inverse(wave):
    air = vacuum_to_air(wave)
    assert abs(float(air_to_vacuum(air)) / wave - 1) < 1e-12
    assert 0 < wave - float(air) < 1e-3 * wave


@SETTINGS
@given(waves, velocities)
def test_velocity_and_shift_are_inverse(wave, velocity):
    assert abs(float(velocity_of(shifted(wave, velocity), wave)) - velocity) < 1e-6


@SETTINGS
@given(velocities, velocities)
def test_combining_is_symmetric_and_undone(first, second):
    both = combine(first, second)
    assert abs(both - combine(second, first)) < 1e-9
    assert abs(difference(both, second) - first) < 1e-8


@SETTINGS
@given(waves, velocities, velocities)
def test_two_shifts_are_the_shift_by_the_combination(wave, first, second):
    twice = shifted(shifted(wave, first), second)
    assert abs(float(twice) / float(shifted(wave, combine(first, second))) - 1) < 1e-13


@st.composite
def spectra(draw):
    count = draw(st.integers(20, 300))
    start = draw(st.floats(2500.0, 20000.0))
    step = draw(st.floats(0.005, 3.0))
    seed = draw(st.integers(0, 2**31))
    flux = np.random.default_rng(seed).normal(1.0, 0.1, count)
    return start + step * np.arange(count), flux


@SETTINGS
@given(spectra(), st.sampled_from(["linear", "log", "table", "vectors", "text", "companion"]))
def test_written_and_read_back(tmp_path, spectrum, layout):
    wave, flux = spectrum
    path = tmp_path / "s.fits"
    path.unlink(missing_ok=True)
    wave = _write(path, layout, wave, flux)
    segment = read_spectrum(path, medium="vacuum").segments[0]
    assert np.allclose(segment.wave, wave, rtol=1e-9, atol=0)
    assert np.allclose(segment.flux, flux, rtol=1e-9)


def _write(path, layout, wave, flux):
    """Write in that layout; returns the wavelengths meant (the log axis has its own)."""
    count = len(wave)
    primary = fits.PrimaryHDU(flux if layout in ("linear", "log") else None)
    extra = []
    if layout == "linear":
        primary.header.update(CTYPE1="WAVE", CUNIT1="Angstrom", CRVAL1=wave[0], CRPIX1=1.0,
                              CDELT1=wave[1] - wave[0])
        wave = wave[0] + (wave[1] - wave[0]) * np.arange(count)
    elif layout == "log":
        step = np.log10(wave[1] / wave[0])
        primary.header.update(COEFF0=np.log10(wave[0]), COEFF1=step)
        wave = 10 ** (np.log10(wave[0]) + step * np.arange(count))
    elif layout == "companion":
        extra = [fits.ImageHDU(flux, name="FLUX"), fits.ImageHDU(wave, name="WAVELENGTH")]
    elif layout == "text":
        np.savetxt(path, np.column_stack([wave, flux]), fmt="%.17g")
        return wave
    else:
        code = "D" if layout == "table" else f"{count}D"
        arrays = (wave, flux) if layout == "table" else ([wave], [flux])
        extra = [fits.BinTableHDU.from_columns([
            fits.Column("WAVE", code, unit="Angstrom", array=arrays[0]),
            fits.Column("FLUX", code, array=arrays[1])])]
    fits.HDUList([primary, *extra]).writeto(path)
    return wave


@SETTINGS
@given(spectra(), velocities)
def test_a_shift_changes_no_flux_and_keeps_order(spectrum, velocity):
    wave, flux = spectrum
    segment = Segment(wave, flux, None, np.zeros(len(wave), bool))
    moved = shift(Spectrum((segment,), medium="vacuum"), velocity).segments[0]
    assert np.array_equal(moved.flux, flux) and (np.diff(moved.wave) > 0).all()


@SETTINGS
@given(spectra(), st.randoms(use_true_random=False))
def test_coverage_and_gaps_tile_the_good_range(spectrum, random):
    wave, flux = spectrum
    mask = np.array([random.random() < 0.2 for _ in wave])
    mask[len(mask) // 2: len(mask) // 2 + 5] = False
    found = Spectrum((Segment(wave, flux, None, mask),), medium="vacuum")
    covered, missing = coverage(found), gaps(found)
    assert all(low < high for low, high in covered + missing)
    edges = [x for pair in zip(covered, missing + ((covered[-1][1],) * 2,), strict=True)
             for x in pair]
    assert all(a[1] == b[0] for a, b in zip(edges[:-2], edges[1:-1], strict=True))
    inside = sum(high - low for low, high in covered)
    assert inside <= wave[-1] - wave[0] + 1e-9


@SETTINGS
@given(spectra(), st.integers(0, 2**31))
def test_sample_order_does_not_matter(spectrum, seed):
    wave, flux = spectrum
    order = np.random.default_rng(seed).permutation(len(wave))
    straight = clean_segments((RawSegment(wave, flux),), ANGSTROM, "air", "x")[0][0]
    shuffled = clean_segments((RawSegment(wave[order], flux[order]),), ANGSTROM, "air", "x")[0][0]
    assert np.array_equal(straight.wave, shuffled.wave)
    assert np.array_equal(straight.flux, shuffled.flux)


@SETTINGS
@given(spectra(), st.integers(2, 5))
def test_merging_equal_twins_changes_nothing_but_the_error(spectrum, copies):
    """The mean of n equal values with equal sigma has sigma/sqrt(n)."""
    wave, flux = spectrum
    sigma = np.full(len(wave), 0.1)
    args = [np.repeat(a, copies) for a in (wave, flux, sigma)]
    merged = merge_repeats(*args, np.zeros(len(wave) * copies, bool))
    assert np.allclose(merged[1], flux, rtol=1e-12)
    assert np.allclose(merged[2], 0.1 / np.sqrt(copies), rtol=1e-12)
