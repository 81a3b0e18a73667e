"""Feature tables from columns, picks by hand and drawn profiles."""

from __future__ import annotations

import numpy as np
import pytest
from measure_simulation import AREA, Lines, spectrum_of

from linewright.errors import InputRefused
from linewright.measure import features_from_columns, fit_profile, measure_at, measure_spectrum


def test_columns_become_a_sorted_table():
    f = features_from_columns(
        [5200.0, 5100.0], wave_err=0.01, depth=[0.2, 0.4], fwhm=0.1,
        kind=["emission", "absorption"],
    )
    assert f.wave.tolist() == [5100.0, 5200.0]
    assert f.sign.tolist() == [1, -1]
    assert f.depth.tolist() == [0.4, -0.2]
    assert np.allclose(f.ew, [1e3 * AREA * 0.04, -1e3 * AREA * 0.02])
    assert np.isnan(f.significance).all() and f.number.tolist() == [1, 2]


@pytest.mark.parametrize(
    ("columns", "word"),
    [
        ({"wave_vac": []}, "wave"),
        ({"wave_vac": [5000.0, np.nan]}, "wave"),
        ({"wave_vac": [5000.0], "wave_err": [0.0]}, "wave_err"),
        ({"wave_vac": [5000.0], "kind": ["plateau"]}, "plateau"),
    ],
)
def test_bad_columns_are_refused_by_name(columns, word):
    with pytest.raises(InputRefused, match=word):
        features_from_columns(**columns)


def test_a_pick_measures_what_the_search_measured():
    spectrum, centres = Lines(pixels=5.0, count=60, snr=80.0).build()
    measured = measure_spectrum(spectrum)
    f = measured.features
    k = int(np.argmin(np.abs(f.wave - centres[20])))
    one = measure_at(spectrum, measured, centres[20] + 0.04)
    assert len(one) == 1 and one.flags[0].split()[-1] == "hand"
    assert one.wave[0] == pytest.approx(f.wave[k], abs=0.2 * f.wave_err[k])
    assert one.ew[0] == pytest.approx(f.ew[k], abs=0.3 * f.ew_err[k])
    assert one.significance[0] == pytest.approx(f.significance[k], rel=0.05)


def test_a_pick_finds_what_lies_below_the_threshold():
    spectrum, centres = Lines(pixels=5.0, count=40, snr=50.0, depth=0.03).build()
    measured = measure_spectrum(spectrum)
    missed = [c for c in centres if np.min(np.abs(measured.features.wave - c)) > 0.1]
    assert len(missed) > 10
    picked = [measure_at(spectrum, measured, c, "absorption") for c in missed]
    depth = np.array([p.depth[0] for p in picked])
    assert 0.01 < np.median(depth) < 0.045
    assert all(p.significance[0] < measured.threshold for p in picked)


def test_a_pick_outside_the_spectrum_is_refused():
    spectrum, _ = Lines(count=20).build()
    measured = measure_spectrum(spectrum)
    with pytest.raises(InputRefused, match="outside"):
        measure_at(spectrum, measured, 9000.0)


def test_the_drawn_profile_lies_on_the_samples():
    spectrum, _ = Lines(pixels=6.0, count=30, snr=200.0).build()
    f = measure_spectrum(spectrum).features
    wave, flux = fit_profile(f, 7)
    assert wave.shape == flux.shape == (121,)
    segment = spectrum.segments[0]
    there = np.interp(wave, segment.wave, segment.flux)
    assert np.std(flux - there) < 2.0 * 1000.0 / 200.0
    both = fit_profile(f, 7, neighbours=True)[1]
    assert np.allclose(both, flux, rtol=1e-3)


def test_a_lone_spectrum_of_few_samples_does_not_fail():
    rng = np.random.default_rng(2)
    wave = 6000 + 0.5 * np.arange(45)
    measured = measure_spectrum(spectrum_of(wave, 3 + 0.1 * rng.standard_normal(45)))
    assert len(measured.features) <= 1
