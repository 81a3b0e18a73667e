"""Noise alone: no confident claim, whatever a dense catalogue offers."""

from __future__ import annotations

import numpy as np
import pytest

from linewright.job.options import SolveOptions
from linewright.job.solve import solve
from linewright.spectra.medium import air_to_vacuum
from linewright.spectra.spectrum import Segment, Spectrum


def noise_spectrum(seed, smooth):
    """A flat spectrum of S/N 100, 5000-6000 A, 0.02 A a sample; ``smooth`` correlates it
    over two samples, as resampling does; a line of R 50,000 has five."""
    rng = np.random.default_rng(seed)
    wave = air_to_vacuum(np.arange(5000.0, 6000.0, 0.02))
    noise = rng.normal(0.0, 0.01, len(wave) + 8)
    if smooth:
        kernel = np.exp(-0.5 * (np.arange(-4, 5) / 0.8) ** 2)
        noise = np.convolve(noise, kernel / np.sqrt(np.sum(kernel**2)), mode="valid")
    flux = 1.0 + noise[: len(wave)]
    segment = Segment(wave, flux, None, np.zeros(len(wave), dtype=bool))
    return Spectrum((segment,), medium="air", medium_from="simulated", name="noise")


@pytest.mark.parametrize("smooth", [False, True])
def test_noise_gives_no_confident_claim_and_no_velocity(smooth):
    false = 0
    for seed in range(3):
        session = solve(noise_spectrum(seed, smooth), options=SolveOptions(resolution=50000.0))
        false += len(session.features)
        assert [c.species for c in session.claims if c.probability >= 0.95] == []
        assert not session.velocity.declared
    assert false <= 12  # one is expected in each
