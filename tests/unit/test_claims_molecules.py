"""Molecular bands put into a sample at known heads: seen there, nowhere else, and what follows."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from linewright.claims.band_claims import band_ranges, is_band
from linewright.claims.banded import CAP, FLAG, capped, crowding
from linewright.claims.model import Candidate, Claim
from linewright.claims.molecules import seen_bands
from linewright.job.options import SolveOptions
from linewright.job.reweigh import reweigh
from linewright.job.solve import solve
from linewright.lines.bands import bands_between
from linewright.resources import samples_dir
from linewright.spectra.medium import C_KM_S
from linewright.spectra.reading import read_spectrum

VELOCITY = 37.6  # km/s, of the solar-type sample
DROP = 0.25


@pytest.fixture(scope="module")
def plain():
    return read_spectrum(samples_dir() / "g_dwarf.fits")


@pytest.fixture(scope="module")
def banded(plain):
    return with_bands(plain, "TiO", DROP)


def with_bands(spectrum, molecule, drop):
    """The spectrum with a drop at each head of a molecule that recovers over the band."""
    factor, segments = 1.0 + VELOCITY / C_KM_S, []
    for s in spectrum.segments:
        flux = s.flux.copy()
        for band in bands_between(s.wave[0], s.wave[-1], (molecule,)):
            head, length = band.head * factor, (band.high - band.low) * factor
            into = (s.wave - head) if band.shading == "red" else (head - s.wave)
            flux *= 1.0 - np.where((into > 0) & (into < length), drop * (1 - into / length), 0.0)
        segments.append(replace(s, flux=flux))
    return replace(spectrum, segments=tuple(segments))


@pytest.mark.parametrize("sample", ["g_dwarf.fits", "cool_giant.fits", "hot_star.fits",
                                    "metal_poor.fits", "double_lined.fits"])
@pytest.mark.parametrize("velocity", [-80.0, 0.0, 160.0])
def test_no_bands_in_samples_that_have_none(sample, velocity):
    assert seen_bands(read_spectrum(samples_dir() / sample), velocity) == ()


@pytest.mark.parametrize("molecule", ["TiO", "MgH"])
def test_the_molecule_put_in_is_the_one_seen(plain, molecule):
    seen = seen_bands(with_bands(plain, molecule, DROP), VELOCITY)
    assert {s.band.molecule for s in seen} == {molecule}
    assert np.median([s.step for s in seen]) == pytest.approx(DROP, abs=0.07)


def test_bands_are_rows_with_a_molecular_claim(banded):
    session = solve(banded, options=SolveOptions(ranges=((6100.0, 6260.0),)))
    rows = np.nonzero(is_band(session.features))[0]
    assert len(rows) >= 2
    for i in rows:
        claim = session.claims[i]
        assert (claim.species, claim.origin) == ("TiO", "molecular")
        assert claim.probability > 0.9
    assert len(set(session.features.number.tolist())) == len(session.features)
    assert any("bands of TiO" in w for w in session.warnings)
    ranges = band_ranges(session.features, session.claims)
    inside = [any(a <= x <= b for a, b in ranges) for x in session.features.wave]
    assert any(FLAG in c.flags for c, within in zip(session.claims, inside) if within)
    weighed, _ = reweigh(session)
    assert [weighed.claims[i].species for i in rows] == ["TiO"] * len(rows)


def claim(probability, unlisted=0.0):
    line = Candidate("Fe I", "stellar", 5000.0, 0.01, 1.0, -1.0, 0.0, probability, 1.0, 0.0, 0.1, "x")
    return Claim("Fe I", probability, probability, unlisted, "firm", origin="stellar",
                 candidates=(line,))


def test_within_the_forest_no_claim_is_firm(plain):
    """25 unlisted features 0.1 deep make the forest; a claim as deep is held, one deeper is not."""
    session = solve(plain, options=SolveOptions(ranges=((5200.0, 5230.0),)))
    f = session.features.take(slice(0, 27))
    depth = np.where(np.arange(27) == 26, 0.6, 0.1)
    f = replace(f, depth=depth, sign=np.ones(27, int), wave=np.linspace(5001, 5020, 27))
    claims = (*(claim(0.1, 0.9) for _ in range(25)), claim(0.99), claim(0.99))
    held = capped(claims, f, ((5000.0, 5030.0),))
    assert held[25].probability == CAP and held[25].standing == "likely"
    assert held[26].probability == 0.99 and FLAG in held[26].flags
    assert capped(claims, f, ()) == claims


def test_unlisted_features_are_weighed_apart_inside_bands():
    class Features:
        wave = np.concatenate([np.linspace(5000, 5100, 80), np.linspace(5101, 5199, 10)])
        sign = np.ones(90)

    class Problem:
        features, coverage = Features(), np.array([[5000.0, 5200.0]])

        def length(self):
            return 200.0

    crowd = crowding(Problem(), np.ones(90), np.array([[5000.0, 5100.0]]))
    assert crowd[0] == pytest.approx(80 / 45, rel=0.02)
    assert crowd[-1] == pytest.approx(10 / 45, rel=0.02)
