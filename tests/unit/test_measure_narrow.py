"""Close pairs and narrow lines among broad ones are told apart; lone lines stay one."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from linewright.measure.core import measure_spectrum
from linewright.measure.options import MeasureOptions
from linewright.measure.shapes import profile
from linewright.resources import samples_dir
from linewright.spectra.medium import air_to_vacuum
from linewright.spectra.reading import read_spectrum
from linewright.spectra.spectrum import Segment

STEP, PIXELS = 0.02, 8
FWHM = STEP * PIXELS


def comb(kinds, sn, seed=3, count=40):
    """(spectrum, places): ``count`` places 25 widths apart, in turn the sums of ``kinds``, lists
    of (kind, offset in widths, depth, parameters after the centre)."""
    rng = np.random.default_rng(seed)
    x = 5000.0 + STEP * np.arange(25 * PIXELS * count)
    places = 5000.0 + (np.arange(count) + 0.5) * 25 * FWHM + rng.uniform(-0.5, 0.5, count) * FWHM
    y = np.zeros(len(x))
    for k, place in enumerate(places):
        near = np.abs(x - place) < 12 * FWHM
        for kind, offset, depth, *more in kinds[k % len(kinds)]:
            y[near] += profile(kind, x[near], np.array([depth, place + offset * FWHM, *more]))[0]
    noise = np.full(len(x), 1.0 / sn)
    flux = 1.0 - y + rng.normal(0.0, noise)
    base = read_spectrum(samples_dir() / "g_dwarf.fits")
    segment = Segment(x, flux, noise, np.zeros(len(x), dtype=bool))
    return replace(base, segments=(segment,)), places


def members(spectrum, places):
    """Absorption features within 1.5 widths of each place."""
    found = measure_spectrum(spectrum, MeasureOptions()).features
    wave = found.wave[found.sign > 0]
    return (np.abs(wave[None, :] - places[:, None]) < 1.5 * FWHM).sum(axis=1)


SIGMA = np.log(FWHM / 2.3548)
LONE = {
    "gaussian": [("gaussian", 0.0, 0.5, SIGMA)],
    "rotational": [("rotational", 0.0, 0.5, SIGMA - 1.0, np.log(0.62 * FWHM))],
    "voigt": [("voigt", 0.0, 0.5, SIGMA - 0.36, np.log(0.35 * FWHM))],
}


@pytest.mark.parametrize("kind", LONE)
@pytest.mark.parametrize("sn", [200, 800])
def test_lone_lines_of_any_shape_are_not_split(kind, sn):
    assert np.all(members(*comb([LONE[kind]], sn)) == 1)


def test_equal_lines_one_width_apart_are_two():
    pair = [("gaussian", d, 0.35, SIGMA) for d in (-0.5, 0.5)]
    found = members(*comb([LONE["gaussian"], pair], 200))
    assert np.all(found[::2] == 1)
    assert np.mean(found[1::2] == 2) > 0.95


def test_interstellar_clouds_beside_a_rotating_star_are_found():
    """Na D of the sample A star: two clouds (its truth table) 13 and 37 km/s from the star."""
    star = read_spectrum(samples_dir() / "a_star.txt.gz")
    options = MeasureOptions(ranges=((5880.0, 5910.0),))
    wave = measure_spectrum(star, options).features.wave
    for rest in (5889.9510, 5895.9242):  # Ritz air wavelengths, NIST ASD
        for velocity in (-27.3, 9.6):
            place = air_to_vacuum(np.array([rest]))[0] * (1 + velocity / 299792.458)
            assert np.min(np.abs(wave - place)) < 0.03
