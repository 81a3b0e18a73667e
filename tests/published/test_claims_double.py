"""Two stars in one spectrum, and no second star where there is none.

The double-lined sample is simulated (its script stands beside it); the Sun is single.
"""

from __future__ import annotations

import pytest
from truths import SPECTRA

from linewright.job.solve import solve
from linewright.resources import samples_dir
from linewright.spectra.reading import read_spectrum


def star_velocities(session):
    return sorted(v for origin, v, _ in session.components if origin == "stellar")


def test_both_velocities_of_the_double_lined_sample():
    """Truth: -31.2 and +28.8 km/s (double_lined_truth.ecsv)."""
    session = solve(read_spectrum(samples_dir() / "double_lined.fits"))
    assert star_velocities(session) == pytest.approx([-31.2, 28.8], abs=0.3)


@pytest.mark.skipif(not SPECTRA.is_dir(), reason="the real spectra are not beside the checkout")
@pytest.mark.parametrize(
    ("name", "medium"), [("fstar_hband_r22500.fits", None), ("ttauri_r40000_blue.fits", None)]
)
def test_single_stars_stay_single(name, medium):
    session = solve(read_spectrum(SPECTRA / name, medium=medium))
    assert len(star_velocities(session)) <= 1
