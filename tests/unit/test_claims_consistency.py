"""Flags and drift, on spectra whose fault is known."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from linewright.job.options import SolveOptions
from linewright.job.solve import solve
from linewright.resources import samples_dir
from linewright.spectra.medium import C_KM_S
from linewright.spectra.reading import read_spectrum

PART = SolveOptions(ranges=((5000.0, 5700.0),))


@pytest.fixture(scope="module")
def spectrum():
    return read_spectrum(samples_dir() / "g_dwarf.fits")


def tilted(spectrum, km_s_per_1000):
    """The spectrum with a wavelength scale that drifts about 5350 A."""
    segments = tuple(
        replace(s, wave=s.wave * (1 + km_s_per_1000 * (s.wave - 5350.0) / 1000.0 / C_KM_S))
        for s in spectrum.segments
    )
    return replace(spectrum, segments=segments)


def test_a_good_wavelength_scale_raises_no_warning(spectrum):
    session = solve(spectrum, options=PART)
    assert not [w for w in session.warnings if "drifts" in w]
    words = {w for c in session.claims for w in c.flags.split()}
    assert words <= {"off-velocity", "broad", "narrow", "off-strength", "off-excitation"}
    firm = [c for c in session.claims if c.standing == "firm"]
    odd = [c for c in firm if "off-velocity" in c.flags]
    assert len(odd) < 0.1 * len(firm)


def test_a_drifting_scale_is_pointed_out_with_its_slope(spectrum):
    session = solve(tilted(spectrum, 2.0), options=PART)
    found = [w for w in session.warnings if "drifts" in w]
    assert len(found) == 1
    slope = float(found[0].split("by ")[1].split()[0])
    assert slope == pytest.approx(2.0, abs=0.3)


def test_off_velocity_flags_mark_large_offsets_only(spectrum):
    session = solve(spectrum, options=PART)
    for claim in session.claims:
        if claim.probability >= 0.5:
            offset = abs(claim.candidates[0].offset_sigma)
            assert ("off-velocity" in claim.flags) == bool(np.greater(offset, 3.5))
