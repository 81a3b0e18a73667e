"""At low resolution the template of predicted lines finds the velocity.

The simulated dwarf's truth (+37.6 km/s) is in its truth table; the Sun's own velocity at
full resolution is the truth of the degraded Sun.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from linewright.job.options import SolveOptions
from linewright.job.solve import solve
from linewright.resources import samples_dir
from linewright.spectra.reading import read_spectrum
from linewright.spectra.spectrum import Segment


def smoothed(spectrum, resolution, sn=150.0):
    """Each segment at ``resolution``, four samples an element, with noise."""
    rng, segments = np.random.default_rng(0), []
    for s in spectrum.segments:
        good = ~s.mask & np.isfinite(s.flux)
        step = 1.0 / resolution / 16
        x = np.arange(np.log(s.wave[good][0]), np.log(s.wave[good][-1]), step)
        sigma = 16 / 2.3548
        reach = np.arange(-40, 41)
        kernel = np.exp(-0.5 * (reach / sigma) ** 2)
        flux = np.convolve(np.interp(x, np.log(s.wave[good]), s.flux[good]),
                           kernel / kernel.sum(), mode="same")[::4]  # fmt: skip
        noise = np.abs(flux) / sn
        flux = flux + rng.normal(0, 1, len(flux)) * noise
        segments.append(Segment(np.exp(x[::4]), flux, noise, np.zeros(len(flux), bool)))
    return replace(spectrum, segments=tuple(segments))


def test_blended_spectrum_gets_the_template_velocity_and_says_so():
    star = smoothed(read_spectrum(samples_dir() / "g_dwarf.fits"), 2500.0)
    session = solve(star, options=SolveOptions(resolution=2500.0))
    assert session.velocity.how == "template"
    assert session.velocity.declared
    assert session.velocity.velocity == pytest.approx(37.6, abs=5.0)
    assert abs(session.velocity.velocity - 37.6) < 3 * session.velocity.error
    said = [w for w in session.warnings if w.startswith("voting gives")]
    assert len(said) == 1
    assert "the template" in said[0]


def test_resolved_spectrum_keeps_the_vote():
    star = read_spectrum(samples_dir() / "g_dwarf.fits")
    session = solve(star, options=SolveOptions(ranges=((5150.0, 5250.0),)))
    assert session.velocity.how == "voting"
