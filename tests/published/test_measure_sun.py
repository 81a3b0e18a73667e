"""The Sun at R 47,000 against published line lists and equivalent widths.

Moore, Minnaert & Houtgast 1966 (NBS Monograph 61) and Melendez et al. 2014 (ApJ 791, 14,
table 1). The lines stand at +0.4 km/s: gravitational redshift less convective blueshift.
"""

from __future__ import annotations

import numpy as np
import pytest
from truths import PUBLISHED, SPECTRA, rows_of

from linewright.measure import measure_spectrum
from linewright.spectra.medium import C_KM_S, air_to_vacuum
from linewright.spectra.spectrum import Segment, Spectrum

SUN = SPECTRA / "sun_r47000.txt"
pytestmark = pytest.mark.skipif(not SUN.exists(), reason=f"the shared data ({SUN.name}) are absent")
VELOCITY = 0.42
WEAKEST = 10.0  # milliangstrom


@pytest.fixture(scope="module")
def sun():
    wave, flux = np.loadtxt(SUN).T
    wave, first = np.unique(wave, return_index=True)
    segment = Segment(air_to_vacuum(wave), flux[first], None, np.zeros(len(wave), dtype=bool))
    return measure_spectrum(Spectrum((segment,), medium="air", name="Sun"))


def _matched(measured, air):
    """(nearest absorption feature, distance in Angstrom, inside coverage) of air lines."""
    f = measured.features
    rows = np.flatnonzero(f.sign > 0)
    rest = f.wave[rows] / (1 + VELOCITY / C_KM_S)
    wave = air_to_vacuum(air)
    near = np.argmin(np.abs(rest[None, :] - wave[:, None]), axis=1)
    covered = np.any([(wave > a) & (wave < b) for a, b in measured.coverage], axis=0)
    return rows[near], rest[near] - wave, covered


def _robust(values):
    return 1.4826 * np.median(np.abs(values - np.median(values)))


def test_listed_lines_over_ten_milliangstrom_are_found(sun):
    ids = [(float(r[0]), float(r[1])) for r in rows_of(PUBLISHED / "solar_ids.csv")]
    ews = [(float(r[0]), float(r[4])) for r in rows_of(PUBLISHED / "solar_ew.csv")]
    lines = np.array(ids + ews)
    _, distance, covered = _matched(sun, lines[:, 0])
    wanted = covered & (lines[:, 1] > WEAKEST)
    found = np.abs(distance[wanted]) < 0.05
    assert wanted.sum() > 160
    assert found.mean() >= 0.95


def test_equivalent_widths_agree_with_those_measured_by_hand(sun):
    rows = rows_of(PUBLISHED / "solar_ew.csv")
    air, published = np.array([(float(r[0]), float(r[4])) for r in rows]).T
    row, distance, covered = _matched(sun, air)
    fine = covered & (np.abs(distance) < 0.05)
    assert fine.sum() >= 0.95 * covered.sum()
    ratio = sun.features.ew[row[fine]] / published[fine]
    assert np.median(ratio) == pytest.approx(1.0, abs=0.03)
    assert _robust(ratio) < 0.05
    # by strength: the weak ones carry the error of two continua
    for low, high, limit in ((0, 20, 0.06), (20, 50, 0.03), (50, 200, 0.03)):
        bin_ = (published[fine] >= low) & (published[fine] < high)
        assert abs(np.median(ratio[bin_]) - 1) < limit, (low, high)


def test_the_continuum_of_a_normalised_spectrum_is_one(sun):
    level = sun.segments[0].continuum_at(np.linspace(*sun.coverage[0], 50))
    every = sun.segments[0].node_flux
    assert abs(np.mean(every) - 1) < 0.005
    assert np.min(level) > 0.985


def test_strong_lines_are_one_feature_each(sun):
    """Air wavelengths (NIST): H alpha 6562.80, H beta 4861.33, Na D, Mg b, Fe I 5269.54."""
    f = sun.features
    for air, width in ((6562.80, 1.0), (4861.33, 0.6), (5889.951, 0.3), (5895.924, 0.3),
                       (5183.604, 0.4), (5269.537, 0.15)):
        wave = air_to_vacuum(air) * (1 + VELOCITY / C_KM_S)
        near = np.flatnonzero((np.abs(f.wave - wave) < 0.5 * width) & (f.depth > 0.5))
        assert len(near) == 1, air
        assert f.wave[near[0]] == pytest.approx(wave, abs=0.03)
        assert f.depth[near[0]] > 0.7


def test_the_noise_is_known_to_be_correlated(sun):
    assert sun.segments[0].correlation_length > 2.5
    assert 0.002 < np.median(sun.segments[0].noise) < 0.004


def test_hardly_any_emission_in_a_normal_star(sun):
    assert np.sum(sun.features.sign < 0) < 0.01 * len(sun.features)
