"""Vega at low resolution (STIS and model, Bohlin 2007): 3000-10200 A.

Air wavelengths of H I: NIST. Metals of Vega's strongest lines (Ca II K, Mg II 4481, O I 7774,
Mg I, Fe II, Ti II, Cr II, Si II, C I): common practice, no source. Radial velocity -13.9 km/s:
common practice, no source; the file's comment speaks of an adjusted model, so only shifts
are judged.
"""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from linewright.job.options import SolveOptions
from linewright.job.solve import solve
from linewright.spectra.medium import C_KM_S, vacuum_to_air
from linewright.spectra.reading import read_spectrum

BALMER = (3770.63, 3797.90, 3835.38, 3889.05, 3970.07, 4101.73, 4340.46, 4861.32, 6562.80)
PASCHEN = (8750.47, 8862.78, 9014.91, 9229.01, 9545.97, 10049.37)
METALS = {"Ca II", "Mg I", "Mg II", "O I", "Fe II", "Ti II", "Cr II", "Si II", "C I"}
RANGE = (3000.0, 10200.0)


def _vega(shift: float):
    sedpy = pytest.importorskip("sedpy", reason="the package with the spectrum of Vega is absent")
    files = list(Path(sedpy.__file__).parent.rglob("alpha_lyr_stis_011.fits"))
    if not files:
        pytest.skip("this version of the package carries no spectrum of Vega")
    star = read_spectrum(files[0])
    moved = [replace(s, wave=s.wave * (1 + shift / C_KM_S)) for s in star.segments]
    star = replace(star, segments=tuple(moved))
    return solve(star, options=SolveOptions(ranges=(RANGE,)))


def _firm(session, shift: float):
    rest = vacuum_to_air(session.features.wave / (1 + shift / C_KM_S))
    width = session.features.fwhm
    return [
        (wave, reach, claim.species)
        for wave, reach, claim in zip(rest, width, session.claims, strict=True)
        if claim.standing == "firm"
    ]


@pytest.fixture(scope="module")
def unmoved():
    return _vega(0.0)


def _hydrogen_is_firm(firm) -> None:
    for line in BALMER + PASCHEN:
        named = [name for wave, reach, name in firm if abs(wave - line) < 0.25 * reach + 1.0]
        assert named == ["H I"], (line, named)


def test_the_balmer_and_paschen_lines_are_firm(unmoved):
    _hydrogen_is_firm(_firm(unmoved, 0.0))


def test_nothing_else_is_firm_that_vega_lacks(unmoved):
    others = {name for _, _, name in _firm(unmoved, 0.0)} - {"H I"}
    assert others <= METALS
    assert {"Ca II", "Mg II", "O I"} <= others


def test_the_tops_between_the_balmer_lines_are_no_emission(unmoved):
    f = unmoved.features
    near_the_limit = (f.wave > 3660) & (f.wave < 4400)
    assert not np.any(f.depth[near_the_limit] < -0.05)


@pytest.mark.parametrize("shift", [250.0, -180.0])
def test_shifted_copies_are_recovered(unmoved, shift):
    moved = _vega(shift)
    found = moved.velocity.velocity - unmoved.velocity.velocity
    assert moved.velocity.declared
    assert abs(found - shift) < 15.0
    _hydrogen_is_firm(_firm(moved, shift))
