"""Real public spectra open, or are refused, as the people who gave them say."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest

from linewright.errors import InputRefused
from linewright.spectra.axis import header_axis
from linewright.spectra.coverage import coverage, gaps
from linewright.spectra.describe import describe, in_words
from linewright.spectra.medium import air_to_vacuum, to_medium
from linewright.spectra.reading import read_spectrum

SHARED = Path(__file__).resolve().parents[2].parent / "shared" / "spectra"
pytestmark = pytest.mark.skipif(
    not SHARED.is_dir(), reason="the shared spectra do not stand beside this checkout")

# What the observatories and surveys that made the files document (ESO, SDSS/BOSS/APOGEE,
# LAMOST, Gaia-ESO): medium, frame, range in Angstrom (own medium), samples, segments.
OPENED = (
    ("sun_r47000.txt", {"medium": "air", "frame": "rest"}, "air", "rest",
     (4835.0, 6723.5), 181266 - 47, 1),
    ("mdwarf_r115000_s1d.fits", {}, "air", "barycentric", (3781.19, 6912.32), 313114, 1),
    ("gdwarf_r2000_18hdu.fits", {}, "vacuum", "heliocentric", (3561.2, 10327.6), 4625, 1),
    ("ttauri_r40000_blue.fits", {}, "air", "topocentric", (3732.056, 4999.738), 42751, 1),
    ("fstar_hband_r22500.fits", {}, "vacuum", "topocentric", (15142.7, 16954.8), 3 * 4096, 3),
    ("f5star_r1800.fits.gz", {}, "vacuum", "heliocentric", (3699.99, 9099.13), 3909, 1),
    ("nebula/full-spectrum-by-area.tab",
     {"columns": "wave=11,flux=2", "medium": "air", "frame": "topocentric"},
     "air", "topocentric", (4595.0, 9366.05), 5614, 1),
)


@pytest.mark.parametrize(("name", "options", "medium", "frame", "limits", "samples", "segments"),
                         OPENED, ids=[row[0] for row in OPENED])
def test_opens_as_documented(name, options, medium, frame, limits, samples, segments):
    spectrum = read_spectrum(SHARED / name, **options)
    facts = describe(spectrum)
    assert (facts["medium"], facts["frame"]) == (medium, frame)
    assert facts["range"] == pytest.approx(limits, abs=0.06)
    assert (facts["samples"], facts["segments"]) == (samples, segments)
    assert json.loads(json.dumps(facts)) == facts
    assert in_words(spectrum).count("\n") >= 10
    for segment in spectrum.segments:
        assert (np.diff(segment.wave) > 0).all()
        assert np.isfinite(segment.flux[~segment.mask]).all()


@pytest.mark.parametrize("row", OPENED, ids=[row[0] for row in OPENED])
def test_the_kept_choices_read_the_same_again(row):
    first = read_spectrum(SHARED / row[0], **row[1])
    again = read_spectrum(SHARED / row[0], **first.read_options)
    assert again.sha256 == first.sha256
    for a, b in zip(first.segments, again.segments, strict=True):
        assert np.array_equal(a.wave, b.wave) and np.array_equal(a.flux, b.flux, equal_nan=True)


def test_text_without_a_header_has_no_medium():
    assert read_spectrum(SHARED / "sun_r47000.txt").medium == "unknown"
    nebula = read_spectrum(SHARED / "nebula/full-spectrum-by-area.tab")
    assert nebula.medium == "unknown"
    assert any("'all' read" in warning for warning in nebula.warnings)


def test_the_sun_has_two_gaps_and_repeats():
    spectrum = read_spectrum(SHARED / "sun_r47000.txt", medium="air")
    own = [tuple(np.round(to_medium(np.array(g), "air"), 2)) for g in gaps(spectrum)]
    assert own == [(5759.5, 5827.82), (6066.0, 6074.0)]
    assert "47 repeated wavelengths averaged with equal weights" in spectrum.warnings
    sodium = float(air_to_vacuum(5889.951))
    missing = float(air_to_vacuum(5800.0))
    inside = [low <= x <= high for x in (sodium, missing) for low, high in coverage(spectrum)]
    assert any(inside[:3]) and not any(inside[3:])


def test_the_m_dwarf_has_a_zero_filled_detector_gap():
    spectrum = read_spectrum(SHARED / "mdwarf_r115000_s1d.fits")
    own = [tuple(to_medium(np.array(g), "air")) for g in gaps(spectrum)]
    assert own == [(pytest.approx(5303.9, abs=0.02), pytest.approx(5336.85, abs=0.02))]
    assert describe(spectrum)["masked"] == 3295
    assert spectrum.corrections == (
        "barycentric correction -23.54 km/s (ESO DRS BERV) already applied",)
    assert (spectrum.segments[0].flux < 0).sum() > 1000


def test_the_t_tauri_star_has_zero_filled_ends_and_an_offered_correction():
    spectrum = read_spectrum(SHARED / "ttauri_r40000_blue.fits")
    assert describe(spectrum)["masked"] == 927 + 416
    assert spectrum.corrections == ()
    assert any("-27.50 km/s" in w and "not applied" in w for w in spectrum.warnings)
    assert spectrum.flux_unit == "ADU"


def test_the_h_band_star_has_descending_detectors_and_an_offered_correction():
    spectrum = read_spectrum(SHARED / "fstar_hband_r22500.fits")
    assert "descending wavelengths turned round" in spectrum.warnings
    assert any("+11.30 km/s" in w and "not applied" in w for w in spectrum.warnings)
    starts = [round(float(s.wave[0]), 1) for s in spectrum.segments]
    assert starts == [15142.7, 15857.3, 16472.8]
    assert all(s.uncertainty is not None for s in spectrum.segments)


def test_the_survey_table_uses_ivar_and_keeps_other_hdus_within_reach():
    spectrum = read_spectrum(SHARED / "gdwarf_r2000_18hdu.fits")
    assert "COADD" in spectrum.layout and "14 more HDUs" in spectrum.layout
    assert describe(spectrum)["masked"] == 12
    exposure = read_spectrum(SHARED / "gdwarf_r2000_18hdu.fits", hdu=4)
    assert exposure.samples == 2537 and exposure.medium == "vacuum"
    with pytest.raises(InputRefused, match="no HDU 40"):
        read_spectrum(SHARED / "gdwarf_r2000_18hdu.fits", hdu=40)
    with pytest.raises(InputRefused, match="HDU 2 holds a spectrum"):
        read_spectrum(SHARED / "gdwarf_r2000_18hdu.fits", hdu=2)


def test_the_cross_correlation_image_is_refused_with_the_reason():
    with pytest.raises(InputRefused) as refusal:
        read_spectrum(SHARED / "not_a_spectrum_ccf.fits")
    assert "velocity" in str(refusal.value) and "km/s" in str(refusal.value)


def test_every_file_opens_or_is_refused_in_one_line():
    count = 0
    for path in sorted(p for p in SHARED.rglob("*") if p.is_file()):
        count += 1
        try:
            assert read_spectrum(path).samples >= 8
        except InputRefused as refusal:
            assert str(refusal).startswith(str(path)) and "\n" not in str(refusal)
    assert count >= 15


@pytest.mark.parametrize("kind", ["freq", "velo", "wave"])
def test_the_exotic_axes_agree_about_their_wavelengths(kind):
    """One observation described in three ways (headers by M. Calabretta and D. Petry, 2009).

    The truth is the frequency axis worked by hand, lambda = c/nu (FITS Paper III); the
    headers give ten digits.
    """
    from astropy.io import fits

    text = (SHARED / f"headers/axis-{kind}-1.hdr").read_text(encoding="ascii")
    axis = header_axis(fits.Header.fromstring(text), 4096, "header")
    wave = axis.unit.to_angstrom(axis.values)
    frequency = 102.1189414e9 - 2.695372970e5 * (np.arange(1, 4097) - 32768.0)
    by_hand = 2.99792458e18 / frequency
    if kind == "freq":
        assert np.allclose(wave, by_hand, rtol=1e-14)
        assert axis.medium == "vacuum"
    else:  # linear in wavelength: equal at the reference channel, so compare where they meet
        pixels = np.arange(1, 4097) - 32768.0
        if kind == "wave":
            expected = 1e10 * (2.919277457e-3 + 6.630101933e-9 * pixels)
        else:
            beta = (2.195128874e7 + 731.9359645 * pixels) / 299792458.0
            expected = 1e10 * 0.00272040633 * np.sqrt((1 + beta) / (1 - beta))
        assert np.allclose(wave, expected, rtol=2e-9)
        assert abs(wave[0] / by_hand[0] - 1) < 2e-9
