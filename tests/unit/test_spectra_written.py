"""The working spectrum: normalised, at rest, merged, written, and read by standard readers."""

from __future__ import annotations

import numpy as np
import pytest
from astropy.table import QTable, Table

from linewright.errors import InputRefused
from linewright.publish.spectrum_out import spectrum_bytes, write_spectrum
from linewright.publish.spectrum_working import at_rest, merged, normalised
from linewright.spectra.medium import C_KM_S, to_medium
from linewright.spectra.reading import read_spectrum
from linewright.spectra.spectrum import Segment, Spectrum

RNG = np.random.default_rng(11)


def _segment(start, count=400, sigma=True, step=0.05):
    wave = start + step * np.arange(count)
    mask = np.zeros(count, bool)
    mask[5:9] = True
    return Segment(wave, 2.0 + RNG.normal(0, 0.02, count),
                   np.full(count, 0.02) if sigma else None, mask)


def _spectrum(medium="air", segments=1, **more):
    parts = tuple(_segment(5000.0 + 15.0 * k) for k in range(segments))
    return Spectrum(parts, medium, "stated", "topocentric", "stated",
                    "1E-17 erg/cm^2/s/Ang", "HD 1", **more)


@pytest.mark.parametrize("suffix", [".fits", ".ecsv"])
@pytest.mark.parametrize("medium", ["air", "vacuum"])
@pytest.mark.parametrize("segments", [1, 3])
def test_what_is_written_is_read_again(tmp_path, suffix, medium, segments):
    first = _spectrum(medium, segments, resolution=48000.0)
    path = tmp_path / f"out{suffix}"
    write_spectrum(first, path)
    again = read_spectrum(path)
    assert (again.medium, again.frame, again.name) == (medium, "topocentric", "HD 1")
    assert again.resolution == 48000.0 and len(again.segments) == segments
    for a, b in zip(first.segments, again.segments, strict=True):
        assert np.allclose(b.wave, a.wave, rtol=1e-12, atol=0)
        assert np.array_equal(b.flux, a.flux) and np.array_equal(b.uncertainty, a.uncertainty)
        assert np.array_equal(b.mask, a.mask)


@pytest.mark.parametrize("suffix", [".fits", ".ecsv"])
def test_units_reach_a_standard_reader(tmp_path, suffix):
    path = tmp_path / f"out{suffix}"
    write_spectrum(_spectrum("air"), path)
    table = QTable.read(path)
    assert table["wavelength"].unit == "Angstrom" and len(table) == 400
    assert table["flux"].unit.is_equivalent("erg / (s cm2 Angstrom)")
    own = to_medium(_spectrum("air").segments[0].wave, "air")
    assert np.allclose(table["wavelength"].value, own, rtol=1e-13)


def test_the_same_spectrum_gives_the_same_bytes():
    spectrum = _spectrum()
    for suffix in (".fits", ".ecsv"):
        assert spectrum_bytes(spectrum, suffix) == spectrum_bytes(spectrum, suffix)


def test_fits_keywords_say_medium_frame_and_correction(tmp_path):
    from astropy.io import fits

    from linewright.spectra.earth_motion import corrected

    path = tmp_path / "out.fits"
    write_spectrum(corrected(_spectrum(), -12.5), path)
    with fits.open(path) as hdus:
        header = hdus[1].header
    assert (header["SPECSYS"], header["MEDIUM"], header["VCORR"]) == ("BARYCENT", "air", -12.5)
    assert header["TUCD1"] == "em.wl;obs.atmos" and "applied here" in str(header["HISTORY"])
    again = read_spectrum(path)
    assert again.observer_velocity == -12.5 and again.frame == "barycentric"
    with pytest.raises(InputRefused, match="not applied again"):
        corrected(again, -12.5)


def test_an_existing_file_stays_without_force(tmp_path):
    path = tmp_path / "out.ecsv"
    path.write_text("mine")
    with pytest.raises(InputRefused, match="exists already"):
        write_spectrum(_spectrum(), path)
    assert path.read_text() == "mine"
    with pytest.raises(InputRefused, match="no spectrum format '.png'"):
        write_spectrum(_spectrum(), tmp_path / "out.png")


