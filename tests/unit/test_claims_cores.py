"""Emission put into the cores of a sample's strong lines: found there, and nowhere else."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from linewright.claims.profiles import CORE_REVERSAL
from linewright.job.options import SolveOptions
from linewright.job.reweigh import reweigh
from linewright.job.solve import solve
from linewright.resources import samples_dir
from linewright.spectra.medium import C_KM_S, air_to_vacuum
from linewright.spectra.reading import read_spectrum

VELOCITY, SHIFT = 37.6, 3.0  # km/s: of the star, and of its emission against it
LINES = (6562.795,)
HEIGHT, FWHM = 0.25, 0.4  # of the continuum; Angstrom
PART = SolveOptions(ranges=((6500.0, 6640.0),), velocity=VELOCITY, temperature=5800.0)


@pytest.fixture(scope="module")
def plain():
    return read_spectrum(samples_dir() / "g_dwarf.fits")


def shining(spectrum):
    segments = []
    for s in spectrum.segments:
        flux = s.flux.copy()
        for line in LINES:
            centre = float(air_to_vacuum(line)) * (1 + (VELOCITY + SHIFT) / C_KM_S)
            flux += HEIGHT * np.exp(-0.5 * ((s.wave - centre) / (FWHM / 2.3548)) ** 2)
        segments.append(replace(s, flux=flux))
    return replace(spectrum, segments=tuple(segments))


def cores(session):
    return [i for i, f in enumerate(session.features.flags) if "core" in f.split()]


@pytest.mark.parametrize("sample", ["g_dwarf.fits"])
def test_no_core_shines_in_samples_without(sample):
    session = solve(read_spectrum(samples_dir() / sample),
                    options=SolveOptions(ranges=((5860.0, 5919.0), (6540.0, 6600.0))))
    assert cores(session) == []


def test_emission_in_the_core_of_hydrogen(plain):
    session = solve(shining(plain), options=PART)
    found = cores(session)
    assert len(found) == 1
    for i in found:
        f, claim = session.features, session.claims[i]
        assert (claim.species, claim.origin, f.sign[i]) == ("H I", "stellar", -1)
        velocity = C_KM_S * (f.wave[i] / claim.line.wave - 1.0)
        assert velocity == pytest.approx(VELOCITY + SHIFT, abs=1.5)
        assert 0.05 < -f.depth[i] < HEIGHT  # above the higher minimum: a lower bound
        around = [c for c, x in zip(session.claims, f.wave) if c.species == "H I"
                  and abs(x - f.wave[i]) < 1.0]
        assert sum(CORE_REVERSAL in c.flags for c in around) == 2
    weighed, _ = reweigh(session)
    assert [weighed.claims[i] for i in found] == [session.claims[i] for i in found]