def test_normalised_divides_flux_and_error_by_the_continuum():
    spectrum = _spectrum()
    wave = spectrum.segments[0].wave
    nodes = [(wave[[0, -1]], np.array([2.0, 4.0]))]
    done = normalised(spectrum, nodes)
    level = 2.0 + 2.0 * (wave - wave[0]) / (wave[-1] - wave[0])
    assert np.allclose(done.segments[0].flux, spectrum.segments[0].flux / level)
    assert np.allclose(done.segments[0].uncertainty, 0.02 / level)
    assert done.flux_unit == ""
    nothing = normalised(spectrum, [(np.zeros(0), np.zeros(0))])
    assert nothing.segments[0].mask.all()


def test_rest_divides_by_one_plus_v_over_c():
    spectrum = _spectrum("vacuum")
    done = at_rest(spectrum, 100.0)
    assert np.allclose(done.segments[0].wave, spectrum.segments[0].wave / (1 + 100 / C_KM_S),
                       rtol=1e-15)
    assert done.frame == "rest" and at_rest(done, 50.0) is done


@pytest.mark.parametrize("sigma", [True, False])
def test_merging_averages_the_overlap_and_keeps_order(sigma):
    """Two equal measurements: the mean of both, sigma/sqrt(2) (inverse variance weights)."""
    wave = 5000.0 + 0.05 * np.arange(400)
    clean = np.zeros(400, bool)
    parts = tuple(Segment(w, np.full(400, level), np.full(400, 0.02) if sigma else None, clean)
                  for w, level in ((wave, 1.0), (wave + 10.0, 3.0)))
    one = merged(Spectrum(parts, "vacuum")).segments[0]
    assert (np.diff(one.wave) > 0).all() and len(one.wave) == 600
    overlap = (one.wave >= 5010.0) & (one.wave <= wave[-1])
    if sigma:
        assert np.allclose(one.flux[overlap], 2.0)
        assert np.allclose(one.uncertainty[overlap], 0.02 / np.sqrt(2))
        assert np.allclose(one.uncertainty[~overlap], 0.02)
    else:  # a linear cross-fade from the one to the other
        assert np.allclose(one.flux[overlap], 1 + 2 * (one.wave[overlap] - 5010.0) / (
            wave[-1] - 5010.0), atol=1e-6)
    assert np.allclose(one.flux[one.wave < 5010], 1.0)
    assert np.allclose(one.flux[one.wave > wave[-1]], 3.0)


def test_merging_bridges_a_gap_and_forgets_masked_samples():
    first, second = _segment(5000.0), _segment(5100.0)
    one = merged(Spectrum((first, second), "vacuum")).segments[0]
    assert len(one.wave) == 800 and one.mask.sum() == 8
    bad = Segment(first.wave, np.full(400, 99.0), first.uncertainty, np.ones(400, bool))
    good = Segment(first.wave + 0.001, np.ones(400), first.uncertainty, np.zeros(400, bool))
    both = merged(Spectrum((bad, good), "vacuum")).segments[0]
    inside = (both.wave > first.wave[2]) & (both.wave < first.wave[-2])
    assert np.allclose(both.flux[inside & ~both.mask], 1.0) and (~both.mask[inside]).all()


def test_an_unknown_flux_unit_is_kept_as_a_comment(tmp_path):
    spectrum = Spectrum((_segment(5000.0),), "air", flux_unit="Relative Flux")
    write_spectrum(spectrum, tmp_path / "out.fits")
    table = Table.read(tmp_path / "out.fits")
    assert table["flux"].unit is None and "Relative Flux" in str(table.meta["comments"])


@pytest.mark.parametrize("suffix", [".fits", ".ecsv"])
def test_what_was_done_is_read_again(tmp_path, suffix):
    from linewright.spectra.earth_motion import corrected, zero_point_removed

    done = at_rest(corrected(zero_point_removed(_spectrum(), 0.1, 0.02), -12.5), 40.0)
    write_spectrum(done, tmp_path / f"out{suffix}")
    again = read_spectrum(tmp_path / f"out{suffix}")
    told = " | ".join(again.corrections)
    assert "zero point +0.1000 +- 0.0200 km/s removed" in told
    assert "barycentric correction -12.5000 km/s applied" in told
    assert "brought to rest from +40.0000 km/s" in told and again.frame == "rest"


def test_an_applied_correction_is_no_longer_offered():
    from linewright.spectra.earth_motion import corrected

    spectrum = _spectrum(warnings=("the header gives a correction of -12.50 km/s (BERV): not "
                                   "applied", "other"))
    assert corrected(spectrum, -12.5).warnings == ("other",)
